/* Dense linear algebra: the wall around LAPACK and BLAS (OpenBLAS). Column-major, like LAPACK:
 * element (i, j) of a matrix with leading dimension ld is a[i + j*ld]. */
#ifndef PK_DENSE_DENSE_H
#define PK_DENSE_DENSE_H

#include <complex.h>

#include "base/context.h"

/* Uses one BLAS thread from now on in this process and makes BLAS allocate its workspace (so that
 * running out of memory later is reported instead of hanging). Safe to call often. */
void pk_dense_warm_up(void);

/* Eigenpairs of a real symmetric matrix (destroyed; receives orthonormal eigenvectors as columns);
 * values rising. */
picket_status pk_dense_symmetric(picket_context *context, int n, double *a, double *values);

/* Eigenpairs of a complex Hermitian matrix (destroyed; receives eigenvectors); values rising. */
picket_status pk_dense_hermitian(picket_context *context, int n, double complex *a, double *values);

/* Eigenpairs of a general complex matrix (destroyed). `right` and `left` [n*n] receive eigenvectors
 * as columns, or are null. */
picket_status pk_dense_general(picket_context *context, int n, double complex *a,
                               double complex *values, double complex *left, double complex *right);

/* Generalised eigenpairs A x = λ B x of general complex matrices (both destroyed): λ = alpha/beta.
 */
picket_status pk_dense_pencil(picket_context *context, int n, double complex *a, double complex *b,
                              double complex *alpha, double complex *beta, double complex *right);

/* LU of a general complex matrix in place, pivots[n]; PICKET_ERROR_NUMERIC if singular. */
picket_status pk_dense_lu(picket_context *context, int n, double complex *a, int *pivots);
/* X = A⁻¹ B in place in b [n][columns], from pk_dense_lu. */
void pk_dense_lu_solve(int n, const double complex *a, const int *pivots, int columns,
                       double complex *b);
/* X = A⁻ᵀ B (plain transpose). */
void pk_dense_lu_solve_transposed(int n, const double complex *a, const int *pivots, int columns,
                                  double complex *b);

/* A⁻¹ in place; PICKET_ERROR_NUMERIC if singular. */
picket_status pk_dense_inverse(picket_context *context, int n, double complex *a);

/* Replaces the columns of a rows × columns matrix, rows >= columns, by orthonormal ones that span
 * them. */
picket_status pk_dense_orthonormal(picket_context *context, int rows, int columns,
                                   double complex *a);

/* C = alpha A B + beta C; A is m × k, B is k × n. */
void pk_dense_times(int m, int n, int k, double complex alpha, const double complex *a,
                    const double complex *b, double complex beta, double complex *c);
/* C = alpha Aᵀ B + beta C (plain transpose); A is k × m, B is k × n. */
void pk_dense_transposed_times(int m, int n, int k, double complex alpha, const double complex *a,
                               const double complex *b, double complex beta, double complex *c);

/* C = alpha A B + beta C, all n × n, for a C and a product A B that are (complex) symmetric: about
 * half of the work; the lower triangle is a copy of the upper one. */
void pk_dense_symmetric_times(int n, double complex alpha, const double complex *a,
                              const double complex *b, double complex beta, double complex *c);

/* Least squares: x[columns] minimising |A x - b| for a real rows × columns matrix (destroyed), rows
 * >= columns; b[rows] is destroyed. */
picket_status pk_dense_least_squares(picket_context *context, int rows, int columns, double *a,
                                     double *b, double *x);

/* Plain vector work. */
double complex pk_dense_dot(long n, const double complex *x,
                            const double complex *y); /* conj(x)·y */
double pk_dense_norm(long n, const double complex *x);

#endif
