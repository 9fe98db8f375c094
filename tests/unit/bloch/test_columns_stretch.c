/* The inverse of a uniform stretch by sines, against the inverse of the whole block matrix. */
#include "bloch/columns_private.h"
#include "dense/dense.h"
#include "unit/linear_cases.h"

enum { N = 6, M = 5, ORDER = N * (M - 1) };

/* Rounding of both inverses; their norm is below 20 here. */
static const double TIGHT = 1e-12;

typedef struct stored_strip {
  int row[PK_STRIP * N];
  double complex value[PK_STRIP * N];
} stored_strip;

static void put(stored_strip *s, int row, int column, double complex value) {
  int k = PK_STRIP * column;
  while (s->row[k] >= 0) {
    k++;
  }
  s->row[k] = row;
  s->value[k] = value;
}

/* D with the given diagonal entry plus noise, random neighbours; U diagonal, random. */
static void fill(double complex diagonal, double noise, stored_strip *D, stored_strip *U) {
  uint64_t seed = 5;
  *D = *U = (stored_strip){.value = {0}};
  memset(D->row, -1, sizeof D->row);
  memset(U->row, -1, sizeof U->row);
  for (int i = 0; i < N; i++) {
    put(D, i, i, diagonal + noise * next_complex(&seed));
    put(U, i, i, -1 + 0.3 * next_complex(&seed));
    if (i + 1 < N) {
      put(D, i + 1, i, -1 + 0.3 * next_complex(&seed));
      put(D, i, i + 1, -1 + 0.3 * next_complex(&seed));
    }
  }
}

static void place(const stored_strip *s, int row, int column, double complex *whole) {
  for (int k = 0; k < PK_STRIP * N; k++) {
    if (s->row[k] >= 0) {
      whole[row * N + s->row[k] + (column * N + k / PK_STRIP) * ORDER] = s->value[k];
    }
  }
}

static void compare(double complex diagonal, double noise) {
  stored_strip D, U;
  fill(diagonal, noise, &D, &U);
  static double complex whole[ORDER * ORDER];
  memset(whole, 0, sizeof whole);
  for (int j = 0; j < M - 1; j++) {
    place(&D, j, j, whole);
    if (j + 1 < M - 1) {
      place(&U, j, j + 1, whole);
      place(&U, j + 1, j, whole);
    }
  }
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_dense_inverse(context, ORDER, whole), PICKET_OK);
  double complex near[N * N], far[N * N];
  pk_strip d = {D.row, D.value}, u = {U.row, U.value};
  assert_true(pk_strip_is_tridiagonal(N, d));
  assert_int_equal(pk_stretch_inverse(context, N, d, u, M, near, far), PICKET_OK);
  for (int c = 0; c < N; c++) {
    for (int r = 0; r < N; r++) {
      assert_true(cabs(near[r + c * N] - whole[r + c * ORDER]) < TIGHT);
      assert_true(cabs(far[r + c * N] - whole[r + (c + (M - 2) * N) * ORDER]) < TIGHT);
    }
  }
  picket_context_free(context);
}

static void blocks_are_those_of_the_whole_inverse(void **state) {
  (void)state;
  compare(4.1 - 0.2 * I, 0.3); /* evanescent */
  compare(0.7 + 0.1 * I, 0.3); /* oscillating, lossy: pivots of any size */
}

/* A column with zeros on its diagonal: every second pivot vanishes, though the matrix is regular.
 */
static void pivots_that_vanish_do_no_harm(void **state) {
  (void)state;
  stored_strip D, U;
  fill(0, 0, &D, &U);
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  double complex near[N * N], far[N * N], whole[N * N] = {0};
  /* Two intervals have one inner column: G = D⁻¹ for both blocks. */
  assert_int_equal(pk_stretch_inverse(context, N, (pk_strip){D.row, D.value},
                                      (pk_strip){U.row, U.value}, 2, near, far),
                   PICKET_OK);
  pk_strip_add(N, (pk_strip){D.row, D.value}, whole);
  assert_int_equal(pk_dense_inverse(context, N, whole), PICKET_OK);
  for (int i = 0; i < N * N; i++) {
    assert_true(cabs(near[i] - whole[i]) < TIGHT && cabs(far[i] - whole[i]) < TIGHT);
  }
  picket_context_free(context);
}

static void wrapping_blocks_are_recognised(void **state) {
  (void)state;
  stored_strip D, U;
  fill(4, 0, &D, &U);
  put(&D, N - 1, 0, -1);
  assert_false(pk_strip_is_tridiagonal(N, (pk_strip){D.row, D.value}));
}

int main(void) {
  pk_dense_warm_up();
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(blocks_are_those_of_the_whole_inverse),
      cmocka_unit_test(pivots_that_vanish_do_no_harm),
      cmocka_unit_test(wrapping_blocks_are_recognised),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
