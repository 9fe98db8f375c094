/* Products against the same sums written out over a dense copy, and the Laplacian of a plane. */
#include "unit/linear_cases.h"

enum { NX = 6, NY = 4, N = NX * NY };

/* Sums of five products of order one. */
static const double TIGHT = 1e-14;

static void dense_copy(const laplacian *a, double complex *dense) {
  memset(dense, 0, N * N * sizeof *dense);
  for (int64_t j = 0; j < N; j++) {
    for (int64_t p = a->pattern.start[j]; p < a->pattern.start[j + 1]; p++) {
      dense[a->pattern.row[p] + j * N] = a->complex_[p];
    }
  }
}

static void products_agree_with_the_dense_sums(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, true, 0.7, 0.3 + 0.2 * I);
  double complex dense[N * N], x[N], y[N], t[N];
  double real_x[N], real_y[N];
  uint64_t seed = 1;
  dense_copy(&a, dense);
  for (int i = 0; i < N; i++) {
    x[i] = next_complex(&seed);
    real_x[i] = next_number(&seed);
  }
  pk_sparse_times_complex(&a.pattern, a.complex_, x, y);
  pk_sparse_transposed_times_complex(&a.pattern, a.complex_, x, t);
  pk_sparse_times_real(&a.pattern, a.real, real_x, real_y);
  for (int i = 0; i < N; i++) {
    double complex plain = 0.0, transposed = 0.0;
    double real = 0.0;
    for (int j = 0; j < N; j++) {
      plain += dense[i + j * N] * x[j];
      transposed += dense[j + i * N] * x[j];
      real += creal(dense[i + j * N]) * real_x[j];
    }
    assert_true(cabs(y[i] - plain) < TIGHT);
    assert_true(cabs(t[i] - transposed) < TIGHT);
    assert_near(real_y[i], real, TIGHT);
  }
  laplacian_free(&a);
}

static void laplacian_of_a_plane_vanishes_inside(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, false, 0.0, 0.0);
  double x[N], y[N];
  for (int i = 0; i < N; i++) {
    x[i] = 1.0 + 2.0 * (i % NX) - 3.0 * (i / NX);
  }
  pk_sparse_times_real(&a.pattern, a.real, x, y);
  for (int row = 1; row < NY - 1; row++) {
    for (int column = 1; column < NX - 1; column++) {
      assert_near(y[row * NX + column], 0.0, TIGHT);
    }
  }
  laplacian_free(&a);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(products_agree_with_the_dense_sums),
      cmocka_unit_test(laplacian_of_a_plane_vanishes_inside),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
