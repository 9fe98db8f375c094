/* The first stop band of a channel: standing waves at k = π/Λ on a family of section grids and with
 * rising numbers of harmonics, extrapolated in both (channel_converge.h), and how the operating
 * band stands to them. */
#include "study/channel_edges.h"

#include <math.h>

#include "base/memory.h"
#include "study/channel_converge.h"

static const double PI = 3.141592653589793238;
static const double DECIBEL_PER_NEPER = 8.685889638065036553; /* 20/ln 10 */

static const char NOTE_RADIATES[] =
    "not confined: this edge lies above the light line of an open side, where the mode radiates";
static const char NOTE_MATERIAL[] = "a material is not known at this wavelength";
static const char NOTE_NO_ATTENUATION[] =
    "needs both edges and a wave of the fundamental family between them";

enum { LONG_UM, SHORT_UM, ATTENUATION_DB, VALUES };

/* Frequencies between the edges, as parts of the band, at which the decay is solved; with the edges
 * themselves, where it vanishes, they fix the third-order polynomial
 *   κ² = t (1 - t) (a + b t). */
static const double INSIDE[2] = {0.35, 0.65};
enum { DECAY_CANDIDATES = 4, DECAY_STEPS = 100, DECAY_GUESSES = 3 };
/* A wave that is not found from one guess is looked for from others. */
static const double GUESS_PART[DECAY_GUESSES] = {1, 0.6, 1.5};

typedef struct work {
  pk_channel_outlook look;
  bool known[2];
  double decay[2]; /* of the last grid; 0: none yet */
} work;

/* --- Attenuation ------------------------------------------------------------------------------ */

/* The wave between the edges that decays slowest, of the polarization, at a frequency. */
static picket_status decay_at(const work *w, pk_channel_level *level, double k0, double guess,
                              int wanted, double *decay) {
  picket_context *context = level->context;
  double k = PI / w->look.survey.problem->channel.pitch_um;
  pk_channel_mode found[DECAY_CANDIDATES] = {{0}};
  int count = 0;
  picket_status status = pk_channel_media_set(&level->media, k0, level->channel);
  if (status == PICKET_OK) {
    status = pk_channel_waves(level->channel, k0, k + I * guess, wanted, NULL, found, &count);
  }
  *decay = NAN;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    bool alike = pk_channel_is_alike(&w->look.survey, level, found[i].right);
    double own = fabs(cimag(found[i].k));
    if (alike && own > 0 && fabs(creal(found[i].k) - k) < 0.01 * k && !(own > *decay)) {
      *decay = own;
    }
  }
  pk_channel_modes_clear(context, count, found);
  if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(context);
    status = PICKET_OK;
  }
  return status;
}

/* Largest value of the polynomial through the two squares. */
static double largest(const double square[2]) {
  double value[2];
  for (int i = 0; i < 2; i++) {
    value[i] = square[i] / (INSIDE[i] * (1 - INSIDE[i]));
  }
  double b = (value[1] - value[0]) / (INSIDE[1] - INSIDE[0]), a = value[0] - b * INSIDE[0];
  double most = 0;
  for (int i = 1; i < DECAY_STEPS; i++) {
    double t = (double)i / DECAY_STEPS;
    most = fmax(most, t * (1 - t) * (a + b * t));
  }
  return most;
}

static picket_status find_decay(const work *w, pk_channel_level *level, double k0, double guess,
                                bool known, double *decay) {
  picket_status status = PICKET_OK;
  *decay = NAN;
  if (known) { /* from another grid: the wave nearest to it is the one */
    status = decay_at(w, level, k0, guess, 1, decay);
  }
  for (int i = 0; status == PICKET_OK && isnan(*decay) && i < DECAY_GUESSES; i++) {
    status = decay_at(w, level, k0, GUESS_PART[i] * guess, DECAY_CANDIDATES, decay);
  }
  return status;
}

static picket_status attenuation(work *w, pk_channel_level *level, const pk_channel_pair *pair,
                                 double *decibel) {
  picket_status status = PICKET_OK;
  double square[2] = {NAN, NAN}, width = pair->k0[PK_SHORT] - pair->k0[PK_LONG];
  double index = PI / w->look.survey.problem->channel.pitch_um / pair->k0[PK_LONG];
  for (int i = 0; status == PICKET_OK && i < 2; i++) {
    double t = INSIDE[i], decay = NAN;
    double guess = w->decay[i] > 0 ? w->decay[i] : 1.6 * index * width * sqrt(t * (1 - t));
    status = find_decay(w, level, pair->k0[PK_LONG] + t * width, guess, w->decay[i] > 0, &decay);
    square[i] = decay * decay;
    w->decay[i] = decay > 0 ? decay : w->decay[i];
  }
  double pitch = w->look.survey.problem->channel.pitch_um;
  *decibel = status == PICKET_OK && isfinite(square[0] + square[1])
                 ? DECIBEL_PER_NEPER * pitch * sqrt(largest(square))
                 : NAN;
  return status;
}

/* --- Values ----------------------------------------------------------------------------------- */

