/* The dense wall: residuals of what LAPACK gives back, in the layouts and meanings we promise, and
 * every allocation failing once. */
#include "dense/dense.h"

#include "unit/linear_cases.h"

enum { N = 12 };

/* Rounding of backward stable methods on matrices of order 12 and norm about 10. */
static const double TIGHT = 1e-12;

static picket_context *context;

static int setup(void **state) {
  (void)state;
  pk_dense_warm_up();
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int teardown(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static void fill(int count, double complex *a, uint64_t seed) {
  for (int i = 0; i < count; i++) {
    a[i] = next_complex(&seed);
  }
}

/* y = A x, or Aᴴ x. */
static void times(const double complex *a, bool adjoint, const double complex *x,
                  double complex *y) {
  for (int i = 0; i < N; i++) {
    y[i] = 0.0;
    for (int j = 0; j < N; j++) {
      y[i] += (adjoint ? conj(a[j + i * N]) : a[i + j * N]) * x[j];
    }
  }
}

static void symmetric_laplacian_has_its_closed_form(void **state) {
  (void)state;
  double a[N * N] = {0}, values[N];
  for (int i = 0; i < N; i++) {
    a[i + i * N] = 2.0;
    if (i > 0) {
      a[i + (i - 1) * N] = a[i - 1 + i * N] = -1.0;
    }
  }
  assert_int_equal(pk_dense_symmetric(context, N, a, values), PICKET_OK);
  for (int k = 0; k < N; k++) {
    assert_near(values[k], dirichlet_level(k + 1, N), TIGHT);
    /* Vector k is sin((k+1) π (i+1)/(N+1)) up to its sign and norm. */
    const double sign = a[k * N] > 0.0 ? 1.0 : -1.0;
    for (int i = 0; i < N; i++) {
      const double exact = sqrt(2.0 / (N + 1)) * sin((k + 1) * PI * (i + 1) / (N + 1));
      assert_near(sign * a[i + k * N], exact, TIGHT);
    }
  }
}

static void hermitian_pairs_satisfy_their_equation(void **state) {
  (void)state;
  double complex a[N * N], v[N * N], y[N];
  double values[N];
  fill(N * N, a, 1);
  for (int j = 0; j < N; j++) {
    for (int i = 0; i < j; i++) {
      a[j + i * N] = conj(a[i + j * N]);
    }
    a[j + j * N] = creal(a[j + j * N]);
  }
  memcpy(v, a, sizeof a);
  assert_int_equal(pk_dense_hermitian(context, N, v, values), PICKET_OK);
  for (int k = 0; k < N; k++) {
    assert_true(k == 0 || values[k] >= values[k - 1]);
    times(a, false, v + k * N, y);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(y[i] - values[k] * v[i + k * N]) < TIGHT);
    }
    for (int l = 0; l <= k; l++) {
      assert_true(cabs(pk_dense_dot(N, v + l * N, v + k * N) - (k == l ? 1.0 : 0.0)) < TIGHT);
    }
  }
}

static void general_pairs_satisfy_both_equations(void **state) {
  (void)state;
  double complex a[N * N], destroyed[N * N], left[N * N], right[N * N], values[N], y[N], alone[N];
  fill(N * N, a, 2);
  memcpy(destroyed, a, sizeof a);
  assert_int_equal(pk_dense_general(context, N, destroyed, values, left, right), PICKET_OK);
  for (int k = 0; k < N; k++) {
    times(a, false, right + k * N, y);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(y[i] - values[k] * right[i + k * N]) < TIGHT);
    }
    times(a, true, left + k * N, y);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(y[i] - conj(values[k]) * left[i + k * N]) < TIGHT);
    }
    assert_near(pk_dense_norm(N, right + k * N), 1.0, TIGHT);
  }
  memcpy(destroyed, a, sizeof a);
  assert_int_equal(pk_dense_general(context, N, destroyed, alone, NULL, NULL), PICKET_OK);
  double complex sum = 0.0;
  for (int k = 0; k < N; k++) {
    sum += alone[k] - a[k + k * N]; /* the trace */
  }
  assert_true(cabs(sum) < TIGHT);
}

