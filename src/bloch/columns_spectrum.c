/* The dense problem of a reduced cell, T(ξ)x = (ξ A + A₀ + ξ⁻¹ A') x = 0 with A = S12, A' = S21.
 *
 * Waves that decay fast in a period leave A and A' with a low numerical rank, A = Y Zᵀ, A' = Y'
 * Z'ᵀ, found by random sampling (N. Halko, P. G. Martinsson, J. A. Tropp, SIAM Rev. 53, 217
 * (2011)). About a shift σ, with θ = 1/(ξ - σ), p = Zᵀx, q = Z'ᵀx/ξ, W = T(σ)⁻¹Y, W' = T(σ)⁻¹Y': θ
 * x = -W p + W' q/σ θ p = -ZᵀW p + ZᵀW' q/σ θ q = -Z'ᵀW p/σ + Z'ᵀW' q/σ² - q/σ a standard
 * eigenproblem of the order of both ranks together, bounded at ξ = 0 and ∞. From a left eigenvector
 * (u, w): yᵀT(ξ) = 0 with y = T(σ)⁻ᵀ(Z u + Z' w/σ). A mirrored cell has A = A', so T depends on μ =
 * ξ + 1/ξ only, and with θ = 1/(μ - μ_σ) θ p = -ZᵀT(σ)⁻¹Y p,   x = T(σ)⁻¹Y p,   y = T(σ)⁻ᵀZ u is of
 * the order of one rank.
 */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"
#include "dense/dense.h"

/* What is dropped from A, relative to A: waves that change by more than 1e12 in a period. It
 * changes vectors by exp(reach) times as much, and ξ not at all, see columns_modes.c. */
static const double DROPPED = 1e-12;
enum {
  SAMPLES = 16, /* columns sampled at a time: BLAS-3, and at most that much rank too many */
  SHIFTS = 3    /* tried until none is at a wave */
};
/* Shifts are near the unit circle but no reported wave is likely to be there. */
static const double complex SHIFT[SHIFTS] = {0.65 + 0.95 * I, -0.35 + 1.15 * I, 0.97 - 0.71 * I};
/* |θ| above this costs the digits that the other waves need. */
static const double TOO_NEAR = 1e4;
static double next_number(uint64_t *state) {
  *state = *state * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407); /* Knuth, MMIX */
  return (double)(*state >> 11) / 4503599627370496.0 - 1.0;
}

/* One batch: Q = an orthonormal basis of A Ω, Zᵢ = Aᵀ Q*, A → A - Q Zᵢᵀ. */
static picket_status sample(picket_context *context, int n, int batch, uint64_t *seed,
                            double complex *work, double complex *A, double complex *Q,
                            double complex *Z) {
  size_t entries = (size_t)n * (size_t)batch;
  for (size_t i = 0; i < entries; i++) {
    work[i] = next_number(seed);
  }
  pk_dense_times(n, batch, n, 1, A, work, 0, Q);
  picket_status status = pk_dense_orthonormal(context, n, batch, Q);
  if (status != PICKET_OK) {
    return status;
  }
  for (size_t i = 0; i < entries; i++) {
    work[i] = conj(Q[i]);
  }
  pk_dense_transposed_times(n, batch, n, 1, A, work, 0, Z);
  for (int r = 0; r < n; r++) {
    for (int k = 0; k < batch; k++) {
      work[k + (size_t)r * (size_t)batch] = Z[(size_t)r + (size_t)k * (size_t)n];
    }
  }
  pk_dense_times(n, n, batch, -1, Q, work, 1, A);
  return PICKET_OK;
}

static picket_status find_rank(picket_context *context, int n, const double complex *matrix,
                               pk_low_rank *out) {
  size_t n2 = (size_t)n * (size_t)n;
  double complex *A = pk_copy(context, matrix, n2, sizeof *A);
  double complex *work = PK_NEW(context, (size_t)n * SAMPLES, double complex);
  out->Y = PK_NEW(context, n2, double complex);
  out->Z = PK_NEW(context, n2, double complex);
  picket_status status = A && work && out->Y && out->Z ? PICKET_OK : PICKET_ERROR_MEMORY;
  uint64_t seed = 20223;
  double whole = status == PICKET_OK ? pk_dense_norm((long)n2, A) : 0, left = whole;
  while (status == PICKET_OK && left > DROPPED * whole && out->rank < n) {
    int batch = n - out->rank < SAMPLES ? n - out->rank : SAMPLES;
    size_t at = (size_t)out->rank * (size_t)n;
    status = sample(context, n, batch, &seed, work, A, out->Y + at, out->Z + at);
    out->rank += batch;
    left = pk_dense_norm((long)n2, A);
  }
  pk_free(context, A);
  pk_free(context, work);
  return status;
}

static picket_status find_ranks(pk_spectrum *s) {
  const pk_columns *c = s->columns;
  picket_status status = find_rank(s->context, s->n, c->whole.s12, &s->forward);
  if (status == PICKET_OK && !c->facts.mirrored) {
    if (c->facts.symmetric) {
      s->backward = (pk_low_rank){s->forward.rank, s->forward.Z, s->forward.Y};
    } else {
      status = find_rank(s->context, s->n, c->whole.s21, &s->backward);
    }
  }
  s->order = s->forward.rank + s->backward.rank;
  return status;
}

static picket_status factor_shifted(pk_spectrum *s, double complex sigma) {
  s->sigma = sigma;
  pk_columns_matrix(s->columns, sigma, s->T);
  picket_status status = pk_dense_lu(s->context, s->n, s->T, s->pivots);
  if (status == PICKET_OK) {
    size_t n = (size_t)s->n, r = (size_t)s->forward.rank;
    memcpy(s->W, s->forward.Y, n * r * sizeof *s->W);
    if (s->backward.rank > 0) {
      memcpy(s->W + n * r, s->backward.Y, n * (size_t)s->backward.rank * sizeof *s->W);
    }
    pk_dense_lu_solve(s->n, s->T, s->pivots, s->order, s->W);
  }
  return status;
}

