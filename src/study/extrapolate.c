/* See extrapolate.h. */
#include "study/extrapolate.h"

#include <math.h>

/* Scattered values (interfaces that cut the cells): the step from the finest grid to the value, the
 * largest misfit times this, and the share of the law, which stands for what vanishes from both by
 * chance. Calibrated on 332 values for either polarization: square lattices of rods in air and of
 * holes, permittivities 12:1, 8.9:1, 5.8:1 and 1.9:1, radii 0.15 to 0.45 of the pitch, four lowest
 * bands at two or four wavenumbers, against exact frequencies from cylindrical waves, on the
 * members 2, 3, 4, 6 to 8, 12, 16, 20. None lay outside its bar (worst 0.76 of it for ey, 0.93 for
 * hy, where walls between holes are three cells thick). Without the share 1 and 22 did: a
 * first-order term of hy, small against the second-order one on coarse grids, is nearly invisible
 * to the misfit. */
static const double SCATTER_MISFIT = 3;

/* Rounding of an eigenvalue: about 1e-16 times the square of the steps in a wavelength. Largest
 * seen: 7e-12, on a stack of twenty pitches to a wavelength. */
static const double ROUNDING = 2e-11;

/* Solves the small dense system by elimination with row exchange; size at most PK_GRIDS. */
static double solve_first(int n, double a[PK_GRIDS][PK_GRIDS], double *b) {
  for (int k = 0; k < n; k++) {
    int pivot = k;
    for (int i = k + 1; i < n; i++) {
      pivot = fabs(a[i][k]) > fabs(a[pivot][k]) ? i : pivot;
    }
    for (int j = 0; j < n; j++) {
      double swap = a[k][j];
      a[k][j] = a[pivot][j];
      a[pivot][j] = swap;
    }
    double swap = b[k];
    b[k] = b[pivot];
    b[pivot] = swap;
    for (int i = k + 1; i < n; i++) {
      double factor = a[i][k] / a[k][k];
      for (int j = k; j < n; j++) {
        a[i][j] -= factor * a[k][j];
      }
      b[i] -= factor * b[k];
    }
  }
  for (int k = n - 1; k >= 0; k--) {
    for (int j = k + 1; j < n; j++) {
      b[k] -= a[k][j] * b[j];
    }
    b[k] /= a[k][k];
  }
  return b[0];
}

double pk_extrapolated(const pk_error_law *law, int count, const int *m, const double *values,
                       int used) {
  double a[PK_GRIDS][PK_GRIDS], b[PK_GRIDS];
  int first = count - used;
  for (int i = 0; i < used; i++) {
    a[i][0] = 1;
    for (int j = 1; j < used; j++) {
      a[i][j] = pow((double)m[first + i] / m[count - 1], -law->exponent[j - 1]);
    }
    b[i] = values[first + i];
  }
  return solve_first(used, a, b);
}

/* Two-dimensional cells on grid lines: even where E is smooth enough for h² and h⁴, what comes
 * after them is no even power (E ~ r^(2+α) at corners), so that the differences below can vanish by
 * chance; the bar is never below this share of the step from the finest grid to the value, less on
 * finer grids. Calibrated against 12 times finer grids on 404 ey bands of random cells of one and
 * two rectangles, members 2, 3, 4 and 3, 4, 6 and 4, 6, 8: without the share 7 %, 3 % and 2 % were
 * outside their bars, with it two, one and one values, all but one of them of a cell whose two
 * bands nearly meet; the median bar is 6 to 11 errors. */
static const double SMOOTH_SHARE = 0.002; /* from the member 2 on */

static picket_quantity smooth(const pk_error_law *law, int count, const int *m,
                              const double *values) {
  int most = law->count + 1;
  int used = count < most ? count : most;
  double best = pk_extrapolated(law, count, m, values, used);
  double bar = ROUNDING * fabs(best);
  bar = fmax(bar, fabs(best - pk_extrapolated(law, count, m, values, used - 1)));
  if (count > used) {
    bar = fmax(bar, fabs(best - pk_extrapolated(law, count - 1, m, values, used)));
  }
  if (law->count == 2) {
    bar = fmax(bar, SMOOTH_SHARE * 2 / m[0] * fabs(best - values[count - 1]));
  }
  return (picket_quantity){best, bar, 0};
}

/* Corners: the differences below can vanish by chance where terms of the law cancel on these grids,
 * so the bar is never below a share of the step from the finest grid to the value; with four grids
 * the share falls with the spacing, as the terms left out fall faster than h². Calibrated against
 * finer grids on 348 values of cells with one and three random rectangles, of weak and strong
 * contrast, and with rectangles that touch at a corner: none was outside its bar with the members
 * 2, 3, 4 (worst 0.78 of it) and 2, 3, 4, 6 (worst 0.93), one with 3, 4, 6, 8; without the share
 * 3 % and 6 % were. */