static void pencil_pairs_and_an_infinite_one(void **state) {
  (void)state;
  double complex a[N * N], b[N * N], a2[N * N], b2[N * N], alpha[N], beta[N], x[N * N];
  double complex ax[N], bx[N];
  fill(N * N, a, 3);
  fill(N * N, b, 4);
  for (int j = 0; j < N; j++) {
    b[j * N] = 0.0; /* a zero row: B is singular, one eigenvalue is infinite */
  }
  memcpy(a2, a, sizeof a);
  memcpy(b2, b, sizeof b);
  assert_int_equal(pk_dense_pencil(context, N, a2, b2, alpha, beta, x), PICKET_OK);
  int infinite = 0;
  for (int k = 0; k < N; k++) {
    infinite += cabs(beta[k]) < TIGHT * cabs(alpha[k]);
    times(a, false, x + k * N, ax);
    times(b, false, x + k * N, bx);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(beta[k] * ax[i] - alpha[k] * bx[i]) < 100 * TIGHT);
    }
  }
  assert_int_equal(infinite, 1);
}

static void lu_solves_plain_and_transposed(void **state) {
  (void)state;
  enum { COLUMNS = 3 };
  double complex a[N * N], lu[N * N], x[N * COLUMNS], b[N * COLUMNS];
  int pivots[N];
  fill(N * N, a, 5);
  fill(N * COLUMNS, x, 6);
  memcpy(lu, a, sizeof a);
  assert_int_equal(pk_dense_lu(context, N, lu, pivots), PICKET_OK);
  pk_dense_times(N, COLUMNS, N, 1.0, a, x, 0.0, b);
  pk_dense_lu_solve(N, lu, pivots, COLUMNS, b);
  for (int i = 0; i < N * COLUMNS; i++) {
    assert_true(cabs(b[i] - x[i]) < 100 * TIGHT); /* the condition number is about 50 */
  }
  for (int c = 0; c < COLUMNS; c++) {
    for (int j = 0; j < N; j++) {
      b[j + c * N] = 0.0;
      for (int i = 0; i < N; i++) {
        b[j + c * N] += a[i + j * N] * x[i + c * N];
      }
    }
  }
  pk_dense_lu_solve_transposed(N, lu, pivots, COLUMNS, b);
  for (int i = 0; i < N * COLUMNS; i++) {
    assert_true(cabs(b[i] - x[i]) < 100 * TIGHT);
  }
}

static void singular_lu_is_refused_with_a_reason(void **state) {
  (void)state;
  double complex a[4] = {1.0, 2.0, 2.0, 4.0};
  int pivots[2];
  assert_int_equal(pk_dense_lu(context, 2, a, pivots), PICKET_ERROR_NUMERIC);
  assert_non_null(strstr(picket_context_message(context), "singular"));
}

static void times_handles_oblongs_and_scales(void **state) {
  (void)state;
  /* 2 × 3 by 3 × 1, worked out by hand: A = [1 2 3; 4 5 i], B = [1 0 1]ᵀ. */
  const double complex a[6] = {1.0, 4.0, 2.0, 5.0, 3.0, I}, b[3] = {1.0, 0.0, 1.0};
  double complex c[2] = {10.0, 20.0};
  pk_dense_times(2, 1, 3, 2.0, a, b, 0.5, c);
  assert_true(cabs(c[0] - (2.0 * 4.0 + 5.0)) < TIGHT);
  assert_true(cabs(c[1] - (2.0 * (4.0 + I) + 10.0)) < TIGHT);
  c[0] = c[1] = NAN; /* beta 0 means that C is not read */
  pk_dense_times(2, 1, 3, 1.0, a, b, 0.0, c);
  assert_true(cabs(c[0] - 4.0) < TIGHT);
}

