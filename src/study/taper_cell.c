/* See taper_cell.h.
 *
 * Fields of neighbouring teeth are to differ by what the teeth differ by, and not by their grids:
 * so the spacing of the base grid follows from the wavelength in the densest medium of the core and
 * not from the pitch, and the walls from the Bloch index, which is known well. A plain guide has
 * then the same lateral grid whatever its pitch is called. */
#include "study/taper_cell.h"

#include <math.h>

#include "base/memory.h"
#include "study/channel_index.h"
#include "study/channel_level.h"
#include "study/edges.h"
#include "study/feature.h"
#include "study/index.h"
#include "study/look.h"
#include "study/measure_private.h"

static const double PI = 3.141592653589793238;

/* Base spacings in a wavelength of the densest medium: 16 of half and of a quarter of it, 32 and 64
 * on the two grids. */
static const double STEPS_PER_WAVE = 16;

/* Members of the family of grids by the accuracy asked: below the second, modes are not always
 * recognised. */
enum { LEAST = 1, USUAL = 2, FINE = 4 };
static const double HIGH_ACCURACY = 1e-4;

/* In an open side: base spacings in the decay length of the main harmonic. Past the first zone edge
 * another harmonic reaches farther; the grid near the guide is to stay the same. */
static const double STEPS_PER_DECAY = 3;

/* Further out than a picture of the field needs: what is cut off counts for a share near 1. */
static const double EXTRA_REACH = 4;

/* The mode itself and two more: the next one of its own symmetry is the second after it. */
enum { MODES = 3 };

static const char NOT_FOR_CHANNELS[] = "fields of neighbouring teeth are compared for cells only";
static const char NONE_IN_BAND[] = "a wave in a stop band carries no power";
static const char NO_FIELD[] = "the mode was not found again on the grid of its field";

/* --- Numbers of the whole cell -----------------------------------------------------------------
 */

static bool is_channel(const pk_problem *problem) {
  return problem->taper.of_channel;
}

