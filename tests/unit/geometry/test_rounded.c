/* Rectangles with rounded corners and leaning sides: areas in closed form, the disc at one end and
 * the sharp rectangle at the other, mirror planes, copies over the boundary. */
#include "plane.h"

static const double PI = 3.14159265358979323846;

static void rounded(pk_geometry *plane, int medium, const double at[2], const double size[2],
                    double lean, double radius) {
  assert_int_equal(pk_geometry_add_rounded_rect(plane, nowhere, medium, at, size, lean, radius),
                   PICKET_OK);
}

/* Of medium 1 in the open plane ±1. */
static double area_of(const double at[2], const double size[2], double lean, double radius) {
  pk_geometry *plane = open_plane(1);
  rounded(plane, 1, at, size, lean, radius);
  double area = 4 * share(plane, 1, -1, -1, 1, 1);
  /* The same from boxes that cut the arcs: the largest fraction of a square not at a corner is 1.
   */
  double sum = 0;
  for (int i = 0; i < 10; i++) {
    for (int k = 0; k < 10; k++) {
      sum += 0.04 * share(plane, 1, -1 + 0.2 * i, -1 + 0.2 * k, -0.8 + 0.2 * i, -0.8 + 0.2 * k);
    }
  }
  assert_near(sum, area, 1e-12); /* a hundred sums of rounding errors */
  pk_geometry_free(plane);
  return area;
}

static void areas(void **state) {
  (void)state;
  static const double sizes[][2] = {{0.9, 0.5}, {0.3, 1.1}, {0.6, 0.6}};
  static const double at[2] = {0.13, -0.07};
  for (int s = 0; s < 3; s++) {
    double w = sizes[s][0], h = sizes[s][1], half = fmin(w, h) / 2;
    for (int i = 0; i <= 4; i++) {
      double r = half * i / 4;
      assert_near(area_of(at, sizes[s], 0, r), w * h - (4 - PI) * r * r, 1e-12);
    }
    /* The width at half height is kept, so the area is. */
    assert_near(area_of(at, sizes[s], 0.2, 0), w * h, 1e-12);
    assert_near(area_of(at, sizes[s], -0.25, 0), w * h, 1e-12);
  }
}

/* A corner that turns by φ loses 2 (r²/2) tan(φ/2) - r² φ/2 to its arc; here twice a quarter more
 * and twice a quarter less than the lean. */
static void area_of_both(void **state) {
  (void)state;
  static const double at[2] = {-0.1, 0.05}, size[2] = {0.8, 0.4};
  for (int sign = -1; sign <= 1; sign += 2) {
    double lean = sign * 0.3, r = 0.07;
    double lost = 0;
    for (int end = -1; end <= 1; end += 2) {
      double turn = PI / 2 + end * lean;
      lost += 2 * r * r * (tan(turn / 2) - turn / 2);
    }
    assert_near(area_of(at, size, lean, r), 0.8 * 0.4 - lost, 1e-12);
  }
}

static void top_is_narrower(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  rounded(plane, 1, (double[2]){0, 0}, (double[2]){0.8, 0.4}, atan(0.5), 0);
  double ends[2][2] = {{0.4999, -0.1999}, {0.3001, 0.1999}}; /* 0.4 and the lean over 0.2 */
  for (int i = 0; i < 2; i++) {
    double inside = ends[i][0] - 0.0003, outside = ends[i][0] + 0.0003;
    assert_int_equal(pk_geometry_medium_at(plane, inside, ends[i][1]), 1);
    assert_int_equal(pk_geometry_medium_at(plane, -inside, ends[i][1]), 1);
    assert_int_equal(pk_geometry_medium_at(plane, outside, ends[i][1]), 0);
    assert_int_equal(pk_geometry_medium_at(plane, -outside, ends[i][1]), 0);
  }
  pk_geometry_free(plane);
}

