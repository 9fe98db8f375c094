/* The sparse wall: solves by their residuals, singular and broken matrices refused, and memory
 * running out on our side and on UMFPACK's. */
#include <suitesparse/SuiteSparse_config.h>

#include "dense/dense.h"
#include "unit/linear_cases.h"

enum { NX = 30, NY = 20, N = NX * NY };

/* Condition number of the Laplacian, about 300, times rounding, with room for the growth of a
 * factorisation with threshold pivots. */
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

static void real_solve_gives_the_vector_back(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, false, 0.0, 0.0);
  pk_factor *factor = NULL;
  double exact[N], b[N], x[N];
  uint64_t seed = 1;
  for (int i = 0; i < N; i++) {
    exact[i] = next_number(&seed);
  }
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_REAL, &factor), PICKET_OK);
  assert_int_equal(pk_factor_real(factor, a.real), PICKET_OK);
  pk_sparse_times_real(&a.pattern, a.real, exact, b);
  assert_int_equal(pk_factor_solve_real(factor, b, x), PICKET_OK);
  for (int i = 0; i < N; i++) {
    assert_near(x[i], exact[i], TIGHT);
  }
  const pk_factor_facts facts = pk_factor_cost(factor);
  assert_true(facts.entries >= a.pattern.start[N] && facts.entries < (int64_t)N * N);
  assert_true(facts.flops > 0.0 && facts.peak_bytes > 16.0 * N);
  assert_non_null(strstr(facts.ordering, "METIS"));
  assert_true(facts.symbolic_seconds >= 0.0 && facts.numeric_seconds >= 0.0);
  pk_factor_free(factor);
  laplacian_free(&a);
}

/* b = A (u + i v): the parts come back each by itself; one that is rounding beside the other comes
 * back as zero, also when the answer takes the place of b. */
static void real_factors_solve_for_complex_numbers(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, false, 0.0, 0.0);
  pk_factor *factor = NULL;
  double exact[2][N], b[2][N], work[2 * N];
  double complex both[N];
  uint64_t seed = 3;
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_REAL, &factor), PICKET_OK);
  assert_int_equal(pk_factor_real(factor, a.real), PICKET_OK);
  for (int part = 0; part < 2; part++) {
    for (int i = 0; i < N; i++) {
      exact[part][i] = next_number(&seed);
    }
    pk_sparse_times_real(&a.pattern, a.real, exact[part], b[part]);
  }
  static const double weights[] = {1, 1e-12, 1e-14};
  for (int w = 0; w < 3; w++) {
    for (int i = 0; i < N; i++) {
      both[i] = b[0][i] + I * weights[w] * b[1][i];
    }
    assert_int_equal(pk_factor_solve_parts(factor, N, both, both, work), PICKET_OK);
    double kept = weights[w] < 1e-13 ? 0 : weights[w];
    for (int i = 0; i < N; i++) {
      assert_near(creal(both[i]), exact[0][i], TIGHT);
      assert_near(cimag(both[i]), kept * exact[1][i], TIGHT * kept);
    }
  }
  pk_factor_free(factor);
  laplacian_free(&a);
}

/* A Bloch phase and a complex shift: neither symmetric nor Hermitian. */
static void complex_solves_plain_and_transposed(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, true, 0.9, -0.1 + 0.3 * I);
  pk_factor *factor = NULL;
  double complex exact[N], b[N], x[N];
  uint64_t seed = 2;
  for (int i = 0; i < N; i++) {
    exact[i] = next_complex(&seed);
  }
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_COMPLEX, &factor), PICKET_OK);
  assert_int_equal(pk_factor_complex(factor, a.complex_), PICKET_OK);
  pk_sparse_times_complex(&a.pattern, a.complex_, exact, b);
  assert_int_equal(pk_factor_solve_complex(factor, b, x), PICKET_OK);
  for (int i = 0; i < N; i++) {
    assert_true(cabs(x[i] - exact[i]) < TIGHT);
  }
  pk_sparse_transposed_times_complex(&a.pattern, a.complex_, exact, b);
  assert_int_equal(pk_factor_solve_transposed_complex(factor, b, x), PICKET_OK);
  for (int i = 0; i < N; i++) {
    assert_true(cabs(x[i] - exact[i]) < TIGHT);
  }
  pk_factor_free(factor);
  laplacian_free(&a);
}

