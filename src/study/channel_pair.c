/* See channel_pair.h. */
#include "study/channel_pair.h"

#include <math.h>
#include <string.h>

#include "channel/forms.h"

static const double PI = 3.141592653589793238;

/* Modes asked for at a time, and kept of a search. */
enum { AT_ONCE = 4, MOST_KEPT = 16, MOST_STEPS = 60, CANDIDATES = 3, NEWTON_STEPS = 8 };

/* A Newton step leaves an error of the square of the one before it. */
static const double SETTLED = 1e-5;
/* A shift on a mode would make the matrix singular. */
static const double SHIFT_OFFSET = 1e-6;
/* Edges farther apart than this are told by their frequency alone. */
static const double WIDE = 0.02;

/* A search goes on above what it has seen by this factor of k0²: less than 2, so that the solutions
 * at k0 = 0, which hold no field, stay farther away than any missed mode. */
static const double STEP = 1.5;

/* Two modes of one channel differ by more than this in k0². */
static const double SAME = 1e-7;

/* Waves that differ by a lateral node have a likeness near 0. Edges of one stop band have one near
 * 1, less where the short one lies at the light line and reaches far out: 0.4 was met. */
static const double ALIKE = 0.2;

typedef struct search {
  const pk_channel_survey *survey;
  pk_channel_level *level;
  int harmonics;
  double k;
  int wanted;
  int count;
  pk_channel_mode mode[MOST_KEPT]; /* by rising k0² */
} search;

bool pk_channel_is_alike(const pk_channel_survey *s, const pk_channel_level *level,
                         const double complex *e) {
  pk_channel_looks looks;
  pk_channel_look(level->channel, e, &looks);
  return (looks.ex_share > 0.5) == (s->polarization == PK_HY);
}

double pk_channel_likeness(const pk_channel_level *level, int harmonics, const double complex *a,
                           const double complex *b) {
  int64_t n = pk_channel_size(level->channel);
  int step = 2 * harmonics + 2;
  double complex both = 0;
  double aa = 0, bb = 0;
  for (int64_t i = harmonics + 1; i < n; i += step) {
    both += conj(a[i]) * b[i];
    aa += creal(a[i] * conj(a[i]));
    bb += creal(b[i] * conj(b[i]));
  }
  return creal(both * conj(both)) / (aa * bb);
}

static void clear(search *s) {
  pk_channel_modes_clear(s->level->context, s->count, s->mode);
  s->count = 0;
}

/* Takes over a mode that is new and of the polarization. */
static void keep(search *s, pk_channel_mode *mode) {
  double square = creal(mode->k0_square);
  bool seen = s->count == MOST_KEPT;
  for (int i = 0; i < s->count; i++) {
    seen = seen || fabs(creal(s->mode[i].k0_square) - square) < SAME * square;
  }
  if (seen || !pk_channel_is_alike(s->survey, s->level, mode->right)) {
    return;
  }
  int at = s->count++;
  for (; at > 0 && creal(s->mode[at - 1].k0_square) > square; at--) {
    s->mode[at] = s->mode[at - 1];
  }
  s->mode[at] = *mode;
  *mode = (pk_channel_mode){0};
}

/* Modes nearest to a value of k0²; *covered is the highest value below which none is missed. */
static picket_status look_at(search *s, double shift, double least, int wanted, double *covered) {
  picket_context *context = s->level->context;
  pk_channel_mode found[AT_ONCE] = {{0}};
  int count = 0;
  picket_status status =
      pk_channel_modes_at_k(s->level->channel, s->k, shift, wanted, NULL, found, &count);
  if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(context);
    status = PICKET_OK;
    count = 0;
  }
  double reach = 0;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    double square = creal(found[i].k0_square);
    reach = fmax(reach, cabs(found[i].k0_square - shift));
    if (square > least) {
      keep(s, &found[i]);
    }
  }
  pk_channel_modes_clear(context, count, found);
  *covered = shift + (count > 0 ? reach : shift * (STEP - 1));
  return status;
}

/* The partner of the lowest mode, or -1. */
static int partner_of(const search *s, int first) {
  for (int i = first + 1; i < s->count; i++) {
    double likeness =
        pk_channel_likeness(s->level, s->harmonics, s->mode[first].right, s->mode[i].right);
    if (likeness > ALIKE) {
      return i;
    }
  }
  return -1;
}

/* Goes up from the densest medium's light line until `done` says so or `most` is reached. */
static picket_status climb(search *s, double most, bool (*done)(const search *)) {
  double top = s->survey->section.top, least = s->k * s->k / (top * top);
  double shift = least, covered = least;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < MOST_STEPS && covered < most * most; i++) {
    status = look_at(s, shift, 0.5 * least, AT_ONCE, &covered);
    if (status == PICKET_OK && done(s)) {
      break;
    }
    shift = fmax(covered, fmin(covered * (1 + 0.5 * (STEP - 1)), most * most));
  }
  return status;
}

