/* See match_side.h. */
#include "study/match_side.h"

#include <math.h>
#include <string.h>

#include "study/section_bend.h"

static bool leaks(const pk_section_survey *s) {
  return s->leaks[0] || s->leaks[1] || s->leaks[2] || s->leaks[3];
}

static bool windowed(const pk_section_survey *s) {
  return s->block->span_um[0] > 0 && s->block->span_um[1] > 0;
}

/* An overlap with a wide field weighs the tail of a mode by its amplitude, not by its power: the
 * walls stand where the amplitude is a tenth of the accuracy, and one decay length further. */
static double reach_for(double accuracy) {
  return log(10 / accuracy) + 1;
}

static picket_status lay(const pk_match_side *side, double accuracy, pk_end outer, bool closed,
                         pk_axis *x, pk_axis *y) {
  pk_section_wish wish = {
      .index = side->family->lowest[side->place],
      .leaking = pk_section_bend_leaking(&side->survey, 1, &side->family->lowest[side->place]),
      .reach = reach_for(accuracy),
      .closed = closed,
      .accuracy = accuracy,
      .outer = outer};
  memcpy(wish.plane, side->family->plane, sizeof wish.plane);
  return pk_section_survey_lay(&side->survey, &wish, x, y);
}

static picket_status lay_grids(pk_match_side *side, double accuracy) {
  picket_status status = lay(side, accuracy, PK_END_ZERO, false, &side->x, &side->y);
  if (status == PICKET_OK && leaks(&side->survey)) {
    status = lay(side, accuracy, PK_END_ZERO, true, &side->closed_x, &side->closed_y);
  }
  if (status == PICKET_OK && !windowed(&side->survey)) {
    status = lay(side, accuracy, PK_END_FREE, false, &side->free_x, &side->free_y);
  }
  return status == PICKET_OK ? pk_section_survey_law(&side->survey, &side->x, &side->y, &side->law)
                             : status;
}

picket_status pk_match_side_take(const pk_problem *problem, double wavelength_um, int order,
                                 double accuracy, pk_match_side *side) {
  *side = (pk_match_side){.order = order};
  picket_status status =
      pk_section_survey_take(problem, &problem->section, wavelength_um, &side->survey);
  if (status == PICKET_OK) {
    status = pk_section_look_at(&side->survey, order + 1, &side->families);
  }
  if (status == PICKET_OK) {
    side->family = pk_section_look_up(&side->families, order, &side->place);
  }
  return status == PICKET_OK && side->family ? lay_grids(side, accuracy) : status;
}

void pk_match_side_clear(picket_context *context, pk_match_side *side) {
  pk_axis *axes[] = {&side->x,        &side->y,      &side->closed_x,
                     &side->closed_y, &side->free_x, &side->free_y};
  for (size_t i = 0; i < sizeof axes / sizeof axes[0]; i++) {
    pk_axis_clear(context, axes[i]);
  }
  pk_section_survey_clear(&side->survey);
  side->family = NULL;
}

picket_status pk_match_side_solve(const pk_match_side *side, int m, bool free_walls,
                                  pk_section_whole *out, double *index) {
  const pk_section_survey *s = &side->survey;
  const pk_axis *x = free_walls && side->free_x.intervals > 0 ? &side->free_x : &side->x;
  const pk_axis *y = free_walls && side->free_y.intervals > 0 ? &side->free_y : &side->y;
  pk_section_mode modes[PK_FAMILY_MODES] = {{0}};
  pk_section_fields fields = {0};
  pk_section *section = NULL;
  int count = side->place + 1, solved = 0;
  picket_status status = pk_section_member_open(s, x, y, m, &section);
  if (status == PICKET_OK) {
    status = pk_section_member_solve(s, &side->closed_x, &side->closed_y, m, section, count, modes);
    solved = status == PICKET_OK ? count : 0;
  }
  if (status == PICKET_OK) {
    status = pk_section_bend_follow(s, x, y, m, &section, count, modes);
  }
  if (status == PICKET_OK) {
    status = pk_section_fields_take(section, s->k0, &modes[side->place], &fields);
  }
  if (status == PICKET_OK) {
    *index = creal(modes[side->place].beta) / s->k0;
    status = pk_section_unfold(section, &fields, s->mirror, out);
  }
  pk_section_fields_clear(&fields);
  pk_section_modes_clear(s->problem->context, solved, modes);
  pk_section_free(section);
  return status;
}
