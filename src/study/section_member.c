/* See section_member.h. */
#include "study/section_member.h"

#include <math.h>

/* The shift stands this far above the highest index, where no mode is. */
static const double ABOVE_TOP = 1.0005;

/* Of the distance of n² of the highest mode from that of the surroundings: more than that mode
 * moves from grid to grid, less than what lies between modes. */
static const double SHIFT_MARGIN = 0.15;

/* Candidates among which a leaking mode is looked for: it is the one that is absorbed least. */
enum { CANDIDATES = 3 };

picket_status pk_section_member_bent(const pk_section_survey *s, const pk_axis *x, const pk_axis *y,
                                     int m, double curvature, pk_section **out) {
  picket_context *context = s->problem->context;
  pk_axis fine_x = {0}, fine_y = {0};
  pk_section *section = NULL;
  picket_status status = pk_axis_divide(context, x, m, &fine_x);
  if (status == PICKET_OK) {
    status = pk_axis_divide(context, y, m, &fine_y);
  }
  if (status == PICKET_OK) {
    pk_section_plan plan = {s->block->geometry, &fine_x, &fine_y, s->media, true, curvature};
    status = pk_section_create(context, &plan, &section);
  }
  if (status == PICKET_OK) {
    status = pk_section_load(section, s->permittivity);
  }
  pk_axis_clear(context, &fine_x);
  pk_axis_clear(context, &fine_y);
  if (status != PICKET_OK) {
    pk_section_free(section);
    return status;
  }
  *out = section;
  return PICKET_OK;
}

picket_status pk_section_member_open(const pk_section_survey *s, const pk_axis *x, const pk_axis *y,
                                     int m, pk_section **out) {
  return pk_section_member_bent(s, x, y, m, 0, out);
}

picket_status pk_section_member_uppermost(const pk_section_survey *s, pk_section *section,
                                          int wanted, pk_section_mode *modes, int *found) {
  double top = s->k0 * s->top * ABOVE_TOP;
  return pk_section_modes(section, s->k0, top * top, wanted, modes, found);
}

/* Of the modes nearest to β² of the closed guide the one that is absorbed least, in *out. */
static picket_status leaking_mode(const pk_section_survey *s, pk_section *section,
                                  double complex near, pk_section_mode *out) {
  picket_context *context = s->problem->context;
  pk_section_mode modes[CANDIDATES] = {{0}};
  int found = 0, best = 0;
  picket_status status = pk_section_modes(section, s->k0, creal(near), CANDIDATES, modes, &found);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 1; i < found; i++) {
    if (fabs(cimag(modes[i].beta_square)) < fabs(cimag(modes[best].beta_square))) {
      best = i;
    }
  }
  *out = modes[best];
  modes[best].h = NULL;
  pk_section_modes_clear(context, found, modes);
  return PICKET_OK;
}

/* The modes nearest to a shift a little above the highest one that is known: near the shift the
 * iteration converges fast even where modes crowd below the index of the surroundings. */
static picket_status from_above(const pk_section_survey *s, pk_section *section, double highest,
                                int wanted, pk_section_mode *modes, int *found) {
  double known = highest * highest, top = s->top * ABOVE_TOP;
  double shift = known + SHIFT_MARGIN * (known - s->cut * s->cut);
  shift = s->k0 * s->k0 * fmin(shift, top * top);
  return pk_section_modes(section, s->k0, shift, wanted, modes, found);
}

picket_status pk_section_member_solve_near(const pk_section_survey *s, const pk_axis *closed_x,
                                           const pk_axis *closed_y, int m, pk_section *section,
                                           double highest, int count, pk_section_mode *modes) {
  picket_context *context = s->problem->context;
  int found = 0;
  if (closed_y->intervals == 0) {
    picket_status status = from_above(s, section, highest, count, modes, &found);
    if (status == PICKET_OK && found < count) {
      pk_section_modes_clear(context, found, modes);
      status = pk_fail(context, PICKET_ERROR_NUMERIC, "%d of %d modes of the section converged",
                       found, count);
    }
    return status;
  }
  pk_section_mode closed[PK_FAMILY_MODES] = {{0}};
  pk_section *twin = NULL;
  picket_status status = pk_section_member_open(s, closed_x, closed_y, m, &twin);
  if (status == PICKET_OK) {
    status = from_above(s, twin, highest, count, closed, &found);
  }
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = i < found ? leaking_mode(s, section, closed[i].beta_square, &modes[i])
                       : pk_fail(context, PICKET_ERROR_NUMERIC,
                                 "%d of %d modes of the section converged", found, count);
  }
  pk_section_modes_clear(context, found, closed);
  pk_section_free(twin);
  if (status != PICKET_OK) {
    pk_section_modes_clear(context, count, modes);
  }
  return status;
}

picket_status pk_section_member_solve(const pk_section_survey *s, const pk_axis *closed_x,
                                      const pk_axis *closed_y, int m, pk_section *section,
                                      int count, pk_section_mode *modes) {
  return pk_section_member_solve_near(s, closed_x, closed_y, m, section, s->top, count, modes);
}
