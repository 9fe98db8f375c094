/* Sparse matrices and their LU factors: the wall around UMFPACK.
 *
 * Compressed columns, 64-bit indices, rows sorted in each column. All matrices here have a
 * symmetric *structure* (a_ij stored exactly when a_ji is), so compressed columns and compressed
 * rows share one pattern. Method: T. A. Davis, ACM Trans. Math. Softw. 30, 196 (2004). */
#ifndef PK_SPARSE_SPARSE_H
#define PK_SPARSE_SPARSE_H

#include <complex.h>
#include <stdbool.h>
#include <stdint.h>

#include "base/context.h"

typedef struct pk_pattern {
  int64_t n;      /* rows and columns */
  int64_t *start; /* [n + 1] */
  int64_t *row;   /* [start[n]] rising in each column */
} pk_pattern;

/* y = A x for values on a pattern, [start[n]] each. x and y do not overlap. */
void pk_sparse_times_real(const pk_pattern *pattern, const double *values, const double *x,
                          double *y);
void pk_sparse_times_complex(const pk_pattern *pattern, const double complex *values,
                             const double complex *x, double complex *y);
/* y = Aᵀ x (no conjugation). */
void pk_sparse_transposed_times_complex(const pk_pattern *pattern, const double complex *values,
                                        const double complex *x, double complex *y);

typedef enum pk_scalar { PK_REAL, PK_COMPLEX } pk_scalar;

typedef struct pk_factor pk_factor;

/* What a factorisation cost: shown in the log and used by benchmarks. */
typedef struct pk_factor_facts {
  int64_t entries; /* in L + U */
  double flops;
  double peak_bytes;
  const char *ordering; /* the one really used */
  double symbolic_seconds, numeric_seconds;
} pk_factor_facts;

/* The symbolic phase: ordering and pattern of the factors, kept for every later numeric phase.
 * The pattern is borrowed and must outlive the factor. */
picket_status pk_factor_create(picket_context *context, const pk_pattern *pattern, pk_scalar scalar,
                               pk_factor **out);
void pk_factor_free(pk_factor *factor); /* accepts null */

/* The numeric phase; the values are borrowed until the next numeric phase or the free.
 * PICKET_ERROR_NUMERIC for a singular matrix, PICKET_ERROR_MEMORY when memory is out. */
picket_status pk_factor_real(pk_factor *factor, const double *values);
picket_status pk_factor_complex(pk_factor *factor, const double complex *values);

/* x = A⁻¹ b, no refinement (residuals are checked where eigenpairs are). x may equal b: no. */
picket_status pk_factor_solve_real(pk_factor *factor, const double *b, double *x);
/* The same for a complex b and a real factor, real and imaginary part by themselves; a part that is
 * rounding beside the other (below 1e-13 of it) is taken for zero and costs nothing.
 *   n     order
 *   work  [2n]; x may equal b: yes */
picket_status pk_factor_solve_parts(pk_factor *factor, int64_t n, const double complex *b,
                                    double complex *x, double *work);
picket_status pk_factor_solve_complex(pk_factor *factor, const double complex *b,
                                      double complex *x);
/* x = A⁻ᵀ b (plain transpose). */
picket_status pk_factor_solve_transposed_complex(pk_factor *factor, const double complex *b,
                                                 double complex *x);

pk_factor_facts pk_factor_cost(const pk_factor *factor);

#endif