static void inverse_undoes_and_refuses_the_singular(void **state) {
  (void)state;
  double complex a[N * N], inverse[N * N], product[N * N];
  fill(N * N, a, 7);
  memcpy(inverse, a, sizeof a);
  assert_int_equal(pk_dense_inverse(context, N, inverse), PICKET_OK);
  pk_dense_times(N, N, N, 1.0, a, inverse, 0.0, product);
  for (int i = 0; i < N * N; i++) {
    assert_true(cabs(product[i] - (i % (N + 1) == 0 ? 1.0 : 0.0)) < 100 * TIGHT);
  }
  double complex singular[4] = {1.0, 2.0, 2.0, 4.0};
  assert_int_equal(pk_dense_inverse(context, 2, singular), PICKET_ERROR_NUMERIC);
}

static void orthonormal_columns_span_the_given_ones(void **state) {
  (void)state;
  enum { COLUMNS = 4 };
  double complex a[N * COLUMNS], q[N * COLUMNS], rest[N];
  fill(N * COLUMNS, a, 8);
  memcpy(q, a, sizeof a);
  assert_int_equal(pk_dense_orthonormal(context, N, COLUMNS, q), PICKET_OK);
  for (int j = 0; j < COLUMNS; j++) {
    memcpy(rest, a + j * N, sizeof rest);
    for (int k = 0; k < COLUMNS; k++) {
      const double complex along = pk_dense_dot(N, q + k * N, a + j * N);
      assert_true(cabs(pk_dense_dot(N, q + k * N, q + j * N) - (j == k ? 1.0 : 0.0)) < TIGHT);
      for (int i = 0; i < N; i++) {
        rest[i] -= along * q[i + k * N];
      }
    }
    assert_true(pk_dense_norm(N, rest) < TIGHT);
  }
}

static void transposed_times_does_not_conjugate(void **state) {
  (void)state;
  /* Aᵀ B with A = [1 i; 2 0; 3 1] and B = [1 1 i]ᵀ, worked out by hand. */
  const double complex a[6] = {1.0, 2.0, 3.0, I, 0.0, 1.0}, b[3] = {1.0, 1.0, I};
  double complex c[2] = {2.0, 4.0};
  pk_dense_transposed_times(2, 1, 3, 1.0, a, b, 0.5, c);
  assert_true(cabs(c[0] - (4.0 + 3.0 * I)) < TIGHT);
  assert_true(cabs(c[1] - (2.0 + 2.0 * I)) < TIGHT);
}

/* A Aᵀ is symmetric; the order is above one panel, and not a multiple of it. */
static void symmetric_times_gives_the_whole_product(void **state) {
  (void)state;
  enum { ORDER = 150 };
  static double complex a[ORDER * ORDER], b[ORDER * ORDER], c[ORDER * ORDER], d[ORDER * ORDER];
  fill(ORDER * ORDER, a, 9);
  for (int j = 0; j < ORDER; j++) {
    for (int i = 0; i < ORDER; i++) {
      b[j + i * ORDER] = a[i + j * ORDER];
      c[i + j * ORDER] = d[i + j * ORDER] = i + j;
    }
  }
  pk_dense_times(ORDER, ORDER, ORDER, 2.0 * I, a, b, 0.5, c);
  pk_dense_symmetric_times(ORDER, 2.0 * I, a, b, 0.5, d);
  for (int i = 0; i < ORDER * ORDER; i++) {
    assert_true(cabs(c[i] - d[i]) < TIGHT * ORDER);
  }
}

static void least_squares_fits_a_parabola(void **state) {
  (void)state;
  enum { ROWS = 7 };
  double a[ROWS * 3], b[ROWS], x[3];
  for (int i = 0; i < ROWS; i++) {
    const double t = i - 3.0;
    a[i] = 1.0;
    a[i + ROWS] = t;
    a[i + 2 * ROWS] = t * t;
    /* A cubic of t orthogonal to all parabolas on these nodes leaves the fit as it is: t³ - 7 t,
     * since Σ t⁴ / Σ t² = 196 / 28. */
    b[i] = 3.0 - 2.0 * t + 0.5 * t * t + 0.1 * (t * t * t - 7.0 * t);
  }
  assert_int_equal(pk_dense_least_squares(context, ROWS, 3, a, b, x), PICKET_OK);
  assert_near(x[0], 3.0, TIGHT);
  assert_near(x[1], -2.0, TIGHT);
  assert_near(x[2], 0.5, TIGHT);
}

