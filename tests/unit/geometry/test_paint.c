/* Painting: what is refused, what is found at a point, and memory that runs out. */
#include "plane.h"

static void frames_are_checked(void **state) {
  (void)state;
  const pk_frame wrong[] = {
      {.from = {0, 0}, .to = {0, 1}},
      {.from = {1, 0}, .to = {0, 1}},
      {.from = {NAN, 0}, .to = {1, 1}},
      {.from = {0, NAN}, .to = {1, 1}},
      {.from = {0, 1}, .to = {1, 1}},
      {.from = {-INFINITY, 0}, .to = {1, 1}},
      {.from = {0, -INFINITY}, .to = {1, INFINITY}, .periodic = {true, true}},
      {.from = {0, 0}, .to = {1, 1}, .periodic = {true, false}, .shift = 0.5},
      {.from = {0, 0}, .to = {1, 1}, .periodic = {true, true}, .shift = NAN},
  };
  picket_context *context = context_new(NULL);
  for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
    pk_geometry *plane = NULL;
    assert_int_equal(pk_geometry_create(context, &wrong[i], &plane), PICKET_ERROR_INPUT);
    assert_null(plane);
    assert_true(strlen(picket_context_message(context)) > 0);
  }
  picket_context_free(context);
  pk_geometry_free(NULL);
}

/* A refused shape leaves the plane as it was. */
static void expect_refused(pk_geometry *plane, picket_status status) {
  assert_int_equal(status, PICKET_ERROR_INPUT);
  assert_int_equal(pk_geometry_shape_count(plane), 0);
  double low;
  double high;
  assert_false(pk_geometry_extent(plane, PK_U, &low, &high));
}

static void wrong_sizes_are_refused(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(2, 2, 0);
  const double wrong[] = {0, -1, NAN, INFINITY, 2.001, 1e-12};
  for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
    double at[2] = {0, 0};
    double wide[2] = {wrong[i], 0.5};
    double high[2] = {0.5, wrong[i]};
    expect_refused(plane, pk_geometry_add_rect(plane, nowhere, 1, at, wide));
    expect_refused(plane, pk_geometry_add_rect(plane, nowhere, 1, at, high));
    expect_refused(plane, pk_geometry_add_disc(plane, nowhere, 1, at, wrong[i]));
  }
  const double bad[][2] = {{NAN, 0}, {0, INFINITY}, {5, 0}, {0, -5}};
  for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
    double size[2] = {0.5, 0.5};
    expect_refused(plane, pk_geometry_add_rect(plane, nowhere, 1, bad[i], size));
    expect_refused(plane, pk_geometry_add_disc(plane, nowhere, 1, bad[i], 0.5));
  }
  expect_refused(plane, pk_geometry_add_stripe(plane, nowhere, 1, PK_U, 0.5, 0.5));
  expect_refused(plane, pk_geometry_add_stripe(plane, nowhere, 1, PK_V, NAN, 0.5));
  expect_refused(plane, pk_geometry_add_stripe(plane, nowhere, 1, PK_V, -INFINITY, 0));
  rect(plane, 1, 0, 0, 2, 2); /* just one period long */
  pk_geometry_free(plane);
}

static void the_place_is_named(void **state) {
  (void)state;
  picket_context *context = context_new(NULL);
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
  pk_place place = {"teeth.yaml", 12, 7};
  double at[2] = {0, 0};
  assert_int_equal(pk_geometry_add_disc(plane, place, 1, at, -0.12), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "teeth.yaml:12:7: "));
  assert_non_null(strstr(picket_context_message(context), "-120 nm"));
  pk_geometry_free(plane);
  picket_context_free(context);
}

static void wrong_polygons_are_refused(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(2, 2, 0);
  const struct {
    int count;
    double corners[6][2];
  } wrong[] = {
      {2, {{0, 0}, {1, 0}}},
      {4, {{0, 0}, {1, 1}, {1, 0}, {0, 1}}},                        /* bow tie */
      {3, {{0, 0}, {0.5, 0.5}, {1, 1}}},                            /* no area */
      {4, {{0, 0}, {1, 0}, {1, 0}, {0, 1}}},                        /* a corner twice */
      {4, {{0, 0}, {1, 0}, {0.5, 0}, {0, 1}}},                      /* folds back */
      {3, {{0, 0}, {1, 0}, {NAN, 1}}},                              /* not a number */
      {3, {{0, 0}, {1, 0}, {0, INFINITY}}},                         /* not finite */
      {6, {{0, 0}, {1, 0}, {1, 1}, {0.5, 0}, {0, 1}, {-0.2, 0.3}}}, /* touches itself */
      {3, {{0, 0}, {2.5, 0}, {0, 1}}},                              /* longer than the period */
      {3, {{4, 0}, {5, 0}, {4, 1}}},                                /* outside */
  };
  for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
    expect_refused(plane, pk_geometry_add_polygon(plane, nowhere, 1, wrong[i].count,
                                                  (const double(*)[2])wrong[i].corners));
  }
  double(*many)[2] = calloc(1001, sizeof *many);
  assert_non_null(many);
  for (int i = 0; i < 1001; i++) {
    many[i][0] = 0.5 * cos(i * 6.283185307179586 / 1001);
    many[i][1] = 0.5 * sin(i * 6.283185307179586 / 1001);
  }
  expect_refused(plane, pk_geometry_add_polygon(plane, nowhere, 1, 1001, (const double(*)[2])many));
  polygon(plane, 1, 1000, (const double(*)[2])many);
  free(many);
  pk_geometry_free(plane);
}

