/* The Bloch modes of a cell at a wavelength, on families of grids: index, group index, dispersion,
 * loss and where it goes, regime.
 *
 * A first look on a coarse grid finds all modes. Each is then followed from grid to grid: the wave
 * nearest to the one of the last grid, recognised by its main harmonic and its nodes. Values are
 * extrapolated and get bars like everything else (converge.h). */
#include "study/index.h"

#include <math.h>

#include "base/memory.h"
#include "study/branch.h"
#include "study/channel_index.h"
#include "study/converge.h"
#include "study/estimate.h"
#include "study/look.h"
#include "study/radiation.h"
#include "study/study.h"

static const double PI = 3.141592653589793238;
static const double DECIBEL_PER_NEPER = 8.685889638065036553; /* 20/ln 10, of a field */
static const double UM_PER_CM = 1e4;
static const double SPEED_OF_LIGHT = 299.792458; /* µm/ps */

/* Half-width of the frequency difference for dispersion: truncation and rounding (1e-11/δ) are both
 * small, and truncation is measured. */
static const double DISPERSION_STEP = 2e-3;

/* Rounding of solved waves: the largest errors of stacks, known in closed form, where all else is
 * below: 4e-13 of the index and 7e-11 of the group index; with room. */
static const double ROUNDING_INDEX = 5e-12;
static const double ROUNDING_GROUP = 5e-10;

/* Relative uncertainty that a loss is refined for. */
static const double LOSS_ACCURACY = 1e-2;

/* Im k/k0 below which a loss is not refined for: 4e-3 dB/cm at 1.55 µm. */
static const double LOSS_FLOOR = 1e-8;

/* Sampled values of a mode. */
enum {
  V_SQUARE,     /* Re s, see branch.h */
  V_SQUARE_IM,  /* Im s */
  V_PRODUCT,    /* Re g, see branch.h */
  V_PRODUCT_IM, /* Im g */
  V_GROUP,      /* |dk/dk0|, away from edges as good as g or better */
  V_DISPERSION, /* ps/(nm km) */
  V_ABSORBED,   /* part of the loss by absorption, 0 to 1 */
  V_UPWARD,     /* share of the radiated power into +x */
  VALUES
};

static const char NOTE_STOP_BAND[] = "inside a stop band the wave does not propagate";
static const char NOTE_LOST[] = "the mode could not be followed from grid to grid";
static const char NOTE_NO_RADIATION[] = "the mode does not radiate";

typedef struct index_study {
  pk_look look;
  pk_branch *branch;            /* [count of the look] */
  pk_radiation_table radiation; /* of the last grid */
} index_study;

/* --- Values of a mode on a grid
 * -------------------------------------------------------------------- */

/* Group index and Re k of the same mode at another frequency. */
static picket_status neighbour_at(index_study *s, pk_level *level, const pk_wave *wave,
                                  double complex slope, double k0, double *group,
                                  double complex *k) {
  double pitch = s->look.problem->cell.pitch_um;
  picket_status status = pk_media_set(&level->media, k0, level->op);
  pk_wave other = {0};
  double complex guess = wave->xi * cexp(I * slope * (k0 - s->look.k0) * pitch), dk = NAN;
  if (status == PICKET_OK) {
    status = pk_wave_near(level->solver, (pk_phase){1, 1, 0}, k0, guess, wave->right, &other);
  }
  if (status == PICKET_OK) {
    status = pk_wave_slope(&level->media, level->op, (pk_phase){1, 1, 0}, k0, pitch,
                           s->look.problem->cell.shift, &other, &dk);
    *group = creal(dk);
    *k = -I * clog(other.xi / wave->xi) / pitch; /* relative to the middle */
  }
  pk_wave_clear(s->look.problem->context, &other);
  return status;
}

/* D = (1/c) dn_g/dλ from the group index on both sides. The second difference of k gives the same
 * with half the truncation error, so twice the second less the first has none of that order; what
 * was taken away is the bar. */
