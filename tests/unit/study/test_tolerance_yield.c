/* The interval of a share. */
#include "study/tolerance_private.h"
#include "unit/near.h"

/* What the interval is: the shares p from which the one seen is z standard errors of p away. */
static void ends_are_z_errors_away(void **state) {
  (void)state;
  const double z = 1.959963984540054, shares[] = {0.5, 0.98, 0.003};
  for (int i = 0; i < 3; i++) {
    for (double n = 10; n < 2e4; n *= 10) {
      double low, high;
      pk_wilson(shares[i], n, &low, &high);
      assert_near((shares[i] - low) / sqrt(low * (1 - low) / n), z, 1e-9);
      assert_near((high - shares[i]) / sqrt(high * (1 - high) / n), z, 1e-9);
    }
  }
}

/* Of none in n it reaches from 0 to z²/(n + z²), and mirrored of all. */
static void none_and_all(void **state) {
  (void)state;
  const double zz = 1.959963984540054 * 1.959963984540054;
  double low, high;
  pk_wilson(0, 100, &low, &high);
  assert_near(low, 0, 1e-17);
  assert_near(high, zz / (100 + zz), 1e-15);
  pk_wilson(1, 100, &low, &high);
  assert_near(low, 100 / (100 + zz), 1e-15);
  assert_near(high, 1, 1e-15);
}

static void margins(void **state) {
  (void)state;
  const pk_tolerance_block both = {.least = 2, .most = 5}, least = {.least = 2, .most = INFINITY};
  assert_near(pk_tolerance_margin(&both, 3), 1, 0);
  assert_near(pk_tolerance_margin(&both, 4.5), 0.5, 0);
  assert_near(pk_tolerance_margin(&both, 6), -1, 0);
  assert_near(pk_tolerance_margin(&least, 1), -1, 0);
  assert_near(pk_tolerance_margin(&least, 1e6), 1e6 - 2, 0);
  assert_true(isnan(pk_tolerance_margin(&both, NAN)));
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(ends_are_z_errors_away),
      cmocka_unit_test(none_and_all),
      cmocka_unit_test(margins),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
