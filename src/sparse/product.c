/* Products of a sparse matrix and a vector.
 *
 *   y_i = Σ_j a_ij x_j     column by column: each x_j is spread over the rows of column j
 *   y_j = Σ_i a_ij x_i     the transpose: each y_j is gathered from the rows of column j
 *
 * Compressed columns: column j holds its rows at row[start[j] … start[j+1]-1], values alike. */
#include <string.h>

#include "sparse/sparse.h"

void pk_sparse_times_real(const pk_pattern *pattern, const double *values, const double *x,
                          double *y) {
  memset(y, 0, (size_t)pattern->n * sizeof *y);
  for (int64_t j = 0; j < pattern->n; j++) {
    for (int64_t p = pattern->start[j]; p < pattern->start[j + 1]; p++) {
      y[pattern->row[p]] += values[p] * x[j];
    }
  }
}

void pk_sparse_times_complex(const pk_pattern *pattern, const double complex *values,
                             const double complex *x, double complex *y) {
  for (int64_t i = 0; i < pattern->n; i++) {
    y[i] = 0.0;
  }
  for (int64_t j = 0; j < pattern->n; j++) {
    for (int64_t p = pattern->start[j]; p < pattern->start[j + 1]; p++) {
      y[pattern->row[p]] += values[p] * x[j];
    }
  }
}

void pk_sparse_transposed_times_complex(const pk_pattern *pattern, const double complex *values,
                                        const double complex *x, double complex *y) {
  for (int64_t j = 0; j < pattern->n; j++) {
    double complex sum = 0.0;
    for (int64_t p = pattern->start[j]; p < pattern->start[j + 1]; p++) {
      sum += values[p] * x[pattern->row[p]];
    }
    y[j] = sum;
  }
}