/* One symbolic phase serves two numeric ones, and every digit is the same the second time. */
static void symbolic_phase_is_kept_and_digits_repeat(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, false, 0.0, 0.0);
  laplacian shifted = laplacian_create(NX, NY, false, 0.0, 0.5);
  pk_factor *factor = NULL, *other = NULL;
  double b[N], first[N], middle[N], again[N];
  for (int i = 0; i < N; i++) {
    b[i] = cos(i);
  }
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_REAL, &factor), PICKET_OK);
  assert_int_equal(pk_factor_real(factor, a.real), PICKET_OK);
  assert_int_equal(pk_factor_solve_real(factor, b, first), PICKET_OK);
  assert_int_equal(pk_factor_real(factor, shifted.real), PICKET_OK);
  assert_int_equal(pk_factor_solve_real(factor, b, middle), PICKET_OK);
  assert_memory_not_equal(first, middle, sizeof first);
  srand(12345); /* METIS shares the generator with everybody: it must not matter */
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_REAL, &other), PICKET_OK);
  assert_int_equal(pk_factor_real(other, a.real), PICKET_OK);
  assert_int_equal(pk_factor_solve_real(other, b, again), PICKET_OK);
  assert_memory_equal(first, again, sizeof first);
  pk_factor_free(factor);
  pk_factor_free(other);
  laplacian_free(&a);
  laplacian_free(&shifted);
}

static void singular_and_broken_matrices_are_refused(void **state) {
  (void)state;
  enum { M = 5 };
  laplacian a = laplacian_create(M, 1, false, 0.0, 0.0);
  pk_factor *factor = NULL;
  double b[M] = {1, 1, 1, 1, 1}, x[M];
  assert_int_equal(pk_factor_create(context, &a.pattern, PK_REAL, &factor), PICKET_OK);
  double *zero = calloc(3 * M, sizeof *zero);
  assert_int_equal(pk_factor_real(factor, zero), PICKET_ERROR_NUMERIC);
  assert_non_null(strstr(picket_context_message(context), "singular"));
  zero[0] = NAN;
  assert_int_equal(pk_factor_real(factor, zero), PICKET_ERROR_NUMERIC);
  /* The factor stays usable. */
  assert_int_equal(pk_factor_real(factor, a.real), PICKET_OK);
  assert_int_equal(pk_factor_solve_real(factor, b, x), PICKET_OK);
  /* -x'' = 1 in differences: x_i = (i + 1)(M - i) / 2. */
  for (int i = 0; i < M; i++) {
    assert_near(x[i], (i + 1) * (M - i) / 2.0, 1e-13);
  }
  free(zero);
  pk_factor_free(factor);
  pk_factor_free(NULL);
  laplacian_free(&a);
}

static void matrix_of_order_one(void **state) {
  (void)state;
  int64_t start[2] = {0, 1}, row[1] = {0};
  const pk_pattern pattern = {1, start, row};
  const double complex value = 2.0 * I, b = 4.0;
  double complex x = 0.0;
  pk_factor *factor = NULL;
  assert_int_equal(pk_factor_create(context, &pattern, PK_COMPLEX, &factor), PICKET_OK);
  assert_int_equal(pk_factor_complex(factor, &value), PICKET_OK);
  assert_int_equal(pk_factor_solve_complex(factor, &b, &x), PICKET_OK);
  assert_true(cabs(x + 2.0 * I) < 1e-15);
  pk_factor_free(factor);
}

/* Both phases and a solve, with the error of the solve. */
static picket_status run_all(picket_context *c, const laplacian *a, double *error) {
  pk_factor *factor = NULL;
  double complex b[N], x[N];
  for (int i = 0; i < N; i++) {
    b[i] = 1.0;
  }
  picket_status status = pk_factor_create(c, &a->pattern, PK_COMPLEX, &factor);
  if (status == PICKET_OK) {
    status = pk_factor_complex(factor, a->complex_);
  }
  if (status == PICKET_OK) {
    status = pk_factor_solve_complex(factor, b, x);
  }
  if (status == PICKET_OK) {
    double complex back[N];
    *error = 0.0;
    pk_sparse_times_complex(&a->pattern, a->complex_, x, back);
    for (int i = 0; i < N; i++) {
      *error = fmax(*error, cabs(back[i] - b[i]));
    }
  }
  pk_factor_free(factor);
  return status;
}

