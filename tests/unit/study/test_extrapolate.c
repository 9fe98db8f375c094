/* Extrapolation: exact for values that obey the law, an honest bar for values that do not quite,
 * NaN for what is missing. */
#include "study/extrapolate.h"

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include <string.h>

static const int M[] = {2, 3, 4, 6, 8, 12};

static double series(int m, double limit, int count, const double *exponent, const double *factor) {
  double value = limit;
  for (int j = 0; j < count; j++) {
    value += factor[j] * pow(m, -exponent[j]);
  }
  return value;
}

static void values_that_obey_the_law_give_the_limit(void **state) {
  (void)state;
  const pk_error_law law = {.count = 4, .exponent = {1.5, 2, 2.5, 4}, .smooth = 1};
  const double factor[] = {0.7, -1.3, 0.2, 2.0};
  for (int used = 2; used <= 5; used++) {
    double values[6];
    for (int i = 0; i < 6; i++) {
      values[i] = series(M[i], 3.25, used - 1, law.exponent, factor);
    }
    assert_near(pk_extrapolated(&law, 6, M, values, used), 3.25, 1e-11);
    assert_near(pk_extrapolated(&law, used, M, values, used), 3.25, 1e-11);
    picket_quantity q = pk_extrapolate(&law, 6, M, values);
    assert_near(q.value, 3.25, 1e-11);
    assert_null(q.note);
  }
}

/* Richardson's own case: two grids, h². */
static void two_grids_and_a_square_are_richardson(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1};
  const double values[] = {1.7, 1.4};
  assert_near(pk_extrapolated(&law, 2, M, values, 2), 1.4 + (1.4 - 1.7) * 4 / (9 - 4), 1e-14);
  assert_near(pk_extrapolated(&law, 2, M, values, 1), 1.4, 0);
  picket_quantity q = pk_extrapolate(&law, 2, M, values);
  assert_near(q.value, 1.16, 1e-14);
  assert_near(q.uncertainty, 0.24, 1e-14); /* to the value without any exponent */
}

/* Values with one term more than the law knows, terms of like size at 4 steps in a unit, either
 * sign, grids from 8 steps on: the bar covers the error and is not wild. */
static void bars_cover_terms_beyond_the_law(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1};
  const double exponent[] = {2, 4, 6};
  uint64_t seed = 1;
  for (int trial = 0; trial < 100; trial++) {
    double factor[3], values[4];
    for (int j = 0; j < 3; j++) { /* either sign, like sizes */
      seed = seed * 6364136223846793005u + 1442695040888963407u;
      double r = (double)(seed >> 11) / 9007199254740992.0;
      factor[j] = (seed >> 5) % 2 ? 0.5 + r : -0.5 - r;
    }
    for (int count = 3; count <= 4; count++) {
      for (int i = 0; i < count; i++) {
        values[i] = series(4 * M[i], 1, 3, exponent, factor);
      }
      picket_quantity q = pk_extrapolate(&law, count, M, values);
      assert_true(fabs(q.value - 1) < q.uncertainty);
      assert_true(q.uncertainty < 1e-3);
    }
  }
}

static void bars_never_fall_below_rounding(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1};
  const double values[] = {5, 5, 5};
  picket_quantity q = pk_extrapolate(&law, 3, M, values);
  assert_near(q.value, 5, 1e-13);
  assert_true(q.uncertainty > 1e-13 && q.uncertainty < 1e-9);
}

/* h² with a scatter of alternating sign: least squares, and a bar of at least the scatter. */
static void scattered_values_are_fitted(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 0};
  for (int count = 2; count <= 6; count++) {
    double values[6], clean[6];
    for (int i = 0; i < count; i++) {
      clean[i] = 2 + 0.3 / (M[i] * M[i]);
      values[i] = clean[i] + (i % 2 ? 1e-3 : -1e-3);
    }
    picket_quantity q = pk_extrapolate(&law, count, M, clean);
    assert_near(q.value, 2, 1e-13);
    q = pk_extrapolate(&law, count, M, values);
    assert_true(fabs(q.value - 2) <= q.uncertainty);
    assert_true(count < 3 || q.uncertainty >= 1e-3);
    assert_true(q.uncertainty < 0.2);
  }
}

/* Errors of the index of HE11, HE21 and TM01 of a rod of 1.5 in air (diameter 1.2, wavelength 1.0)
 * against the roots of its closed form, on members 5 to 8 of a base grid of 0.12 with a line at the
 * end of the rod. The whole step would be a bar of 4 to 6e-5 and more. */
