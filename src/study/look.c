/* See look.h. */
#include "study/look.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/search.h"
#include "study/estimate.h"

static const double PI = 3.141592653589793238;

/* In units of π/Λ. */
static const double NEAR_BOUNDARY = 0.15;

pk_character_request pk_look_request(const pk_look *look) {
  const pk_cell *cell = &look->problem->cell;
  pk_character_request request = {.pitch_um = cell->pitch_um, .k0 = look->k0};
  request.phase = (pk_phase){1, 1, 0};
  request.structure[0] = cell->lateral == PK_LATERAL_UNIFORM ? -1 : -0.5 * cell->span_um;
  request.structure[1] = -request.structure[0];
  if (cell->lateral == PK_LATERAL_OPEN) {
    pk_geometry_extent(cell->geometry, PK_V, &request.structure[0], &request.structure[1]);
  }
  request.least_inside = look->least_inside;
  return request;
}

/* The permittivities at the wavelength, or the message of the material that is not known there. */
static picket_status set_media(pk_look *look, pk_level *level) {
  double wavelength = 2 * PI / look->k0;
  look->lossless = true;
  for (int m = 0; m < level->media.count; m++) {
    if (level->media.used[m]) {
      pk_medium medium;
      picket_status status = pk_materials_at(look->problem->materials, m, wavelength,
                                             look->problem->temperature_c, &medium);
      if (status != PICKET_OK) {
        return status;
      }
      look->lossless = look->lossless && cimag(medium.permittivity) == 0;
    }
  }
  return pk_media_set(&level->media, look->k0, level->op);
}

picket_status pk_look_open(pk_look *look, const pk_cell_grid *base, int m, pk_level *out) {
  pk_level level;
  picket_status status = pk_level_open(look->problem, look->polarization, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = set_media(look, &level);
  if (status != PICKET_OK) {
    pk_level_close(&level);
    return status;
  }
  *out = level;
  return PICKET_OK;
}

/* Waves looked at beyond those wanted, as some may not be modes. */
enum { SPARE = 4 };

/* Distance of the layers in decay lengths of a wave that reaches them: what it owes them falls by
 * exp(-6). */
static const double DOUBT_DECAYS = 3;

static picket_status keep_found(pk_look *look, const pk_level *level, int count,
                                const pk_found_wave *found) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    pk_followed *f = &look->mode[i];
    f->character = found[i].character;
    status = pk_follow_remember(look->problem->context, level->op, &found[i].wave, f);
    look->count = i + 1;
  }
  return status;
}

static picket_status look_on(pk_look *look, const pk_cell_grid *base, int wanted) {
  pk_level level;
  picket_context *context = look->problem->context;
  picket_status status = pk_look_open(look, base, 2, &level);
  if (status != PICKET_OK) {
    return status;
  }
  int most = wanted + SPARE, count = 0;
  pk_found_wave *found = PK_NEW(context, most, pk_found_wave);
  status = found ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_character_request request = pk_look_request(look);
    status = pk_wave_search(level.solver, &request, most, found, &count);
  }
  if (status == PICKET_OK) {
    status = keep_found(look, &level, count, found);
  }
  pk_found_waves_clear(context, found ? count : 0, found);
  pk_free(context, found);
  pk_level_close(&level);
  return status;
}

/* On a grid: true if a wave in doubt is still there and hardly depends on the layers. */
static picket_status prove_on(pk_look *look, const pk_cell_grid *base, pk_followed *mode,
                              bool *bound) {
  picket_context *context = look->problem->context;
  pk_level level;
  pk_wave wave = {0};
  pk_character character;
  bool same = false;
  picket_status status = pk_look_open(look, base, 2, &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_look_follow(look, &level, mode, &wave, &character, &same);
  *bound = status == PICKET_OK && same && character.layer_share < PK_LAYER_SHARE_SURE;
  if (*bound) {
    mode->character = character;
    status = pk_follow_remember(context, level.op, &wave, mode);
  } else if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(context);
    status = PICKET_OK;
  }
  pk_wave_clear(context, &wave);
  pk_level_close(&level);
  return status;
}

