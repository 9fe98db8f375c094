/* Shapes as polygons: corners where they are, areas of discs up to their chords, wrapping, and the
 * medium found in the picture is the one that the plane has. */
#include "geometry/draw.h"
#include "plane.h"

/* Twice the signed area of a polygon is the sum of the cross products of its corners. */
static double area_of(const pk_drawn *drawn) {
  double twice = 0;
  for (int i = 0; i < drawn->count; i++) {
    const double *a = drawn->at[i], *b = drawn->at[(i + 1) % drawn->count];
    twice += a[0] * b[1] - a[1] * b[0];
  }
  return fabs(twice) / 2;
}

/* Even-odd rule. */
static bool holds(const pk_drawn *drawn, double u, double v) {
  bool inside = false;
  for (int i = 0; i < drawn->count; i++) {
    const double *a = drawn->at[i], *b = drawn->at[(i + 1) % drawn->count];
    if ((a[1] > v) != (b[1] > v) && u < a[0] + (v - a[1]) / (b[1] - a[1]) * (b[0] - a[0])) {
      inside = !inside;
    }
  }
  return inside;
}

static const pk_frame lattice = {{-0.5, -0.4}, {0.5, 0.4}, {true, true}, 0.25, 7};

static pk_geometry *painted(picket_context *context) {
  static const double corners[4][2] = {{-0.2, -0.3}, {0.1, -0.25}, {0, 0.1}, {-0.3, 0}};
  pk_geometry *plane = NULL;
  picket_status status = pk_geometry_create(context, &lattice, &plane);
  if (status == PICKET_OK) {
    status = pk_geometry_add_stripe(plane, nowhere, 1, PK_V, 0.1, 0.2);
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_disc(plane, nowhere, 2, (double[2]){0.45, 0.35}, 0.3);
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_polygon(plane, nowhere, 3, 4, corners);
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_rounded_rect(plane, nowhere, 4, (double[2]){0.2, 0},
                                          (double[2]){0.2, 0.3}, 0.1, 0.05);
  }
  if (status != PICKET_OK) {
    pk_geometry_free(plane);
    return NULL;
  }
  return plane;
}

/* At random points, but for those so near to an arc that its chord may pass on the other side. */
static void the_picture_is_the_plane(void **state) {
  (void)state;
  picket_context *context = context_new(NULL);
  pk_geometry *plane = painted(context);
  pk_drawn *drawn = NULL;
  int count = 0, wrong = 0;
  assert_non_null(plane);
  assert_int_equal(pk_geometry_draw(plane, lattice.from, lattice.to, &drawn, &count), PICKET_OK);
  unsigned seed = 1;
  enum { POINTS = 20000 };
  for (int i = 0; i < POINTS; i++) {
    double at[2];
    for (int a = 0; a < 2; a++) {
      seed = seed * 1664525u + 1013904223u;
      at[a] = lattice.from[a] + (lattice.to[a] - lattice.from[a]) * (seed / 4294967296.0);
    }
    int medium = lattice.background;
    for (int d = 0; d < count; d++) {
      medium = holds(&drawn[d], at[0], at[1]) ? drawn[d].medium : medium;
    }
    wrong += medium != pk_geometry_medium_at(plane, at[0], at[1]);
  }
  /* A circle of radius r loses 1 - sin(θ)/θ of its area to chords of θ = 7.5°: 0.3 % of 0.07 of an
   * area of 0.8, that is 5 points of 20000; the rounded corners less. */
  assert_in_range(wrong, 0, 20);
  pk_drawn_free(context, drawn, count);
  pk_geometry_free(plane);
  picket_context_free(context);
}

static void a_disc_is_a_polygon(void **state) {
  (void)state;
  static const pk_frame open = {{-1, -INFINITY}, {1, INFINITY}, {false, false}, 0, 0};
  picket_context *context = context_new(NULL);
  pk_geometry *plane = NULL;
  pk_drawn *drawn = NULL;
  int count = 0;
  assert_int_equal(pk_geometry_create(context, &open, &plane), PICKET_OK);
  assert_int_equal(pk_geometry_add_disc(plane, nowhere, 5, (double[2]){0.1, 0.2}, 0.8), PICKET_OK);
  assert_int_equal(pk_geometry_draw(plane, (double[2]){-1, -1}, (double[2]){1, 1}, &drawn, &count),
                   PICKET_OK);
  assert_int_equal(count, 1);
  assert_int_equal(drawn[0].medium, 5);
  assert_int_equal(drawn[0].count, 48);
  /* Area of the regular polygon with 48 corners. */
  assert_near(area_of(&drawn[0]), 24 * 0.16 * sin(2 * 3.14159265358979323846 / 48), 1e-14);
  pk_drawn_free(context, drawn, count);
  pk_geometry_free(plane);
  picket_context_free(context);
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  long n = 1;
  for (; status != PICKET_OK; n++) {
    memory_watch watch = {0, 0, 0};
    picket_context *context = context_new(&watch);
    pk_geometry *plane = painted(context);
    pk_drawn *drawn = NULL;
    int count = 0;
    assert_non_null(plane);
    watch.fail_at = watch.requests + n;
    status = pk_geometry_draw(plane, lattice.from, lattice.to, &drawn, &count);
    assert_true(status == PICKET_OK || (status == PICKET_ERROR_MEMORY && !drawn));
    pk_drawn_free(context, drawn, count);
    pk_geometry_free(plane);
    picket_context_free(context);
    assert_int_equal(watch.alive, 0);
  }
  assert_true(n > 10); /* a list, and one or two for each copy of each shape */
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(the_picture_is_the_plane),
      cmocka_unit_test(a_disc_is_a_polygon),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
