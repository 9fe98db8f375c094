/* Corners with their quadrants. */
#include "plane.h"

static pk_corner *corners_of(const pk_geometry *plane, int expected, int expected_other) {
  pk_corner *corners = NULL;
  int count = -1;
  int other = -1;
  assert_int_equal(pk_geometry_corners(plane, &corners, &count, &other), PICKET_OK);
  assert_int_equal(count, expected);
  assert_int_equal(other, expected_other);
  assert_int_equal(pk_geometry_has_corners(plane), expected + expected_other > 0);
  return corners;
}

static void expect_corner(const pk_corner *corner, double u, double v, int pp, int mp, int mm,
                          int pm) {
  assert_near(corner->at[0], u, 1e-12);
  assert_near(corner->at[1], v, 1e-12);
  assert_int_equal(corner->medium[0], pp);
  assert_int_equal(corner->medium[1], mp);
  assert_int_equal(corner->medium[2], mm);
  assert_int_equal(corner->medium[3], pm);
}

static void four_corners_of_a_tooth(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  free(corners_of(plane, 0, 0));
  rect(plane, 1, 0, 0, 0.15, 0.5);
  pk_corner *corners = corners_of(plane, 4, 0);
  expect_corner(&corners[0], -0.075, -0.25, 1, 0, 0, 0);
  expect_corner(&corners[1], 0.075, -0.25, 0, 1, 0, 0);
  expect_corner(&corners[2], -0.075, 0.25, 0, 0, 0, 1);
  expect_corner(&corners[3], 0.075, 0.25, 0, 0, 1, 0);
  free(corners);
  pk_geometry_free(plane);
}

static void straight_interfaces_have_none(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  stripe(plane, 1, PK_V, -INFINITY, 0);
  rect(plane, 1, 0, -0.1, 0.1, 0.2); /* hidden: the same medium */
  rect(plane, 2, 0.05, 1, 0.3, 0.5); /* a whole period */
  disc(plane, 3, 0, 1, 0.1);         /* smooth */
  free(corners_of(plane, 0, 0));
  stripe(plane, 4, PK_U, -0.05, 0.05); /* crosses the interfaces at 0, 0.75, 1.25 */
  free(corners_of(plane, 6, 0));
  pk_geometry_free(plane);
}

static void tooth_on_a_substrate(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  stripe(plane, 1, PK_V, -INFINITY, -0.25);
  rect(plane, 2, 0, 0, 0.4, 0.5);
  pk_corner *corners = corners_of(plane, 4, 0);
  expect_corner(&corners[0], -0.2, -0.25, 2, 0, 1, 1);
  expect_corner(&corners[1], 0.2, -0.25, 0, 2, 1, 1);
  expect_corner(&corners[2], -0.2, 0.25, 0, 0, 0, 2);
  free(corners);
  pk_geometry_free(plane);
}

static void checkerboard_and_wrapping(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(1, 1, 0);
  rect(plane, 1, 0.25, 0.25, 0.5, 0.5);
  rect(plane, 1, -0.25, -0.25, 0.5, 0.5);
  pk_corner *corners = corners_of(plane, 4, 0); /* (0,0), (±½,0), (0,±½), (±½,±½): four per cell */
  expect_corner(&corners[0], -0.5, -0.5, 1, 0, 1, 0);
  expect_corner(&corners[3], 0, 0, 1, 0, 1, 0);
  free(corners);
  pk_geometry_free(plane);
  plane = lattice_plane(1, 0.5, 0.25);
  rect(plane, 1, 0.5, 0.25, 0.2, 0.1); /* across both boundaries */
  corners = corners_of(plane, 4, 0);
  expect_corner(&corners[0], 0.5 - 0.1 - 0.25, -0.2, 0, 0, 0, 1); /* its upper edge, one row down */
  free(corners);
  pk_geometry_free(plane);
}

static void oblique_corners_are_counted(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  const double cut[5][2] = {{-0.5, -0.5}, {0.5, -0.5}, {0.5, 0.2}, {0.2, 0.5}, {-0.5, 0.5}};
  polygon(plane, 1, 5, cut);
  pk_corner *corners = corners_of(plane, 3, 2);
  expect_corner(&corners[0], -0.5, -0.5, 1, 0, 0, 0);
  free(corners);
  disc(plane, 2, -0.5, -0.5, 0.2); /* swallows a corner, crosses two edges */
  free(corners_of(plane, 2, 4));
  pk_geometry_free(plane);
}

static void corners_outside_an_open_frame_are_not_meant(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  rect(plane, 1, 1, 0, 0.4, 0.5);    /* reaches through the side */
  rect(plane, 2, -0.8, 0, 0.4, 0.5); /* ends on the side */
  free(corners_of(plane, 4, 0));
  pk_geometry_free(plane);
}

static void every_allocation_can_fail(void **state) {
  (void)state;
  memory_watch watch = {0, 0, -1};
  picket_context *context = context_new(&watch);
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
  for (int i = 0; i < 10; i++) {
    rect(plane, 1, -0.9 + 0.18 * i, 0, 0.05, 0.1);
  }
  long alive = watch.alive;
  picket_status status = PICKET_ERROR_MEMORY;
  pk_corner *corners = NULL;
  int count = -7;
  int other = -7;
  int tries = 0;
  for (; status == PICKET_ERROR_MEMORY; tries++) {
    watch.fail_at = watch.requests + 1 + tries;
    status = pk_geometry_corners(plane, &corners, &count, &other);
    if (status != PICKET_OK) {
      assert_null(corners);
      assert_true(count == -7 && other == -7);
      assert_int_equal(watch.alive, alive);
    }
  }
  assert_int_equal(status, PICKET_OK);
  assert_true(tries > 4);
  assert_int_equal(count, 40);
  pk_free(context, corners);
  pk_geometry_free(plane);
  picket_context_free(context);
  assert_int_equal(watch.alive, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(four_corners_of_a_tooth),
      cmocka_unit_test(straight_interfaces_have_none),
      cmocka_unit_test(tooth_on_a_substrate),
      cmocka_unit_test(checkerboard_and_wrapping),
      cmocka_unit_test(oblique_corners_are_counted),
      cmocka_unit_test(corners_outside_an_open_frame_are_not_meant),
      cmocka_unit_test(every_allocation_can_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