static void both_senses_of_rotation_are_the_same(void **state) {
  (void)state;
  const double left[4][2] = {{0, 0}, {0.5, 0.1}, {0.4, 0.6}, {0.1, 0.3}};
  double right[4][2];
  for (int i = 0; i < 4; i++) {
    right[i][0] = left[3 - i][0];
    right[i][1] = left[3 - i][1];
  }
  pk_geometry *a = open_plane(1);
  pk_geometry *b = open_plane(1);
  polygon(a, 1, 4, left);
  polygon(b, 1, 4, (const double(*)[2])right);
  assert_near(share(a, 1, 0.05, -1, 0.3, 0.25), share(b, 1, 0.05, -1, 0.3, 0.25), 1e-14);
  pk_geometry_free(a);
  pk_geometry_free(b);
}

static void the_medium_at_a_point(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  rect(plane, 1, 0.15, 0, 0.15, 0.5); /* across the boundary: 0.075 .. 0.225 */
  disc(plane, 2, 0, 1, 0.2);
  stripe(plane, 3, PK_V, -INFINITY, -2);
  assert_int_equal(pk_geometry_medium_at(plane, 0, 0), 0);
  assert_int_equal(pk_geometry_medium_at(plane, 0.14, 0), 1);
  assert_int_equal(pk_geometry_medium_at(plane, -0.14, 0), 1);
  assert_int_equal(pk_geometry_medium_at(plane, -0.07, 0), 0);
  assert_int_equal(pk_geometry_medium_at(plane, 3.0 + 0.06, 1), 2);
  assert_int_equal(pk_geometry_medium_at(plane, 0.08, 1.08), 0);
  assert_int_equal(pk_geometry_medium_at(plane, 0.1, -1e6), 3);
  /* On an interface the upper side counts, whatever the copy. */
  for (int k = -3; k <= 3; k++) {
    assert_int_equal(pk_geometry_medium_at(plane, 0.075 + k * 0.3, 0), 1);
    assert_int_equal(pk_geometry_medium_at(plane, -0.075 + k * 0.3, 0), 0);
  }
  assert_int_equal(pk_geometry_medium_at(plane, 0.14, 0.25), 0);
  assert_int_equal(pk_geometry_medium_at(plane, 0.14, -0.25), 1);
  assert_int_equal(pk_geometry_frame(plane)->background, 0);
  pk_geometry_free(plane);
}

static picket_status paint_all(picket_context *context, pk_geometry **out) {
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}, .periodic = {true, true}, .shift = 0.3};
  const double corners[3][2] = {{0, 0}, {0.5, 0}, {0, 0.4}};
  pk_geometry *plane = NULL;
  picket_status status = pk_geometry_create(context, &frame, &plane);
  for (int i = 0; i < 6 && status == PICKET_OK; i++) {
    double at[2] = {0.1 * i, 0};
    double size[2] = {0.23, 0.31};
    status = pk_geometry_add_rect(plane, nowhere, 1, at, size);
    if (status == PICKET_OK) {
      status = pk_geometry_add_disc(plane, nowhere, 2, at, 0.2);
    }
    if (status == PICKET_OK) {
      status = pk_geometry_add_polygon(plane, nowhere, 3, 3, corners);
    }
    if (status == PICKET_OK) {
      status = pk_geometry_add_stripe(plane, nowhere, 4, PK_U, at[0], at[0] + 0.01);
    }
  }
  if (status != PICKET_OK) {
    pk_geometry_free(plane);
    return status;
  }
  *out = plane;
  return PICKET_OK;
}

static void every_allocation_can_fail(void **state) {
  (void)state;
  memory_watch watch = {0, 0, -1};
  picket_context *context = context_new(&watch);
  long alive = watch.alive;
  long requests = watch.requests;
  pk_geometry *plane = NULL;
  assert_int_equal(paint_all(context, &plane), PICKET_OK);
  requests = watch.requests - requests;
  pk_geometry_free(plane);
  for (long n = 1; n <= requests; n++) {
    plane = NULL;
    watch.fail_at = watch.requests + n;
    assert_int_equal(paint_all(context, &plane), PICKET_ERROR_MEMORY);
    assert_null(plane);
    assert_int_equal(watch.alive, alive);
  }
  picket_context_free(context);
  assert_int_equal(watch.alive, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(frames_are_checked),
      cmocka_unit_test(wrong_sizes_are_refused),
      cmocka_unit_test(the_place_is_named),
      cmocka_unit_test(wrong_polygons_are_refused),
      cmocka_unit_test(both_senses_of_rotation_are_the_same),
      cmocka_unit_test(the_medium_at_a_point),
      cmocka_unit_test(every_allocation_can_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
