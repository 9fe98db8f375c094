/* Spreads and their deviates: groups, ends, and what is drawn. */
#include "study/spread.h"

#include "unit/near.h"

static char LENGTH[] = "cell.shapes.0.length_nm", TEMPERATURE[] = "temperature_c",
            WIDTH[] = "cell.shapes.0.width_nm", PITCH[] = "cell.pitch_nm", EDGE[] = "edge";
static const pk_spread SPREADS[] = {
    {.vary = LENGTH, .group = EDGE, .normal = true, .sigma = 3},
    {.vary = TEMPERATURE, .sigma = NAN, .from = -5, .to = 70},
    {.vary = WIDTH, .group = EDGE, .normal = true, .sigma = 2},
    {.vary = PITCH, .normal = true, .sigma = 1},
};
static const double START[] = {150, 20, 450, 300};
enum { COUNT = 4, DEVIATES = 3, DRAWN = 100000 };

static pk_spreading made(void) {
  pk_spreading spreading;
  pk_spreading_make(COUNT, SPREADS, START, &spreading);
  return spreading;
}

static void groups_share_a_deviate(void **state) {
  (void)state;
  pk_spreading s = made();
  assert_int_equal(s.deviates, DEVIATES);
  assert_int_equal(s.deviate_of[0], s.deviate_of[2]);
  assert_string_equal(s.name[0], "edge");
  assert_string_equal(s.name[1], "temperature_c");
  assert_string_equal(s.name[2], "cell.pitch_nm");
  assert_true(s.normal[0] && !s.normal[1] && s.normal[2]);
  const double deviate[DEVIATES] = {2, 0, 0};
  double values[COUNT];
  pk_spreading_values(&s, deviate, values);
  assert_near(values[0], 156, 0);
  assert_near(values[2], 454, 0);
  assert_near(values[1], 32.5, 0); /* the middle of its range, not the value in the file */
  assert_near(values[3], 300, 0);  /* the pitch stays exact */
}

static void ends_are_exact(void **state) {
  (void)state;
  pk_spreading s = made();
  double deviate[DEVIATES], values[COUNT];
  for (int side = -1; side <= 1; side += 2) {
    for (int j = 0; j < DEVIATES; j++) {
      deviate[j] = side * pk_spreading_corner(&s, j);
    }
    pk_spreading_values(&s, deviate, values);
    assert_near(values[0], 150 + 9 * side, 0);
    assert_near(values[1], side < 0 ? -5 : 70, 0);
  }
}

/* The first outputs of SplitMix64 from the state 0 (m: as its authors' code gives them). */
static void is_split_mix(void **state) {
  (void)state;
  assert_true(pk_split_mix(0) == UINT64_C(0xe220a8397b1dcdaf));
  assert_true(pk_split_mix(1) == UINT64_C(0x6e789e6aa1b965f4));
  assert_true(pk_split_mix(2) == UINT64_C(0x06c45d188009454f));
}

/* Moments of DRAWN samples, within five standard errors; shares of the normal distribution within
 * one and two standard deviations are 0.682689 and 0.954500. */
static void draws_what_it_says(void **state) {
  (void)state;
  pk_spreading s = made();
  double sum[DEVIATES] = {0}, square[DEVIATES] = {0}, cross = 0, deviate[DEVIATES];
  int within[2] = {0};
  for (int n = 0; n < DRAWN; n++) {
    pk_spreading_draw(&s, 1, 0, n, deviate);
    for (int j = 0; j < DEVIATES; j++) {
      sum[j] += deviate[j];
      square[j] += deviate[j] * deviate[j];
    }
    cross += deviate[0] * deviate[2];
    within[0] += fabs(deviate[0]) < 1;
    within[1] += fabs(deviate[0]) < 2;
    assert_true(fabs(deviate[1]) < 1);
  }
  const double error = 5 / sqrt(DRAWN);
  for (int j = 0; j < DEVIATES; j++) {
    double variance = s.normal[j] ? 1 : 1.0 / 3;
    assert_near(sum[j] / DRAWN, 0, error * sqrt(variance));
    assert_near(square[j] / DRAWN, variance, error * sqrt(2.0));
  }
  assert_near(cross / DRAWN, 0, error);
  assert_near((double)within[0] / DRAWN, 0.682689, error * 0.47);
  assert_near((double)within[1] / DRAWN, 0.954500, error * 0.21);
}

/* A sample depends on seed, stream and its number alone. */
static void has_random_access(void **state) {
  (void)state;
  pk_spreading s = made();
  double first[DEVIATES], again[DEVIATES], other[DEVIATES];
  pk_spreading_draw(&s, 7, 0, 12345, first);
  pk_spreading_draw(&s, 7, 0, 3, other);
  pk_spreading_draw(&s, 7, 0, 12345, again);
  assert_memory_equal(first, again, sizeof first);
  assert_true(other[0] != first[0]);
  pk_spreading_draw(&s, 8, 0, 12345, other);
  assert_true(other[0] != first[0] && other[1] != first[1]);
  pk_spreading_draw(&s, 7, 1, 12345, other);
  assert_true(other[0] != first[0] && other[1] != first[1]);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(groups_share_a_deviate), cmocka_unit_test(ends_are_exact),
      cmocka_unit_test(is_split_mix),           cmocka_unit_test(draws_what_it_says),
      cmocka_unit_test(has_random_access),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
