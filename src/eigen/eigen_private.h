/* What the files of this room share. One code serves both scalars: `width` is the number of doubles
 * per element (1 real, 2 complex), and every array is an array of doubles. */
#ifndef PK_EIGEN_EIGEN_PRIVATE_H
#define PK_EIGEN_EIGEN_PRIVATE_H

#include <stddef.h>

#include "eigen/eigen.h"

#define PK_EIGEN_TOLERANCE 1e-10 /* when none is asked for: measured to halve the applications */

typedef struct pk_operator {
  size_t width;
  pk_apply_real real; /* the one that width says */
  pk_apply_complex complex_;
  void *user;
} pk_operator;

static inline picket_status pk_operator_apply(const pk_operator *operator, const double * x,
                                              double *y) {
  return operator->width == 1 ? operator->real(operator->user, x, y) :
                              operator->complex_(operator->user, (const double complex *)x,
                                                 (double complex *)y);
}

/* Krylov vectors of a request: as asked for, at least two more than pairs wanted, at most n. */
int pk_eigen_basis(const pk_eigen_request *request);

/* One iteration of ARPACK (or the dense solver); adds to *applications. */
picket_status pk_eigen_once(picket_context *context, const pk_eigen_request *request,
                            const pk_operator *operator, double * values, double *vectors,
                            int *found, int *applications);

/* Looks for copies that pk_eigen_once missed and merges them into its results, of which all
 * `wanted` were found; adds to *applications. On failure the results are as they were. */
picket_status pk_eigen_copies(picket_context *context, const pk_eigen_request *request,
                              const pk_operator *operator, double * values, double *vectors,
                              int *applications);

#endif