/* Whether a wave that reaches the layers is a mode: they are moved out as far as it reaches. */
static picket_status prove(pk_look *look, pk_followed *mode, double accuracy, bool *bound) {
  const pk_survey kept = look->survey;
  pk_survey own = kept;
  pk_survey_open_sides(&own, creal(mode->character.k), look->k0, accuracy);
  for (int side = 0; side < 2; side++) {
    if (own.layer[side].thickness == 0) {
      look->survey.decay_um[side] = fmax(kept.decay_um[side], DOUBT_DECAYS * own.decay_um[side]);
    }
  }
  pk_cell_grid base;
  pk_lay_plan plan = {.reach = 1, .mirror = false, .zero_walls = true};
  picket_status status = pk_survey_lay(&look->survey, &plan, &base);
  if (status == PICKET_OK) {
    status = prove_on(look, &base, mode, bound);
    pk_cell_grid_clear(look->problem->context, &base);
  }
  look->survey = kept;
  pk_log(look->problem->context, PICKET_LOG_DETAIL, "wave n = %.6f reaches the layers: %s",
         creal(mode->character.k) / look->k0, *bound ? "a mode" : "left out");
  return status;
}

/* Leaves out what is no mode, and what was not asked for; gives orders: nodes, raised where two
 * modes have the same number. */
static picket_status settle(pk_look *look, int wanted, double accuracy) {
  picket_status status = PICKET_OK;
  int kept = 0, found = look->count;
  for (int i = 0; i < found; i++) {
    pk_followed *f = &look->mode[i];
    bool bound = f->character.layer_share < PK_LAYER_SHARE_SURE;
    if (status == PICKET_OK && !bound && kept < wanted) {
      status = prove(look, f, accuracy, &bound);
    }
    if (status != PICKET_OK || !bound || kept == wanted) {
      pk_follow_forget(look->problem->context, f);
      continue;
    }
    int least = kept > 0 ? look->mode[kept - 1].order + 1 : 0;
    f->order = f->character.nodes > least ? f->character.nodes : least;
    pk_followed moved = *f;
    *f = (pk_followed){0};
    look->mode[kept++] = moved;
  }
  look->count = kept;
  return status;
}

/* Sides are prepared for the mode that reaches farthest; a side needs a layer if any mode radiates
 * there. */
static void prepare_sides(pk_look *look, double accuracy) {
  pk_survey worst = look->survey;
  for (int i = 0; i < look->count; i++) {
    pk_survey one = look->survey;
    pk_survey_open_sides(&one, creal(look->mode[i].character.k), look->k0, accuracy);
    for (int side = 0; side < 2; side++) {
      if (i == 0 || one.decay_um[side] > worst.decay_um[side]) {
        worst.decay_um[side] = one.decay_um[side];
      }
      if (i == 0 || one.layer[side].thickness > worst.layer[side].thickness) {
        worst.layer[side] = one.layer[side];
      }
    }
    if (i == 0 || (one.outer_step_um > 0 && one.outer_step_um < worst.outer_step_um) ||
        worst.outer_step_um == 0) {
      worst.outer_step_um = one.outer_step_um;
    }
  }
  look->survey = worst;
}

/* One look, and what of it is a mode. */
static picket_status look_once(pk_look *look, int wanted, double accuracy) {
  pk_cell_grid base;
  pk_lay_plan plan = {.reach = 1, .mirror = false, .zero_walls = true};
  picket_status status = pk_survey_lay(&look->survey, &plan, &base);
  if (status == PICKET_OK) {
    status = look_on(look, &base, wanted);
    pk_cell_grid_clear(look->problem->context, &base);
  }
  return status == PICKET_OK ? settle(look, wanted, accuracy) : status;
}

/* A mode that is bound weakly has most of its energy far from the structure, where a first look has
 * its layers. If the estimate says that there may be one, a second look takes the sides as far out
 * as it would reach. */
static picket_status look_far(pk_look *look, int wanted, double accuracy) {
  double estimate = NAN, reach = 0;
  picket_status status =
      pk_estimated_index(look->problem, look->polarization, 2 * PI / look->k0, &estimate);
  if (status != PICKET_OK || !look->survey.open || isnan(estimate)) {
    return status;
  }
  for (int side = 0; side < 2; side++) {
    if (estimate <= pk_survey_side_index(&look->survey, side, look->k0)) {
      return PICKET_OK;
    }
    double decay = pk_survey_decay(&look->survey, side, estimate * look->k0, look->k0);
    look->survey.decay_um[side] = DOUBT_DECAYS * decay;
    reach += decay;
  }
  pk_character_request request = pk_look_request(look);
  double width = 2 * (request.structure[1] - request.structure[0]);
  look->least_inside = 0.3 * width / (width + reach);
  return look_once(look, wanted, accuracy);
}

