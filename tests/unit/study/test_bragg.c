/* λ = 2 Λ n(λ) for indices whose solution is known in closed form. */
#include "study/bragg.h"

#include "unit/near.h"

static const double tight = 1e-14; /* a few roundings of λ, which is of order 1 */

static picket_status constant_index(void *user, double wavelength_um, double *index) {
  (void)wavelength_um;
  *index = *(const double *)user;
  return PICKET_OK;
}

/* n = a + b/λ: λ² = 2Λ (a λ + b). */
static picket_status falling_index(void *user, double wavelength_um, double *index) {
  const double *ab = user;
  *index = ab[0] + ab[1] / wavelength_um;
  return PICKET_OK;
}

static picket_status index_below_one_micron(void *user, double wavelength_um, double *index) {
  *index = wavelength_um < 1 ? *(const double *)user : NAN;
  return PICKET_OK;
}

static picket_status broken_index(void *user, double wavelength_um, double *index) {
  (void)user;
  (void)wavelength_um;
  (void)index;
  return PICKET_ERROR_MEMORY;
}

static double solve(double pitch, double low, double high, pk_index_at index_at, void *user) {
  double um = -1;
  assert_int_equal(pk_bragg_solve(pitch, low, high, index_at, user, &um), PICKET_OK);
  return um;
}

static void closed_forms(void **state) {
  (void)state;
  double n = 1.444, ab[] = {1.5, 0.8};
  assert_near(solve(0.3, 0, INFINITY, constant_index, &n), 2 * 0.3 * 1.444, tight);
  double expected = 0.3 * 1.5 + sqrt(0.3 * 0.3 * 1.5 * 1.5 + 2 * 0.3 * 0.8);
  assert_near(solve(0.3, 0, INFINITY, falling_index, ab), expected, tight);
  /* Scaling all lengths scales the answer. */
  double wide[] = {1.5, 8};
  assert_near(solve(3, 0, INFINITY, falling_index, wide), 10 * expected, 10 * tight);
}

static void nothing_outside_the_range(void **state) {
  (void)state;
  double n = 2;
  assert_near(solve(0.3, 1.1, 1.3, constant_index, &n), 1.2, tight);
  assert_true(isnan(solve(0.3, 1.21, 9, constant_index, &n)));
  assert_true(isnan(solve(0.3, 0.1, 1.19, constant_index, &n)));
  assert_true(isnan(solve(0.3, 5, 4, constant_index, &n)));
  /* At an end of the range itself. */
  assert_near(solve(0.3, 0.5, 1.2, constant_index, &n), 1.2, tight);
}

static void unknown_index_is_no_solution(void **state) {
  (void)state;
  double n = 2;
  assert_true(isnan(solve(0.3, 0, INFINITY, index_below_one_micron, &n)));
  assert_near(solve(0.2, 0, INFINITY, index_below_one_micron, &n), 0.8, tight);
}

static void failures_are_passed_on(void **state) {
  (void)state;
  double um = -1;
  assert_int_equal(pk_bragg_solve(0.3, 0, INFINITY, broken_index, NULL, &um), PICKET_ERROR_MEMORY);
  assert_near(um, -1, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(closed_forms),
      cmocka_unit_test(nothing_outside_the_range),
      cmocka_unit_test(unknown_index_is_no_solution),
      cmocka_unit_test(failures_are_passed_on),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