static void least_squares_of_deficient_rank_takes_the_shortest(void **state) {
  (void)state;
  double a[4] = {1.0, 1.0, 1.0, 1.0}, b[2] = {2.0, 2.0}, x[2];
  assert_int_equal(pk_dense_least_squares(context, 2, 2, a, b, x), PICKET_OK);
  assert_near(x[0], 1.0, TIGHT);
  assert_near(x[1], 1.0, TIGHT);
}

static void dot_conjugates_its_first_argument(void **state) {
  (void)state;
  const double complex x[2] = {I, 2.0}, y[2] = {1.0, 3.0 + I};
  assert_true(cabs(pk_dense_dot(2, x, y) - (6.0 + I)) < TIGHT);
  assert_near(pk_dense_norm(2, x), sqrt(5.0), TIGHT);
  assert_true(pk_dense_dot(0, x, y) == 0.0);
  const double complex huge[2] = {3e200, 4e200 * I};
  assert_near(pk_dense_norm(2, huge) / 5e200, 1.0, TIGHT);
}

static picket_status run_all(picket_context *c) {
  double complex a[4] = {2.0, 1.0, 1.0, 3.0}, b[4] = {1.0, 0.0, 0.0, 1.0}, alpha[2], beta[2], v[4];
  double real[4] = {2.0, 1.0, 1.0, 3.0}, values[2], x[2];
  picket_status status = pk_dense_symmetric(c, 2, real, values);
  if (status == PICKET_OK) {
    status = pk_dense_hermitian(c, 2, a, values);
  }
  if (status == PICKET_OK) {
    status = pk_dense_general(c, 2, a, alpha, NULL, v);
  }
  if (status == PICKET_OK) {
    status = pk_dense_pencil(c, 2, a, b, alpha, beta, v);
  }
  if (status == PICKET_OK) {
    status = pk_dense_least_squares(c, 2, 2, real, values, x);
  }
  double complex d[4] = {2.0, 1.0, 1.0, 3.0};
  if (status == PICKET_OK) {
    status = pk_dense_inverse(c, 2, d);
  }
  if (status == PICKET_OK) {
    status = pk_dense_orthonormal(c, 2, 2, d);
  }
  return status;
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  short_memory count = {0};
  picket_context *c = short_memory_context(&count);
  assert_non_null(c);
  assert_int_equal(run_all(c), PICKET_OK);
  const long calls = count.asked;
  assert_true(calls > 8);
  for (long i = 2; i <= calls; i++) {
    count.asked = 1; /* the context itself was the first */
    count.fail_at = i;
    assert_int_equal(run_all(c), PICKET_ERROR_MEMORY);
    assert_non_null(strstr(picket_context_message(c), "memory"));
    assert_int_equal(count.living, 1);
  }
  picket_context_free(c);
  assert_int_equal(count.living, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(symmetric_laplacian_has_its_closed_form),
      cmocka_unit_test(hermitian_pairs_satisfy_their_equation),
      cmocka_unit_test(general_pairs_satisfy_both_equations),
      cmocka_unit_test(pencil_pairs_and_an_infinite_one),
      cmocka_unit_test(lu_solves_plain_and_transposed),
      cmocka_unit_test(singular_lu_is_refused_with_a_reason),
      cmocka_unit_test(times_handles_oblongs_and_scales),
      cmocka_unit_test(inverse_undoes_and_refuses_the_singular),
      cmocka_unit_test(orthonormal_columns_span_the_given_ones),
      cmocka_unit_test(transposed_times_does_not_conjugate),
      cmocka_unit_test(symmetric_times_gives_the_whole_product),
      cmocka_unit_test(least_squares_fits_a_parabola),
      cmocka_unit_test(least_squares_of_deficient_rank_takes_the_shortest),
      cmocka_unit_test(dot_conjugates_its_first_argument),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, setup, teardown);
}