static picket_status dispersion(index_study *s, pk_level *level, const pk_wave *wave,
                                double complex slope, double *value, double *error) {
  double step = DISPERSION_STEP * s->look.k0, group[2];
  double complex k[2];
  for (int side = 0; side < 2; side++) {
    picket_status status = neighbour_at(s, level, wave, slope, s->look.k0 + (side ? step : -step),
                                        &group[side], &k[side]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  /* dn_g/dλ = -(k0²/2π) dn_g/dk0; 1 ps/µm² = 1e15/1e3... = 1e6 ps/(nm km). */
  double factor = -s->look.k0 * s->look.k0 / (2 * PI) / SPEED_OF_LIGHT * 1e6;
  double first = factor * (group[1] - group[0]) / (2 * step);
  double second = factor * creal(k[0] + k[1]) / (step * step);
  *value = 2 * second - first;
  *error = 2 * fabs(first - second);
  picket_status status = pk_media_set(&level->media, s->look.k0, level->op);
  return status;
}

static void loss_values(const pk_character *c, double *v) {
  double radiated = c->power.radiated[0] + c->power.radiated[1], absorbed = c->power.absorbed;
  double lost = radiated + absorbed;
  bool known = fabs(lost) > 0 && !c->at_boundary;
  v[V_ABSORBED] = known ? absorbed / lost : 0;
  v[V_UPWARD] = known && radiated > 0 ? c->power.radiated[1] / radiated : NAN;
}

static picket_status measure(index_study *s, pk_level *level, int i, const pk_wave *wave,
                             double *v) {
  pk_followed *f = &s->look.mode[i];
  double complex slope = NAN, k = f->character.k;
  double complex square = pk_branch_square(&s->branch[i], k);
  v[V_SQUARE] = creal(square);
  v[V_SQUARE_IM] = f->character.at_boundary ? 0 : cimag(square);
  loss_values(&f->character, v);
  picket_status status =
      pk_wave_slope(&level->media, level->op, (pk_phase){1, 1, 0}, s->look.k0,
                    s->look.problem->cell.pitch_um, s->look.problem->cell.shift, wave, &slope);
  double complex product = pk_branch_product(&s->branch[i], k, slope);
  v[V_PRODUCT] = creal(product);
  v[V_PRODUCT_IM] = f->character.at_boundary ? 0 : cimag(product);
  v[V_GROUP] = f->character.at_boundary ? NAN : fabs(creal(slope));
  if (status == PICKET_OK && !f->character.at_boundary) {
    status = dispersion(s, level, wave, slope, &v[V_DISPERSION], &f->dispersion_error);
  }
  if (status == PICKET_ERROR_NUMERIC || status == PICKET_ERROR_NO_MODE) {
    /* Too near an edge, or a slab is cut off beside: no value. */
    pk_message_clear(s->look.problem->context);
    v[V_DISPERSION] = NAN;
    status = pk_media_set(&level->media, s->look.k0, level->op);
  }
  return status;
}

static picket_status follow(index_study *s, pk_level *level, int i, double *v) {
  picket_context *context = s->look.problem->context;
  pk_followed *f = &s->look.mode[i];
  for (int q = 0; q < VALUES; q++) {
    v[q] = NAN;
  }
  pk_wave wave = {0};
  pk_character character;
  bool same = false;
  picket_status status = pk_look_follow(&s->look, level, f, &wave, &character, &same);
  if (status == PICKET_OK && same) {
    f->character = character;
    status = pk_follow_remember(context, level->op, &wave, f);
    if (status == PICKET_OK) {
      status = measure(s, level, i, &wave, v);
    }
    pk_character_request request = pk_look_request(&s->look);
    if (status == PICKET_OK) {
      status =
          pk_profile_take(context, level->op, &request, f->character.k, wave.right, &f->profile);
    }
    if (status == PICKET_OK) {
      status = pk_radiation_take(context, level->op, &request, &s->look.survey, &wave,
                                 f->character.k, f->order, &s->radiation);
    }
  } else if (status == PICKET_ERROR_NUMERIC) {
    pk_log(context, PICKET_LOG_DETAIL, "mode %d: %s", f->order, picket_context_message(context));
    pk_message_clear(context);
    status = PICKET_OK;
  }
  pk_wave_clear(context, &wave);
  return status;
}

static picket_status sample(void *user, const pk_cell_grid *base, int m, double *values) {
  index_study *s = user;
  pk_level level;
  picket_status status = pk_look_open(&s->look, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; status == PICKET_OK && i < s->look.count; i++) {
    status = follow(s, &level, i, values + i * VALUES);
  }
  pk_level_close(&level);
  return status;
}

/* --- From values to an answer
 * ---------------------------------------------------------------------- */

static picket_quantity rounded(picket_quantity q, double part) {
  q.uncertainty += part * fabs(q.value);
  return q;
}

static picket_quantity scaled(picket_quantity q, double factor) {
  q.value *= factor;
  q.uncertainty *= fabs(factor);
  return q;
}

static picket_quantity absent(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

static picket_regime regime_of(const index_study *s, const pk_followed *f, double k, bool stopped) {
  if (stopped) {
    return PICKET_REGIME_STOP_BAND;
  }
  if (pk_radiation_has_grating_order(&s->radiation, f->order)) {
    return PICKET_REGIME_RADIATING;
  }
  bool below = fabs(k) * s->look.problem->cell.pitch_um < PI;
  return below ? PICKET_REGIME_SUBWAVELENGTH : PICKET_REGIME_UNKNOWN;
}

/* Nothing absorbs and nothing radiates: outside a stop band nothing is lost. */
static bool is_lossless(const index_study *s, const pk_followed *f) {
  return s->look.lossless && pk_radiation_count(&s->radiation, f->order) == 0;
}

/* Inside a stop band s is negative and, but for losses, real: told by the extrapolated s, as the
 * edge moves with the grid. */
static bool is_stopped(const picket_quantity *square, const picket_quantity *square_im) {
  return square->value < 0 && fabs(square_im->value) < 0.1 * fabs(square->value);
}

/* How the loss of a mode divides, with bars. Loss of a lossless guide without an open channel is
 * zero; what the solver says about it is the bar. */
static void divide_loss(const index_study *s, const pk_followed *f, bool stopped,
                        picket_quantity part, picket_quantity *decay, picket_quantity *absorbed,
                        picket_quantity *radiated) {
  picket_quantity zero = {0, 0, NULL};
  if (is_lossless(s, f) && !stopped) {
    zero.uncertainty = fabs(decay->value) + 1e-12 * s->look.k0;
    *decay = *absorbed = *radiated = zero;
    return;
  }
  bool open_channel = pk_radiation_count(&s->radiation, f->order) > 0;
  if (s->look.lossless) {
    part = zero;
  } else if (!open_channel) {
    part = (picket_quantity){1, 0, NULL};
  }
  double spread = fabs(decay->value) * part.uncertainty;
  *absorbed = *radiated = *decay;
  absorbed->value *= part.value;
  absorbed->uncertainty = decay->uncertainty * fabs(part.value) + spread;
  radiated->value *= 1 - part.value;
  radiated->uncertainty = decay->uncertainty * fabs(1 - part.value) + spread;
  if (stopped) {
    *absorbed = *radiated = zero; /* a mirror: nothing is lost */
  }
}

/* The better of the two ways to the group index: through the edge, or directly. The direct one
 * misleads where the square-root branch bends it more than its bar knows: then the two disagree. */
static picket_quantity group_index(const picket_quantity *q) {
  picket_quantity through = pk_branch_group_index(&q[V_PRODUCT], &q[V_SQUARE]), direct = q[V_GROUP];
  bool agree = fabs(direct.value - through.value) <= direct.uncertainty + through.uncertainty;
  return agree && direct.uncertainty < through.uncertainty ? direct : through;
}

/* A loss below zero within its bar is zero. */
static picket_quantity not_negative(picket_quantity q) {
  if (q.value < 0 && -q.value <= 2 * q.uncertainty) {
    q.uncertainty = fmax(q.uncertainty, -q.value);
    q.value = 0;
  }
  return q;
}

static picket_status fill_mode(index_study *s, int i, picket_quantity *q, picket_bloch_mode *mode) {
  const pk_followed *f = &s->look.mode[i];
  double decibel = DECIBEL_PER_NEPER * UM_PER_CM;
  for (int v = 0; v < VALUES; v++) {
    if (isnan(q[v].value) && !q[v].note) {
      q[v].note = NOTE_LOST;
    }
  }
  picket_quantity k, decay, absorbed, radiated;
  pk_branch_take_side(&s->branch[i], q[V_PRODUCT].value);
  pk_branch_wavenumber(&s->branch[i], q[V_SQUARE], q[V_SQUARE_IM], &k, &decay);
  bool stopped = is_stopped(&q[V_SQUARE], &q[V_SQUARE_IM]);
  decay = not_negative(decay);
  divide_loss(s, f, stopped, q[V_ABSORBED], &decay, &absorbed, &radiated);
  mode->order = f->order;
  mode->bloch_index = rounded(scaled(k, 1 / s->look.k0), stopped ? 0 : ROUNDING_INDEX);
  mode->group_index = stopped ? absent(NOTE_STOP_BAND) : rounded(group_index(q), ROUNDING_GROUP);
  mode->dispersion_ps_per_nm_km = stopped ? absent(NOTE_STOP_BAND) : q[V_DISPERSION];
  mode->dispersion_ps_per_nm_km.uncertainty += f->dispersion_error;
  mode->loss_db_per_cm = scaled(decay, decibel);
  mode->loss_db_per_pitch = scaled(decay, DECIBEL_PER_NEPER * s->look.problem->cell.pitch_um);
  mode->absorption_db_per_cm = scaled(absorbed, decibel);
  mode->radiation_db_per_cm = scaled(radiated, decibel);
  mode->radiation_per_mm = scaled(radiated, 2e3);
  bool radiates = pk_radiation_count(&s->radiation, f->order) > 0;
  mode->upward_share = radiates ? q[V_UPWARD] : absent(NOTE_NO_RADIATION);
  mode->regime = regime_of(s, f, k.value, stopped);
  return pk_radiation_fill(s->look.problem->context, &s->radiation, f->order, k.value,
                           s->look.problem->cell.pitch_um, mode);
}

static void index_clear(picket_context *context, index_study *s) {
  pk_look_clear(&s->look);
  pk_free(context, s->branch);
  pk_radiation_clear(context, &s->radiation);
}

static bool is_enough(const picket_quantity *q, double accuracy) {
  return q->uncertainty <= accuracy * fabs(q->value);
}

/* Outside a stop band k is asked for, inside it the attenuation. */
static double allowed_square(const pk_branch *branch, double square, double accuracy) {
  double allowed = pk_branch_allowed(branch, square, accuracy);
  return square < 0 ? fmin(allowed, 2 * fabs(square) * fmax(LOSS_ACCURACY, accuracy)) : allowed;
}

/* Of Im s: a part of it, or what LOSS_FLOOR makes of it. */
static double allowed_loss(const index_study *s, const picket_quantity *square_im, double square,
                           double accuracy) {
  double decay = LOSS_FLOOR * s->look.k0 * s->look.problem->cell.pitch_um / PI;
  return fmax(fmax(LOSS_ACCURACY, accuracy) * fabs(square_im->value),
              2 * sqrt(fabs(square)) * decay);
}

/* Index and group index meet the accuracy asked; a loss is a small difference of large numbers and
 * meets it to a hundredth at best; what is derived from it, and dispersion, take what they get. */
static double allowed_of(const pk_converge_request *request, const picket_quantity *q, int i) {
  const index_study *s = request->user;
  double accuracy = request->options->accuracy;
  int mode = i / VALUES;
  switch (i % VALUES) {
    case V_SQUARE: return allowed_square(&s->branch[mode], q[i].value, accuracy);
    case V_PRODUCT: /* inside a stop band there is no group index to ask for */
      return s->look.mode[mode].character.at_boundary ||
                     is_enough(&q[mode * VALUES + V_GROUP], accuracy)
                 ? INFINITY
                 : accuracy * fabs(q[i].value);
    case V_SQUARE_IM:
      return is_lossless(s, &s->look.mode[mode]) || s->look.mode[mode].character.at_boundary
                 ? INFINITY
                 : allowed_loss(s, &q[i], q[mode * VALUES + V_SQUARE].value, accuracy);
    default: return INFINITY;
  }
}

static picket_status converge_modes(index_study *s, const picket_options *options,
                                    picket_index_point *point, pk_profile **profile,
                                    picket_result *result) {
  picket_context *context = s->look.problem->context;
  picket_quantity *q = PK_NEW(context, s->look.count * VALUES, picket_quantity);
  picket_bloch_mode *modes = PK_NEW(context, s->look.count, picket_bloch_mode);
  pk_profile *profiles = PK_NEW(context, s->look.count, pk_profile);
  picket_status status = q && modes && profiles ? PICKET_OK : PICKET_ERROR_MEMORY;
  point->modes = modes;
  if (status == PICKET_OK) {
    pk_converge_request request = {
        .survey = &s->look.survey,
        .count = s->look.count * VALUES,
        .sample = sample,
        .user = s,
        .options = options,
        .phase = s->look.polarization == PK_EY ? "Bloch index, ey" : "Bloch index, hy",
        .allowed = allowed_of};
    status = pk_converge(&request, q, result);
  }
  for (int i = 0; status == PICKET_OK && i < s->look.count; i++) {
    status = fill_mode(s, i, q + i * VALUES, &modes[i]);
    point->mode_count = i + 1;
    profiles[i] = s->look.mode[i].profile;
  }
  pk_free(context, q);
  if (status != PICKET_OK) {
    pk_free(context, profiles);
    return status;
  }
  *profile = profiles;
  return PICKET_OK;
}

/* After the fact: near a band edge the group index, and the index itself, can be worse than the
 * values they were made of. */
static picket_status check_bars(const picket_index_point *point, const picket_options *options,
                                picket_result *result) {
  for (int i = 0; i < point->mode_count; i++) {
    const picket_bloch_mode *mode = &point->modes[i];
    const picket_quantity *asked[2] = {&mode->bloch_index, &mode->group_index};
    for (int a = 0; a < 2; a++) {
      bool missed = isfinite(asked[a]->value) && !is_enough(asked[a], 1.01 * options->accuracy);
      if (missed && result->complete) {
        return pk_result_fall_short(
            result, "at %.10g nm the %s of mode %d is not known to %.1g: %s",
            1e3 * point->wavelength_um, a ? "group index" : "Bloch index", mode->order,
            options->accuracy,
            isnan(asked[a]->uncertainty) && asked[a]->note ? asked[a]->note
                                                           : "it changes fast near a band edge");
      }
    }
  }
  return PICKET_OK;
}

static const char NOTE_NO_MODE[] =
    "no Bloch mode was found at this wavelength: the cell guides none, or one too weakly bound to "
    "be "
    "told from the light beside it";

picket_status pk_index_point(const pk_problem *problem, pk_polarization polarization,
                             double wavelength_um, const picket_options *options,
                             picket_index_point *point, pk_profile **profile,
                             picket_result *result) {
  if (pk_asks_channel(problem)) {
    return pk_channel_index_point(problem, polarization, wavelength_um, options, point, profile,
                                  result);
  }
  index_study s = {0};
  int wanted = options->count > 0 ? (int)options->count : 1;
  point->wavelength_um = wavelength_um;
  picket_status status = pk_estimated_index(problem, polarization, wavelength_um, &point->estimate);
  if (status == PICKET_OK) {
    status = pk_look_take(problem, polarization, wavelength_um, wanted, options->accuracy, &s.look);
  }
  if (status == PICKET_OK) {
    s.branch = PK_NEW(problem->context, wanted, pk_branch);
    status = s.branch ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK && s.look.count == 0) {
    point->note = NOTE_NO_MODE;
  } else if (status == PICKET_OK) {
    for (int i = 0; i < s.look.count; i++) {
      s.branch[i] = pk_branch_of(s.look.mode[i].character.k, problem->cell.pitch_um);
    }
    status = converge_modes(&s, options, point, profile, result);
    if (status == PICKET_OK) {
      status = check_bars(point, options, result);
    }
  }
  index_clear(problem->context, &s);
  return status;
}

void pk_index_point_clear(picket_context *context, picket_index_point *point) {
  picket_bloch_mode *modes = (picket_bloch_mode *)point->modes;
  for (int i = 0; modes && i < point->mode_count; i++) {
    pk_free(context, (void *)modes[i].radiated);
  }
  pk_free(context, modes);
  point->modes = NULL;
  point->mode_count = 0;
}
