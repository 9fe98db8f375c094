/* Bands ω(k) along a path, and the gaps between them.
 *
 * Band j at a wavenumber is the frequency at which the j-th lowest eigenvalue of the cell, its
 * media taken at that frequency, equals (ω/c)²; sorted values are continuous along the path. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/phase.h"
#include "bloch/resonance.h"
#include "study/channel_bands.h"
#include "study/converge.h"
#include "study/level.h"
#include "study/study.h"

enum { USUAL_BANDS = 6, NEWTON_STEPS = 12 };

static const double PI = 3.141592653589793238;

/* Modes below the start frequency by this factor stand at zero: the constant field at the zone
 * centre. */
static const double ZERO = 1e-5;

static const char NOTE_ABOVE[] =
    "not guided: above the light line of an open side there is a continuum, or no such mode";
static const char NOTE_MATERIAL[] = "a material is not known at this frequency";

typedef struct path_point {
  double kz, kx;
  const char *label; /* borrowed from the problem */
  bool corner;       /* a point of the path itself, not between two */
} path_point;

typedef struct band_study {
  const pk_problem *problem;
  pk_polarization polarization;
  pk_survey survey;
  int bands, points;
  path_point *point;
  bool *outside; /* [points][bands] a material was not known there */
} band_study;

/* --- The path ------------------------------------------------------------------------------------
 */

static const pk_path_point USUAL_PATH[2] = {{{0, 0}, NULL}, {{1, 0}, NULL}};

static picket_status lay_path(band_study *s, int per_leg) {
  const pk_path *path = &s->problem->path;
  const pk_path_point *corner = path->given ? path->point : USUAL_PATH;
  int corners = path->given ? path->count : 2;
  s->points = (corners - 1) * per_leg + 1;
  s->point = PK_NEW(s->problem->context, s->points, path_point);
  if (!s->point) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < s->points; i++) {
    int leg = i / per_leg < corners - 1 ? i / per_leg : corners > 1 ? corners - 2 : 0;
    double t = corners > 1 ? (double)(i - leg * per_leg) / per_leg : 0;
    const double *a = corner[leg].at, *b = corners > 1 ? corner[leg + 1].at : a;
    path_point *p = &s->point[i];
    p->kz = a[0] + (b[0] - a[0]) * t;
    p->kx = a[1] + (b[1] - a[1]) * t;
    p->corner = t == 0 || t == 1;
    p->label = t == 0 ? corner[leg].label : t == 1 ? corner[leg + 1].label : NULL;
  }
  return PICKET_OK;
}

/* --- Bands at one wavenumber on one grid ---------------------------------------------------------
 */

/* |k| folded into the first zone, 1/µm: what the light line is compared with. */
static double folded_wavenumber(const pk_cell *cell, double kz) {
  return fabs(kz - 2 * floor(0.5 * kz + 0.5)) * PI / cell->pitch_um;
}

static bool is_guided(const band_study *s, const path_point *point, double k0) {
  if (!s->survey.open) {
    return true;
  }
  double k = folded_wavenumber(&s->problem->cell, point->kz);
  for (int side = 0; side < 2; side++) {
    if (k0 * pk_survey_side_index(&s->survey, side, k0) >= k) {
      return false;
    }
  }
  return true;
}

/* The j-th lowest mode with its media at its own frequency, from a guess. NaN if it does not
 * settle. */
static picket_status settle_band(band_study *s, pk_level *level, pk_phase phase, int j, double *k0,
                                 bool *outside) {
  picket_context *context = s->problem->context;
  pk_mode *modes = PK_NEW(context, j + 1, pk_mode);
  picket_status status = modes ? PICKET_OK : PICKET_ERROR_MEMORY;
  double shift = -0.2 * s->survey.k0_start * s->survey.k0_start;
  double step = INFINITY;
  for (int i = 0; status == PICKET_OK && i < NEWTON_STEPS && step > 1e-12; i++) {
    int found = 0;
    status = pk_media_set(&level->media, *k0, level->op);
    if (status == PICKET_OK) {
      status = pk_solver_modes(level->solver, phase, shift, j + 1, NULL, modes, &found);
    }
    if (status == PICKET_OK && found == j + 1) {
      double next = *k0;
      status = pk_mode_newton(&level->media, level->op, phase, *k0, &modes[j], &next);
      step = fabs(next - *k0) / *k0;
      *k0 = next;
    } else if (status == PICKET_OK) {
      status = pk_fail(context, PICKET_ERROR_NUMERIC, "band %d did not converge", j + 1);
    }
    pk_modes_clear(context, found, modes);
  }
  *outside = level->media.clamped;
  pk_free(context, modes);
  return status;
}