/* A quantity whose note is the result's. */
static picket_status keep(picket_result *result, picket_quantity *q) {
  if (q->note) {
    q->note = pk_result_text(result, q->note);
    return q->note ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return PICKET_OK;
}

static picket_status take_index(const pk_problem *problem, pk_polarization polarization,
                                const picket_options *options, picket_result *scratch,
                                pk_taper_cell *cell) {
  picket_context *context = problem->context;
  picket_index_point point = {0};
  pk_profile *profile = NULL;
  picket_status status = (is_channel(problem) ? pk_channel_index_point : pk_index_point)(
      problem, polarization, problem->taper.at_um, options, &point, &profile, scratch);
  if (status == PICKET_OK && point.mode_count == 0) {
    status = pk_fail(context, PICKET_ERROR_NO_MODE, "%s",
                     point.note ? point.note : "there is no Bloch mode");
  }
  if (status == PICKET_OK) {
    const picket_bloch_mode *mode = &point.modes[0];
    cell->bloch_index = mode->bloch_index;
    cell->group_index = mode->group_index;
    cell->loss_db_per_cm = mode->loss_db_per_cm;
    cell->regime = mode->regime;
    picket_quantity *kept[] = {&cell->bloch_index, &cell->group_index, &cell->loss_db_per_cm};
    for (int i = 0; i < 3 && status == PICKET_OK; i++) {
      status = keep(scratch, kept[i]);
    }
  }
  pk_index_point_clear(context, &point);
  pk_free(context, profile);
  return status;
}

/* What the edges of the first band say of the wavelength. */
static picket_status judge_edges(const picket_options *options, const picket_edges_answer *answer,
                                 picket_result *scratch, pk_taper_cell *cell) {
  const picket_stop_band *first = &answer->bands[0];
  picket_quantity q = answer->operating.clearance_um;
  double width = first->long_um.value - first->short_um.value;
  cell->clearance_um = q;
  cell->no_band = fabs(width) <= first->long_um.uncertainty + first->short_um.uncertainty;
  picket_status status = keep(scratch, &cell->clearance_um);
  if (status == PICKET_OK &&
      !(q.uncertainty <= 1.01 * options->accuracy * fabs(first->long_um.value))) {
    status =
        pk_result_fall_short(scratch, "the clearance is not known to %.1g: %s", options->accuracy,
                             q.note ? q.note : "finer grids did not bring its bar down");
  }
  return status;
}

/* A cell without a first stop band is an outcome. */
static picket_status take_clearance(const pk_problem *problem, pk_polarization polarization,
                                    const picket_options *options, picket_result *scratch,
                                    pk_taper_cell *cell) {
  picket_context *context = problem->context;
  picket_edges_answer answer = {.bands = NULL};
  picket_result *own = NULL; /* the attenuation may fall short without harm */
  pk_lit lit;
  pk_lit_make(problem, problem->taper.at_um, (int)polarization, &lit);
  lit.problem.light.wavelength_um = &lit.wavelength_um;
  picket_status status = pk_result_create(context, PK_RESULT_EDGES, "", options->accuracy, &own);
  if (status == PICKET_OK) {
    status = (is_channel(problem) ? pk_channel_edges_of : pk_edges_of)(&lit.problem, polarization,
                                                                       options, &answer, own);
  }
  if (status == PICKET_OK) {
    status = judge_edges(options, &answer, scratch, cell);
  } else if (status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
             status == PICKET_ERROR_NO_MODE) {
    cell->clearance_um = (picket_quantity){NAN, NAN, picket_context_message(context)};
    status = keep(scratch, &cell->clearance_um);
    pk_message_clear(context);
  }
  pk_free(context, (void *)answer.bands);
  pk_result_free(own);
  return status;
}

/* --- The field where the next tooth begins -----------------------------------------------------
 */

static const pk_followed *fundamental(const pk_look *look) {
  for (int i = 0; i < look->count; i++) {
    if (look->mode[i].order == 0) {
      return &look->mode[i];
    }
  }
  return NULL;
}

/* The denser open side or, above it, the next mode that a change of the structure couples to: in a
 * structure with a lateral mirror plane one that is even as well. */
static double next_index(const pk_look *look) {
  double next = NAN, centre;
  bool mirrored = pk_geometry_mirror(look->problem->cell.geometry, PK_V, &centre);
  for (int side = 0; look->survey.open && side < 2; side++) {
    next = fmax(next, pk_survey_side_index(&look->survey, side, look->k0));
  }
  for (int i = 0; i < look->count; i++) {
    const pk_followed *mode = &look->mode[i];
    if (mode->order > 0 && (!mirrored || mode->order % 2 == 0)) {
      next = fmax(next, creal(mode->character.k) / look->k0);
    }
  }
  return next;
}

/* Nothing varies along the guide: a wave is its main harmonic alone. */
static picket_status is_plain(const pk_problem *problem, bool *plain) {
  double *lines = NULL;
  int count = 0;
  picket_status status = pk_geometry_lines(problem->cell.geometry, PK_U, &lines, &count);
  pk_free(problem->context, lines);
  *plain = count == 0 && pk_geometry_is_rectangular(problem->cell.geometry);
  return status;
}

static picket_status prepare_sides(pk_look *look, double k, double accuracy) {
  pk_survey *survey = &look->survey;
  bool plain = false;
  picket_status status = is_plain(look->problem, &plain);
  pk_survey_open_sides(survey, k, look->k0, accuracy);
  for (int side = 0; survey->open && side < 2; side++) {
    double decay = pk_survey_decay(survey, side, k, look->k0), step = decay / STEPS_PER_DECAY;
    survey->outer_step_um = survey->outer_step_um > 0 ? fmin(survey->outer_step_um, step) : step;
    if (plain && survey->layer[side].thickness == 0) {
      survey->decay_um[side] = decay;
    }
  }
  return status;
}

static picket_status lay(pk_look *look, double index, double accuracy, pk_cell_grid *base) {
  double core = 0, pitch = look->problem->cell.pitch_um;
  picket_status status = pk_survey_core_index(&look->survey, look->k0, &core);
  if (core > 0) {
    look->survey.steps_per_pitch = STEPS_PER_WAVE * pitch * core * look->k0 / (2 * PI);
  }
  if (status == PICKET_OK && isfinite(index)) {
    status = prepare_sides(look, index * look->k0, accuracy);
  }
  pk_lay_plan plan = {.reach = 0.5 * log(10 / accuracy) + EXTRA_REACH, .zero_walls = true};
  return status == PICKET_OK ? pk_survey_lay(&look->survey, &plan, base) : status;
}

static picket_status take_plane(pk_look *look, const pk_cell_grid *base, int m,
                                const pk_followed *mode, pk_plane *out) {
  pk_level level = {0};
  picket_field *field = NULL;
  picket_status status = pk_look_open(look, base, m, &level);
  if (status == PICKET_OK) {
    status = pk_field_on(look, &level, mode, &field);
  }
  if (status == PICKET_OK) {
    status = pk_plane_of_field(field, out);
  }
  pk_mode_field_free(field);
  pk_level_close(&level);
  return status;
}

static int coarse_member(const pk_cell_grid *base, const picket_options *options) {
  int m = options->accuracy >= HIGH_ACCURACY ? USUAL : FINE;
  while (m > LEAST && pk_level_unknowns(base, PK_TAPER_GRIDS * m) > options->unknowns) {
    m--;
  }
  return m;
}

static picket_status take_planes_of(pk_look *look, const picket_options *options,
                                    pk_taper_cell *cell) {
  const pk_followed *mode = fundamental(look);
  pk_cell_grid base;
  cell->next_index = next_index(look);
  if (!mode) {
    cell->why = NO_FIELD;
    return PICKET_OK;
  }
  picket_status status = lay(look, cell->bloch_index.value, options->accuracy, &base);
  if (status != PICKET_OK) {
    return status;
  }
  int m = coarse_member(&base, options);
  for (int g = 0; g < PK_TAPER_GRIDS && status == PICKET_OK; g++) {
    status = take_plane(look, &base, (g + 1) * m, mode, &cell->plane[g]);
  }
  pk_cell_grid_clear(look->problem->context, &base);
  return status;
}

static picket_status take_planes(const pk_problem *problem, pk_polarization polarization,
                                 const picket_options *options, pk_taper_cell *cell) {
  pk_look look = {0};
  picket_status status =
      pk_look_take(problem, polarization, problem->taper.at_um, MODES, options->accuracy, &look);
  if (status == PICKET_OK) {
    status = take_planes_of(&look, options, cell);
  }
  pk_look_clear(&look);
  if (status == PICKET_ERROR_NUMERIC) { /* the numbers of the cell stand without it */
    pk_message_clear(problem->context);
    for (int g = 0; g < PK_TAPER_GRIDS; g++) {
      pk_plane_clear(problem->context, &cell->plane[g]);
    }
    cell->why = NO_FIELD;
    status = PICKET_OK;
  }
  return status;
}

/* --- All of it ---------------------------------------------------------------------------------
 */

void pk_taper_cell_begin(const pk_problem *problem, pk_polarization polarization,
                         pk_taper_cell *out) {
  const picket_quantity none = {NAN, NAN, "was not looked at"};
  bool channel = is_channel(problem);
  double smallest =
      pk_smallest_feature(problem, channel ? PK_STRUCTURE_CHANNEL : PK_STRUCTURE_CELL);
  *out = (pk_taper_cell){
      .polarization = channel ? pk_channel_word(polarization) : (picket_polarization)polarization,
      .pitch_um = channel ? problem->channel.pitch_um : problem->cell.pitch_um,
      .smallest_um = smallest,
      .respects = pk_feature_respects(&problem->rules, smallest) != 0,
      .bloch_index = none,
      .group_index = none,
      .loss_db_per_cm = none,
      .clearance_um = none,
      .next_index = NAN,
      .why = none.note};
}

picket_status pk_taper_cell_solve(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_result *scratch,
                                  pk_taper_cell *cell) {
  picket_options chosen = *options;
  chosen.count = 0; /* the first band, the fundamental mode */
  chosen.jobs = 1;
  pk_taper_cell_begin(problem, polarization, cell);
  picket_status status = take_index(problem, polarization, &chosen, scratch, cell);
  if (status == PICKET_OK) {
    status = take_clearance(problem, polarization, &chosen, scratch, cell);
  }
  cell->why = is_channel(problem)                       ? NOT_FOR_CHANNELS
              : cell->regime == PICKET_REGIME_STOP_BAND ? NONE_IN_BAND
                                                        : NULL;
  if (status == PICKET_OK && !cell->why) {
    status = take_planes(problem, polarization, &chosen, cell);
  }
  return status;
}

void pk_taper_cell_clear(picket_context *context, pk_taper_cell *cell) {
  for (int g = 0; g < PK_TAPER_GRIDS; g++) {
    pk_plane_clear(context, &cell->plane[g]);
  }
}

/* The error of the finer grid is at most the difference when it falls in first order, as next to
 * singular corners; twice that also covers what rounding adds to both. */
static const double BAR = 2;

picket_quantity pk_taper_pair(double coarse, double fine, const char *missing) {
  bool known = isfinite(coarse) && isfinite(fine);
  return known ? (picket_quantity){fine, BAR * fabs(fine - coarse), NULL}
               : (picket_quantity){NAN, NAN, missing};
}