/* C of the head of this file, from G = [Z Z']ᵀ W. */
static void small_matrix(const pk_spectrum *s, double complex *C) {
  int r = s->forward.rank, m = s->order;
  double complex *G = s->right; /* room that is not used yet */
  double complex inverse = 1 / s->sigma;
  pk_dense_transposed_times(r, m, s->n, -1, s->forward.Z, s->W, 0, G);
  for (int j = 0; j < m; j++) {
    for (int i = 0; i < r; i++) {
      C[i + (size_t)j * (size_t)m] = G[i + (size_t)j * (size_t)r] * (j < r ? 1 : -inverse);
    }
  }
  int b = s->backward.rank;
  if (b == 0) {
    return;
  }
  pk_dense_transposed_times(b, m, s->n, -inverse, s->backward.Z, s->W, 0, G);
  for (int j = 0; j < m; j++) {
    for (int i = 0; i < b; i++) {
      C[r + i + (size_t)j * (size_t)m] = G[i + (size_t)j * (size_t)b] * (j < r ? 1 : -inverse);
    }
  }
  for (int i = r; i < m; i++) {
    C[i + (size_t)i * (size_t)m] -= inverse;
  }
}

static picket_status reserve_spectrum(pk_spectrum *s) {
  size_t n = (size_t)s->n, m = (size_t)s->order;
  s->T = PK_NEW(s->context, n * n, double complex);
  s->pivots = PK_NEW(s->context, n, int);
  s->W = PK_NEW(s->context, n * m, double complex);
  s->theta = PK_NEW(s->context, m, double complex);
  s->right = PK_NEW(s->context, m * m, double complex);
  bool one_sided = s->columns->facts.symmetric;
  s->left = one_sided ? NULL : PK_NEW(s->context, m * m, double complex);
  bool all = s->T && s->pivots && s->W && s->theta && s->right && (one_sided || s->left);
  return all ? PICKET_OK : PICKET_ERROR_MEMORY;
}

void pk_spectrum_close(pk_spectrum *s) {
  bool borrowed = s->backward.Y == s->forward.Z;
  void *arrays[] = {s->forward.Y,
                    s->forward.Z,
                    borrowed ? NULL : s->backward.Y,
                    borrowed ? NULL : s->backward.Z,
                    s->T,
                    s->pivots,
                    s->W,
                    s->theta,
                    s->right,
                    s->left};
  for (size_t i = 0; i < sizeof arrays / sizeof arrays[0]; i++) {
    pk_free(s->context, arrays[i]);
  }
}

static picket_status solve_at(pk_spectrum *s, double complex sigma, double complex *C,
                              double *largest) {
  picket_status status = factor_shifted(s, sigma);
  if (status == PICKET_OK) {
    small_matrix(s, C);
    status = pk_dense_general(s->context, s->order, C, s->theta, s->left, s->right);
  }
  *largest = status == PICKET_OK ? 0 : INFINITY;
  for (int i = 0; status == PICKET_OK && i < s->order; i++) {
    *largest = fmax(*largest, cabs(s->theta[i]));
  }
  return status;
}

picket_status pk_spectrum_solve(const pk_columns *columns, pk_spectrum *s) {
  *s = (pk_spectrum){.context = columns->context, .columns = columns, .n = columns->n};
  picket_status status = find_ranks(s);
  if (status == PICKET_OK) {
    status = reserve_spectrum(s);
  }
  size_t m = (size_t)s->order;
  double complex *C = status == PICKET_OK ? PK_NEW(s->context, m * m, double complex) : NULL;
  if (!C) {
    return PICKET_ERROR_MEMORY;
  }
  double largest = s->order > 0 ? INFINITY : 0;
  for (int k = 0; k < SHIFTS && status != PICKET_ERROR_MEMORY && !(largest < TOO_NEAR); k++) {
    status = solve_at(s, SHIFT[k], C, &largest);
  }
  pk_free(s->context, C);
  if (status == PICKET_OK) {
    pk_message_clear(s->context); /* of shifts that failed */
  }
  return status;
}

static void scale_to_unit(int n, double complex *x) {
  double norm = pk_dense_norm(n, x);
  for (int i = 0; i < n; i++) {
    x[i] /= norm;
  }
}

void pk_spectrum_right(const pk_spectrum *s, int index, double complex *work, double complex *x) {
  int r = s->forward.rank, m = s->order;
  const double complex *v = s->right + (size_t)index * (size_t)m;
  for (int i = 0; i < m; i++) {
    work[i] = i < r ? v[i] : -v[i] / s->sigma;
  }
  pk_dense_times(s->n, 1, m, 1, s->W, work, 0, x);
  scale_to_unit(s->n, x);
}

/* LAPACK's left vectors are uᴴ. */
void pk_spectrum_left(const pk_spectrum *s, int index, double complex *work, double complex *y) {
  int r = s->forward.rank, m = s->order;
  const double complex *u = s->left + (size_t)index * (size_t)m;
  for (int i = 0; i < m; i++) {
    work[i] = i < r ? conj(u[i]) : conj(u[i]) / s->sigma;
  }
  pk_dense_times(s->n, 1, r, 1, s->forward.Z, work, 0, y);
  if (m > r) {
    pk_dense_times(s->n, 1, m - r, 1, s->backward.Z, work + r, 1, y);
  }
  pk_dense_lu_solve_transposed(s->n, s->T, s->pivots, 1, y);
  scale_to_unit(s->n, y);
}