static bool has_partner(const search *s) {
  return s->count > 1 && partner_of(s, 0) >= 0;
}

static bool has_wanted(const search *s) {
  return s->count > s->wanted;
}

picket_status pk_channel_lowest(const pk_channel_survey *survey, pk_channel_level *level, double k,
                                double most, int wanted, double *k0, int *found) {
  search s = {.survey = survey, .level = level, .k = k, .wanted = wanted};
  picket_status status = climb(&s, most, has_wanted);
  *found = 0;
  for (int i = 0; status == PICKET_OK && i < s.count && *found < wanted; i++) {
    double own = sqrt(creal(s.mode[i].k0_square));
    if (own < most) {
      k0[(*found)++] = own;
    }
  }
  clear(&s);
  return status;
}

picket_status pk_channel_pair_search(const pk_channel_survey *survey, pk_channel_level *level,
                                     int harmonics, double most, pk_channel_pair *out) {
  search s = {.survey = survey, .level = level, .harmonics = harmonics};
  s.k = PI / survey->problem->channel.pitch_um;
  picket_status status = climb(&s, most, has_partner);
  int second = s.count > 1 ? partner_of(&s, 0) : -1;
  *out = (pk_channel_pair){.known = {true, true}};
  for (int e = 0; status == PICKET_OK && e < 2; e++) {
    int i = e == PK_LONG ? (s.count > 0 ? 0 : -1) : second;
    double k0 = i >= 0 ? sqrt(creal(s.mode[i].k0_square)) : NAN;
    out->found[e] = k0 < most;
    out->k0[e] = out->found[e] ? k0 : NAN;
  }
  clear(&s);
  return status;
}

/* The two kept modes that lie nearest to a guess and belong together. */
static bool choose(const search *s, const pk_channel_pair *guess, int chosen[2]) {
  double best = INFINITY;
  for (int i = 0; i < s->count; i++) {
    double first = sqrt(creal(s->mode[i].k0_square));
    double away = fabs(first - guess->k0[PK_LONG]);
    for (int j = i + 1; j < s->count; j++) {
      double other = fabs(sqrt(creal(s->mode[j].k0_square)) - guess->k0[PK_SHORT]);
      if (away + other < best &&
          pk_channel_likeness(s->level, s->harmonics, s->mode[i].right, s->mode[j].right) > ALIKE) {
        best = away + other;
        chosen[PK_LONG] = i;
        chosen[PK_SHORT] = j;
      }
    }
  }
  return isfinite(best);
}

/* One Newton step on λ(k0) = k0² from a mode solved with the media at k0. */
static picket_status newton(const search *s, const pk_channel_mode *mode, double k0, double *next) {
  pk_channel_level *level = s->level;
  double complex form = NAN;
  if (!level->media.dispersive) {
    *next = sqrt(creal(mode->k0_square));
    return PICKET_OK;
  }
  picket_status status =
      pk_channel_k0_form(level->channel, k0, level->media.slope, mode->left, mode->right, &form);
  if (status == PICKET_OK) {
    double complex slope = form / pk_channel_mass_form(level->channel, mode->left, mode->right);
    *next = k0 - (creal(mode->k0_square) - k0 * k0) / creal(slope);
  }
  return status;
}

/* The same mode with the media at another frequency, in the place of the old one. */
static picket_status solve_again(const search *s, double k0, pk_channel_mode *mode) {
  pk_channel_mode found[CANDIDATES] = {{0}};
  int count = 0, best = 0;
  picket_status status = pk_channel_media_set(&s->level->media, k0, s->level->channel);
  if (status == PICKET_OK) {
    status = pk_channel_modes_at_k(s->level->channel, s->k, k0 * k0 * (1 - SHIFT_OFFSET),
                                   CANDIDATES, mode->right, found, &count);
  }
  for (int i = 1; status == PICKET_OK && i < count; i++) {
    double own = pk_channel_overlap(s->level->channel, mode->right, found[i].right);
    best = own > pk_channel_overlap(s->level->channel, mode->right, found[best].right) ? i : best;
  }
  if (status == PICKET_OK) {
    pk_channel_mode chosen = found[best];
    found[best] = *mode;
    *mode = chosen;
  }
  pk_channel_modes_clear(s->level->context, count, found);
  return status;
}

/* Takes kept mode i, solved with the media at `k0`, and follows it to its own frequency, which is
 * then that of its k0_square. Where a material is not known it stays where it is. */
static picket_status settle(search *s, int i, double k0, pk_channel_mode *mode, bool *known) {
  picket_status status = PICKET_OK;
  double step = INFINITY;
  *mode = s->mode[i];
  s->mode[i].right = s->mode[i].left = NULL;
  *known = !s->level->media.clamped;
  for (int n = 0; status == PICKET_OK && *known && step > SETTLED && n < NEWTON_STEPS; n++) {
    double next = k0;
    status = newton(s, mode, k0, &next);
    step = s->level->media.dispersive ? fabs(next - k0) / k0 : 0;
    if (status == PICKET_OK && step > SETTLED) {
      status = solve_again(s, next, mode);
      *known = !s->level->media.clamped;
    } else {
      mode->k0_square = next * next;
    }
    k0 = next;
  }
  if (status != PICKET_OK) {
    pk_channel_modes_clear(s->level->context, 1, mode);
  }
  return status;
}