static void every_allocation_of_ours_fails_once(void **state) {
  (void)state;
  laplacian a = laplacian_create(NX, NY, true, 0.4, 0.0);
  short_memory count = {0};
  picket_context *c = short_memory_context(&count);
  assert_non_null(c);
  double error = 1.0;
  assert_int_equal(run_all(c, &a, &error), PICKET_OK);
  const long calls = count.asked;
  assert_int_equal(calls, 1 + 3); /* the context; factor, indices and work */
  for (long i = 2; i <= calls; i++) {
    count.asked = 1;
    count.fail_at = i;
    assert_int_equal(run_all(c, &a, &error), PICKET_ERROR_MEMORY);
    assert_int_equal(count.living, 1);
  }
  picket_context_free(c);
  assert_int_equal(count.living, 0);
  laplacian_free(&a);
}

/* UMFPACK's side: the hooks of SuiteSparse, counting in the same way. */
static short_memory suite;
static bool suite_stays_empty; /* all later calls fail too */
enum { MOST_BLOCKS = 1000 };
static void *suite_blocks[MOST_BLOCKS]; /* the living ones, and nulls */

static bool suite_refuses(void) {
  suite.asked++;
  return suite.fail_at &&
         (suite.asked == suite.fail_at || (suite_stays_empty && suite.asked > suite.fail_at));
}

/* Where a living block is noted; of a null: a free place. */
static void **suite_place(const void *block) {
  int i = 0;
  while (i < MOST_BLOCKS - 1 && suite_blocks[i] != block) {
    i++;
  }
  assert_ptr_equal(suite_blocks[i], block);
  return &suite_blocks[i];
}

static void *suite_realloc(void *old, size_t bytes) {
  if (suite_refuses()) {
    return NULL;
  }
  void **place = suite_place(old);
  suite.living += old == NULL;
  *place = realloc(old, bytes);
  assert_non_null(*place);
  return *place;
}

static void *suite_malloc(size_t bytes) {
  return suite_realloc(NULL, bytes);
}

static void *suite_calloc(size_t count, size_t size) {
  void *block = suite_malloc(count * size);
  return block ? memset(block, 0, count * size) : NULL;
}

static void suite_free(void *pointer) {
  if (pointer) {
    *suite_place(pointer) = NULL;
    suite.living--;
    free(pointer);
  }
}

/* SuiteSparse 5.12 itself keeps four blocks when the memory ends inside its ordering. */
static void check_blocks(picket_status status) {
  const bool ordering = status != PICKET_OK && strstr(picket_context_message(context), "ordering");
  assert_true(suite.living == 0 || (ordering && suite.living <= 4));
  for (int i = 0; i < MOST_BLOCKS; i++) {
    free(suite_blocks[i]);
    suite_blocks[i] = NULL;
  }
}

static void every_allocation_of_suitesparse_fails(void **state) {
  (void)state;
  const struct SuiteSparse_config_struct saved = SuiteSparse_config;
  laplacian a = laplacian_create(NX, NY, true, 0.4, 0.0);
  double error = 1.0;
  suite = (short_memory){0};
  SuiteSparse_config.malloc_func = suite_malloc;
  SuiteSparse_config.calloc_func = suite_calloc;
  SuiteSparse_config.realloc_func = suite_realloc;
  SuiteSparse_config.free_func = suite_free;
  assert_int_equal(run_all(context, &a, &error), PICKET_OK);
  const long calls = suite.asked;
  assert_true(calls > 10);
  assert_int_equal(suite.living, 0);
  int refused = 0;
  for (int stays = 0; stays < 2; stays++) {
    suite_stays_empty = stays;
    for (long i = 1; i <= calls; i++) {
      suite = (short_memory){.fail_at = i};
      picket_status status = run_all(context, &a, &error);
      /* UMFPACK asks again for less when a large block is refused, so a run may succeed. */
      if (status == PICKET_OK) {
        assert_true(error < TIGHT);
      } else {
        assert_int_equal(status, PICKET_ERROR_MEMORY);
        assert_non_null(strstr(picket_context_message(context), "memory"));
        refused++;
      }
      check_blocks(status);
    }
  }
  assert_true(refused > calls);
  SuiteSparse_config = saved;
  laplacian_free(&a);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(real_solve_gives_the_vector_back),
      cmocka_unit_test(real_factors_solve_for_complex_numbers),
      cmocka_unit_test(complex_solves_plain_and_transposed),
      cmocka_unit_test(symbolic_phase_is_kept_and_digits_repeat),
      cmocka_unit_test(singular_and_broken_matrices_are_refused),
      cmocka_unit_test(matrix_of_order_one),
      cmocka_unit_test(every_allocation_of_ours_fails_once),
      cmocka_unit_test(every_allocation_of_suitesparse_fails),
  };
  return cmocka_run_group_tests(tests, setup, teardown);
}
