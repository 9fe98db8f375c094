/* The second-order average of a stack against Rytov's formulas for two layers: the values of
 * reference case O07 (to 1e-15), and CHECKS in closed form. */
#include "study/estimate.h"
#include "unit/near.h"

static const double pi = 3.14159265358979323846;

/* The reference has 16 digits; a dozen operations round. */
static const double tight = 1e-12;

static void two_layers_to_reference(void **state) {
  (void)state;
  const double eps[] = {8.1225, 2.085136};
  const double boundary[] = {-0.5, 0, 0.5}; /* a period of 1, so that k0 = 2 pi R */
  pk_rytov e = pk_rytov_average(2, boundary, eps, 0);
  assert_near(e.along, 5.103818, tight);
  assert_near(e.across, 3.3184014712123355, tight);
  e = pk_rytov_average(2, boundary, eps, 2 * pi * 0.05);
  assert_near(e.along, 5.1225547058265155, tight);
  assert_near(e.across, 3.3305837065860073, tight);
  e = pk_rytov_average(2, boundary, eps, 2 * pi * 0.15);
  assert_near(e.along, 5.272448352438639, tight);
  assert_near(e.across, 3.4280415895753795, tight);
}

/* ε∥₂ = ε∥ + ⅓[πR f(1-f) Δε]², ε⊥₂ = ε⊥ + ⅓[πR f(1-f) Δ(1/ε)]² ε∥ ε⊥³ (Rytov 1956). */
static void two_layers_in_closed_form(void **state) {
  (void)state;
  for (int i = 1; i < 10; i++) {
    const double f = i / 10.0, a = 12.08, b = 2.09, r = 0.11, period = 0.3;
    const double eps[] = {a, b};
    const double boundary[] = {1, 1 + f * period, 1 + period};
    double along = f * a + (1 - f) * b, across = 1 / (f / a + (1 - f) / b);
    double p = pi * r * f * (1 - f) * (a - b), q = pi * r * f * (1 - f) * (1 / a - 1 / b);
    pk_rytov e = pk_rytov_average(2, boundary, eps, 2 * pi * r / period);
    assert_near(e.along, along + p * p / 3, tight);
    assert_near(e.across, across + q * q / 3 * along * across * across * across, tight);
  }
}

static void cutting_and_shifting_change_nothing(void **state) {
  (void)state;
  const double k0 = 4;
  const double two[] = {8, 2}, two_at[] = {0, 0.1, 0.3};
  const double cut[] = {8, 8, 2, 2}, cut_at[] = {0, 0.04, 0.1, 0.15, 0.3};
  const double shifted[] = {2, 8, 2}, shifted_at[] = {0, 0.05, 0.15, 0.3};
  pk_rytov a = pk_rytov_average(2, two_at, two, k0);
  pk_rytov b = pk_rytov_average(4, cut_at, cut, k0);
  pk_rytov c = pk_rytov_average(3, shifted_at, shifted, k0);
  assert_near(b.along, a.along, tight);
  assert_near(b.across, a.across, tight);
  assert_near(c.along, a.along, tight);
  assert_near(c.across, a.across, tight);
}

static void one_layer_is_itself(void **state) {
  (void)state;
  const double eps[] = {7.5}, boundary[] = {-1, 2};
  pk_rytov e = pk_rytov_average(1, boundary, eps, 9);
  assert_near(e.along, 7.5, tight);
  assert_near(e.across, 7.5, tight);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(two_layers_to_reference),
      cmocka_unit_test(two_layers_in_closed_form),
      cmocka_unit_test(cutting_and_shifting_change_nothing),
      cmocka_unit_test(one_layer_is_itself),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
