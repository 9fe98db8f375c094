/* See sparse.h: complex right-hand sides of a real factor, a part at a time. */
#include <math.h>
#include <string.h>

#include "sparse/sparse.h"

/* A part this much smaller than the other is the rounding of a vector that should be real, such as
 * a restart of Arnoldi in complex arithmetic leaves, and is taken for zero: a hundred times the
 * rounding of a vector of norm 1, far below every residual that is asked for (1e-9 to 1e-11). */
static const double ROUNDING = 1e-13;

static double largest(int64_t n, const double *part) {
  double most = 0;
  for (int64_t p = 0; p < n; p++) {
    most = fmax(most, fabs(part[2 * p]));
  }
  return most;
}

picket_status pk_factor_solve_parts(pk_factor *factor, int64_t n, const double complex *b,
                                    double complex *x, double *work) {
  const double *from = (const double *)b; /* pairs of doubles (C11 6.2.5) */
  double *to = (double *)x, *in = work, *out = work + n;
  double size[2] = {largest(n, from), largest(n, from + 1)};
  picket_status status = PICKET_OK;
  for (int part = 0; status == PICKET_OK && part < 2; part++) {
    if (size[part] <= ROUNDING * size[1 - part]) {
      memset(out, 0, (size_t)n * sizeof *out);
    } else {
      for (int64_t p = 0; p < n; p++) {
        in[p] = from[2 * p + part];
      }
      status = pk_factor_solve_real(factor, in, out);
    }
    for (int64_t p = 0; status == PICKET_OK && p < n; p++) {
      to[2 * p + part] = out[p];
    }
  }
  return status;
}
