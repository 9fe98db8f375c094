/* See harmonics.h. The law is linear in X, A and B; more values than unknowns are met in the sense
 * of least squares. */
#include "study/harmonics.h"

#include <math.h>

static const double PI = 3.141592653589793238;

enum { UNKNOWNS = 3 };

/* With as many values as unknowns there is no check: the bar is this part of what the law adds to
 * the last value. X from N = 2, 3, 4 was off by up to 0.13 of it (harmonics.h). */
static const double SHARE_THREE = 0.2;

/* With four: the larger difference between the four and the first or last three, times this, as the
 * four may lie half way between the truth and the three (seen: 1.02 of it); and never below this
 * part of what the law adds, for what cancels by chance. */
static const double DIFFERENCE = 1.5;
static const double SHARE_FOUR = 0.02;

/* More walls than two: the beats are scatter about A N^-3. */
static const double SCATTER_MISFIT = 2;

pk_harmonic_law pk_harmonic_law_of(const pk_channel_block *channel) {
  pk_harmonic_law law = {.uniform = channel->slices == 1, .single = channel->slices == 2};
  if (law.single) {
    law.distance = (channel->from_um[1] - channel->from_um[0]) / channel->pitch_um;
  }
  return law;
}

static double beat(const pk_harmonic_law *law, int n, int term) {
  double power = pow(n, -3);
  return term == 0 ? 1 : term == 1 ? power : power * cos(2 * PI * n * law->distance);
}

/* Normal equations of `unknowns` terms by elimination; X. The terms are scaled to the last n. */
static double fit(const pk_harmonic_law *law, int unknowns, int count, const int *n,
                  const double *values, double *worst) {
  double a[UNKNOWNS][UNKNOWNS + 1] = {{0}};
  double x[UNKNOWNS] = {0};
  double scale = pow(n[count - 1], 3);
  for (int g = 0; g < count; g++) {
    for (int i = 0; i < unknowns; i++) {
      double row = beat(law, n[g], i) * (i ? scale : 1);
      for (int j = 0; j < unknowns; j++) {
        a[i][j] += row * beat(law, n[g], j) * (j ? scale : 1);
      }
      a[i][unknowns] += row * (values[g] - values[count - 1]);
    }
  }
  for (int k = 0; k < unknowns; k++) {
    for (int i = k + 1; i < unknowns; i++) {
      double factor = a[i][k] / a[k][k];
      for (int j = k; j <= unknowns; j++) {
        a[i][j] -= factor * a[k][j];
      }
    }
  }
  for (int k = unknowns - 1; k >= 0; k--) {
    x[k] = a[k][unknowns];
    for (int j = k + 1; j < unknowns; j++) {
      x[k] -= a[k][j] * x[j];
    }
    x[k] /= a[k][k];
  }
  *worst = 0;
  for (int g = 0; g < count; g++) {
    double misfit = values[g] - values[count - 1];
    for (int i = 0; i < unknowns; i++) {
      misfit -= x[i] * beat(law, n[g], i) * (i ? scale : 1);
    }
    *worst = fmax(*worst, fabs(misfit));
  }
  return values[count - 1] + x[0];
}

/* The beats of these n are told from the plain power if cos 2πnd differs among them. */
static bool is_told(const pk_harmonic_law *law, int count, const int *n) {
  double low = 1, high = -1;
  for (int i = 0; i < count; i++) {
    double c = cos(2 * PI * n[i] * law->distance);
    low = fmin(low, c);
    high = fmax(high, c);
  }
  return high - low > 0.3;
}

picket_quantity pk_harmonics_extrapolate(const pk_harmonic_law *law, int count, const int *n,
                                         const double *values) {
  double misfit = 0, ignored = 0, last = values[count - 1];
  for (int i = 0; i < count; i++) {
    if (!isfinite(values[i])) {
      return (picket_quantity){NAN, NAN, 0};
    }
  }
  if (law->uniform) {
    return (picket_quantity){last, 0, 0};
  }
  if (!law->single || !is_told(law, count, n)) {
    double best = fit(law, 2, count, n, values, &misfit);
    return (picket_quantity){best, fabs(best - last) + SCATTER_MISFIT * misfit, 0};
  }
  double best = fit(law, UNKNOWNS, count, n, values, &misfit);
  double share = count > UNKNOWNS ? SHARE_FOUR : SHARE_THREE;
  double bar = share * fabs(best - last);
  if (count > UNKNOWNS) {
    bool first = is_told(law, UNKNOWNS, n), final = is_told(law, UNKNOWNS, n + count - UNKNOWNS);
    bar = fmax(
        bar,
        first ? DIFFERENCE * fabs(best - fit(law, UNKNOWNS, UNKNOWNS, n, values, &ignored)) : 0);
    const int skipped = count - UNKNOWNS;
    double without = final ? fit(law, UNKNOWNS, UNKNOWNS, n + skipped, values + skipped, &ignored)
                           : fit(law, 2, UNKNOWNS, n + skipped, values + skipped, &ignored);
    bar = fmax(bar, DIFFERENCE * fabs(best - without));
  }
  return (picket_quantity){best, bar, 0};
}