static picket_status bands_at(band_study *s, pk_level *level, int at, double *frequency) {
  picket_context *context = s->problem->context;
  const path_point *point = &s->point[at];
  pk_phase phase = pk_phase_at(&s->problem->cell, point->kz, point->kx);
  pk_mode *modes = PK_NEW(context, s->bands, pk_mode);
  int found = 0;
  double start = s->survey.k0_start;
  picket_status status =
      modes ? pk_media_set(&level->media, start, level->op) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status =
        pk_solver_modes(level->solver, phase, -0.2 * start * start, s->bands, NULL, modes, &found);
  }
  bool dispersive = level->media.dispersive || level->media.clamped;
  for (int j = 0; j < s->bands && status == PICKET_OK; j++) {
    double k0 = j < found ? sqrt(fmax(0, creal(modes[j].lambda))) : NAN;
    bool outside = false;
    if (k0 < ZERO * start) {
      k0 = 0;
    } else if (dispersive && j < found && is_guided(s, point, k0)) {
      status = settle_band(s, level, phase, j, &k0, &outside);
    }
    s->outside[at * s->bands + j] = outside;
    bool valid = k0 == 0 ? !s->survey.open : !outside && is_guided(s, point, k0);
    frequency[j] = valid ? k0 * s->problem->cell.pitch_um / (2 * PI) : NAN;
  }
  pk_modes_clear(context, found, modes);
  pk_free(context, modes);
  return status;
}

static picket_status sample(void *user, const pk_cell_grid *base, int m, double *values) {
  band_study *s = user;
  pk_level level;
  picket_status status = pk_level_open(s->problem, s->polarization, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  pk_solver_want_every_copy(level.solver, true);
  for (int i = 0; status == PICKET_OK && i < s->points; i++) {
    status = pk_progress(s->problem->context, "bands", (double)i / s->points);
    if (status == PICKET_OK) {
      status = bands_at(s, &level, i, values + i * s->bands);
    }
  }
  pk_level_close(&level);
  return status;
}

/* Open cells: how far the slowest guided mode of the path reaches into the sides. */
static picket_status scout(band_study *s) {
  if (!s->survey.open) {
    return PICKET_OK;
  }
  double *values = PK_NEW(s->problem->context, s->points * s->bands, double);
  pk_cell_grid base;
  pk_lay_plan plan = {PK_REACH_ROOMY, false, true};
  picket_status status = values ? pk_survey_lay(&s->survey, &plan, &base) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = sample(s, &base, 1, values);
    pk_cell_grid_clear(s->problem->context, &base);
  }
  double decay[2] = {0, 0};
  for (int i = 0; status == PICKET_OK && i < s->points * s->bands; i++) {
    if (isfinite(values[i])) {
      double k = folded_wavenumber(&s->problem->cell, s->point[i / s->bands].kz);
      double k0 = values[i] * 2 * PI / s->problem->cell.pitch_um;
      for (int side = 0; side < 2; side++) {
        decay[side] = fmax(decay[side], pk_survey_decay(&s->survey, side, k, k0));
      }
    }
  }
  for (int side = 0; side < 2; side++) {
    s->survey.decay_um[side] = decay[side] > 0 ? decay[side] : s->survey.decay_um[side];
  }
  pk_free(s->problem->context, values);
  return status;
}

/* --- Gaps ----------------------------------------------------------------------------------------
 */

/* The highest (sign 1) or lowest (sign -1) value of a band over the path. Between the points of the
 * path a parabola through three samples says how much is missed; that much is added to the bar. */
static picket_quantity extreme(const band_study *s, const picket_quantity *q, int band, int sign) {
  int best = 0;
  for (int i = 0; i < s->points; i++) {
    const picket_quantity *here = &q[i * s->bands + band];
    if (isnan(here->value)) {
      return *here;
    }
    if (sign * here->value > sign * q[best * s->bands + band].value) {
      best = i;
    }
  }
  picket_quantity top = q[best * s->bands + band];
  if (!s->point[best].corner) {
    double before = q[(best - 1) * s->bands + band].value;
    double after = q[(best + 1) * s->bands + band].value;
    double curvature = before - 2 * top.value + after, slope = 0.5 * (after - before);
    double missed = curvature != 0 ? -0.5 * slope * slope / curvature : 0;
    top.value += missed;
    top.uncertainty += fabs(missed);
  }
  return top;
}

