/* Where to look for f(x) = t: two values of the varied number with the target between those of the
 * quantity. See aim_private.h.
 *
 * The ends are measured coarsely. Where one has no value the search walks there from the other;
 * where both lie on the same side it looks for a turn between them. */
#include <math.h>

#include "study/aim_private.h"

enum {
  MOST_WALK = 9, /* towards an end without a value */
  MOST_TURNS = 3 /* samples where a quantity is thought to turn */
};
static const double COARSE = 1e-3;  /* accuracy of the ends */
static const double BEYOND = 0.05;  /* of its length, so that a step of a walk passes the target */
static const double CLOSEST = 1e-3; /* of the bracket: how near a walk goes to a missing value */

bool pk_aim_is_good(const pk_aim_search *s, int i) {
  return isfinite(s->sample[i].m.q.value);
}

double pk_aim_residual(const pk_aim_search *s, int i) {
  return s->sample[i].m.q.value - s->part[0].target;
}

bool pk_aim_is_met(const pk_aim_search *s, int i) {
  return pk_aim_is_good(s, i) &&
         fabs(pk_aim_residual(s, i)) <= pk_aim_tolerance(s, &s->sample[i].m);
}

bool pk_aim_straddles(const pk_aim_search *s, int i, int k) {
  return (pk_aim_residual(s, i) > 0) != (pk_aim_residual(s, k) > 0);
}

static pk_aim_bracket between(const pk_aim_search *s, int i, int k) {
  bool rising = s->sample[i].x < s->sample[k].x;
  return (pk_aim_bracket){true, rising ? i : k, rising ? k : i, -1, NAN};
}

double pk_aim_width(const pk_aim_search *s) {
  return s->part[0].to - s->part[0].from;
}

/* Measures at x and keeps it; *out is its number. */
picket_status pk_aim_take(pk_aim_search *s, double x, double accuracy, int *out) {
  if (s->count == PK_AIM_SAMPLES) {
    return pk_fail(s->problem->context, PICKET_ERROR_INTERNAL, "aim took more than %d samples",
                   (int)PK_AIM_SAMPLES);
  }
  pk_aim_sample *sample = &s->sample[s->count];
  sample->x = x;
  sample->slope = sample->slope_bar = NAN;
  sample->accuracy = accuracy;
  picket_status status = pk_aim_measure(s, 0, &x, accuracy, &sample->m);
  if (status == PICKET_OK) {
    *out = s->count++;
  }
  return status;
}

double pk_aim_coarse_accuracy(const pk_aim_search *s) {
  return fmax(s->options->accuracy, COARSE);
}

/* At an end: once more where the coarse bar leaves the side of the target open. */
static picket_status take_end(pk_aim_search *s, double x, int *out) {
  picket_status status = pk_aim_take(s, x, pk_aim_coarse_accuracy(s), out);
  bool open = status == PICKET_OK && pk_aim_is_good(s, *out) &&
              !(fabs(pk_aim_residual(s, *out)) > s->sample[*out].m.q.uncertainty);
  if (open && s->options->accuracy < pk_aim_coarse_accuracy(s)) {
    s->count--;
    status = pk_aim_take(s, x, s->options->accuracy, out);
  }
  return status;
}

/* --- The bracket ------------------------------------------------------------------------------
 */

/* What vanishes where the target is met, for extrapolation: the residual, but for a Bloch index n
 * below its limit L at a stop band, where it has a square root, (n - t)(2L - n - t), which is
 * (L - t)² - (L - n)² and smooth through the edge (branch.h). */
static double smooth_residual(const pk_aim_search *s, int i) {
  const pk_measurement *m = &s->sample[i].m;
  double r = pk_aim_residual(s, i);
  return isnan(m->limit) ? r : r * (2 * m->limit - m->q.value - s->part[0].target);
}

/* From a point with a value towards one without: the next point is where the line through the last
 * two values meets the target, or half way. */
static double walk_on(const pk_aim_search *s, int before, int good, double bad) {
  double x = s->sample[good].x;
  if (before >= 0) {
    double r = smooth_residual(s, good);
    double guess = x + (x - s->sample[before].x) * r / (smooth_residual(s, before) - r);
    guess += BEYOND * (guess - x);
    if ((guess - x) * (bad - guess) > 0) {
      return guess;
    }
  }
  return 0.5 * (x + bad);
}

