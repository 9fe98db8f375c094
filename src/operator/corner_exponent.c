/* See corner_exponent.h. The extremes of tr M are found from sign changes of its derivative, which
 * is exact; exponents are then bracketed between neighbouring extremes. Complex permittivities are
 * reached in steps from their real parts, with Newton's method on tr M = 2; where two exponents are
 * close they start from the parabola about the stationary point between them. */
#include "operator/corner_exponent.h"

#include <math.h>

/* tr M is a sum of cosines with frequencies up to 2π and, by Hill's theory, monotone between
 * extremes that stand about 1/2 apart; 256 steps per unit see every one of them at any contrast of
 * real media. */
enum { SCAN_STEPS_PER_UNIT = 256, BISECTIONS = 60, NEWTON_STEPS = 30, FOLLOW_STEPS = 16 };

static const double SCAN_END =
    3; /* the maximum that follows the last exponent below 2 lies before */

/* A maximum so little above 2, relative to the size of the entries of M, is rounding: it touches.
 */
static const double TOUCHES = 4e-15;

/* Two exponents closer than this start from their common parabola. */
static const double CLOSE = 1e-2;

/* tr M - 2, its derivative, and M if wanted. `scale` is the size of what was added up. */
typedef struct turn {
  double complex mismatch, slope;
  double complex m[2][2];
  double scale;
} turn;

static void times(double complex left[2][2], double complex right[2][2], double complex out[2][2]) {
  for (int i = 0; i < 2; i++) {
    for (int j = 0; j < 2; j++) {
      out[i][j] = left[i][0] * right[0][j] + left[i][1] * right[1][j];
    }
  }
}

static turn go_around(const pk_sectors *s, double complex alpha) {
  double complex m[2][2] = {{1, 0}, {0, 1}}, d[2][2] = {{0}};
  double scale = 1;
  for (int q = 0; q < s->count; q++) {
    double angle = s->angle[q];
    double complex e = s->permittivity[q], c = ccos(alpha * angle), n = csin(alpha * angle);
    double complex t[2][2] = {{c, n * e}, {-n / e, c}};
    double complex dt[2][2] = {{-n * angle, c * e * angle}, {-c / e * angle, -n * angle}};
    double complex tm[2][2], td[2][2], dm[2][2];
    times(t, m, tm);
    times(t, d, td);
    times(dt, m, dm);
    for (int i = 0; i < 4; i++) {
      m[i / 2][i % 2] = tm[i / 2][i % 2];
      d[i / 2][i % 2] = td[i / 2][i % 2] + dm[i / 2][i % 2];
    }
    scale = fmax(scale, cabs(m[0][0]) + cabs(m[1][1]) + sqrt(cabs(m[0][1] * m[1][0])));
  }
  turn r = {
      m[0][0] + m[1][1] - 2, d[0][0] + d[1][1], {{m[0][0], m[0][1]}, {m[1][0], m[1][1]}}, scale};
  return r;
}

double complex pk_corner_mismatch(const pk_sectors *sectors, double complex alpha) {
  return go_around(sectors, alpha).mismatch;
}

/* A zero of the slope (extreme) or of the mismatch between a and b, where it changes sign. */
static double bisect(const pk_sectors *s, bool extreme, double a, double b) {
  turn at_a = go_around(s, a);
  double sign = creal(extreme ? at_a.slope : at_a.mismatch) > 0 ? 1 : -1;
  for (int i = 0; i < BISECTIONS; i++) {
    double middle = 0.5 * (a + b);
    turn t = go_around(s, middle);
    double value = creal(extreme ? t.slope : t.mismatch);
    if (value * sign > 0) {
      a = middle;
    } else {
      b = middle;
    }
  }
  return 0.5 * (a + b);
}

/* A pair of exponents and the stationary point between them. */
typedef struct pair {
  double complex low, high, middle;
} pair;

static pair pair_between(const pk_sectors *s, double before, double top, double after) {
  turn t = go_around(s, top);
  if (creal(t.mismatch) <= TOUCHES * t.scale) {
    return (pair){top, top, top};
  }
  return (pair){bisect(s, false, before, top), bisect(s, false, top, after), top};
}

/* All pairs whose lower member may lie below 2, for real permittivities. */
static int real_pairs(const pk_sectors *s, pair pairs[PK_CORNER_EXPONENTS / 2]) {
  int count = 0;
  double before = 0, top = 0;
  bool have_top = false;
  double at = 1.0 / SCAN_STEPS_PER_UNIT, slope = creal(go_around(s, at).slope);
  while (at < SCAN_END && count < PK_CORNER_EXPONENTS / 2) {
    double next = at + 1.0 / SCAN_STEPS_PER_UNIT, next_slope = creal(go_around(s, next).slope);
    if (slope > 0 && next_slope <= 0) {
      top = bisect(s, true, at, next);
      have_top = true;
    } else if (slope <= 0 && next_slope > 0) {
      double least = bisect(s, true, at, next);
      if (have_top) {
        pairs[count++] = pair_between(s, before, top, least);
      }
      before = least;
      have_top = false;
    }
    at = next;
    slope = next_slope;
  }
  return count;
}

