/* The eigenvalue wall: spectra in closed form by shift-inversion through the sparse wall,
 * residuals, failures on the way, repeatability, and several threads at once. */
#include <pthread.h>

#include "dense/dense.h"
#include "eigen/eigen.h"
#include "unit/linear_cases.h"

/* Ritz values of Hermitian operators are better than the tolerance of 1e-10 on residuals: their
 * error is its square over the gap. What is left is the rounding of solves of condition 1e4. */
static const double TIGHT = 1e-11;

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

/* An operator with a fuse: application number `fails_at` (from 1) fails. */
typedef struct inverse {
  pk_factor *factor;
  picket_context *context;
  int calls, fails_at;
  bool gives_nan;
} inverse;

static picket_status burn(inverse *op, double *y) {
  op->calls++;
  if (op->calls != op->fails_at) {
    return PICKET_OK;
  }
  if (op->gives_nan) {
    y[0] = NAN;
    return PICKET_OK;
  }
  return pk_fail(op->context, PICKET_ERROR_STOPPED, "stopped at application %d", op->calls);
}

static picket_status apply_real(void *user, const double *x, double *y) {
  inverse *op = user;
  picket_status status = pk_factor_solve_real(op->factor, x, y);
  return status == PICKET_OK ? burn(op, y) : status;
}

static picket_status apply_complex(void *user, const double complex *x, double complex *y) {
  inverse *op = user;
  picket_status status = pk_factor_solve_complex(op->factor, x, y);
  return status == PICKET_OK ? burn(op, (double *)y) : status;
}

static inverse inverse_of(picket_context *c, const laplacian *a, pk_scalar scalar) {
  inverse op = {.context = c};
  assert_int_equal(pk_factor_create(c, &a->pattern, scalar, &op.factor), PICKET_OK);
  assert_int_equal(scalar == PK_REAL ? pk_factor_real(op.factor, a->real)
                                     : pk_factor_complex(op.factor, a->complex_),
                   PICKET_OK);
  return op;
}

