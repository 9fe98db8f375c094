/* Lines, extent, features, profile and sides. Coordinates are those painted, moved by whole
 * periods, so they agree to some units in the last place: 1e-14. */
#include "plane.h"

static void expect_lines(const pk_geometry *plane, pk_axis_name axis, int count,
                         const double *expected) {
  double *lines = NULL;
  int found = -1;
  assert_int_equal(pk_geometry_lines(plane, axis, &lines, &found), PICKET_OK);
  assert_int_equal(found, count);
  for (int i = 0; i < count; i++) {
    assert_near(lines[i], expected[i], 1e-14);
  }
  free(lines); /* the plane has no memory callbacks */
}

static void lines_of_a_tooth(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  rect(plane, 1, 0, 0.1, 0.15, 0.5);
  disc(plane, 2, 0, 2, 0.2);
  stripe(plane, 3, PK_V, -INFINITY, -2);
  expect_lines(plane, PK_U, 2, (double[]){-0.075, 0.075});
  expect_lines(plane, PK_V, 3, (double[]){-2, -0.15, 0.35});
  pk_geometry_free(plane);
}

static void hidden_edges_give_no_lines(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.4);
  rect(plane, 1, 0, 0, 0.1, 0.3);
  rect(plane, 2, 0, 0, 0.2, 0.5);                 /* covers it */
  rect(plane, 2, 0.15, 0, 0.1, 0.5);              /* continues it: no line at 0.1 */
  rect(plane, 0, -0.15, 0.6, 0.1, 0.1);           /* background on background */
  expect_lines(plane, PK_U, 1, (double[]){-0.1}); /* 0.2 is the frame boundary */
  expect_lines(plane, PK_V, 2, (double[]){-0.25, 0.25});
  pk_geometry_free(plane);
}

static void lines_wrap_and_shift(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.4);
  rect(plane, 1, 0.2, 0, 0.1, 0.5);
  expect_lines(plane, PK_U, 2, (double[]){-0.15, 0.15});
  pk_geometry_free(plane);
  plane = cell_plane(0.4);
  rect(plane, 1, 0.1, 0, 0.4, 0.5); /* a whole period: no ends */
  expect_lines(plane, PK_U, 0, NULL);
  expect_lines(plane, PK_V, 2, (double[]){-0.25, 0.25});
  pk_geometry_free(plane);
  plane = lattice_plane(1, 0.5, 0.2);
  rect(plane, 1, 0, 0.25, 0.2, 0.1); /* its upper half is seen one row down, at u - 0.2 */
  expect_lines(plane, PK_U, 3, (double[]){-0.3, -0.1, 0.1});
  pk_geometry_free(plane);
}

static void near_lines_are_one(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  rect(plane, 1, 0, 0.5, 0.5, 0.2);
  rect(plane, 1, 1e-10, -0.5, 0.5, 0.2);
  expect_lines(plane, PK_U, 2, (double[]){-0.25, 0.25});
  pk_geometry_free(plane);
}

static void extent_of_finite_things(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(1);
  double low = 7;
  double high = 7;
  assert_false(pk_geometry_extent(plane, PK_V, &low, &high));
  assert_true(low == 7 && high == 7);
  stripe(plane, 1, PK_V, -INFINITY, -2);
  assert_true(pk_geometry_extent(plane, PK_V, &low, &high));
  assert_true(low == -2 && high == -2);
  assert_false(pk_geometry_extent(plane, PK_U, &low, &high));
  disc(plane, 1, 0.25, 1, 0.5);
  assert_true(pk_geometry_extent(plane, PK_V, &low, &high));
  assert_true(low == -2 && high == 1.25);
  assert_true(pk_geometry_extent(plane, PK_U, &low, &high));
  assert_true(low == 0 && high == 0.5);
  pk_geometry_free(plane);
}

static void smallest_feature_of_teeth(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  assert_true(isinf(pk_geometry_smallest_feature(plane)));
  rect(plane, 1, 0, 0, 0.2, 0.5);
  assert_near(pk_geometry_smallest_feature(plane), 0.1, 1e-12); /* the gap, around the period */
  rect(plane, 1, 0, 0.28, 0.2, 0.02);
  assert_near(pk_geometry_smallest_feature(plane), 0.02, 1e-12); /* a slit across */
  pk_geometry_free(plane);
  plane = cell_plane(0.3);
  stripe(plane, 1, PK_U, -0.14, 0.12);
  assert_near(pk_geometry_smallest_feature(plane), 0.04, 1e-12);
  pk_geometry_free(plane);
  plane = cell_plane(0.3);
  disc(plane, 1, 0.1, 0, 0.24);
  assert_near(pk_geometry_smallest_feature(plane), 0.06, 1e-12);
  pk_geometry_free(plane);
  plane = open_plane(1);
  const double ell[6][2] = {{0, 0}, {0.8, 0}, {0.8, 0.1}, {0.3, 0.1}, {0.3, 0.7}, {0, 0.7}};
  polygon(plane, 1, 6, ell);
  assert_near(pk_geometry_smallest_feature(plane), 0.1, 1e-12);
  pk_geometry_free(plane);
}