static const double CORNER_SHARE_THREE = 0.02;
static const double CORNER_SHARE_FOUR = 0.006; /* from the member 2 on */

static picket_quantity at_corners(const pk_error_law *law, int count, const int *m,
                                  const double *values) {
  picket_quantity q = smooth(law, count, m, values);
  double share = CORNER_SHARE_THREE;
  if (count > 3) {
    q.uncertainty = fmax(q.uncertainty, fabs(q.value - pk_extrapolated(law, 3, m, values, 3)));
    share = CORNER_SHARE_FOUR * 2 / m[0];
  }
  q.uncertainty = fmax(q.uncertainty, share * fabs(q.value - values[count - 1]));
  return q;
}

/* Sections with curved interfaces: beside h² there is a slow term, of first order with a small
 * factor, which h³ imitates over a few grids. With more than three grids the value is that of least
 * squares with h² and h³; the bar holds this share of the step from the finest grid to the value,
 * and CURVED_GAIN times what h³ changed. Calibrated on the exact modes HE11, TE01, HE21 and TM01 of
 * a rod of 1.5 in air, on base grids with and without a line at the end of the rod, members 2 to 5,
 * 3 to 6, 4 to 7, 5 to 8 and 6, 7, 8, 10: with a line there the value is up to ten times nearer
 * than with h² alone, and the worst value of all is at 0.73 of its bar, which is 2 to 4 times
 * narrower than with the whole step in it. HE11, TE01 and TM01 of 3.476 in 1.444 and the group
 * index of HE11 of either lie at 0.4 of theirs at most. */
static const double CURVED_STEP = 0.25;
static const double CURVED_GAIN = 1.5;

/* With corners between oblique sides the singular field there adds h^2α, α from 0.7; h³ helps the
 * bar alone. Held against the same square upright, whose corners are corrected. */
static const double OBLIQUE_GAIN = 3;

/* Least squares with h² and h³: the normal equations of three unknowns. */
static double with_cubic(int count, const int *m, const double *values, double *misfit) {
  double a[PK_GRIDS][PK_GRIDS] = {{0}}, b[PK_GRIDS] = {0};
  for (int g = 0; g < count; g++) {
    double h = (double)m[0] / m[g];
    const double term[3] = {1, h * h, h * h * h};
    for (int i = 0; i < 3; i++) {
      for (int j = 0; j < 3; j++) {
        a[i][j] += term[i] * term[j];
      }
      b[i] += term[i] * (values[g] - values[0]);
    }
  }
  double best = values[0] + solve_first(3, a, b); /* b holds all three now */
  *misfit = 0;
  for (int g = 0; g < count; g++) {
    double h = (double)m[0] / m[g];
    *misfit = fmax(*misfit, fabs(values[g] - best - b[1] * h * h - b[2] * h * h * h));
  }
  return best;
}

static picket_quantity scattered(const pk_error_law *law, int count, const int *m,
                                 const double *values) {
  double n = count, sx = 0, sy = 0, sxx = 0, sxy = 0;
  for (int i = 0; i < count; i++) {
    double x = 1.0 / ((double)m[i] * m[i]);
    sx += x;
    sy += values[i];
    sxx += x * x;
    sxy += x * values[i];
  }
  double slope = (n * sxy - sx * sy) / (n * sxx - sx * sx);
  double best = (sy - slope * sx) / n;
  double misfit = 0;
  for (int i = 0; i < count; i++) {
    misfit = fmax(misfit, fabs(values[i] - best - slope / ((double)m[i] * m[i])));
  }
  double step = fabs(values[count - 1] - best), gain = 0;
  if (law->curved && count > 3) {
    double plain = best, cubic_misfit;
    double cubic = with_cubic(count, m, values, &cubic_misfit);
    gain = (law->curved > 1 ? OBLIQUE_GAIN : CURVED_GAIN) * fabs(cubic - plain);
    if (law->curved == 1) {
      best = cubic;
      misfit = cubic_misfit;
      step = CURVED_STEP * fabs(values[count - 1] - best);
    }
  }
  double bar = step + SCATTER_MISFIT * misfit + gain;
  bar += law->share * pow(m[count - 1], -law->share_order) * fabs(best);
  return (picket_quantity){best, bar, 0};
}

picket_quantity pk_extrapolate(const pk_error_law *law, int count, const int *m,
                               const double *values) {
  for (int i = 0; i < count; i++) {
    if (!isfinite(values[i])) {
      return (picket_quantity){NAN, NAN, 0};
    }
  }
  picket_quantity q = law->corners  ? at_corners(law, count, m, values)
                      : law->smooth ? smooth(law, count, m, values)
                                    : scattered(law, count, m, values);
  if (law->no_bar) {
    q.uncertainty = NAN;
    q.note = law->no_bar;
  }
  return q;
}