/* The kept mode nearest to a frequency, or -1. */
static int nearest_to(const search *s, double k0) {
  int best = -1;
  double least = INFINITY;
  for (int i = 0; i < s->count; i++) {
    double away = s->mode[i].right ? fabs(sqrt(creal(s->mode[i].k0_square)) - k0) : INFINITY;
    if (away < least) {
      least = away;
      best = i;
    }
  }
  return best;
}

/* The mode nearest to a frequency, with the media at its own. */
static picket_status near_one(search *s, double guess, pk_channel_mode *mode, bool *known) {
  double covered = 0;
  clear(s);
  picket_status status = pk_channel_media_set(&s->level->media, guess, s->level->channel);
  /* Mostly the nearest mode of all is the one; where it is of the other polarization, more are. */
  for (int wanted = 1; status == PICKET_OK && s->count == 0 && wanted <= AT_ONCE; wanted += 3) {
    status = look_at(s, guess * guess * (1 - SHIFT_OFFSET), 0, wanted, &covered);
  }
  int i = nearest_to(s, guess);
  if (status == PICKET_OK && i < 0) {
    status = pk_fail(s->level->context, PICKET_ERROR_NUMERIC,
                     "no mode of the channel was found near %.6g/µm", guess);
  }
  return status == PICKET_OK ? settle(s, i, guess, mode, known) : status;
}

/* Both edges at once, told by their shape. */
static picket_status near_both(search *s, const pk_channel_pair *guess, pk_channel_mode modes[2],
                               bool known[2]) {
  double middle = 0.5 * (guess->k0[PK_LONG] + guess->k0[PK_SHORT]), covered = 0;
  int chosen[2] = {-1, -1};
  picket_status status = pk_channel_media_set(&s->level->media, middle, s->level->channel);
  if (status == PICKET_OK) {
    status = look_at(s, middle * middle, 0, AT_ONCE, &covered);
  }
  if (status == PICKET_OK && !choose(s, guess, chosen)) {
    status = pk_fail(s->level->context, PICKET_ERROR_NUMERIC,
                     "the edges of the stop band were not recognised near %.6g/µm", middle);
  }
  for (int e = 0; status == PICKET_OK && e < 2; e++) {
    status = pk_channel_media_set(&s->level->media, middle, s->level->channel);
    if (status == PICKET_OK) {
      status = settle(s, chosen[e], middle, &modes[e], &known[e]);
    }
  }
  return status;
}

picket_status pk_channel_pair_near(const pk_channel_survey *survey, pk_channel_level *level,
                                   int harmonics, const pk_channel_pair *guess,
                                   pk_channel_mode *modes, pk_channel_pair *out) {
  search s = {.survey = survey, .level = level, .harmonics = harmonics};
  pk_channel_mode own[2] = {{0}};
  pk_channel_pair found = {.known = {true, true}, .k0 = {NAN, NAN}};
  bool both = guess->found[PK_LONG] && guess->found[PK_SHORT];
  bool narrow = both && guess->k0[PK_SHORT] - guess->k0[PK_LONG] < WIDE * guess->k0[PK_LONG];
  s.k = PI / survey->problem->channel.pitch_um;
  picket_status status = narrow ? near_both(&s, guess, own, found.known) : PICKET_OK;
  for (int e = 0; status == PICKET_OK && e < 2; e++) {
    found.found[e] = guess->found[e];
    if (guess->found[e] && !narrow) {
      status = near_one(&s, guess->k0[e], &own[e], &found.known[e]);
    }
    if (status == PICKET_OK && guess->found[e]) {
      found.k0[e] = sqrt(creal(own[e].k0_square));
    }
  }
  clear(&s);
  if (status == PICKET_OK) {
    *out = found;
  }
  for (int e = 0; e < 2; e++) {
    if (status == PICKET_OK && modes) {
      modes[e] = own[e];
    } else {
      pk_channel_modes_clear(level->context, 1, &own[e]);
    }
  }
  return status;
}

picket_status pk_channel_near(const pk_channel_survey *survey, pk_channel_level *level, double k,
                              int count, const double *guess, double *k0, bool *known) {
  search s = {.survey = survey, .level = level, .k = k};
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    pk_channel_mode mode = {0};
    status = near_one(&s, guess[i], &mode, &known[i]);
    k0[i] = status == PICKET_OK ? sqrt(creal(mode.k0_square)) : NAN;
    pk_channel_modes_clear(level->context, 1, &mode);
  }
  clear(&s);
  return status;
}
