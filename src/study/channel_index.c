/* The fundamental Bloch mode of a channel at a wavelength: index, group index, loss, regime.
 *
 * As for cells (index.c) s = ((k - K)Λ/π)² and g = (dk/dk0)(k - K)Λ/π are extrapolated in the place
 * of k and the group index, since they are smooth through the edge of a stop band (branch.h). */
#include "study/channel_index.h"

#include <math.h>

#include "base/memory.h"
#include "study/branch.h"
#include "study/channel_converge.h"

static const double PI = 3.141592653589793238;
static const double DECIBEL_PER_NEPER = 8.685889638065036553;
static const double UM_PER_CM = 1e4;

/* Relative uncertainty that a loss is refined for, and Im k/k0 below which it is not (index.c). */
static const double LOSS_ACCURACY = 1e-2;
static const double LOSS_FLOOR = 1e-8;

enum { V_SQUARE, V_SQUARE_IM, V_PRODUCT, V_PRODUCT_IM, V_GROUP, VALUES };

static const char NOTE_STOP_BAND[] = "inside a stop band the wave does not propagate";
static const char NOTE_NO_MODE[] =
    "no confined mode was found at this wavelength: past its stop band the channel radiates, or it "
    "guides none";
static const char NOTE_NOT_GIVEN[] = "not given for a channel";
static const char NOTE_DIVIDED[] =
    "how the loss divides is not given for a channel that leaks and "
    "absorbs";

typedef struct work {
  pk_channel_sight sight;
  pk_branch branch;
  bool lossless; /* no medium absorbs */
} work;

static bool is_stopped(const work *w) {
  double edge = PI / w->branch.pitch_um;
  return fabs(creal(w->sight.k) - edge) < 1e-6 * edge && fabs(cimag(w->sight.k)) > 1e-6 * edge;
}

static void take_lossless(work *w, const pk_channel_level *level) {
  w->lossless = true;
  for (int m = 0; m < 3 * level->media.count; m++) {
    w->lossless = w->lossless && cimag(level->media.permittivity[m]) == 0;
  }
}

static picket_status measure(const work *w, pk_channel_level *level, const pk_channel_mode *mode,
                             double *v) {
  double complex slope = NAN;
  picket_status status = pk_channel_slope(level, w->sight.k0, mode, &slope);
  double complex square = pk_branch_square(&w->branch, mode->k);
  double complex product = pk_branch_product(&w->branch, mode->k, slope);
  v[V_SQUARE] = creal(square);
  v[V_SQUARE_IM] = cimag(square);
  v[V_PRODUCT] = creal(product);
  v[V_PRODUCT_IM] = cimag(product);
  v[V_GROUP] = is_stopped(w) ? NAN : fabs(creal(slope));
  return status;
}

static picket_status sample(void *user, const pk_axis *x, const pk_axis *y, int m, int harmonics,
                            double *values) {
  work *w = user;
  pk_channel_level level;
  pk_channel_mode mode = {0};
  picket_status status =
      pk_channel_level_open(&w->sight.survey, x, y, m, harmonics, w->sight.k0, &level);
  if (status != PICKET_OK) {
    return status;
  }
  take_lossless(w, &level);
  status = pk_channel_sight_follow(&w->sight, &level, &mode);
  if (status == PICKET_OK) {
    status = measure(w, &level, &mode, values);
  }
  pk_channel_modes_clear(level.context, 1, &mode);
  pk_channel_level_close(&level);
  return status;
}

/* --- What is asked for ------------------------------------------------------------------------ */

static double allowed_loss(const work *w, const picket_quantity *q, double accuracy) {
  double decay = LOSS_FLOOR * w->sight.k0 * w->branch.pitch_um / PI;
  return fmax(fmax(LOSS_ACCURACY, accuracy) * fabs(q[V_SQUARE_IM].value),
              2 * sqrt(fabs(q[V_SQUARE].value)) * decay);
}

static double allowed(const pk_channel_request *request, const picket_quantity *q, int i) {
  const work *w = request->user;
  double accuracy = request->options->accuracy, square = q[V_SQUARE].value;
  bool direct = q[V_GROUP].uncertainty <= accuracy * q[V_GROUP].value;
  double inside = square < 0 ? 2 * fabs(square) * fmax(LOSS_ACCURACY, accuracy) : INFINITY;
  switch (i) {
    case V_SQUARE: return fmin(pk_branch_allowed(&w->branch, square, accuracy), inside);
    case V_SQUARE_IM:
      return w->lossless && !w->sight.leaks ? INFINITY : allowed_loss(w, q, accuracy);
    case V_PRODUCT: return square < 0 || direct ? INFINITY : accuracy * fabs(q[i].value);
    default: return INFINITY;
  }
}

/* --- The answer ------------------------------------------------------------------------------- */

static picket_quantity scaled(picket_quantity q, double factor) {
  q.value *= factor;
  q.uncertainty *= fabs(factor);
  return q;
}

