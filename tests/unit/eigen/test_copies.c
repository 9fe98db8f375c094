/* Multiple eigenvalues: every copy is found, for many start vectors, with independent vectors.
 *
 * The operators are diagonal with repeated values, so that the answer is known without a solve, and
 * an upper triangular one that is far from normal. */
#include "dense/dense.h"
#include "eigen/eigen.h"
#include "unit/linear_cases.h"

enum { N = 200, WANTED = 5, SEEDS = 30 };

/* The tolerance of the iteration, with room for the eigenvalues of an operator that is not normal.
 */
static const double TIGHT = 1e-8;

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

/* Like a shift-inverted spectrum: copies of 100 and 40, then a tail that falls fast. */
typedef struct spectrum {
  int first, second; /* copies of 100 and of 40 */
  double coupling;   /* of each element to the next */
} spectrum;

static double level(const spectrum *s, int i) {
  if (i < s->first) {
    return 100.0;
  }
  return i < s->first + s->second ? 40.0 : 20.0 / (1 + i - s->first - s->second);
}

static picket_status apply_real(void *user, const double *x, double *y) {
  for (int i = 0; i < N; i++) {
    y[i] = level(user, i) * x[i];
  }
  return PICKET_OK;
}

/* Turned by a phase, so that the values are complex. */
static const double complex TURN = 0.6 + 0.8 * I;

/* The coupling joins the two groups but not the copies within one, which stay diagonalisable. */
static picket_status apply_complex(void *user, const double complex *x, double complex *y) {
  const spectrum *s = user;
  for (int i = 0; i < N; i++) {
    const int next = i + s->first + s->second;
    y[i] = TURN * (level(s, i) * x[i] + (next < N ? s->coupling * x[next] : 0.0));
  }
  return PICKET_OK;
}

static void real_copies_are_all_found(void **state) {
  (void)state;
  for (int seed = 1; seed <= SEEDS; seed++) {
    spectrum s = {1 + seed % 3, 4, 0.0};
    const pk_eigen_request request = {
        .n = N, .wanted = WANTED, .seed = (uint64_t)seed, .every_copy = true};
    double values[WANTED], vectors[WANTED * N];
    int found = 0;
    assert_int_equal(
        pk_eigen_symmetric(context, &request, apply_real, &s, values, vectors, &found, NULL),
        PICKET_OK);
    assert_int_equal(found, WANTED);
    for (int k = 0; k < WANTED; k++) {
      assert_near(values[k], level(&s, k), TIGHT);
      for (int l = 0; l <= k; l++) {
        double dot = 0.0;
        for (int i = 0; i < N; i++) {
          dot += vectors[k * N + i] * vectors[l * N + i];
        }
        assert_near(dot, k == l, TIGHT);
      }
    }
  }
}

static void check_complex(spectrum *s, int seed) {
  const pk_eigen_request request = {
      .n = N, .wanted = WANTED, .seed = (uint64_t)seed, .every_copy = true};
  double complex values[WANTED], vectors[WANTED * N], y[N], gram[WANTED * WANTED];
  double sizes[WANTED];
  int found = 0;
  assert_int_equal(
      pk_eigen_complex(context, &request, apply_complex, s, values, vectors, &found, NULL),
      PICKET_OK);
  assert_int_equal(found, WANTED);
  for (int k = 0; k < WANTED; k++) {
    assert_true(cabs(values[k] - TURN * level(s, k)) < TIGHT * 100.0);
    assert_int_equal(apply_complex(s, vectors + k * N, y), PICKET_OK);
    for (int i = 0; i < N; i++) {
      assert_true(cabs(y[i] - values[k] * vectors[k * N + i]) < TIGHT * 100.0);
    }
    for (int l = 0; l < WANTED; l++) {
      gram[l + k * WANTED] = pk_dense_dot(N, vectors + l * N, vectors + k * N);
    }
  }
  /* Independent: no combination of them is small. */
  assert_int_equal(pk_dense_hermitian(context, WANTED, gram, sizes), PICKET_OK);
  assert_true(sizes[0] > 1e-6);
}

static void hermitian_copies_are_all_found(void **state) {
  (void)state;
  for (int seed = 1; seed <= SEEDS; seed++) {
    spectrum s = {1 + seed % 3, 4, 0.0};
    check_complex(&s, seed);
  }
}

static void copies_of_a_lopsided_operator_are_all_found(void **state) {
  (void)state;
  for (int seed = 1; seed <= SEEDS; seed++) {
    spectrum s = {1 + seed % 3, 4, 10.0};
    check_complex(&s, seed);
  }
}

/* Nothing is missing among simple eigenvalues: the look costs a few applications and changes
 * no digit. */
static void simple_values_are_left_alone(void **state) {
  (void)state;
  spectrum s = {1, 1, 0.0};
  pk_eigen_request request = {.n = N, .wanted = WANTED, .seed = 5};
  double plain[WANTED], looked[WANTED], plain_vectors[WANTED * N], looked_vectors[WANTED * N];
  int found = 0, plain_cost = 0, looked_cost = 0;
  assert_int_equal(pk_eigen_symmetric(context, &request, apply_real, &s, plain, plain_vectors,
                                      &found, &plain_cost),
                   PICKET_OK);
  request.every_copy = true;
  assert_int_equal(pk_eigen_symmetric(context, &request, apply_real, &s, looked, looked_vectors,
                                      &found, &looked_cost),
                   PICKET_OK);
  assert_memory_equal(plain, looked, sizeof plain);
  assert_memory_equal(plain_vectors, looked_vectors, sizeof plain_vectors);
  assert_in_range(looked_cost - plain_cost, 1, 30);
}

/* The merging of missed copies has allocations of its own. */
static void every_allocation_fails_once(void **state) {
  (void)state;
  spectrum s = {2, 4, 0.0};
  const pk_eigen_request request = {.n = N, .wanted = WANTED, .seed = 1, .every_copy = true};
  double complex values[WANTED], vectors[WANTED * N];
  short_memory count = {0};
  picket_context *c = short_memory_context(&count);
  int found = 0;
  assert_int_equal(pk_eigen_complex(c, &request, apply_complex, &s, values, vectors, &found, NULL),
                   PICKET_OK);
  const long asked = count.asked;
  for (long i = 2; i <= asked; i++) {
    count.asked = 1; /* the context itself was the first */
    count.fail_at = i;
    found = -1;
    assert_int_equal(
        pk_eigen_complex(c, &request, apply_complex, &s, values, vectors, &found, NULL),
        PICKET_ERROR_MEMORY);
    assert_int_equal(found, -1);
    assert_int_equal(count.living, 1);
  }
  picket_context_free(c);
  assert_int_equal(count.living, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(real_copies_are_all_found),
      cmocka_unit_test(hermitian_copies_are_all_found),
      cmocka_unit_test(copies_of_a_lopsided_operator_are_all_found),
      cmocka_unit_test(simple_values_are_left_alone),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, setup, teardown);
}