static picket_status walk(pk_aim_search *s, int good, double bad, pk_aim_bracket *out) {
  int before = -1;
  for (int i = 0; i < MOST_WALK && !out->found; i++) {
    int at = 0;
    if (fabs(bad - s->sample[good].x) < CLOSEST * pk_aim_width(s)) {
      break;
    }
    double x = walk_on(s, before, good, bad);
    picket_status status = take_end(s, x, &at);
    if (status != PICKET_OK) {
      return status;
    }
    if (!pk_aim_is_good(s, at)) {
      bad = x;
    } else if (pk_aim_is_met(s, at) || pk_aim_straddles(s, at, good)) {
      *out = between(s, at, good);
    } else {
      before = good;
      good = at;
    }
  }
  out->last = good;
  out->gap = bad;
  return PICKET_OK;
}

/* Where the parabola through three samples by rising x has its extreme; NaN if that is not between
 * them, or not nearer to the target than they are. */
static double extreme(const pk_aim_search *s, const int three[3]) {
  double xa = s->sample[three[0]].x, xb = s->sample[three[1]].x, xc = s->sample[three[2]].x;
  double ra = pk_aim_residual(s, three[0]), rb = pk_aim_residual(s, three[1]),
         rc = pk_aim_residual(s, three[2]);
  double left = (rb - ra) / (xb - xa), right = (rc - rb) / (xc - xb);
  double bend = (right - left) / (xc - xa);
  double x = 0.5 * (xa + xb) - left / (2 * bend);
  double r = ra + left * (x - xa) + bend * (x - xa) * (x - xb);
  double nearest = fmin(fabs(ra), fmin(fabs(rb), fabs(rc)));
  bool towards = (r > 0) != (ra > 0) || fabs(r) < nearest;
  return x > xa && x < xc && x != xb && towards ? x : NAN;
}

/* Puts a fourth sample among three and keeps the ones about the nearest to the target. */
static void narrow(const pk_aim_search *s, int fresh, int three[3]) {
  int four[4] = {three[0], three[1], three[2], fresh}, best = 0;
  for (int i = 3; i > 0 && s->sample[four[i]].x < s->sample[four[i - 1]].x; i--) {
    int moved = four[i];
    four[i] = four[i - 1];
    four[i - 1] = moved;
  }
  for (int i = 1; i < 4; i++) {
    best = fabs(pk_aim_residual(s, four[i])) < fabs(pk_aim_residual(s, four[best])) ? i : best;
  }
  int first = best < 2 ? 0 : 1;
  for (int i = 0; i < 3; i++) {
    three[i] = four[first + i];
  }
}

/* Both ends lie on the same side: a quantity that turns may meet the target twice. The middle, then
 * where the last three samples say that it turns. */
static picket_status search_inside(pk_aim_search *s, int a, int b, pk_aim_bracket *out) {
  int three[3] = {a, 0, b}, fresh = 0;
  picket_status status = take_end(s, 0.5 * (s->sample[a].x + s->sample[b].x), &fresh);
  three[1] = fresh;
  for (int i = 0; status == PICKET_OK && pk_aim_is_good(s, fresh) && !pk_aim_straddles(s, a, fresh);
       i++) {
    double x = extreme(s, three);
    if (isnan(x) || i == MOST_TURNS) {
      return PICKET_OK;
    }
    status = take_end(s, x, &fresh);
    if (status == PICKET_OK && pk_aim_is_good(s, fresh)) {
      narrow(s, fresh, three);
    }
  }
  if (status == PICKET_OK && pk_aim_is_good(s, fresh)) {
    s->answer->unique = 0;
    s->answer->unique_basis =
        "the quantity turns between the bounds and meets the target on both "
        "sides; this is the lower of the two";
    *out = between(s, a, fresh);
  }
  return status;
}

picket_status pk_aim_find_bracket(pk_aim_search *s, pk_aim_bracket *out) {
  int a = 0, b = 0, middle = 0;
  picket_status status = take_end(s, s->part[0].from, &a);
  if (status == PICKET_OK) {
    status = take_end(s, s->part[0].to, &b);
  }
  if (status != PICKET_OK) {
    return status;
  }
  if (pk_aim_is_good(s, a) && pk_aim_is_good(s, b)) {
    if (pk_aim_is_met(s, a) || pk_aim_is_met(s, b) || pk_aim_straddles(s, a, b)) {
      *out = between(s, a, b);
      return PICKET_OK;
    }
    return search_inside(s, a, b, out);
  }
  if (pk_aim_is_good(s, a) || pk_aim_is_good(s, b)) {
    return pk_aim_is_good(s, a) ? walk(s, a, s->part[0].to, out) : walk(s, b, s->part[0].from, out);
  }
  status = take_end(s, 0.5 * (s->part[0].from + s->part[0].to), &middle);
  if (status == PICKET_OK && pk_aim_is_good(s, middle)) {
    status = walk(s, middle, s->part[0].to, out);
    if (status == PICKET_OK && !out->found) {
      status = walk(s, middle, s->part[0].from, out);
    }
  }
  return status;
}