static void profile_along_a_line(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.4);
  rect(plane, 1, 0.2, 0, 0.1, 0.5);
  disc(plane, 2, 0, 0, 0.1);
  double at[8] = {0};
  int media[8] = {0};
  int count = 0;
  assert_int_equal(pk_geometry_profile(plane, 0, 8, at, media, &count), PICKET_OK);
  const double expected[6] = {-0.2, -0.15, -0.05, 0.05, 0.15, 0.2};
  const int expected_media[5] = {1, 0, 2, 0, 1};
  assert_int_equal(count, 5);
  for (int i = 0; i < 6; i++) {
    assert_near(at[i], expected[i], 1e-9 * 0.4); /* the scan stands half a tolerance up */
  }
  for (int i = 0; i < 5; i++) {
    assert_int_equal(media[i], expected_media[i]);
  }
  assert_int_equal(pk_geometry_profile(plane, 0.25, 8, at, media, &count), PICKET_OK);
  assert_int_equal(count, 1); /* on the upper edge: the upper side */
  assert_int_equal(pk_geometry_profile(plane, -0.25, 8, at, media, &count), PICKET_OK);
  assert_int_equal(count, 3);
  count = -7;
  assert_int_equal(pk_geometry_profile(plane, 0, 4, at, media, &count), PICKET_ERROR_UNSUPPORTED);
  assert_int_equal(count, -7);
  assert_int_equal(pk_geometry_profile(plane, 0, 5, at, media, &count), PICKET_OK);
  pk_geometry_free(plane);
}

static void profile_of_a_shifted_row(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(1, 0.5, 0.2);
  rect(plane, 1, 0, 0, 0.2, 0.1);
  double at[4] = {0};
  int media[4] = {0};
  int count = 0;
  assert_int_equal(pk_geometry_profile(plane, 0.5, 3, at, media, &count), PICKET_OK);
  assert_int_equal(count, 3);
  assert_near(at[1], 0.1, 1e-14);
  assert_near(at[2], 0.3, 1e-14);
  assert_int_equal(media[1], 1);
  pk_geometry_free(plane);
}

static void media_at_the_sides(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  int low = -7;
  int high = -7;
  rect(plane, 1, 0, 0, 0.2, 3);
  stripe(plane, 2, PK_V, -INFINITY, -2);
  stripe(plane, 3, PK_V, 5, 6);
  assert_true(pk_geometry_side_media(plane, PK_V, &low, &high));
  assert_int_equal(low, 2);
  assert_int_equal(high, 0);
  low = high = -7;
  assert_false(pk_geometry_side_media(plane, PK_U, &low, &high)); /* periodic */
  stripe(plane, 4, PK_U, -0.1, 0.1);
  assert_false(pk_geometry_side_media(plane, PK_V, &low, &high));
  assert_true(low == -7 && high == -7);
  pk_geometry_free(plane);
  plane = open_plane(1);
  stripe(plane, 1, PK_V, -INFINITY, 0);
  assert_false(pk_geometry_side_media(plane, PK_U, &low, &high));
  assert_true(pk_geometry_side_media(plane, PK_V, &low, &high));
  assert_int_equal(low, 1);
  assert_int_equal(high, 0);
  pk_geometry_free(plane);
}

static void every_allocation_can_fail(void **state) {
  (void)state;
  memory_watch watch = {0, 0, -1};
  picket_context *context = context_new(&watch);
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
  for (int i = 0; i < 20; i++) { /* more lines than the first block holds */
    rect(plane, 1, -0.95 + 0.09 * i, 0, 0.03, 0.1 + 0.02 * i);
  }
  long alive = watch.alive;
  picket_status status = PICKET_ERROR_MEMORY;
  int tries = 0;
  double *lines = NULL;
  int count = -7;
  for (; status == PICKET_ERROR_MEMORY; tries++) {
    watch.fail_at = watch.requests + 1 + tries;
    status = pk_geometry_lines(plane, PK_U, &lines, &count);
    if (status != PICKET_OK) {
      assert_null(lines);
      assert_int_equal(count, -7);
      assert_int_equal(watch.alive, alive);
    }
  }
  assert_int_equal(status, PICKET_OK);
  assert_true(tries > 2);
  assert_int_equal(count, 40);
  pk_free(context, lines);
  pk_geometry_free(plane);
  picket_context_free(context);
  assert_int_equal(watch.alive, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(lines_of_a_tooth),        cmocka_unit_test(hidden_edges_give_no_lines),
      cmocka_unit_test(lines_wrap_and_shift),    cmocka_unit_test(near_lines_are_one),
      cmocka_unit_test(extent_of_finite_things), cmocka_unit_test(smallest_feature_of_teeth),
      cmocka_unit_test(profile_along_a_line),    cmocka_unit_test(profile_of_a_shifted_row),
      cmocka_unit_test(media_at_the_sides),      cmocka_unit_test(every_allocation_can_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
