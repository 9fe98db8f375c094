/* See channel_level.h.
 *
 * Mirror planes. E_x of a te-like fundamental mode is even in x and in y; it is normal to a plane x
 * = constant, so the tangential E vanishes there, and tangential to a plane y = constant, where it
 * is free. E_y of a tm-like one is the other way round. */
#include "study/channel_level.h"

#include <math.h>
#include <string.h>

/* Member 2 of the family then has steps of a sixth of the pitch, up to which its law holds
 * (channel.h). */
static const double STEP_PER_PITCH = 1.0 / 3;

picket_polarization pk_channel_word(pk_polarization polarization) {
  return polarization == PK_HY ? PICKET_TE_LIKE : PICKET_TM_LIKE;
}

bool pk_asks_channel(const pk_problem *problem) {
  return !problem->has_cell && problem->channel.given;
}

picket_polarization pk_answer_word(const pk_problem *problem, pk_polarization polarization) {
  return pk_asks_channel(problem) ? pk_channel_word(polarization)
                                  : (picket_polarization)polarization;
}

picket_status pk_channel_survey_take(const pk_problem *problem, pk_polarization polarization,
                                     double wavelength_um, pk_channel_survey *out) {
  pk_channel_survey s = {.problem = problem, .polarization = polarization};
  const pk_channel_block *channel = &problem->channel;
  picket_status status =
      pk_section_survey_take(problem, &channel->outline, wavelength_um, &s.section);
  if (status != PICKET_OK) {
    return status;
  }
  for (int axis = 0; axis < 2; axis++) {
    s.section.mirror[axis] = s.section.mirror[axis] && channel->use_planes;
  }
  *out = s;
  return PICKET_OK;
}

void pk_channel_survey_clear(pk_channel_survey *s) {
  pk_section_survey_clear(&s->section);
}

picket_status pk_channel_survey_set_apart(pk_channel_survey *s, bool *done) {
  const pk_section_survey before = s->section;
  picket_status status = pk_section_survey_set_apart(&s->section, done);
  bool all = true;
  for (int side = 0; side < PK_SIDES; side++) {
    all = all && s->section.leaks[side];
  }
  if (status == PICKET_OK && all) {
    s->section = before; /* arrays are the same */
    *done = false;
  }
  return status;
}

picket_status pk_channel_survey_lay(const pk_channel_survey *s, double index, double reach,
                                    bool closed, double accuracy, pk_end outer, pk_axis *x,
                                    pk_axis *y) {
  const bool te = s->polarization == PK_HY;
  const pk_channel_block *channel = &s->problem->channel;
  const pk_section_wish wish = {
      .step = channel->slices > 1 ? STEP_PER_PITCH * channel->pitch_um : 0,
      .index = index,
      .reach = reach,
      .closed = closed,
      .accuracy = accuracy,
      .outer = outer,
      .plane = {te ? PK_END_ZERO : PK_END_FREE, te ? PK_END_FREE : PK_END_ZERO}};
  return pk_section_survey_lay(&s->section, &wish, x, y);
}

static picket_status open_channel(const pk_channel_survey *s, const pk_axis *x, const pk_axis *y,
                                  int harmonics, pk_channel **out) {
  const pk_channel_block *block = &s->problem->channel;
  const pk_channel_plan plan = {.pitch = block->pitch_um,
                                .slices = block->slices,
                                .from = block->from_um,
                                .geometry = (const pk_geometry *const *)block->slice,
                                .x = x,
                                .y = y,
                                .media = pk_materials_count(s->problem->materials),
                                .correct_corners = true,
                                .low = -harmonics - 1,
                                .high = harmonics,
                                .origin = NAN};
  return pk_channel_create(s->problem->context, &plan, out);
}

static picket_status open_level(const pk_channel_survey *s, const pk_axis *x, const pk_axis *y,
                                int harmonics, double k0, pk_channel_level *level) {
  picket_status status = open_channel(s, x, y, harmonics, &level->channel);
  if (status == PICKET_OK) {
    status = pk_channel_media_open(level->context, s->problem->materials, s->problem->temperature_c,
                                   level->channel, &level->media);
  }
  if (status == PICKET_OK) {
    status = pk_channel_media_set(&level->media, k0, level->channel);
  }
  return status;
}

picket_status pk_channel_level_open(const pk_channel_survey *s, const pk_axis *x, const pk_axis *y,
                                    int m, int harmonics, double k0, pk_channel_level *out) {
  picket_context *context = s->problem->context;
  pk_channel_level level = {.context = context};
  pk_axis fine_x = {0}, fine_y = {0};
  picket_status status = pk_axis_divide(context, x, m, &fine_x);
  if (status == PICKET_OK) {
    status = pk_axis_divide(context, y, m, &fine_y);
  }
  if (status == PICKET_OK) {
    status = open_level(s, &fine_x, &fine_y, harmonics, k0, &level);
  }
  pk_axis_clear(context, &fine_x);
  pk_axis_clear(context, &fine_y);
  if (status != PICKET_OK) {
    pk_channel_level_close(&level);
    return status;
  }
  *out = level;
  return PICKET_OK;
}

void pk_channel_level_close(pk_channel_level *level) {
  if (level->context) {
    pk_channel_media_close(&level->media);
    pk_channel_free(level->channel);
  }
  memset(level, 0, sizeof *level);
}

double pk_channel_level_unknowns(const pk_axis *x, const pk_axis *y, int m, int harmonics) {
  return 3.0 * x->intervals * m * y->intervals * m * (2 * harmonics + 2);
}