static picket_quantity absent(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

static picket_quantity group_index(const picket_quantity *q) {
  picket_quantity through = pk_branch_group_index(&q[V_PRODUCT], &q[V_SQUARE]), direct = q[V_GROUP];
  bool agree = fabs(direct.value - through.value) <= direct.uncertainty + through.uncertainty;
  return agree && !(direct.uncertainty > through.uncertainty) ? direct : through;
}

/* Where a loss goes: media that absorb, or sides that leak. */
static void divide_loss(const work *w, bool stopped, picket_quantity *decay,
                        picket_quantity *absorbed, picket_quantity *radiated) {
  const picket_quantity zero = {0, 0, NULL};
  *absorbed = *radiated = zero;
  if (stopped) {
    return;
  }
  if (w->lossless && !w->sight.leaks) {
    *decay = (picket_quantity){0, fabs(decay->value) + 1e-12 * w->sight.k0, NULL};
  } else if (w->lossless) {
    *radiated = *decay;
  } else if (!w->sight.leaks) {
    *absorbed = *decay;
  } else {
    *absorbed = *radiated = absent(NOTE_DIVIDED);
  }
}

static void fill_mode(work *w, picket_quantity *q, picket_bloch_mode *mode) {
  const double decibel = DECIBEL_PER_NEPER * UM_PER_CM;
  picket_quantity k, decay, absorbed, radiated;
  pk_branch_take_side(&w->branch, q[V_PRODUCT].value);
  pk_branch_wavenumber(&w->branch, q[V_SQUARE], q[V_SQUARE_IM], &k, &decay);
  bool stopped =
      q[V_SQUARE].value < 0 && fabs(q[V_SQUARE_IM].value) < 0.1 * fabs(q[V_SQUARE].value);
  if (decay.value < 0 && -decay.value <= 2 * decay.uncertainty) {
    decay.uncertainty = fmax(decay.uncertainty, -decay.value);
    decay.value = 0; /* a loss below zero within its bar is zero */
  }
  divide_loss(w, stopped, &decay, &absorbed, &radiated);
  mode->bloch_index = scaled(k, 1 / w->sight.k0);
  mode->group_index = stopped ? absent(NOTE_STOP_BAND) : group_index(q);
  mode->dispersion_ps_per_nm_km = absent(NOTE_NOT_GIVEN);
  mode->loss_db_per_cm = scaled(decay, decibel);
  mode->loss_db_per_pitch = scaled(decay, DECIBEL_PER_NEPER * w->branch.pitch_um);
  mode->absorption_db_per_cm = scaled(absorbed, decibel);
  mode->radiation_db_per_cm = scaled(radiated, decibel);
  mode->radiation_per_mm = scaled(radiated, 2e3);
  mode->upward_share = absent(NOTE_NOT_GIVEN);
  bool below = k.value * w->branch.pitch_um < PI;
  mode->regime = stopped ? PICKET_REGIME_STOP_BAND
                 : below ? PICKET_REGIME_SUBWAVELENGTH
                         : PICKET_REGIME_UNKNOWN;
}

static picket_status check_bars(const picket_index_point *point, const picket_options *options,
                                picket_result *result) {
  const picket_bloch_mode *mode = &point->modes[0];
  const picket_quantity *asked[2] = {&mode->bloch_index, &mode->group_index};
  for (int a = 0; a < 2; a++) {
    bool missed = isfinite(asked[a]->value) &&
                  !(asked[a]->uncertainty <= 1.01 * options->accuracy * fabs(asked[a]->value));
    if (missed && result->complete) {
      return pk_result_fall_short(
          result, "at %.10g nm the %s is not known to %.1g: %s", 1e3 * point->wavelength_um,
          a ? "group index" : "Bloch index", options->accuracy,
          asked[a]->note ? asked[a]->note : "it changes fast near a band edge");
    }
  }
  return PICKET_OK;
}

static picket_status converge(work *w, const picket_options *options, picket_index_point *point,
                              pk_profile **profile, picket_result *result) {
  picket_context *context = result->context;
  picket_bloch_mode *mode = PK_NEW(context, 1, picket_bloch_mode);
  pk_profile *shape = PK_NEW(context, 1, pk_profile); /* one mode: nothing to tell apart */
  picket_quantity q[VALUES];
  point->modes = mode;
  picket_status status = mode && shape ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_channel_request request = {.survey = &w->sight.survey,
                                  .index = creal(w->sight.k) / w->sight.k0,
                                  .count = VALUES,
                                  .sample = sample,
                                  .user = w,
                                  .options = options,
                                  .phase = w->sight.survey.polarization == PK_HY
                                               ? "Bloch index, te-like"
                                               : "Bloch index, tm-like",
                                  .allowed = allowed};
    status = pk_channel_converge(&request, q, result);
  }
  if (status != PICKET_OK) {
    pk_free(context, shape);
    return status;
  }
  fill_mode(w, q, mode);
  point->mode_count = 1;
  *profile = shape;
  return PICKET_OK;
}

picket_status pk_channel_index_point(const pk_problem *problem, pk_polarization polarization,
                                     double wavelength_um, const picket_options *options,
                                     picket_index_point *point, pk_profile **profile,
                                     picket_result *result) {
  work w = {.lossless = false};
  point->wavelength_um = wavelength_um;
  point->estimate = NAN;
  if (options->count > 1) {
    return pk_fail(problem->context, PICKET_ERROR_UNSUPPORTED,
                   "count is %.0f, must be 1 for the Bloch modes of a channel", options->count);
  }
  picket_status status = pk_channel_sight_take(problem, polarization, wavelength_um, &w.sight);
  if (status == PICKET_OK && !w.sight.found) {
    point->note = NOTE_NO_MODE;
  } else if (status == PICKET_OK) {
    w.branch = pk_branch_of(w.sight.k, problem->channel.pitch_um);
    status = converge(&w, options, point, profile, result);
    if (status == PICKET_OK) {
      status = check_bars(point, options, result);
    }
  }
  pk_channel_sight_clear(&w.sight);
  return status;
}