/* The same numbers, bit for bit, in every box of a grid. */
static void expect_same(const pk_geometry *a, const pk_geometry *b) {
  for (int i = 0; i < 14; i++) {
    for (int k = 0; k < 14; k++) {
      double u = -1 + i / 7., v = -1 + k / 7.;
      pk_box x = box_of(a, u, v, u + 1 / 7., v + 1 / 7.);
      pk_box y = box_of(b, u, v, u + 1 / 7., v + 1 / 7.);
      assert_int_equal(x.count, y.count);
      assert_memory_equal(x.medium, y.medium, (size_t)x.count * sizeof *x.medium);
      assert_memory_equal(x.fraction, y.fraction, (size_t)x.count * sizeof *x.fraction);
      assert_memory_equal(x.facing, y.facing, sizeof x.facing);
    }
  }
}

static void fully_rounded_square_is_a_disc(void **state) {
  (void)state;
  static const double at[2] = {0.03, -0.2}, size[2] = {0.7, 0.7};
  pk_geometry *square = open_plane(1), *circle = open_plane(1);
  rounded(square, 1, at, size, 0, 0.35);
  disc(circle, 1, at[0], at[1], 0.7);
  expect_same(square, circle);
  pk_geometry_free(square);
  /* Nearly: the box that holds the most of its edge differs by the rounding. */
  square = open_plane(1);
  rounded(square, 1, at, size, 0, 0.35 * (1 - 1e-7));
  for (int i = 0; i < 10; i++) {
    double u = -1 + 0.2 * i;
    assert_near(share(square, 1, u, -0.2, u + 0.2, 0.1), share(circle, 1, u, -0.2, u + 0.2, 0.1),
                1e-6);
  }
  pk_geometry_free(square);
  pk_geometry_free(circle);
}

static void without_rounding_it_is_a_rectangle(void **state) {
  (void)state;
  static const double at[2] = {0.03, -0.2}, size[2] = {0.7, 0.4};
  pk_geometry *plain = open_plane(1);
  rect(plain, 1, at[0], at[1], size[0], size[1]);
  for (int i = 0; i < 2; i++) { /* 1e-9 of the extent, 2, is the tolerance of coordinates */
    pk_geometry *other = open_plane(1);
    rounded(other, 1, at, size, i * 1e-9, i * 1e-9);
    assert_true(pk_geometry_is_rectangular(other));
    expect_same(plain, other);
    pk_geometry_free(other);
  }
  pk_geometry_free(plain);
}

static void expect_mirror(const pk_geometry *plane, pk_axis_name axis, double expected) {
  double centre = NAN;
  assert_true(pk_geometry_mirror(plane, axis, &centre));
  assert_near(centre, expected, 1e-12);
}

static void mirrors_corners_and_lines(void **state) {
  (void)state;
  double centre = 0;
  pk_geometry *plane = cell_plane(1);
  rounded(plane, 1, (double[2]){0.1, 0.3}, (double[2]){0.4, 0.8}, 0, 0.15);
  expect_mirror(plane, PK_U, 0.1);
  expect_mirror(plane, PK_V, 0.3);
  assert_false(pk_geometry_has_corners(plane));
  assert_false(pk_geometry_is_rectangular(plane));
  assert_near(pk_geometry_smallest_along(plane, PK_U), 0.4, 1e-12);
  double *lines = NULL;
  int count = 0;
  assert_int_equal(pk_geometry_lines(plane, PK_U, &lines, &count), PICKET_OK);
  assert_int_equal(count, 2); /* the straight parts of the sides */
  assert_near(lines[0], -0.1, 1e-12);
  assert_near(lines[1], 0.3, 1e-12);
  free(lines); /* the plane has no memory callbacks */
  pk_geometry_free(plane);

  plane = open_plane(1);
  rounded(plane, 1, (double[2]){-0.2, 0}, (double[2]){0.6, 0.4}, 0.2, 0.05);
  expect_mirror(plane, PK_U, -0.2);
  assert_false(pk_geometry_mirror(plane, PK_V, &centre));
  assert_false(pk_geometry_has_corners(plane));
  pk_geometry_free(plane);
}

