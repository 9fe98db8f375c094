/* The fundamental mode of a channel at a wavelength: see channel_index.h.
 *
 * Below the first stop band it is the wave of the largest k in (0, π/Λ]; inside it has Re k = π/Λ
 * and decays. Where the band lies is known from a look at the zone edge. Past the band the mode
 * folds back and radiates into its sides, which then get absorbing layers. */
#include <math.h>

#include "channel/forms.h"
#include "study/branch.h"
#include "study/channel_index.h"

static const double PI = 3.141592653589793238;

enum { LOOK_MEMBER = 2, LOOK_HARMONICS = 1, CANDIDATES = 6, GUESSES = 4, SECANTS = 12 };

/* A guess of k this good finds the wave on any grid. */
static const double NEAR_ENOUGH = 1e-3;
static const double LOOK_REACH = 5;
static const double LOOK_ACCURACY = 1e-2;

/* A wave whose decay per wavelength is below this propagates. */
static const double PROPAGATES = 1e-6;

void pk_channel_sight_clear(pk_channel_sight *sight) {
  pk_channel_survey_clear(&sight->survey);
}

picket_status pk_channel_slope(pk_channel_level *level, double k0, const pk_channel_mode *mode,
                               double complex *slope) {
  double complex by_k0 = NAN;
  const double complex *dispersion = level->media.dispersive ? level->media.slope : NULL;
  picket_status status =
      pk_channel_k0_form(level->channel, k0, dispersion, mode->left, mode->right, &by_k0);
  if (status == PICKET_OK) {
    *slope = -by_k0 / pk_channel_k_form(level->channel, mode->k, mode->left, mode->right);
  }
  return status;
}

/* Better: of the kind wanted, nearer to the edge of the zone. */
static double rank_of(const pk_channel_sight *s, const pk_channel_mode *mode, bool stopped) {
  double edge = PI / s->survey.problem->channel.pitch_um;
  double away = edge - creal(mode->k), decay = fabs(cimag(mode->k));
  bool at_edge = fabs(away) < 1e-6 * edge && decay > PROPAGATES * edge;
  if (stopped) {
    return at_edge ? decay : INFINITY;
  }
  bool guided = decay < PROPAGATES * edge && creal(mode->k) > s->survey.section.cut * s->k0;
  return guided && away > -1e-9 * edge ? away : INFINITY;
}

static picket_status try_guess(pk_channel_sight *s, pk_channel_level *level, double complex guess,
                               bool stopped, double *best) {
  picket_context *context = level->context;
  pk_channel_mode found[CANDIDATES] = {{0}};
  int count = 0;
  picket_status status =
      pk_channel_waves(level->channel, s->k0, guess, CANDIDATES, NULL, found, &count);
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    double rank = rank_of(s, &found[i], stopped);
    if (rank < *best && pk_channel_is_alike(&s->survey, level, found[i].right)) {
      *best = rank;
      s->k = found[i].k;
      s->found = true;
    }
  }
  pk_channel_modes_clear(context, count, found);
  if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(context);
    status = PICKET_OK;
  }
  return status;
}

/* Below the stop band: the k at which the lowest band has the frequency, by secants from the edge
 * of the zone, where its frequency is known. */
static picket_status follow_band(pk_channel_sight *s, pk_channel_level *level, double edge_k0) {
  double edge = PI / s->survey.problem->channel.pitch_um, cut = fmax(s->survey.section.cut, 1e-6);
  double index = edge / edge_k0, k = fmin(index * s->k0, edge);
  picket_status status = PICKET_OK;
  for (int n = 0; status == PICKET_OK && n < SECANTS; n++) {
    double k0 = NAN;
    int found = 0;
    status = pk_channel_lowest(&s->survey, level, k, k / cut, 1, &k0, &found);
    if (status != PICKET_OK || found == 0) {
      return status;
    }
    index = k / k0;
    s->found = fabs(k0 / s->k0 - 1) < NEAR_ENOUGH;
    if (s->found) {
      s->k = k;
      return PICKET_OK;
    }
    k = fmin(index * s->k0, edge);
  }
  return status;
}

/* From the edge of the zone down to the light line. */
static picket_status search_waves(pk_channel_sight *s, pk_channel_level *level, bool stopped) {
  double edge = PI / s->survey.problem->channel.pitch_um, best = INFINITY;
  double low = s->survey.section.cut * s->k0, high = fmin(edge, s->survey.section.top * s->k0);
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < GUESSES && !s->found; i++) {
    double complex guess =
        stopped ? edge + I * edge * 0.1 * (i + 0.5) : high + (low - high) * (i + 0.05) / GUESSES;
    status = try_guess(s, level, guess, stopped, &best);
  }
  return status;
}

