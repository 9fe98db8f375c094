/* What the tests of the linear rooms share: seeded numbers and discrete Laplacians, whose spectra
 * are closed forms. */
#ifndef PK_TEST_LINEAR_CASES_H
#define PK_TEST_LINEAR_CASES_H

#include <complex.h>
#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/context.h"
#include "sparse/sparse.h"
#include "unit/near.h"
#include "unit/short_memory.h"

#define PI 3.14159265358979323846

/* Numbers in [-1, 1) of a fixed sequence (Knuth's multiplier, MMIX). */
static inline double next_number(uint64_t *state) {
  *state = *state * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
  return (double)(*state >> 11) / 4503599627370496.0 - 1.0;
}

static inline double complex next_complex(uint64_t *state) {
  const double re = next_number(state);
  return re + I * next_number(state);
}

/* The five-point Laplacian of nx × ny nodes with spacing 1, Dirichlet outside, or periodic along x
 * with a Bloch phase (periodic needs nx >= 3): diagonal 4, neighbours -1, the wrap-around edges
 * -exp(±i phase). For ny = 1 the diagonal is 2: the one-dimensional Laplacian. */
typedef struct laplacian {
  pk_pattern pattern;
  double *real;
  double complex *complex_;
} laplacian;

static inline void laplacian_entry(laplacian *a, int64_t row, double complex value) {
  int64_t p = a->pattern.start[a->pattern.n]++; /* the end so far */
  int64_t first = p;
  while (first > 0 && a->pattern.row[first - 1] > row &&
         first > a->pattern.start[a->pattern.n + 1]) {
    a->pattern.row[first] = a->pattern.row[first - 1];
    a->complex_[first] = a->complex_[first - 1];
    first--;
  }
  a->pattern.row[first] = row;
  a->complex_[first] = value;
}

static inline laplacian laplacian_create(int nx, int ny, bool periodic, double phase,
                                         double complex shift) {
  const int64_t n = (int64_t)nx * ny;
  laplacian a = {
      {n, calloc((size_t)n + 2, sizeof(int64_t)), calloc((size_t)n * 5, sizeof(int64_t))},
      calloc((size_t)n * 5, sizeof(double)),
      calloc((size_t)n * 5, sizeof(double complex))};
  int64_t *end = &a.pattern.start[n], *column_start = &a.pattern.start[n + 1];
  for (int64_t c = 0; c < n; c++) {
    const int64_t x = c % nx, y = c / nx;
    *column_start = *end;
    if (c < n) {
      a.pattern.start[c] = *end;
    }
    laplacian_entry(&a, c, (ny == 1 ? 2.0 : 4.0) - shift);
    if (x > 0 || periodic) {
      laplacian_entry(&a, x > 0 ? c - 1 : c + nx - 1, x > 0 ? -1.0 : -cexp(-I * phase));
    }
    if (x < nx - 1 || periodic) {
      laplacian_entry(&a, x < nx - 1 ? c + 1 : c - nx + 1, x < nx - 1 ? -1.0 : -cexp(I * phase));
    }
    if (y > 0) {
      laplacian_entry(&a, c - nx, -1.0);
    }
    if (y < ny - 1) {
      laplacian_entry(&a, c + nx, -1.0);
    }
  }
  for (int64_t p = 0; p < *end; p++) {
    a.real[p] = creal(a.complex_[p]);
  }
  return a;
}

static inline void laplacian_free(laplacian *a) {
  free(a->pattern.start);
  free(a->pattern.row);
  free(a->real);
  free(a->complex_);
}

/* Eigenvalue k = 1 … n of the one-dimensional Dirichlet Laplacian (any text on finite differences).
 */
static inline double dirichlet_level(int k, int n) {
  const double s = sin(k * PI / (2.0 * (n + 1)));
  return 4.0 * s * s;
}

/* Eigenvalue j of the ring of n nodes with a Bloch phase over the whole ring. */
static inline double ring_level(int j, int n, double phase) {
  const double s = sin((2.0 * PI * j + phase) / (2.0 * n));
  return 4.0 * s * s;
}

#endif