static picket_status first_look(pk_look *look, int wanted, double accuracy) {
  pk_survey_absorb(&look->survey, look->k0);
  picket_status status = look_once(look, wanted, accuracy);
  if (status == PICKET_OK && look->count == 0) {
    status = look_far(look, wanted, accuracy);
  }
  return status;
}

picket_status pk_look_take(const pk_problem *problem, pk_polarization polarization,
                           double wavelength_um, int wanted, double accuracy, pk_look *out) {
  pk_look look = {.problem = problem, .polarization = polarization, .k0 = 2 * PI / wavelength_um};
  if (problem->cell.shift != 0) {
    return pk_fail(
        problem->context, PICKET_ERROR_UNSUPPORTED,
        "cell.lateral_shift is %g, must be 0 for a Bloch index: describe the straight cell "
        "of several rows",
        problem->cell.shift);
  }
  picket_status status = pk_survey_take(problem, polarization, &look.survey);
  if (status == PICKET_OK) {
    status = pk_survey_resolve(&look.survey, look.k0);
  }
  if (status == PICKET_OK) {
    look.mode = PK_NEW(problem->context, wanted + SPARE, pk_followed);
    status = look.mode ? first_look(&look, wanted, accuracy) : PICKET_ERROR_MEMORY;
  }
  if (status != PICKET_OK) {
    pk_look_clear(&look);
    return status;
  }
  prepare_sides(&look, accuracy);
  *out = look;
  return PICKET_OK;
}

void pk_look_clear(pk_look *look) {
  if (look->problem) {
    for (int i = 0; look->mode && i < look->count; i++) {
      pk_follow_forget(look->problem->context, &look->mode[i]);
    }
    pk_free(look->problem->context, look->mode);
  }
  memset(look, 0, sizeof *look);
}

/* Near a zone boundary and inside a stop band two main harmonics weigh the same, a wave and its
 * reflection are neighbours, and a grid may put the edge on the other side of the wavelength: then
 * the nodes must do. */
static bool near_boundary(const pk_look *look, const pk_character *c) {
  double half_turns = creal(c->k) * look->problem->cell.pitch_um / PI;
  return c->at_boundary ||
         (fabs(half_turns - round(half_turns)) < NEAR_BOUNDARY && round(half_turns) != 0);
}

static bool same_mode(const pk_look *look, const pk_character *a, const pk_character *b) {
  return a->nodes == b->nodes &&
         (a->harmonic == b->harmonic || (near_boundary(look, a) && near_boundary(look, b)));
}

/* Near its cut-off a mode has waves beside it that live between the walls and not in the guide:
 * less of them is inside by this factor at least (measured 10 to 30; a grid with farther walls has
 * taken up to 3 from a mode). And a wave that would radiate into a side where only a wall stands is
 * one of them. */
static const double LEAST_KEPT = 0.2;

static bool is_of_the_walls(const pk_look *look, const pk_character *before,
                            const pk_character *c) {
  double folded = creal(c->k) - 2 * PI * c->harmonic / look->problem->cell.pitch_um;
  bool found = c->inside < LEAST_KEPT * before->inside;
  for (int side = 0; look->survey.open && side < 2; side++) {
    double in_side = look->k0 * pk_survey_side_index(&look->survey, side, look->k0);
    found = found || (look->survey.layer[side].thickness == 0 && fabs(folded) < in_side);
  }
  return found;
}

picket_status pk_look_follow(const pk_look *look, pk_level *level, const pk_followed *mode,
                             pk_wave *wave, pk_character *character, bool *same) {
  picket_context *context = look->problem->context;
  double complex *start = pk_follow_prolonged(context, level->op, mode);
  if (!start) {
    return PICKET_ERROR_MEMORY;
  }
  pk_wave found = {0};
  pk_character c;
  pk_character_request request = pk_look_request(look);
  picket_status status =
      pk_wave_near(level->solver, (pk_phase){1, 1, 0}, look->k0, mode->xi, start, &found);
  pk_free(context, start);
  if (status == PICKET_OK) {
    status = pk_character_of(context, level->op, &request, &found, &c);
  }
  if (status != PICKET_OK) {
    pk_wave_clear(context, &found);
    return status;
  }
  *wave = found;
  *character = c;
  *same = same_mode(look, &mode->character, &c) && !is_of_the_walls(look, &mode->character, &c);
  return PICKET_OK;
}