static picket_status search(pk_channel_sight *s, double index, bool stopped, double edge_k0) {
  picket_context *context = s->survey.problem->context;
  pk_axis x = {0}, y = {0};
  pk_channel_level level = {0};
  picket_status status = pk_channel_survey_lay(&s->survey, index, LOOK_REACH, true, LOOK_ACCURACY,
                                               PK_END_ZERO, &x, &y);
  if (status == PICKET_OK) {
    status = pk_channel_level_open(&s->survey, &x, &y, LOOK_MEMBER, LOOK_HARMONICS, s->k0, &level);
  }
  if (status == PICKET_OK) {
    bool below = !stopped && edge_k0 > s->k0;
    status = below ? follow_band(s, &level, edge_k0) : PICKET_OK;
  }
  if (status == PICKET_OK && !s->found) {
    status = search_waves(s, &level, stopped);
  }
  pk_channel_level_close(&level);
  pk_axis_clear(context, &x);
  pk_axis_clear(context, &y);
  return status;
}

/* One attempt, with or without the sides of highest index set apart. */
static picket_status attempt(const pk_problem *problem, pk_polarization polarization,
                             double wavelength_um, bool apart, bool stopped, double edge_k0,
                             pk_channel_sight *out) {
  pk_channel_sight s = {.k0 = 2 * PI / wavelength_um};
  picket_status status = pk_channel_survey_take(problem, polarization, wavelength_um, &s.survey);
  if (status == PICKET_OK && apart) {
    status = pk_channel_survey_set_apart(&s.survey, &s.leaks);
  }
  double top = s.survey.section.top, cut = s.survey.section.cut;
  if (status == PICKET_OK && top > cut && (!apart || s.leaks)) {
    status = search(&s, 0.7 * cut + 0.3 * top, stopped, edge_k0);
  }
  if (status != PICKET_OK) {
    pk_channel_sight_clear(&s);
    return status;
  }
  *out = s;
  return PICKET_OK;
}

/* Whether a frequency lies between the edges of the stop band, on the coarse grid. */
static picket_status place(const pk_problem *problem, pk_polarization polarization, double k0,
                           bool *stopped, bool *past, double *edge_k0) {
  pk_channel_outlook look = {.leaks = false};
  picket_status status = pk_channel_outlook_take(problem, polarization, &look);
  if (status == PICKET_ERROR_NO_MODE) {
    pk_message_clear(problem->context);
    return PICKET_OK;
  }
  if (status == PICKET_OK) {
    double top = look.pair.found[PK_SHORT] ? look.pair.k0[PK_SHORT] : look.light_line;
    *stopped = k0 >= look.pair.k0[PK_LONG] && k0 < top;
    *past = k0 >= top;
    *edge_k0 = look.pair.k0[PK_LONG];
  }
  pk_channel_outlook_clear(&look);
  return status;
}

picket_status pk_channel_sight_take(const pk_problem *problem, pk_polarization polarization,
                                    double wavelength_um, pk_channel_sight *out) {
  pk_channel_sight s = {.found = false};
  bool stopped = false, past = false;
  double edge_k0 = 0;
  picket_status status =
      place(problem, polarization, 2 * PI / wavelength_um, &stopped, &past, &edge_k0);
  for (int apart = 0; status == PICKET_OK && apart < 2 && !s.found; apart++) {
    pk_channel_sight_clear(&s);
    status = attempt(problem, polarization, wavelength_um, apart > 0, stopped, edge_k0, &s);
  }
  if (status == PICKET_OK) {
    s.radiates = past && !s.found;
    *out = s;
  }
  return status;
}

/* The best of so many waves nearest to the guess, in *out. */
static picket_status follow_among(const pk_channel_sight *s, pk_channel_level *level, int wanted,
                                  pk_channel_mode *out, bool *done) {
  picket_context *context = level->context;
  pk_branch branch = pk_branch_of(s->k, s->survey.problem->channel.pitch_um);
  double complex square = pk_branch_square(&branch, s->k);
  pk_channel_mode found[CANDIDATES] = {{0}};
  int count = 0, best = -1;
  double least = INFINITY;
  picket_status status = pk_channel_waves(level->channel, s->k0, s->k, wanted, NULL, found, &count);
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    double away = cabs(pk_branch_square(&branch, found[i].k) - square);
    /* Waves that leak as well and lie as near are told by their loss: the layers' own have more. */
    away += s->leaks ? fabs(cimag(found[i].k)) / s->k0 : 0;
    if (away < least && pk_channel_is_alike(&s->survey, level, found[i].right)) {
      least = away;
      best = i;
    }
  }
  *done = status == PICKET_OK && best >= 0;
  if (*done) {
    *out = found[best];
    found[best] = (pk_channel_mode){0};
  }
  pk_channel_modes_clear(context, count, found);
  if (status == PICKET_ERROR_NUMERIC) { /* one of many did not hold: ask for others */
    pk_message_clear(context);
    status = PICKET_OK;
  }
  return status;
}

picket_status pk_channel_sight_follow(const pk_channel_sight *s, pk_channel_level *level,
                                      pk_channel_mode *out) {
  static const int wanted[] = {1, 2, 4, CANDIDATES};
  bool done = false;
  picket_status status = PICKET_OK;
  for (size_t i = 0; status == PICKET_OK && !done && i < sizeof wanted / sizeof *wanted; i++) {
    status = follow_among(s, level, wanted[i], out, &done);
  }
  if (status == PICKET_OK && !done) {
    status = pk_fail(level->context, PICKET_ERROR_NUMERIC,
                     "the mode was not found again near k = %.6g/µm on a finer grid", creal(s->k));
  }
  return status;
}
