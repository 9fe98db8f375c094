/* Laws of a row: ends to the last bit, values by hand, monotone between. */
#include "study/taper_law.h"

#include <math.h>

#include "unit/near.h"

static void by_hand(void **state) {
  (void)state;
  pk_taper_change change = {NULL, 450, 200, PICKET_TAPER_LINEAR, 1};
  assert_near(pk_taper_value(&change, 1, 6), 400, 1e-12);
  change.law = PICKET_TAPER_POWER;
  change.exponent = 2;
  assert_near(pk_taper_value(&change, 1, 6), 450 - 250.0 / 25, 1e-12);
  change.law = PICKET_TAPER_COSINE;
  assert_near(pk_taper_value(&change, 2, 5), 325, 1e-12);
  assert_near(pk_taper_value(&change, 1, 5), 450 - 250 * (1 - sqrt(0.5)) / 2, 1e-12);
}

static void ends_and_order(void **state) {
  (void)state;
  static const double exponent[] = {0.01, 0.5, 1, 3, 100};
  for (int law = PICKET_TAPER_LINEAR; law <= PICKET_TAPER_COSINE; law++) {
    for (int k = 0; k < 5; k++) {
      pk_taper_change change = {NULL, 0.1, -0.7, (picket_taper_law)law, exponent[k]};
      for (int teeth = 2; teeth < 40; teeth++) {
        assert_true(pk_taper_value(&change, 0, teeth) == change.from);
        assert_true(pk_taper_value(&change, teeth - 1, teeth) == change.to);
        for (int i = 1; i < teeth; i++) {
          assert_true(pk_taper_value(&change, i, teeth) <= pk_taper_value(&change, i - 1, teeth));
        }
      }
    }
  }
}

static void a_constant(void **state) {
  (void)state;
  pk_taper_change change = {NULL, 1.0 / 3, 1.0 / 3, PICKET_TAPER_COSINE, 1};
  for (int i = 0; i < 7; i++) {
    assert_true(pk_taper_value(&change, i, 7) == change.from);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(by_hand),
      cmocka_unit_test(ends_and_order),
      cmocka_unit_test(a_constant),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