static void laplacian_levels_by_shift_inversion(void **state) {
  (void)state;
  enum { N = 200, WANTED = 6 };
  laplacian a = laplacian_create(N, 1, false, 0.0, 0.0);
  inverse op = inverse_of(context, &a, PK_REAL);
  const pk_eigen_request request = {.n = N, .wanted = WANTED, .seed = 7};
  double values[WANTED], vectors[WANTED * N], product[N];
  int found = 0, applications = 0;
  assert_int_equal(pk_eigen_symmetric(context, &request, apply_real, &op, values, vectors, &found,
                                      &applications),
                   PICKET_OK);
  assert_int_equal(found, WANTED);
  assert_int_equal(applications, op.calls);
  for (int k = 0; k < WANTED; k++) {
    const double *v = vectors + k * N;
    const double level = dirichlet_level(k + 1, N);
    assert_near(1.0 / values[k] / level, 1.0, TIGHT);
    pk_sparse_times_real(&a.pattern, a.real, v, product);
    for (int i = 0; i < N; i++) {
      assert_near(product[i], level * v[i], TIGHT);
    }
    for (int l = 0; l <= k; l++) {
      double dot = 0.0;
      for (int i = 0; i < N; i++) {
        dot += v[i] * vectors[l * N + i];
      }
      assert_near(dot, k == l, TIGHT);
    }
  }
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* A ring with a Bloch phase: 4 sin²((2πj + φ)/2n), nearest to a shift inside the spectrum. */
static void bloch_ring_levels_near_a_shift(void **state) {
  (void)state;
  enum { N = 150, WANTED = 5 };
  const double phase = 0.8, shift = 1.03;
  laplacian a = laplacian_create(N, 1, true, phase, shift);
  inverse op = inverse_of(context, &a, PK_COMPLEX);
  const pk_eigen_request request = {.n = N, .wanted = WANTED, .seed = 7};
  double complex values[WANTED], vectors[WANTED * N], product[N];
  int found = 0, used[N] = {0};
  assert_int_equal(
      pk_eigen_complex(context, &request, apply_complex, &op, values, vectors, &found, NULL),
      PICKET_OK);
  assert_int_equal(found, WANTED);
  for (int k = 0; k < WANTED; k++) {
    int nearest = -1;
    for (int j = 0; j < N; j++) {
      const double distance = fabs(ring_level(j, N, phase) - shift);
      if (!used[j] && (nearest < 0 || distance < fabs(ring_level(nearest, N, phase) - shift))) {
        nearest = j;
      }
    }
    used[nearest] = 1;
    const double level = ring_level(nearest, N, phase);
    assert_near(creal(shift + 1.0 / values[k]), level, TIGHT);
    assert_near(cimag(1.0 / values[k]), 0.0, TIGHT);
    assert_near(pk_dense_norm(N, vectors + k * N), 1.0, 1e-14);
    pk_sparse_times_complex(&a.pattern, a.complex_, vectors + k * N, product);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(product[i] - (level - shift) * vectors[k * N + i]) < 1e-9);
    }
  }
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* A complex shift makes the inverse neither Hermitian nor symmetric with a Bloch phase. */
static void complex_shift_gives_the_same_levels(void **state) {
  (void)state;
  enum { N = 150, WANTED = 3 };
  const double phase = 0.8;
  const double complex shift = 0.2 + 0.05 * I;
  laplacian a = laplacian_create(N, 1, true, phase, shift);
  inverse op = inverse_of(context, &a, PK_COMPLEX);
  const pk_eigen_request request = {.n = N, .wanted = WANTED, .seed = 3};
  double complex values[WANTED], vectors[WANTED * N];
  int found = 0;
  assert_int_equal(
      pk_eigen_complex(context, &request, apply_complex, &op, values, vectors, &found, NULL),
      PICKET_OK);
  assert_int_equal(found, WANTED);
  for (int k = 0; k < WANTED; k++) {
    const double complex level = shift + 1.0 / values[k];
    double distance = INFINITY;
    for (int j = 0; j < N; j++) {
      distance = fmin(distance, cabs(level - ring_level(j, N, phase)));
    }
    assert_true(distance < TIGHT);
    assert_true(k == 0 || cabs(values[k]) <= cabs(values[k - 1]));
  }
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* The dense solver takes over where the basis is the whole space: all pairs, doubles included. */
static void tiny_orders_give_every_pair(void **state) {
  (void)state;
  for (int n = 1; n <= 6; n++) {
    laplacian a = laplacian_create(n, 1, false, 0.0, 0.0);
    inverse real = inverse_of(context, &a, PK_REAL), op = inverse_of(context, &a, PK_COMPLEX);
    const pk_eigen_request request = {.n = n, .wanted = n};
    double values[6], vectors[36];
    double complex z[6], zvectors[36];
    int found = 0, applications = 0;
    assert_int_equal(pk_eigen_symmetric(context, &request, apply_real, &real, values, vectors,
                                        &found, &applications),
                     PICKET_OK);
    assert_int_equal(found, n);
    assert_int_equal(applications, n);
    assert_int_equal(
        pk_eigen_complex(context, &request, apply_complex, &op, z, zvectors, &found, &applications),
        PICKET_OK);
    assert_int_equal(found, n);
    for (int k = 0; k < n; k++) {
      assert_near(1.0 / values[k], dirichlet_level(k + 1, n), TIGHT);
      assert_true(cabs(1.0 / z[k] - dirichlet_level(k + 1, n)) < TIGHT);
    }
    pk_factor_free(real.factor);
    pk_factor_free(op.factor);
    laplacian_free(&a);
  }
  enum { RING = 9 }; /* levels 0 (shifted), and four pairs */
  laplacian a = laplacian_create(RING, 1, true, 0.0, -1.0);
  inverse op = inverse_of(context, &a, PK_REAL);
  const pk_eigen_request request = {.n = RING, .wanted = 5};
  double values[5], vectors[5 * RING];
  int found = 0;
  assert_int_equal(
      pk_eigen_symmetric(context, &request, apply_real, &op, values, vectors, &found, NULL),
      PICKET_OK);
  for (int k = 0; k < 5; k++) {
    assert_near(1.0 / values[k] - 1.0, ring_level((k + 1) / 2, RING, 0.0), TIGHT);
  }
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* One run on a plane of 20 × 15 nodes, for the tests of failures and digits. */
enum { PLANE_X = 20, PLANE_Y = 15, PLANE = PLANE_X * PLANE_Y, LEVELS = 4 };

typedef struct plane_result {
  double values[LEVELS], vectors[LEVELS * PLANE];
  double complex z[LEVELS], zvectors[LEVELS * PLANE];
} plane_result;

static picket_status run_plane(picket_context *c, inverse *real, inverse *op, uint64_t seed,
                               const double *start, plane_result *out) {
  const pk_eigen_request request = {.n = PLANE, .wanted = LEVELS, .seed = seed, .every_copy = true};
  pk_eigen_request from_start = request;
  from_start.start = start;
  int found = 0;
  picket_status status =
      pk_eigen_symmetric(c, &from_start, apply_real, real, out->values, out->vectors, &found, NULL);
  if (status == PICKET_OK) {
    assert_int_equal(found, LEVELS);
    status = pk_eigen_complex(c, &request, apply_complex, op, out->z, out->zvectors, &found, NULL);
  }
  return status;
}

static void check_plane(const plane_result *result) {
  const int x[LEVELS] = {1, 2, 1, 3}, y[LEVELS] = {1, 1, 2, 1}; /* rising levels, by hand */
  for (int k = 0; k < LEVELS; k++) {
    const double level = dirichlet_level(x[k], PLANE_X) + dirichlet_level(y[k], PLANE_Y);
    assert_near(1.0 / result->values[k] / level, 1.0, TIGHT);
    assert_true(cabs(1.0 / result->z[k] / level - 1.0) < TIGHT);
  }
}

static void same_seed_gives_the_same_digits(void **state) {
  (void)state;
  laplacian a = laplacian_create(PLANE_X, PLANE_Y, false, 0.0, 0.0);
  inverse real = inverse_of(context, &a, PK_REAL), op = inverse_of(context, &a, PK_COMPLEX);
  static plane_result first, other, again;
  assert_int_equal(run_plane(context, &real, &op, 1, NULL, &first), PICKET_OK);
  assert_int_equal(run_plane(context, &real, &op, 2, NULL, &other), PICKET_OK);
  assert_int_equal(run_plane(context, &real, &op, 1, NULL, &again), PICKET_OK);
  assert_memory_equal(&first, &again, sizeof first);
  assert_memory_not_equal(&first, &other, sizeof first);
  check_plane(&first);
  check_plane(&other);
  pk_factor_free(real.factor);
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* A guess near the eigenvector is cheaper than none; an exact one, and one of zeros, do no harm. */
static void guesses_help_and_never_hurt(void **state) {
  (void)state;
  laplacian a = laplacian_create(PLANE_X, PLANE_Y, false, 0.0, 0.0);
  inverse op = inverse_of(context, &a, PK_REAL);
  double exact[PLANE], zero[PLANE] = {0}, near[PLANE], vector[PLANE];
  for (int i = 0; i < PLANE; i++) {
    exact[i] =
        sin(PI * (i % PLANE_X + 1) / (PLANE_X + 1)) * sin(PI * (i / PLANE_X + 1) / (PLANE_Y + 1));
    near[i] = exact[i] + 1e-3 * sin(7.0 * i);
  }
  const double *guesses[4] = {NULL, zero, exact, near};
  int applications[4];
  for (int g = 0; g < 4; g++) {
    const pk_eigen_request request = {.n = PLANE, .wanted = 1, .basis = 4, .start = guesses[g]};
    double value = 0.0;
    int found = 0;
    assert_int_equal(pk_eigen_symmetric(context, &request, apply_real, &op, &value, vector, &found,
                                        &applications[g]),
                     PICKET_OK);
    assert_int_equal(found, 1);
    assert_near(1.0 / value, dirichlet_level(1, PLANE_X) + dirichlet_level(1, PLANE_Y), TIGHT);
  }
  assert_true(applications[2] < applications[0]);
  assert_true(applications[3] < applications[0]);
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

static void failing_operator_passes_its_status_on(void **state) {
  (void)state;
  laplacian a = laplacian_create(PLANE_X, PLANE_Y, false, 0.0, 0.0);
  inverse real = inverse_of(context, &a, PK_REAL), op = inverse_of(context, &a, PK_COMPLEX);
  static plane_result result;
  assert_int_equal(run_plane(context, &real, &op, 1, NULL, &result), PICKET_OK);
  const int real_calls = real.calls, complex_calls = op.calls;
  for (int nan = 0; nan < 2; nan++) {
    for (int step = 0; step < 4; step++) { /* first, in the middle, and last application */
      real.calls = op.calls = real.fails_at = op.fails_at = 0;
      real.gives_nan = op.gives_nan = nan;
      if (step % 2 == 0) {
        real.fails_at = step == 0 ? 1 : real_calls / 2;
      } else {
        op.fails_at = step == 1 ? complex_calls / 2 : complex_calls;
      }
      assert_int_equal(run_plane(context, &real, &op, 1, NULL, &result),
                       nan ? PICKET_ERROR_NUMERIC : PICKET_ERROR_STOPPED);
      assert_non_null(strstr(picket_context_message(context), "application"));
    }
  }
  /* The lock was given back, and the half iteration leaves no trace. */
  real.fails_at = op.fails_at = 0;
  assert_int_equal(run_plane(context, &real, &op, 1, NULL, &result), PICKET_OK);
  check_plane(&result);
  pk_factor_free(real.factor);
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  laplacian a = laplacian_create(PLANE_X, PLANE_Y, false, 0.0, 0.0);
  inverse real = inverse_of(context, &a, PK_REAL), op = inverse_of(context, &a, PK_COMPLEX);
  static plane_result result;
  short_memory count = {0};
  picket_context *c = short_memory_context(&count);
  assert_int_equal(run_plane(c, &real, &op, 1, NULL, &result), PICKET_OK);
  const long asked = count.asked;
  assert_true(asked > 30);
  for (long i = 2; i <= asked; i++) {
    count.asked = 1; /* the context itself was the first */
    count.fail_at = i;
    assert_int_equal(run_plane(c, &real, &op, 1, NULL, &result), PICKET_ERROR_MEMORY);
    assert_int_equal(count.living, 1);
  }
  picket_context_free(c);
  assert_int_equal(count.living, 0);
  pk_factor_free(real.factor);
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* Four threads, each with its own context and factors: the same digits as alone. */
typedef struct worker {
  picket_context *context;
  inverse real, op;
  plane_result result;
  picket_status status;
} worker;

static void *work(void *user) {
  worker *w = user;
  for (int turn = 0; turn < 5 && w->status == PICKET_OK; turn++) {
    w->status = run_plane(w->context, &w->real, &w->op, 1, NULL, &w->result);
  }
  return NULL;
}

static void threads_do_not_disturb_each_other(void **state) {
  (void)state;
  enum { THREADS = 4 };
  static worker workers[THREADS];
  static plane_result alone;
  pthread_t threads[THREADS];
  laplacian a = laplacian_create(PLANE_X, PLANE_Y, false, 0.0, 0.0);
  for (int t = 0; t < THREADS; t++) {
    assert_int_equal(picket_context_create(NULL, &workers[t].context), PICKET_OK);
    workers[t].real = inverse_of(workers[t].context, &a, PK_REAL);
    workers[t].op = inverse_of(workers[t].context, &a, PK_COMPLEX);
  }
  assert_int_equal(run_plane(context, &workers[0].real, &workers[0].op, 1, NULL, &alone),
                   PICKET_OK);
  for (int t = 0; t < THREADS; t++) {
    assert_int_equal(pthread_create(&threads[t], NULL, work, &workers[t]), 0);
  }
  for (int t = 0; t < THREADS; t++) {
    assert_int_equal(pthread_join(threads[t], NULL), 0);
    assert_int_equal(workers[t].status, PICKET_OK);
    assert_memory_equal(&workers[t].result, &alone, sizeof alone);
    pk_factor_free(workers[t].real.factor);
    pk_factor_free(workers[t].op.factor);
    picket_context_free(workers[t].context);
  }
  laplacian_free(&a);
}

/* With so few vectors and so tight a demand not all can converge; that is no error, and what is
 * handed out is right. */
static void partial_convergence_is_an_outcome(void **state) {
  (void)state;
  enum { N = 400, WANTED = 3 };
  laplacian a = laplacian_create(N, 1, false, 0.0, 0.0);
  inverse op = inverse_of(context, &a, PK_REAL);
  const pk_eigen_request request = {.n = N, .wanted = WANTED, .basis = 5, .tolerance = 1e-30};
  double values[WANTED], vectors[WANTED * N];
  int found = -1;
  assert_int_equal(
      pk_eigen_symmetric(context, &request, apply_real, &op, values, vectors, &found, NULL),
      PICKET_OK);
  assert_true(found >= 0 && found <= WANTED);
  for (int k = 0; k < found; k++) {
    double best = INFINITY;
    for (int j = 1; j <= WANTED; j++) {
      best = fmin(best, fabs(1.0 / values[k] / dirichlet_level(j, N) - 1.0));
    }
    assert_true(best < 1e-9);
  }
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

/* One restart of a small basis costs at most about two bases of applications, where the run to the
 * end takes many more; what it hands out, if anything, is right to its own tolerance. */
static void a_run_may_be_cut_short(void **state) {
  (void)state;
  enum { N = 400, BASIS = 4 };
  laplacian a = laplacian_create(N, 1, false, 0.0, 0.0);
  inverse op = inverse_of(context, &a, PK_REAL);
  pk_eigen_request request = {.n = N, .wanted = 1, .basis = BASIS, .tolerance = 1e-14, .seed = 7};
  double value, vector[N];
  int found = 0, whole = 0, cut = 0;
  assert_int_equal(
      pk_eigen_symmetric(context, &request, apply_real, &op, &value, vector, &found, &whole),
      PICKET_OK);
  assert_int_equal(found, 1);
  assert_near(1.0 / value / dirichlet_level(1, N), 1.0, TIGHT);
  request.restarts = 1;
  assert_int_equal(
      pk_eigen_symmetric(context, &request, apply_real, &op, &value, vector, &found, &cut),
      PICKET_OK);
  assert_int_equal(found, 0);
  assert_true(cut <= 2 * BASIS);
  assert_true(whole > cut);
  pk_factor_free(op.factor);
  laplacian_free(&a);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(laplacian_levels_by_shift_inversion),
      cmocka_unit_test(bloch_ring_levels_near_a_shift),
      cmocka_unit_test(complex_shift_gives_the_same_levels),
      cmocka_unit_test(tiny_orders_give_every_pair),
      cmocka_unit_test(same_seed_gives_the_same_digits),
      cmocka_unit_test(guesses_help_and_never_hurt),
      cmocka_unit_test(failing_operator_passes_its_status_on),
      cmocka_unit_test(every_allocation_fails_once),
      cmocka_unit_test(threads_do_not_disturb_each_other),
      cmocka_unit_test(partial_convergence_is_an_outcome),
      cmocka_unit_test(a_run_may_be_cut_short),
  };
  return cmocka_run_group_tests(tests, setup, teardown);
}