static picket_status sample(void *user, const pk_axis *x, const pk_axis *y, int m, int harmonics,
                            double *values) {
  work *w = user;
  pk_channel_level level;
  pk_channel_pair pair = {.found = {false, false}}, guess = w->look.pair;
  for (int e = 0; e < 2; e++) {
    guess.found[e] = guess.found[e] && w->known[e]; /* not known once: not worth solving again */
  }
  picket_status status =
      pk_channel_level_open(&w->look.survey, x, y, m, harmonics, w->look.pair.k0[PK_LONG], &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_channel_pair_near(&w->look.survey, &level, harmonics, &guess, NULL, &pair);
  for (int e = 0; status == PICKET_OK && e < 2; e++) {
    bool sound = pair.found[e] && pair.known[e];
    values[e == PK_LONG ? LONG_UM : SHORT_UM] = sound ? 2 * PI / pair.k0[e] : NAN;
    w->known[e] = w->known[e] && pair.known[e];
    w->look.pair.k0[e] = sound ? pair.k0[e] : w->look.pair.k0[e]; /* a better guess */
  }
  values[ATTENUATION_DB] = NAN;
  bool both = pair.found[PK_LONG] && pair.found[PK_SHORT];
  if (status == PICKET_OK && both && pair.known[PK_LONG] && pair.known[PK_SHORT]) {
    status = attenuation(w, &level, &pair, &values[ATTENUATION_DB]);
  }
  pk_channel_level_close(&level);
  return status;
}

/* Edges meet the accuracy asked; the decay takes what it gets. */
static double allowed(const pk_channel_request *request, const picket_quantity *q, int i) {
  return i == ATTENUATION_DB ? INFINITY : request->options->accuracy * fabs(q[i].value);
}

/* --- The answer ------------------------------------------------------------------------------- */

static picket_quantity missing(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

static picket_quantity edge_of(const work *w, picket_quantity q, int edge) {
  return !w->look.pair.found[edge] ? missing(NOTE_RADIATES)
         : !w->known[edge]         ? missing(NOTE_MATERIAL)
                                   : q;
}

static void fill_band(const work *w, const picket_quantity *q, picket_stop_band *band) {
  band->order = 1;
  band->long_um = edge_of(w, q[LONG_UM], PK_LONG);
  band->short_um = edge_of(w, q[SHORT_UM], PK_SHORT);
  band->attenuation_db_per_pitch =
      isnan(q[ATTENUATION_DB].value) ? missing(NOTE_NO_ATTENUATION) : q[ATTENUATION_DB];
  band->long_confined = isfinite(band->long_um.value) && !w->look.leaks;
  band->short_confined = isfinite(band->short_um.value) && !w->look.leaks;
}

static picket_regime regime_of(const work *w, const picket_stop_band *band, double from,
                               double to) {
  double light_line = 2 * PI / w->look.light_line;
  if (isnan(band->long_um.value)) {
    return PICKET_REGIME_UNKNOWN;
  }
  if (from > band->long_um.value) {
    return PICKET_REGIME_SUBWAVELENGTH;
  }
  double bottom = isnan(band->short_um.value) ? light_line : band->short_um.value;
  if (to >= bottom) {
    return PICKET_REGIME_STOP_BAND;
  }
  return from < light_line ? PICKET_REGIME_RADIATING : PICKET_REGIME_UNKNOWN;
}

static void fill_operating(const work *w, const picket_stop_band *band,
                           picket_operating_band *operating) {
  const pk_light *light = &w->look.survey.problem->light;
  operating->given = light->count > 0;
  operating->clearance_um = missing("no operating band: the problem gives no wavelengths");
  operating->from_um = operating->to_um = NAN;
  if (light->count == 0) {
    return;
  }
  operating->from_um = light->wavelength_um[0];
  operating->to_um = light->wavelength_um[light->count - 1];
  operating->regime = regime_of(w, band, operating->from_um, operating->to_um);
  operating->clearance_um = band->long_um;
  operating->clearance_um.value = operating->from_um - band->long_um.value;
}

static picket_status converge(work *w, const picket_options *options, picket_edges_answer *answer,
                              picket_result *result) {
  picket_stop_band *band = PK_NEW(result->context, 1, picket_stop_band);
  if (!band) {
    return PICKET_ERROR_MEMORY;
  }
  answer->bands = band;
  picket_quantity q[VALUES];
  pk_channel_request request = {
      .survey = &w->look.survey,
      .index = w->look.index,
      .closed = true,
      .count = VALUES,
      .sample = sample,
      .user = w,
      .options = options,
      .phase = w->look.survey.polarization == PK_HY ? "stop band, te-like" : "stop band, tm-like",
      .allowed = allowed};
  picket_status status = pk_channel_converge(&request, q, result);
  if (status == PICKET_OK) {
    fill_band(w, q, band);
    answer->band_count = 1;
    fill_operating(w, band, &answer->operating);
  }
  return status;
}

picket_status pk_channel_edges_check(const pk_problem *problem, const picket_options *options) {
  if (!problem->channel.given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"cell\" and no \"channel\", which is what stop bands are "
                   "of");
  }
  if (options->count > 1) {
    return pk_fail(problem->context, PICKET_ERROR_UNSUPPORTED,
                   "count is %.0f, must be 1 for the stop bands of a channel", options->count);
  }
  return PICKET_OK;
}

picket_status pk_channel_edges_of(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_edges_answer *answer,
                                  picket_result *result) {
  work w = {.known = {true, true}};
  answer->polarization = pk_channel_word(polarization);
  answer->estimate.centre_um = NAN;
  answer->estimate.error_um = missing("there is no estimate for a channel");
  picket_status status = pk_channel_edges_check(problem, options);
  if (status == PICKET_OK) {
    status = pk_channel_outlook_take(problem, polarization, &w.look);
  }
  if (status == PICKET_OK) {
    status = converge(&w, options, answer, result);
  }
  pk_channel_outlook_clear(&w.look);
  return status;
}
