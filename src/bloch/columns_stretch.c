/* The inner columns of a uniform stretch, solved by sines along the guide.
 *
 * The m - 1 inner columns of m equal intervals have the block tridiagonal matrix (U, D, U), which
 * the vectors sin(jθ_k), θ_k = kπ/m, diagonalise along the guide (as in fast Poisson solvers: R. W.
 * Hockney, J. ACM 12, 95 (1965)). With the tridiagonal R_k = (D + 2 cos θ_k U)⁻¹ the blocks of its
 * inverse are G(1, 1)     = 2/m Σ sin²θ_k R_k, G(1, m - 1) = 2/m Σ (-1)^(k+1) sin²θ_k R_k.
 *
 * The inverse R of a tridiagonal matrix with the lower, main and upper diagonals l, d, u is written
 * down in n² steps from its pivots from above, δ, and from below, η:
 *   δ_i = d_i - l_{i-1} u_{i-1}/δ_{i-1},   η_i = d_i - u_i l_i/η_{i+1},
 *   R_ii = 1/(δ_i + η_i - d_i),
 *   R_ij = -R_i,j-1 u_{j-1}/η_j  (i < j),   R_ij = -R_i,j+1 l_j/δ_j  (i > j).
 * A small pivot does no harm: its error and that of the large pivot that follows cancel in the
 * product of the two ratios. */
#include <float.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"

/* Entries this far below the diagonal one are zero: products on the way to underflow are slow. */
static const double NOTHING = 1e-100;

/* Diagonals [n] of a tridiagonal matrix and what its inverse is made of. */
typedef struct tridiagonal {
  int n;
  double complex *l, *d, *u;              /* of the matrix; the last of l and u is 0 */
  double complex *above, *below, *centre; /* δ, η, R_ii */
  double complex *run;                    /* a part of a column of R */
} tridiagonal;

bool pk_strip_is_tridiagonal(int n, pk_strip strip) {
  for (int k = 0; k < PK_STRIP * n; k++) {
    int c = k / PK_STRIP;
    if (strip.row[k] >= 0 && (strip.row[k] < c - 1 || strip.row[k] > c + 1)) {
      return false;
    }
  }
  return true;
}

/* t += factor × strip. */
static void add_strip(tridiagonal *t, double factor, pk_strip strip) {
  for (int c = 0; c < t->n; c++) {
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && strip.row[k] >= 0; k++) {
      int r = strip.row[k];
      double complex *to = r == c ? &t->d[c] : r < c ? &t->u[r] : &t->l[c];
      *to += factor * strip.value[k];
    }
  }
}

/* Pivots that vanish become as small as rounding could have left them; the size of a row is not 0.
 */
static double complex nonzero(const tridiagonal *t, int i, double complex pivot) {
  double size = cabs(t->d[i]) + (i > 0 ? cabs(t->u[i - 1]) : 0) + cabs(t->u[i]);
  return cabs(pivot) > DBL_EPSILON * DBL_EPSILON * size ? pivot : DBL_EPSILON * size;
}

static void factor(tridiagonal *t) {
  int n = t->n;
  t->above[0] = nonzero(t, 0, t->d[0]);
  for (int i = 1; i < n; i++) {
    t->above[i] = nonzero(t, i, t->d[i] - t->l[i - 1] * t->u[i - 1] / t->above[i - 1]);
  }
  t->below[n - 1] = nonzero(t, n - 1, t->d[n - 1]);
  for (int i = n - 2; i >= 0; i--) {
    t->below[i] = nonzero(t, i, t->d[i] - t->u[i] * t->l[i] / t->below[i + 1]);
  }
  for (int i = 0; i < n; i++) {
    t->centre[i] = 1 / nonzero(t, i, t->above[i] + t->below[i] - t->d[i]);
  }
}

static double size_of(double complex x) {
  return fabs(creal(x)) + fabs(cimag(x));
}

/* sum += weight R. */
static void add_inverse(tridiagonal *t, double weight, double complex *sum) {
  int n = t->n;
  double complex *run = t->run;
  for (int j = 0, first = 0; j < n; j++) {
    double complex *to = sum + (size_t)j * (size_t)n;
    double complex ratio = j > 0 ? -t->u[j - 1] / t->below[j] : 0;
    run[j] = t->centre[j];
    for (int i = first; i < j; i++) {
      run[i] *= ratio;
      to[i] += weight * run[i];
    }
    to[j] += weight * run[j];
    while (first < j && size_of(run[first]) < NOTHING * size_of(run[j])) {
      first++;
    }
  }
  for (int j = n - 1, last = n - 1; j >= 0; j--) {
    double complex *to = sum + (size_t)j * (size_t)n;
    double complex ratio = j < n - 1 ? -t->l[j] / t->above[j] : 0;
    run[j] = t->centre[j];
    for (int i = j + 1; i <= last; i++) {
      run[i] *= ratio;
      to[i] += weight * run[i];
    }
    while (last > j && size_of(run[last]) < NOTHING * size_of(run[j])) {
      last--;
    }
  }
}

picket_status pk_stretch_inverse(picket_context *context, int n, pk_strip D, pk_strip U, int m,
                                 double complex *near, double complex *far) {
  double complex *work = PK_NEW(context, 7 * (size_t)n, double complex);
  if (!work) {
    return PICKET_ERROR_MEMORY;
  }
  size_t step = (size_t)n, n2 = step * step;
  tridiagonal t = {n,
                   work,
                   work + step,
                   work + 2 * step,
                   work + 3 * step,
                   work + 4 * step,
                   work + 5 * step,
                   work + 6 * step};
  /* The odd k add to both blocks; the even ones are subtracted from the far one. */
  double complex *odd = near, *even = far;
  memset(odd, 0, n2 * sizeof *odd);
  memset(even, 0, n2 * sizeof *even);
  for (int k = 1; k < m; k++) {
    double theta = 3.14159265358979323846 * k / m, sine = sin(theta);
    memset(work, 0, 3 * step * sizeof *work);
    add_strip(&t, 1, D);
    add_strip(&t, 2 * cos(theta), U);
    factor(&t);
    add_inverse(&t, 2 * sine * sine / m, k % 2 != 0 ? odd : even);
  }
  for (size_t i = 0; i < n2; i++) {
    double complex sum = odd[i] + even[i];
    far[i] = odd[i] - even[i];
    near[i] = sum;
  }
  pk_free(context, work);
  return PICKET_OK;
}