static void values_of_a_rod_lie_within_narrow_bars(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 0, .curved = 1};
  const int m[4] = {5, 6, 7, 8};
  const double scaled[3][4] = {{-0.003658, -0.003668, -0.003678, -0.003694},
                               {-0.005448, -0.005674, -0.005895, -0.006125},
                               {-0.002955, -0.002978, -0.003007, -0.003046}};
  for (int mode = 0; mode < 3; mode++) {
    double values[4];
    for (int i = 0; i < 4; i++) {
      values[i] = 1.3 + scaled[mode][i] / (m[i] * m[i]);
    }
    picket_quantity q = pk_extrapolate(&law, 4, m, values);
    assert_true(fabs(q.value - 1.3) <= q.uncertainty);
    assert_true(fabs(q.value - 1.3) <= 1.3e-5);
    assert_true(q.uncertainty < 3.5e-5);
  }
}

/* With h² and h³ only, the value is exact and the bar not below the share of the step. */
static void curved_sections_take_the_cubic_term(void **state) {
  (void)state;
  pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 0, .curved = 1};
  double values[4];
  for (int i = 0; i < 4; i++) {
    values[i] = 2 + 0.3 / (M[i] * M[i]) + 0.1 / pow(M[i], 3);
  }
  picket_quantity q = pk_extrapolate(&law, 4, M, values);
  assert_near(q.value, 2, 1e-12);
  assert_true(q.uncertainty > 0.2 * fabs(values[3] - 2));
  law.curved = 2; /* oblique corners: h² alone, and the whole step */
  picket_quantity corners = pk_extrapolate(&law, 4, M, values);
  assert_true(fabs(corners.value - 2) > 1e-6);
  assert_true(fabs(corners.value - 2) < corners.uncertainty);
  assert_true(corners.uncertainty > q.uncertainty);
}

/* Values on a clean line leave the step to the finest grid and the share of the law. */
static void the_share_of_the_law_is_added(void **state) {
  (void)state;
  pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 0};
  double values[4];
  for (int i = 0; i < 4; i++) {
    values[i] = 2 + 0.3 / (M[i] * M[i]);
  }
  double last = M[3], bare = pk_extrapolate(&law, 4, M, values).uncertainty;
  assert_near(bare, 0.3 / (last * last), 1e-12);
  law.share = 1e-2;
  law.share_order = 1;
  assert_near(pk_extrapolate(&law, 4, M, values).uncertainty - bare, 2e-2 / last, 1e-12);
}

/* Shifting and scaling the values shifts and scales the answer. */
static void the_answer_is_linear_in_the_values(void **state) {
  (void)state;
  for (int smooth = 0; smooth < 2; smooth++) {
    const pk_error_law law = {.count = 2, .exponent = {1.54, 2}, .smooth = smooth};
    const double values[] = {1.31, 1.24, 1.2, 1.19};
    double other[4];
    for (int i = 0; i < 4; i++) {
      other[i] = 7 - 3 * values[i];
    }
    picket_quantity a = pk_extrapolate(&law, 4, M, values), b = pk_extrapolate(&law, 4, M, other);
    assert_near(b.value, 7 - 3 * a.value, 1e-12);
    assert_near(b.uncertainty, 3 * a.uncertainty, 1e-9);
  }
}

static void missing_values_give_nothing(void **state) {
  (void)state;
  for (int smooth = 0; smooth < 2; smooth++) {
    const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = smooth};
    for (int i = 0; i < 3; i++) {
      double values[] = {1.1, 1.05, 1.02};
      values[i] = i == 1 ? INFINITY : NAN;
      picket_quantity q = pk_extrapolate(&law, 3, M, values);
      assert_true(isnan(q.value) && isnan(q.uncertainty));
    }
  }
}

static void a_law_that_cannot_be_vouched_for_has_no_bar(void **state) {
  (void)state;
  const pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1, .no_bar = "corners"};
  const double values[] = {1.1, 1.05, 1.02};
  picket_quantity q = pk_extrapolate(&law, 3, M, values);
  assert_true(isfinite(q.value) && isnan(q.uncertainty));
  assert_string_equal(q.note, "corners");
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(values_that_obey_the_law_give_the_limit),
      cmocka_unit_test(two_grids_and_a_square_are_richardson),
      cmocka_unit_test(bars_cover_terms_beyond_the_law),
      cmocka_unit_test(bars_never_fall_below_rounding),
      cmocka_unit_test(scattered_values_are_fitted),
      cmocka_unit_test(values_of_a_rod_lie_within_narrow_bars),
      cmocka_unit_test(curved_sections_take_the_cubic_term),
      cmocka_unit_test(the_share_of_the_law_is_added),
      cmocka_unit_test(the_answer_is_linear_in_the_values),
      cmocka_unit_test(missing_values_give_nothing),
      cmocka_unit_test(a_law_that_cannot_be_vouched_for_has_no_bar),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
