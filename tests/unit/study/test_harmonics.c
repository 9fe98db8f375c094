/* The law in the number of harmonics along z. */
#include "study/harmonics.h"

#include "unit/near.h"

static pk_harmonic_law law_of(double distance) {
  static double from[3];
  from[0] = -0.1;
  from[1] = -0.1 + 0.3 * distance;
  from[2] = 0.2;
  const pk_channel_block channel = {.pitch_um = 0.3, .slices = 2, .from_um = from};
  return pk_harmonic_law_of(&channel);
}

static double value_at(int n, double distance) {
  double beat = cos(2 * 3.14159265358979323846 * n * distance);
  return 1.5 + (0.02 - 0.013 * beat) / ((double)n * n * n);
}

/* Values that follow the law give X from any three or four, whatever the distance of the walls. */
static void meets_its_own_law(void **state) {
  (void)state;
  static const double distances[] = {0.5, 0.4, 0.31, 0.72};
  for (size_t d = 0; d < sizeof distances / sizeof *distances; d++) {
    pk_harmonic_law law = law_of(distances[d]);
    assert_true(law.single && !law.uniform);
    assert_near(law.distance, distances[d], 1e-12);
    for (int count = 3; count <= 4; count++) {
      const int n[4] = {2, 3, 4, 5};
      double v[4];
      for (int i = 0; i < 4; i++) {
        v[i] = value_at(n[i], distances[d]);
      }
      picket_quantity q = pk_harmonics_extrapolate(&law, count, n, v);
      assert_near(q.value, 1.5, 1e-11);
      assert_true(q.uncertainty > 0);
    }
  }
}

/* Values of the 450 × 220 nm tooth, te-like long and short edge (µm) on one grid, solved with 2 to
 * 17 pairs of harmonics: the bar from four of them holds the limit of all. */
static void holds_the_limit_of_a_tooth(void **state) {
  (void)state;
  static const double v[2][4] = {{1.2454183197, 1.2450751781, 1.2456689659, 1.2455653595},
                                 {0.9954097994, 0.9973953218, 0.9984408367, 0.9985387174}};
  static const double limit[2] = {1.24570212, 0.998853568};
  const int n[4] = {2, 3, 4, 5};
  pk_harmonic_law law = law_of(0.5);
  for (int i = 0; i < 2; i++) {
    picket_quantity q = pk_harmonics_extrapolate(&law, 4, n, v[i]);
    assert_true(fabs(q.value - limit[i]) <= q.uncertainty);
    assert_true(q.uncertainty < 2e-4);
  }
}

/* More walls: no beat is fitted, and the bar is that of scattered values. */
static void scatters_with_many_walls(void **state) {
  (void)state;
  static double from[5] = {-0.1, -0.05, 0, 0.1, 0.2};
  const pk_channel_block channel = {.pitch_um = 0.3, .slices = 4, .from_um = from};
  pk_harmonic_law law = pk_harmonic_law_of(&channel);
  assert_false(law.single);
  const int n[4] = {2, 3, 4, 5};
  double v[4];
  for (int i = 0; i < 4; i++) {
    v[i] = value_at(n[i], 0.37);
  }
  picket_quantity q = pk_harmonics_extrapolate(&law, 4, n, v);
  assert_true(fabs(q.value - 1.5) <= q.uncertainty);
}

static void knows_uniform_channels_and_nothing(void **state) {
  (void)state;
  static double from[2] = {-0.15, 0.15};
  const pk_channel_block channel = {.pitch_um = 0.3, .slices = 1, .from_um = from};
  pk_harmonic_law law = pk_harmonic_law_of(&channel);
  const int n[3] = {2, 3, 4};
  double v[3] = {1, 1, 2};
  picket_quantity q = pk_harmonics_extrapolate(&law, 3, n, v);
  assert_true(law.uniform && q.value == 2 && q.uncertainty == 0);
  v[1] = NAN;
  law = law_of(0.5);
  assert_true(isnan(pk_harmonics_extrapolate(&law, 3, n, v).value));
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(meets_its_own_law),
      cmocka_unit_test(holds_the_limit_of_a_tooth),
      cmocka_unit_test(scatters_with_many_walls),
      cmocka_unit_test(knows_uniform_channels_and_nothing),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