static picket_status find_gaps(const band_study *s, const picket_quantity *q,
                               picket_bands_answer *answer) {
  picket_gap *gaps = PK_NEW(s->problem->context, s->bands, picket_gap);
  if (!gaps) {
    return PICKET_ERROR_MEMORY;
  }
  answer->gaps = gaps;
  for (int j = 0; j + 1 < s->bands && !s->survey.open; j++) {
    picket_quantity from = extreme(s, q, j, 1), to = extreme(s, q, j + 1, -1);
    double bars = (isnan(from.uncertainty) ? 0 : from.uncertainty) +
                  (isnan(to.uncertainty) ? 0 : to.uncertainty);
    if (to.value - from.value > fmax(bars, 1e-9 * to.value)) {
      gaps[answer->gap_count++] = (picket_gap){j + 1, from, to};
    }
  }
  return PICKET_OK;
}

/* --- The study -----------------------------------------------------------------------------------
 */

static picket_status fill_points(const band_study *s, const picket_quantity *q,
                                 picket_bands_answer *answer) {
  picket_context *context = s->problem->context;
  picket_band_point *points = PK_NEW(context, s->points, picket_band_point);
  if (!points) {
    return PICKET_ERROR_MEMORY;
  }
  answer->points = points;
  answer->point_count = s->points;
  for (int i = 0; i < s->points; i++) {
    points[i].kz = s->point[i].kz;
    points[i].kx = s->point[i].kx;
    const char *label = s->point[i].label;
    points[i].label = label ? pk_text_copy(context, label) : NULL;
    picket_quantity *frequency =
        pk_copy(context, q + i * s->bands, (size_t)s->bands, sizeof(picket_quantity));
    points[i].frequency = frequency;
    if (!frequency || (label && !points[i].label)) {
      return PICKET_ERROR_MEMORY;
    }
    for (int j = 0; j < s->bands; j++) {
      if (isnan(frequency[j].value)) {
        frequency[j].note = s->outside[i * s->bands + j] ? NOTE_MATERIAL : NOTE_ABOVE;
      }
    }
  }
  return PICKET_OK;
}

static picket_status solve(band_study *s, const picket_options *options,
                           picket_bands_answer *answer, picket_result *result) {
  picket_context *context = s->problem->context;
  s->outside = PK_NEW(context, s->points * s->bands, bool);
  picket_quantity *q = PK_NEW(context, s->points * s->bands, picket_quantity);
  picket_status status = s->outside && q ? scout(s) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_converge_request request = {.survey = &s->survey,
                                   .count = s->points * s->bands,
                                   .sample = sample,
                                   .user = s,
                                   .options = options,
                                   .phase = s->polarization == PK_EY ? "bands, ey" : "bands, hy"};
    status = pk_converge(&request, q, result);
  }
  answer->polarization = (picket_polarization)s->polarization;
  answer->band_count = s->bands;
  if (status == PICKET_OK) {
    status = fill_points(s, q, answer);
  }
  if (status == PICKET_OK) {
    status = find_gaps(s, q, answer);
  }
  pk_free(context, q);
  pk_free(context, s->outside);
  return status;
}

static picket_status one_polarization(const pk_problem *problem, pk_polarization polarization,
                                      const picket_options *options, picket_bands_answer *answer,
                                      picket_result *result) {
  if (pk_asks_channel(problem)) {
    return pk_channel_bands_of(problem, polarization, options, answer, result);
  }
  band_study s = {.problem = problem, .polarization = polarization};
  s.bands = options->count > 0 ? (int)options->count : USUAL_BANDS;
  picket_status status = pk_survey_take(problem, polarization, &s.survey);
  if (status == PICKET_OK) {
    status = lay_path(&s, (int)options->points);
  }
  if (status == PICKET_OK) {
    status = solve(&s, options, answer, result);
  }
  pk_free(problem->context, s.point);
  return status;
}

picket_status pk_study_bands(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  if (!problem->has_cell && !problem->channel.given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no cell and no channel: bands need one");
  }
  picket_result *result = NULL;
  picket_status status = pk_result_create(problem->context, PK_RESULT_BANDS, problem->name,
                                          options->accuracy, &result);
  if (status == PICKET_OK) {
    result->bands = PK_NEW(problem->context, 2, picket_bands_answer);
    status = result->bands ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  for (int p = 0; p < 2 && status == PICKET_OK; p++) {
    if (problem->light.wanted[p]) {
      picket_bands_answer *answer = &result->bands[result->count++];
      status = one_polarization(problem, (pk_polarization)p, options, answer, result);
    }
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
