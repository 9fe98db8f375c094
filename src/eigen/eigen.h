/* A few extreme eigenpairs of a large operator: the wall around ARPACK (implicitly restarted
 * Arnoldi, R. B. Lehoucq, D. C. Sorensen and C. Yang, ARPACK Users' Guide, SIAM 1998).
 *
 * The operator is handed in as a function y = Op x (usually a shift-inverted matrix), and the
 * eigenvalues of largest magnitude of Op are found. ARPACK 3.8 keeps static state, so whole
 * iterations run under one process-wide lock. */
#ifndef PK_EIGEN_EIGEN_H
#define PK_EIGEN_EIGEN_H

#include <complex.h>
#include <stdint.h>

#include "base/context.h"

typedef picket_status (*pk_apply_real)(void *user, const double *x, double *y);
typedef picket_status (*pk_apply_complex)(void *user, const double complex *x, double complex *y);

typedef struct pk_eigen_request {
  int64_t n;         /* order of the operator */
  int wanted;        /* 1 <= wanted < n - 1 */
  int basis;         /* Krylov vectors; 0: max(20, 2 wanted + 1), never above n */
  double tolerance;  /* relative, of the Ritz values; 0: 1e-10 */
  uint64_t seed;     /* of the start vector: same seed, same digits */
  const void *start; /* null, or n values of the operator's scalar: a guess of the eigenvector */
} pk_eigen_request;

/* Symmetric real operator. values[wanted] by falling magnitude; vectors [wanted][n] orthonormal.
 *   found          how many converged (fewer than wanted is an outcome, not an error)
 *   applications   how often Op was applied; may be null
 * For n too small for ARPACK (n < 3 or wanted > n - 2) the operator is applied to unit vectors and
 * a dense solver used, so that any wanted <= n works. */
picket_status pk_eigen_symmetric(picket_context *context, const pk_eigen_request *request,
                                 pk_apply_real apply, void *user, double *values, double *vectors,
                                 int *found, int *applications);

/* General complex operator. vectors [wanted][n] of unit 2-norm. */
picket_status pk_eigen_complex(picket_context *context, const pk_eigen_request *request,
                               pk_apply_complex apply, void *user, double complex *values,
                               double complex *vectors, int *found, int *applications);

#endif