static double complex curvature(const pk_sectors *s, double complex at) {
  double step = 1e-4; /* central difference of an exact slope: 1e-8 of it */
  return (go_around(s, at + step).slope - go_around(s, at - step).slope) / (2 * step);
}

static bool newton(const pk_sectors *s, double complex *alpha) {
  for (int i = 0; i < NEWTON_STEPS; i++) {
    turn t = go_around(s, *alpha);
    if (cabs(t.mismatch) <= 1e-14 * t.scale) {
      return true;
    }
    double complex step = t.mismatch / t.slope;
    if (!(cabs(step) < 0.5)) {
      return false;
    }
    *alpha -= step;
    if (cabs(step) < 1e-15) {
      return true;
    }
  }
  turn t = go_around(s, *alpha);
  return cabs(t.mismatch) < 1e-10 * t.scale;
}

/* Moves a pair to permittivities that differ a little. */
static bool follow(const pk_sectors *s, pair *p) {
  for (int i = 0; i < NEWTON_STEPS; i++) {
    double complex step = go_around(s, p->middle).slope / curvature(s, p->middle);
    p->middle -= step;
    if (cabs(step) < 1e-14) {
      break;
    }
  }
  turn t = go_around(s, p->middle);
  if (cabs(t.mismatch) <= TOUCHES * t.scale) {
    p->low = p->high = p->middle;
    return true;
  }
  if (cabs(p->high - p->low) < CLOSE) {
    double complex half = csqrt(-2 * t.mismatch / curvature(s, p->middle));
    half = creal(half) < 0 ? -half : half;
    p->low = p->middle - half;
    p->high = p->middle + half;
  }
  return newton(s, &p->low) && newton(s, &p->high) &&
         cabs(p->high - p->low) > 1e-3 * cabs(p->high - p->middle);
}

static bool follow_all(const pk_sectors *goal, int count, pair *pairs) {
  pk_sectors s = *goal;
  for (int step = 1; step <= FOLLOW_STEPS; step++) {
    for (int q = 0; q < s.count; q++) {
      double complex e = goal->permittivity[q];
      s.permittivity[q] = creal(e) + I * cimag(e) * step / FOLLOW_STEPS;
    }
    for (int i = 0; i < count; i++) {
      if (!follow(&s, &pairs[i])) {
        return false;
      }
    }
  }
  return true;
}

static int insert(double complex *alpha, int count, double complex value) {
  if (!(creal(value) > 1e-12 && creal(value) < 2 - 1e-9)) {
    return count;
  }
  int at = count;
  while (at > 0 && creal(alpha[at - 1]) > creal(value)) {
    alpha[at] = alpha[at - 1];
    at--;
  }
  alpha[at] = value;
  return count + 1;
}

int pk_corner_exponents(const pk_sectors *sectors, double complex alpha[PK_CORNER_EXPONENTS]) {
  pk_sectors real = *sectors;
  bool lossless = true;
  for (int q = 0; q < sectors->count; q++) {
    double complex e = sectors->permittivity[q];
    if (!(creal(e) > 0) || !isfinite(cabs(e))) {
      return -1;
    }
    real.permittivity[q] = creal(e);
    lossless = lossless && cimag(e) == 0;
  }
  pair pairs[PK_CORNER_EXPONENTS / 2];
  int pair_count = real_pairs(&real, pairs), count = 0;
  if (!lossless && !follow_all(sectors, pair_count, pairs)) {
    return -1;
  }
  for (int i = 0; i < pair_count; i++) {
    count = insert(alpha, count, pairs[i].low);
    count = insert(alpha, count, pairs[i].high);
  }
  return count;
}

/* A vector that M keeps, at a single exponent: normal to the larger row of M - 1. */
static void kept_vector(turn t, int which, double complex state[2]) {
  double complex row[2][2] = {{t.m[0][0] - 1, t.m[0][1]}, {t.m[1][0], t.m[1][1] - 1}};
  double size[2];
  for (int i = 0; i < 2; i++) {
    size[i] = cabs(row[i][0]) + cabs(row[i][1]);
  }
  int i = size[1] > size[0];
  if (size[i] < 1e-6) { /* a double exponent is known to 1e-8: every vector is kept */
    state[0] = which == 0;
    state[1] = which != 0;
    return;
  }
  state[0] = -row[i][1];
  state[1] = row[i][0];
}

void pk_corner_shape(const pk_sectors *sectors, double complex alpha, int which,
                     double complex a[PK_SECTORS], double complex b[PK_SECTORS]) {
  double complex state[2];
  kept_vector(go_around(sectors, alpha), which, state);
  double most = 0;
  for (int q = 0; q < sectors->count; q++) {
    double complex e = sectors->permittivity[q];
    double complex c = ccos(alpha * sectors->angle[q]), n = csin(alpha * sectors->angle[q]);
    a[q] = state[0];
    b[q] = state[1] * e;
    most = fmax(most, cabs(a[q]) * cabs(a[q]) + cabs(b[q]) * cabs(b[q]));
    state[0] = c * a[q] + n * b[q];
    state[1] = (c * b[q] - n * a[q]) / e;
  }
  for (int q = 0; q < sectors->count; q++) {
    a[q] /= sqrt(most);
    b[q] /= sqrt(most);
  }
}
