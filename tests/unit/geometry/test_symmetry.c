/* Mirror planes found and not found, and which planes have axis-parallel interfaces only. */
#include "plane.h"

static void expect_mirror(const pk_geometry *plane, pk_axis_name axis, double expected) {
  double centre = NAN;
  assert_true(pk_geometry_mirror(plane, axis, &centre));
  assert_near(centre, expected, 1e-12);
}

static void expect_no_mirror(const pk_geometry *plane, pk_axis_name axis) {
  double centre = -7;
  assert_false(pk_geometry_mirror(plane, axis, &centre));
  assert_true(centre == -7);
}

static void a_tooth_has_both(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  expect_mirror(plane, PK_U, 0); /* nothing painted */
  rect(plane, 1, 0, 0, 0.15, 0.5);
  expect_mirror(plane, PK_U, 0);
  expect_mirror(plane, PK_V, 0);
  stripe(plane, 2, PK_V, -INFINITY, -2);
  expect_mirror(plane, PK_U, 0);
  expect_no_mirror(plane, PK_V);
  stripe(plane, 2, PK_V, 2, INFINITY);
  expect_mirror(plane, PK_V, 0);
  stripe(plane, 3, PK_V, 2, INFINITY);
  expect_no_mirror(plane, PK_V);
  pk_geometry_free(plane);
}

static void centres_off_the_middle(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(1);
  rect(plane, 1, 0.05, 1.5, 0.2, 0.5);
  rect(plane, 1, 0.25, 1.5, 0.1, 0.5);
  rect(plane, 1, 0.05, 1.5, 0.1, 0.7);
  expect_no_mirror(plane, PK_U);
  expect_mirror(plane, PK_V, 1.5);
  pk_geometry_free(plane);
  plane = cell_plane(1);
  disc(plane, 1, 0.1, 0, 0.2);
  disc(plane, 1, 0.3, 0, 0.2);
  expect_mirror(plane, PK_U, 0.2); /* the other one, -0.3, is farther from the middle */
  pk_geometry_free(plane);
  plane = cell_plane(1);
  rect(plane, 1, 0.45, 0.3, 0.2, 0.4); /* across the boundary; the other centre is -0.05 */
  expect_mirror(plane, PK_U, -0.05);
  expect_mirror(plane, PK_V, 0.3);
  pk_geometry_free(plane);
}

static void one_block_of_two_rectangles(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  rect(plane, 1, -0.1, 0, 0.6, 0.5); /* -0.4 .. 0.2 */
  rect(plane, 1, 0.3, 0, 0.2, 0.5);  /* 0.2 .. 0.4: together symmetric about 0 */
  expect_mirror(plane, PK_U, 0);
  rect(plane, 2, 0.3, 0, 0.2, 0.5);
  expect_no_mirror(plane, PK_U);
  pk_geometry_free(plane);
}

static void oblique_shapes(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(1);
  const double trapezoid[4][2] = {{-0.3, -0.2}, {0.3, -0.2}, {0.2, 0.2}, {-0.2, 0.2}};
  polygon(plane, 1, 4, trapezoid);
  expect_mirror(plane, PK_U, 0);
  expect_no_mirror(plane, PK_V);
  assert_false(pk_geometry_is_rectangular(plane));
  pk_geometry_free(plane);
  plane = cell_plane(1);
  const double slanted[4][2] = {{-0.3, -0.2}, {0.2, -0.2}, {0.3, 0.2}, {-0.2, 0.2}};
  polygon(plane, 1, 4, slanted);
  expect_no_mirror(plane, PK_U);
  expect_no_mirror(plane, PK_V);
  pk_geometry_free(plane);
}

static void the_limit_of_equality(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  rect(plane, 1, 0, 0, 0.5, 0.5);
  disc(plane, 2, 1e-10, 0, 0.2); /* below 1e-9 of the extent of 2 */
  expect_mirror(plane, PK_U, 0);
  disc(plane, 3, 1e-6, 0, 0.2);
  expect_no_mirror(plane, PK_U);
  pk_geometry_free(plane);
}

static void shifted_lattices(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(1, 0.8, 0.5);
  disc(plane, 1, 0, 0, 0.4);
  expect_mirror(plane, PK_U, 0);
  expect_mirror(plane, PK_V, 0);
  rect(plane, 2, 0.25, 0.4, 0.1, 0.1); /* its image is not there */
  expect_no_mirror(plane, PK_U);
  pk_geometry_free(plane);
  plane = lattice_plane(1, 0.8, 0.3);
  disc(plane, 1, 0, 0, 0.4);
  expect_no_mirror(plane, PK_U);
  pk_geometry_free(plane);
}

/* A plane painted twice, the second time reflected, has a mirror; with one more shape it has none.
 */
static void random_planes(void **state) {
  (void)state;
  uint64_t seed = 19;
  for (int trial = 0; trial < 15; trial++) {
    pk_geometry *plane = lattice_plane(2, 2, 0);
    double centre = random_in(&seed, -0.4, 0.4);
    for (int i = 0; i < 6; i++) {
      double u = random_in(&seed, 0.1, 0.9);
      double v = random_in(&seed, -1, 1);
      double size = random_in(&seed, 0.05, 0.18); /* keeps clear of its image */
      for (int side = -1; side <= 1; side += 2) {
        double at = remainder(centre + side * u, 2);
        if (i % 2) {
          disc(plane, 1 + i, at, v, size);
        } else {
          rect(plane, 1 + i, at, v, size, 2 * size);
        }
      }
    }
    expect_mirror(plane, PK_U, centre);
    disc(plane, 1, remainder(centre + 0.5, 2), 0.3, 0.05);
    expect_no_mirror(plane, PK_U);
    pk_geometry_free(plane);
  }
}

static void rectangular_planes(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(1);
  assert_true(pk_geometry_is_rectangular(plane));
  disc(plane, 1, 0.4, 0, 0.4);
  assert_false(pk_geometry_is_rectangular(plane));
  rect(plane, 2, 0.4, 0, 0.5, 0.5); /* hides it */
  assert_true(pk_geometry_is_rectangular(plane));
  disc(plane, 2, 0.4, 0, 0.4); /* cannot be seen */
  assert_true(pk_geometry_is_rectangular(plane));
  disc(plane, 2, 0.4, 0.2, 0.4); /* a bulge */
  assert_false(pk_geometry_is_rectangular(plane));
  pk_geometry_free(plane);
  plane = open_plane(1); /* only its straight part is inside the frame */
  const double house[5][2] = {{-0.5, -1.5}, {0, -1.2}, {0.5, -1.5}, {0.5, 0.5}, {-0.5, 0.5}};
  polygon(plane, 1, 5, house);
  assert_true(pk_geometry_is_rectangular(plane));
  pk_geometry_free(plane);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_tooth_has_both),
      cmocka_unit_test(centres_off_the_middle),
      cmocka_unit_test(one_block_of_two_rectangles),
      cmocka_unit_test(oblique_shapes),
      cmocka_unit_test(the_limit_of_equality),
      cmocka_unit_test(shifted_lattices),
      cmocka_unit_test(random_planes),
      cmocka_unit_test(rectangular_planes),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
