/* Labels of modes through a sweep: crossings in closed form, node numbers that flicker, modes that
 * come and go. */
#include "study/trace.h"

#include <math.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

enum { POINTS = 9, MOST = 3 };

static picket_bloch_mode store[POINTS][MOST];
static picket_index_point points[POINTS];
static pk_profile shapes[POINTS][MOST];
static pk_profile *profile[POINTS]; /* null: modes are told by their indices */

static double wavelength(int p) {
  return 1.5 + 0.0125 * p;
}

/* A mode n(λ) = n0 + s (λ - 1.55) + ½ c (λ - 1.55)², with n_g = n - λ dn/dλ and a bar of 1e-5. */
static picket_bloch_mode mode_at(double n0, double s, double c, double at, int order) {
  double d = at - 1.55, n = n0 + s * d + 0.5 * c * d * d;
  picket_bloch_mode mode = {.order = order, .regime = PICKET_REGIME_SUBWAVELENGTH};
  mode.bloch_index = (picket_quantity){n, 1e-5, NULL};
  mode.group_index = (picket_quantity){n - at * (s + c * d), 1e-4, NULL};
  return mode;
}

static void put(int p, int m, picket_bloch_mode mode) {
  store[p][m] = mode;
  points[p].wavelength_um = wavelength(p);
  points[p].modes = store[p];
  points[p].mode_count = m + 1;
}

static void trace(void) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_trace(context, POINTS, points, profile), PICKET_OK);
  picket_context_free(context);
}

static double slope(const picket_index_point *point, int m) {
  const picket_bloch_mode *mode = &point->modes[m];
  return (mode->bloch_index.value - mode->group_index.value) / point->wavelength_um;
}

/* Two modes that cross between two wavelengths; at each point the order is that of the indices, as
 * of a solver that only counts. The labels must go through. */
static void a_crossing_is_followed_by_slopes(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p);
    picket_bloch_mode steep = mode_at(2.0, -1.2, 3, at, 0), flat = mode_at(1.99, -0.2, 1, at, 0);
    bool steep_first = steep.bloch_index.value > flat.bloch_index.value;
    steep.order = !steep_first;
    flat.order = steep_first;
    put(p, 0, steep_first ? steep : flat);
    put(p, 1, steep_first ? flat : steep);
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    assert_int_equal(points[p].modes[0].order, 0);
    assert_int_equal(points[p].modes[1].order, 1);
    /* The longest wavelength, beyond the crossing, has the flat one first. */
    assert_true(slope(&points[p], 0) > -0.5);
    assert_true(slope(&points[p], 1) < -0.5);
  }
}

/* Equal indices and slopes within the bars: only the nodes tell. */
static void nodes_decide_where_indices_cannot(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p), jitter = (p % 2 ? 1 : -1) * 4e-6;
    picket_bloch_mode even = mode_at(2.0 + jitter, -1, 0, at, 0);
    picket_bloch_mode odd = mode_at(2.0 - jitter, -1, 0, at, 1);
    even.radiated_count = 7; /* a mark that is not looked at */
    odd.radiated_count = 8;
    put(p, 0, p % 3 ? even : odd);
    put(p, 1, p % 3 ? odd : even);
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    assert_int_equal(points[p].modes[0].radiated_count, 7);
    assert_int_equal(points[p].modes[1].radiated_count, 8);
  }
}

/* The mode runs into a stop band: the index then follows λ, the group index is missing, and the
 * nodes of the standing wave are counted differently. */
static void a_mode_is_followed_into_its_stop_band(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p);
    picket_bloch_mode mode = mode_at(2.2, -2, 20, at, p < 4 ? 2 : 0);
    if (p < 4) {
      mode.regime = PICKET_REGIME_STOP_BAND;
      mode.bloch_index.value = 2.21 * at / 1.55;
      mode.group_index = (picket_quantity){NAN, NAN, "none"};
    }
    put(p, 0, mode);
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    assert_int_equal(points[p].modes[0].order, 0);
  }
}

static void another_mode_is_not_taken_for_the_lost_one(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p);
    points[p].mode_count = 0;
    if (p >= 5) {
      put(p, 0, mode_at(2.0, -1, 0.1, at, 0));
      put(p, 1, mode_at(1.8, -1, 0.1, at, 1));
    } else {
      put(p, 0, mode_at(1.8, -1, 0.1, at, 1));
    }
  }
  trace();
  assert_int_equal(points[4].modes[0].order, 1);
  assert_int_equal(points[0].modes[0].order, 1);
}

static void points_without_modes_are_stepped_over(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    put(p, 0, mode_at(2.0, -1, 0.1, wavelength(p), p < 6 ? 3 : 0)); /* nodes flicker */
  }
  points[6].mode_count = points[4].mode_count = 0;
  trace();
  for (int p = 0; p < POINTS; p++) {
    if (points[p].mode_count) {
      assert_int_equal(points[p].modes[0].order, 0);
    }
  }
}

static void labels_are_never_given_twice(void **state) {
  (void)state;
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p);
    put(p, 0, mode_at(2.0 + (p % 2) * 0.3, -1, 0, at, 0)); /* jumps: never itself */
    put(p, 1, mode_at(1.8, -1, 0, at, p % 2 ? 0 : 1));     /* claims the other's number */
    put(p, 2, mode_at(NAN, NAN, NAN, at, 1));
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    for (int m = 1; m < MOST; m++) {
      assert_true(points[p].modes[m].order > points[p].modes[m - 1].order);
    }
  }
}

