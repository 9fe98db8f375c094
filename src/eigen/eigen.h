/* A few extreme eigenpairs of a large operator: the wall around ARPACK (implicitly restarted
 * Arnoldi, R. B. Lehoucq, D. C. Sorensen and C. Yang, ARPACK Users' Guide, SIAM 1998).
 *
 * The operator is handed in as a function y = Op x (usually a shift-inverted matrix), and the
 * eigenvalues of largest magnitude of Op are found. ARPACK 3.8 keeps static state, so whole
 * iterations run under one process-wide lock. */
#ifndef PK_EIGEN_EIGEN_H
#define PK_EIGEN_EIGEN_H

#include <complex.h>
#include <stdbool.h>
#include <stdint.h>

#include "base/context.h"

typedef picket_status (*pk_apply_real)(void *user, const double *x, double *y);
typedef picket_status (*pk_apply_complex)(void *user, const double complex *x, double complex *y);

typedef struct pk_eigen_request {
  int64_t n;         /* order of the operator */
  int wanted;        /* 1 <= wanted <= n */
  int basis;         /* Krylov vectors; 0: max(20, 2 wanted + 1); never above n */
  int restarts;      /* before the run stops with what has converged; 0: 100 */
  double tolerance;  /* relative, of the Ritz values; 0: 1e-10 */
  uint64_t seed;     /* of the start vector: same seed, same digits */
  const void *start; /* null, or n values of the operator's scalar: a guess of the eigenvector */
  bool real_start;   /* complex operators: begin with a real vector, which an operator that is real
                        in truth then keeps real; a guess is real if it has no imaginary part */
  bool every_copy;   /* see below */
} pk_eigen_request;

/* A Krylov sequence holds one vector of each eigenspace: further copies of a multiple eigenvalue
 * come in by rounding only, and about one run in ten misses one (a fourfold eigenvalue nearly
 * always). With every_copy set, the found space is taken out of the operator and its largest
 * remaining eigenvalue estimated, which costs 8 to 15 more applications; what was missed is then
 * found and merged. */

/* Symmetric real operator. values[wanted] by falling magnitude; vectors [wanted][n] orthonormal.
 *   found          how many converged (fewer than wanted is an outcome, not an error)
 *   applications   how often Op was applied; may be null
 * For n no larger than the basis (and so for any n too small for ARPACK) the operator is applied to
 * unit vectors and a dense solver used, so that any wanted <= n works.
 * On failure values and vectors may hold anything, found is as it was; a failure of `apply` is
 * passed on with its status. `apply` must not call this room: the lock is held around it. */
picket_status pk_eigen_symmetric(picket_context *context, const pk_eigen_request *request,
                                 pk_apply_real apply, void *user, double *values, double *vectors,
                                 int *found, int *applications);

/* General complex operator. vectors [wanted][n] of unit 2-norm. */
picket_status pk_eigen_complex(picket_context *context, const pk_eigen_request *request,
                               pk_apply_complex apply, void *user, double complex *values,
                               double complex *vectors, int *found, int *applications);

#endif