/* The copies over both boundaries are the same shape. */
static void wraps(void **state) {
  (void)state;
  static const double size[2] = {0.5, 0.4};
  pk_geometry *middle = lattice_plane(1, 1, 0), *edge = lattice_plane(1, 1, 0);
  rounded(middle, 1, (double[2]){0, 0}, size, 0.1, 0.12);
  rounded(edge, 1, (double[2]){0.5, -0.5}, size, 0.1, 0.12);
  for (int i = 0; i < 8; i++) {
    for (int k = 0; k < 8; k++) {
      double u = -0.5 + i / 8., v = -0.5 + k / 8.;
      assert_near(share(edge, 1, u + 0.5, v - 0.5, u + 0.625, v - 0.375),
                  share(middle, 1, u, v, u + 0.125, v + 0.125), 1e-11); /* 64 eps of a box 1/64 */
    }
  }
  assert_near(share(edge, 1, -0.5, -0.5, 0.5, 0.5), share(middle, 1, -0.5, -0.5, 0.5, 0.5), 1e-13);
  pk_geometry_free(middle);
  pk_geometry_free(edge);
}

static void refuses(void **state) {
  (void)state;
  static const struct {
    double at, width, lean, radius;
    const char *words;
  } rows[] = {
      {0, 0.4, 0, -1e-3, "corner radius is -1 nm, must be 0 to 100 nm"},
      {0, 0.4, 0, 0.1001, "corner radius is 100.1 nm, must be 0 to 100 nm"},
      {0, 0.4, 0, NAN, "corner radius is nan"},
      {0, 0.4, NAN, 0, "sides lean by nan"},
      {0, 0.4, 0.8, 0, "sides lean by 0.8 rad, must be within 0.785398 rad"},
      {0, 0.1, 0.5, 0, "sides lean by 0.5 rad, must be within 0.463648 rad"},
      {0, -0.1, 0, 0.01, "size is -100 x 200 nm"},
      {0, INFINITY, 0, 0.01, "size is inf x 200 nm"},
      {NAN, 0.4, 0, 0.01, "position is [nan, 0]"},
      {5, 0.4, 0, 0.01, "must not lie wholly outside"},
  };
  picket_context *context = context_new(NULL);
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    const double at[2] = {rows[i].at, 0}, size[2] = {rows[i].width, 0.2};
    assert_int_equal(
        pk_geometry_add_rounded_rect(plane, nowhere, 1, at, size, rows[i].lean, rows[i].radius),
        PICKET_ERROR_INPUT);
    if (!strstr(picket_context_message(context), rows[i].words)) {
      fail_msg("\"%s\" is not in \"%s\"", rows[i].words, picket_context_message(context));
    }
  }
  assert_int_equal(pk_geometry_shape_count(plane), 0);
  pk_geometry_free(plane);
  picket_context_free(context);
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  long fail_at = 1;
  for (; status != PICKET_OK; fail_at++) {
    memory_watch watch = {.fail_at = 0};
    picket_context *context = context_new(&watch);
    pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
    pk_geometry *plane = NULL;
    assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
    watch.fail_at = watch.requests + fail_at;
    status = pk_geometry_add_rounded_rect(plane, nowhere, 1, (double[2]){0, 0},
                                          (double[2]){0.4, 0.2}, 0.1, 0.05);
    assert_int_equal(pk_geometry_shape_count(plane), status == PICKET_OK);
    pk_geometry_free(plane);
    picket_context_free(context);
    assert_int_equal(watch.alive, 0);
  }
  assert_true(fail_at > 3); /* known coordinates, the outline, the list of shapes */
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(areas),
      cmocka_unit_test(area_of_both),
      cmocka_unit_test(top_is_narrower),
      cmocka_unit_test(fully_rounded_square_is_a_disc),
      cmocka_unit_test(without_rounding_it_is_a_rectangle),
      cmocka_unit_test(mirrors_corners_and_lines),
      cmocka_unit_test(wraps),
      cmocka_unit_test(refuses),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