/* cos(a) of one shape and sin(a) of another, both normal and orthogonal to each other. */
static pk_profile mixture(double a) {
  pk_profile shape = {.known = true};
  for (int p = 0; p < PK_PROFILE_PLACES; p++) {
    double x = acos(-1) * (p + 0.5) / PK_PROFILE_PLACES;
    shape.real[p] = (int)lround(7e4 * (cos(a) * sin(x) + sin(a) * sin(2 * x)));
  }
  return shape;
}

static void give_profiles(void) {
  for (int p = 0; p < POINTS; p++) {
    profile[p] = shapes[p];
  }
}

static int no_profiles(void **state) {
  (void)state;
  memset(profile, 0, sizeof profile);
  return 0;
}

static void overlaps_are_shares(void **state) {
  (void)state;
  pk_profile even = mixture(0), unknown = {0};
  for (int i = 0; i < 9; i++) {
    double a = 0.3 * i;
    pk_profile mixed = mixture(a);
    assert_near(pk_profile_overlap(&even, &mixed), cos(a) * cos(a), 1e-4); /* whole numbers */
  }
  assert_true(isnan(pk_profile_overlap(&even, &unknown)));
}

/* Fields against all else: steep lines that cross, group indices and orders that claim the opposite
 * at every second wavelength. */
static void fields_tell_through_a_crossing(void **state) {
  (void)state;
  give_profiles();
  for (int p = 0; p < POINTS; p++) {
    double at = wavelength(p);
    picket_bloch_mode steep = mode_at(2.0, -1.2, 3, at, p % 2),
                      flat = mode_at(1.99, -0.2, 1, at, !(p % 2));
    picket_quantity kept = steep.group_index;
    if (p % 2) {
      steep.group_index = flat.group_index;
      flat.group_index = kept;
    }
    steep.radiated_count = 7; /* a mark that is not looked at */
    flat.radiated_count = 8;
    put(p, 0, p % 2 ? flat : steep);
    put(p, 1, p % 2 ? steep : flat);
    shapes[p][p % 2] = mixture(0.02 * p); /* of the steep one */
    shapes[p][1 - p % 2] = mixture(acos(-1) / 2 + 0.02 * p);
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    for (int m = 0; m < 2; m++) {
      assert_int_equal(points[p].modes[m].order, m);
      assert_int_equal(points[p].modes[m].radiated_count,
                       points[POINTS - 1].modes[m].radiated_count);
    }
    /* Profiles stay with their modes. */
    assert_true(pk_profile_overlap(&shapes[p][0], &shapes[POINTS - 1][0]) > 0.9);
  }
}

/* Two modes that repel each other exchange their shapes; on a point in the middle each is half of
 * either, and only the slopes tell. */
static void hybrids_are_followed_by_their_slopes(void **state) {
  (void)state;
  give_profiles();
  const double quarter = acos(-1) / 4;
  for (int p = 0; p < POINTS; p++) {
    double d = wavelength(p) - 1.55, root = sqrt(d * d + 1e-4);
    /* n = 2 ± ½ (d² + 0.01²)^½: slopes ± ½ d/root */
    for (int m = 0; m < 2; m++) {
      double sign = m ? -0.5 : 0.5;
      picket_bloch_mode mode = mode_at(2, 0, 0, 1.55, m);
      mode.bloch_index.value = 2 + sign * root;
      mode.group_index.value = mode.bloch_index.value - wavelength(p) * sign * d / root;
      put(p, m, mode);
      /* The upper one changes from one shape to the other over one step of the middle. */
      double turned = d < -1e-9 ? 0 : d > 1e-9 ? 2 * quarter : quarter;
      shapes[p][m] = mixture(turned + 2 * quarter * m);
    }
  }
  trace();
  for (int p = 0; p < POINTS; p++) {
    assert_int_equal(points[p].modes[0].order, 0);
    assert_true(points[p].modes[0].bloch_index.value > points[p].modes[1].bloch_index.value);
  }
}

/* A mode whose field fits none of the last wavelength is none of them, however well its index
 * would. */
static void another_field_is_another_mode(void **state) {
  (void)state;
  give_profiles();
  for (int p = 0; p < POINTS; p++) {
    put(p, 0, mode_at(2.0, -1, 0.1, wavelength(p), p < 5));
    shapes[p][0] = mixture(p < 5 ? acos(-1) / 2 : 0);
  }
  trace();
  assert_int_equal(points[5].modes[0].order, 0);
  assert_int_equal(points[4].modes[0].order, 1);
  assert_int_equal(points[0].modes[0].order, 1);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 2; n < 2 + 2 * POINTS; n++) {
    for (int p = 0; p < POINTS; p++) {
      put(p, 0, mode_at(2.0, -1, 0, wavelength(p), 0));
    }
    short_memory memory = {.fail_at = n};
    picket_context *context = short_memory_context(&memory);
    assert_int_equal(pk_trace(context, POINTS, points, profile), PICKET_ERROR_MEMORY);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_crossing_is_followed_by_slopes),
      cmocka_unit_test(nodes_decide_where_indices_cannot),
      cmocka_unit_test(a_mode_is_followed_into_its_stop_band),
      cmocka_unit_test(another_mode_is_not_taken_for_the_lost_one),
      cmocka_unit_test(points_without_modes_are_stepped_over),
      cmocka_unit_test(labels_are_never_given_twice),
      cmocka_unit_test(overlaps_are_shares),
      cmocka_unit_test_teardown(fields_tell_through_a_crossing, no_profiles),
      cmocka_unit_test_teardown(hybrids_are_followed_by_their_slopes, no_profiles),
      cmocka_unit_test_teardown(another_field_is_another_mode, no_profiles),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
