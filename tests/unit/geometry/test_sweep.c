/* Boxes against closed forms, against their own parts, and against sampling. Tolerances of 1e-12
 * are the promise of the room; the sums are of a few hundred terms of rounding 1e-16. */
#include "plane.h"

static const double pi = 3.14159265358979323846;
static const double exact = 1e-12;

static void rectangle_fraction(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  rect(plane, 1, 0.1, -0.2, 0.6, 0.4); /* -0.2..0.4, -0.4..0 */
  pk_box box = box_of(plane, 0, -1, 1, 1);
  assert_int_equal(box.count, 2);
  assert_int_equal(box.medium[0], 0);
  assert_near(box.fraction[1], 0.4 * 0.4 / 2, exact);
  /* Inside the box: a side of 0.4 facing u, and two of 0.4 facing v. */
  assert_near(box.facing[0], 1.0 / 3, exact);
  assert_near(box.facing[1], 0, exact);
  assert_near(box.facing[2], 2.0 / 3, exact);
  assert_false(box.oblique);
  pk_geometry_free(plane);
}

static void disc_fraction(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  disc(plane, 1, 0.25, -0.5, 0.8);
  pk_box whole = box_of(plane, -1, -1.5, 1, 0.5);
  assert_near(fraction_of(&whole, 1), pi * 0.16 / 4, exact);
  assert_near(whole.facing[0], 0.5, exact);
  assert_near(whole.facing[1], 0, exact);
  assert_true(whole.oblique);
  pk_box quarter = box_of(plane, 0.25, -0.5, 0.65, -0.1);
  assert_near(fraction_of(&quarter, 1), pi / 4, exact);
  /* ∫ cosφ sinφ dφ over a quarter turn is 1/2, of a length of π/2. */
  assert_near(quarter.facing[0], 0.5, exact);
  assert_near(quarter.facing[1], 1 / pi, exact);
  pk_geometry_free(plane);
}

/* ∫ sqrt(r² - x²) dx from a to b. */
static double under_circle(double r, double a, double b) {
  double at_b = b * sqrt(r * r - b * b) + r * r * asin(b / r);
  double at_a = a * sqrt(r * r - a * a) + r * r * asin(a / r);
  return (at_b - at_a) / 2;
}

static void thin_and_small_boxes_of_a_disc(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  disc(plane, 1, 0, 0, 1);
  /* A thin box from the middle up, 1e-4 wide: the closed form loses four digits to a difference. */
  double column = share(plane, 1, 0.2, 0, 0.2001, 1);
  assert_near(column, under_circle(0.5, 0.2, 0.2001) / 1e-4, 1e-11);
  double row = share(plane, 1, 0, 0.2, 1, 0.2001);
  assert_near(row, column, 1e-12);
  /* Half a small box on the top of the disc: sagitta w²/2r, mean fraction 1 - w²/(6 r h) + O(w⁴).
   */
  double w = 1e-3;
  double cap = share(plane, 1, -w, 0.5 - w, w, 0.5);
  assert_near(cap, 1 - w / (6 * 0.5), 1e-9);
  pk_geometry_free(plane);
}

static void polygon_fraction(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  const double corners[3][2] = {{0, 0}, {1, 0}, {0, 1}};
  polygon(plane, 3, 3, corners);
  pk_box box = box_of(plane, 0, 0, 1, 1);
  assert_near(fraction_of(&box, 3), 0.5, exact);
  assert_near(box.facing[0], 0.5, exact);
  assert_near(box.facing[1], 0.5, exact);
  assert_true(box.oblique);
  assert_near(share(plane, 3, 0.25, 0.25, 0.75, 0.75), 0.5, exact);
  assert_near(share(plane, 3, 0.5, 0.25, 0.75, 0.75), 0.25, exact);
  pk_geometry_free(plane);
}

static void a_sheared_edge_faces_along_its_normal(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  const double corners[4][2] = {{-1, -1}, {0.5, -1}, {-0.5, 1}, {-1, 1}}; /* slope du/dv = -1/2 */
  polygon(plane, 1, 4, corners);
  pk_box box = box_of(plane, -0.9, -0.9, 0.9, 0.9);
  /* n = (2, 1)/√5 */
  assert_near(box.facing[0], 0.8, exact);
  assert_near(box.facing[1], 0.4, exact);
  assert_near(box.facing[2], 0.2, exact);
  pk_geometry_free(plane);
}

static void later_shapes_cover_earlier_ones(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  rect(plane, 1, 0, 0, 1, 1);
  disc(plane, 2, 0, 0, 0.5);
  pk_box box = box_of(plane, -1, -1, 1, 1);
  assert_int_equal(box.count, 3);
  assert_near(fraction_of(&box, 2), pi / 16 / 4, exact);
  assert_near(fraction_of(&box, 1), (1 - pi / 16) / 4, exact);
  rect(plane, 1, 0, 0, 1, 1);
  box = box_of(plane, -1, -1, 1, 1);
  assert_int_equal(box.count, 2);
  assert_false(box.oblique); /* the disc is hidden */
  pk_geometry_free(plane);
}

static void two_discs_overlap_in_a_lens(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  double r = 0.5;
  double d = 0.6;
  disc(plane, 1, -d / 2, 0.1, 2 * r);
  disc(plane, 2, d / 2, 0.1, 2 * r);
  double lens = 2 * r * r * acos(d / (2 * r)) - d / 2 * sqrt(4 * r * r - d * d);
  pk_box box = box_of(plane, -1, -1, 1, 1);
  assert_near(fraction_of(&box, 2), pi * r * r / 4, exact);
  assert_near(fraction_of(&box, 1), (pi * r * r - lens) / 4, exact);
  pk_geometry_free(plane);
}

static void one_medium_has_no_interface(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(2);
  rect(plane, 1, -0.25, 0, 0.5, 1);
  rect(plane, 1, 0.25, 0, 0.5, 1); /* meets the first: one block */
  pk_box box = box_of(plane, -0.4, -0.4, 0.4, 0.4);
  assert_int_equal(box.count, 1);
  assert_int_equal(box.medium[0], 1);
  assert_true(box.fraction[0] == 1);
  assert_true(box.facing[0] == 0 && box.facing[2] == 0);
  box = box_of(plane, -0.5, -0.5, 0.5, 0.5); /* its sides lie on the interface */
  assert_int_equal(box.count, 1);
  pk_geometry_free(plane);
}

static void near_coincidences_leave_no_slivers(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.3);
  double off = 1e-9 * 0.3 / 2;
  rect(plane, 1, 0.075 + off, 0, 0.15, 0.5);
  rect(plane, 2, -0.075 - off, 0, 0.15 + off, 0.5); /* would leave gaps at 0 and at the boundary */
  pk_box box = box_of(plane, -0.1, -0.1, 0.1, 0.1);
  assert_int_equal(box.count, 2);
  assert_near(fraction_of(&box, 1), 0.5, 1e-8); /* edges may move by the tolerance */
  box = box_of(plane, 0.1, -0.1, 0.2, 0.1);     /* across the boundary */
  assert_int_equal(box.count, 2);
  box = box_of(plane, off, -0.1, 0.1, 0.1); /* a side within the tolerance of the interface */
  assert_int_equal(box.count, 1);
  pk_geometry_free(plane);
}

static void stripes_run_to_infinity(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(0.4);
  stripe(plane, 1, PK_V, -INFINITY, 0);
  stripe(plane, 2, PK_U, -0.1, 0.1);
  assert_near(share(plane, 1, -0.2, -1e3, 0.2, 1e3), 0.25, exact);
  assert_near(share(plane, 2, -0.2, -1e3, 0.2, 1e3), 0.5, exact);
  pk_box box = box_of(plane, -0.2, -0.1, 0.2, 0.3);
  assert_near(fraction_of(&box, 1), 0.125, exact);
  assert_near(fraction_of(&box, 0), 0.375, exact);
  assert_int_equal(box_of(plane, -0.05, 1e5, 0.05, 2e5).count, 1);
  pk_geometry_free(plane);
}

static void what_wraps_equals_what_is_shifted(void **state) {
  (void)state;
  uint64_t seed = 5;
  for (int trial = 0; trial < 20; trial++) {
    pk_geometry *plane = lattice_plane(2, 2, 0);
    paint_at_random(plane, 1, 6, &seed);
    double u0 = random_in(&seed, -1, 1);
    double v0 = random_in(&seed, -1, 1);
    pk_box here = box_of(plane, u0, v0, u0 + 0.7, v0 + 0.3);
    pk_box there = box_of(plane, u0 - 4, v0 + 6, u0 - 3.3, v0 + 6.3);
    for (int medium = 0; medium < 5; medium++) {
      assert_near(fraction_of(&here, medium), fraction_of(&there, medium), 1e-12);
    }
    pk_geometry_free(plane);
  }
}

static void the_row_above_is_advanced_by_the_shift(void **state) {
  (void)state;
  pk_geometry *plane = lattice_plane(1, 0.5, 0.2);
  disc(plane, 1, 0, 0, 0.3);
  disc(plane, 2, 0.1, 0.2, 0.12); /* across the upper boundary */
  stripe(plane, 3, PK_U, -0.5, -0.4);
  pk_box here = box_of(plane, -0.5, -0.25, 0.3, 0.25);
  pk_box above = box_of(plane, -0.3, 0.25, 0.5, 0.75);
  pk_box below = box_of(plane, -0.9, -1.25, -0.1, -0.75); /* two rows down */
  for (int medium = 0; medium < 4; medium++) {
    assert_near(fraction_of(&here, medium), fraction_of(&above, medium), exact);
    assert_near(fraction_of(&here, medium), fraction_of(&below, medium), exact);
  }
  assert_int_equal(pk_geometry_medium_at(plane, 0.2, 0.5), 1);
  assert_int_equal(pk_geometry_medium_at(plane, -0.1, 0.5), 0);
  assert_near(share(plane, 2, -0.5, -0.25, 0.5, 0.25), pi * 0.0036 / 0.5, exact);
  pk_geometry_free(plane);
}

static void parts_add_up_to_the_box(void **state) {
  (void)state;
  uint64_t seed = 11;
  for (int trial = 0; trial < 60; trial++) {
    pk_geometry *plane = trial % 2 ? lattice_plane(2, 2, 0.3) : open_plane(1);
    paint_at_random(plane, 1, 8, &seed);
    double u0 = random_in(&seed, -1, 0.5);
    double v0 = random_in(&seed, -1, 0.5);
    double width = random_in(&seed, 0.05, 0.8);
    pk_box whole = box_of(plane, u0, v0, u0 + width, v0 + width);
    double sums[5] = {0};
    double cut[4] = {0, random_in(&seed, 0.1, 0.5) * width, random_in(&seed, 0.5, 0.9) * width,
                     width};
    for (int i = 0; i < 3; i++) {
      for (int k = 0; k < 3; k++) {
        pk_box part = box_of(plane, u0 + cut[i], v0 + cut[k], u0 + cut[i + 1], v0 + cut[k + 1]);
        double total = 0;
        for (int m = 0; m < part.count; m++) {
          total += part.fraction[m];
        }
        assert_near(total, 1, 1e-13);
        double size = (cut[i + 1] - cut[i]) * (cut[k + 1] - cut[k]) / (width * width);
        for (int medium = 0; medium < 5; medium++) {
          sums[medium] += size * fraction_of(&part, medium);
        }
      }
    }
    for (int medium = 0; medium < 5; medium++) {
      assert_near(sums[medium], fraction_of(&whole, medium), 1e-12);
    }
    pk_geometry_free(plane);
  }
}

static void a_grid_of_boxes_adds_up_to_the_area(void **state) {
  (void)state;
  pk_geometry *plane = cell_plane(1);
  disc(plane, 1, 0.45, 0.1, 0.7); /* wraps */
  const double corners[5][2] = {{-0.3, -0.9}, {0.2, -0.8}, {0.25, -0.5}, {0, -0.35}, {-0.2, -0.4}};
  polygon(plane, 2, 5, corners);
  double shoelace = 0;
  for (int i = 0; i < 5; i++) {
    const double *a = corners[i];
    const double *b = corners[(i + 1) % 5];
    shoelace += (a[0] * b[1] - a[1] * b[0]) / 2;
  }
  double sums[3] = {0};
  enum { N = 37 };
  for (int i = 0; i < N; i++) {
    for (int k = 0; k < N; k++) {
      for (int m = 0; m < 3; m++) {
        sums[m] += share(plane, m, -0.5 + 1.0 * i / N, -1 + 2.0 * k / N, -0.5 + 1.0 * (i + 1) / N,
                         -1 + 2.0 * (k + 1) / N) *
                   2 / (N * N);
      }
    }
  }
  assert_near(sums[1], pi * 0.1225, 1e-12);
  assert_near(sums[2], shoelace, 1e-12);
  assert_near(sums[0], 2 - pi * 0.1225 - shoelace, 1e-12);
  pk_geometry_free(plane);
}

/* One random point in each of 200 × 200 cells. Only cells cut by an interface err, by independent
 * amounts of at most 1/200². Some thirty curves through at most 400 cells each give a standard
 * deviation below sqrt(30 × 400 / 4) / 200² = 1.4e-3; five of them are allowed. */
static void boxes_agree_with_sampling(void **state) {
  (void)state;
  enum { N = 200 };
  uint64_t seed = 23;
  for (int trial = 0; trial < 12; trial++) {
    pk_geometry *plane = lattice_plane(2, 2, trial % 3 * 0.25);
    paint_at_random(plane, 1, 9, &seed);
    double u0 = random_in(&seed, -1, 1);
    double v0 = random_in(&seed, -1, 1);
    double width = random_in(&seed, 0.1, 1.5);
    double height = random_in(&seed, 0.1, 1.5);
    double counts[5] = {0};
    for (int i = 0; i < N * N; i++) {
      double u = u0 + width * (i % N + random_in(&seed, 0, 1)) / N;
      double v = v0 + height * (i / N + random_in(&seed, 0, 1)) / N;
      counts[pk_geometry_medium_at(plane, u, v)]++;
    }
    pk_box box = box_of(plane, u0, v0, u0 + width, v0 + height);
    for (int medium = 0; medium < 5; medium++) {
      assert_near(fraction_of(&box, medium), counts[medium] / (N * N), 7e-3);
    }
    pk_geometry_free(plane);
  }
}

/* Painted, turned by 90 degrees (u, v) -> (-v, u), and mirrored (u, v) -> (-u, v). */
static void paint_turned(pk_geometry *plane, int turn) {
  static const double star[6][2] = {{-0.8, -0.1}, {-0.3, -0.2}, {0.1, -0.7},
                                    {0.2, 0.1},   {0.6, 0.3},   {-0.2, 0.45}};
  double corners[6][2];
  for (int i = 0; i < 6; i++) {
    corners[i][0] = turn == 1 ? -star[i][1] : turn == 2 ? -star[i][0] : star[i][0];
    corners[i][1] = turn == 1 ? star[i][0] : star[i][1];
  }
  polygon(plane, 1, 6, (const double(*)[2])corners);
  double at[2] = {turn == 1 ? -0.2 : turn == 2 ? -0.1 : 0.1, turn == 1 ? 0.1 : 0.2};
  disc(plane, 2, at[0], at[1], 0.5);
  rect(plane, 1, at[0], at[1], turn == 1 ? 0.1 : 0.6, turn == 1 ? 0.6 : 0.1);
}

static void turning_and_mirroring_change_nothing(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  pk_geometry *turned = open_plane(1);
  pk_geometry *mirrored = open_plane(1);
  paint_turned(plane, 0);
  paint_turned(turned, 1);
  paint_turned(mirrored, 2);
  uint64_t seed = 3;
  for (int trial = 0; trial < 200; trial++) {
    double u = random_in(&seed, -1, 0.9);
    double v = random_in(&seed, -1, 0.9);
    double w = random_in(&seed, 0.01, 0.5);
    double h = random_in(&seed, 0.01, 0.5);
    pk_box a = box_of(plane, u, v, u + w, v + h);
    pk_box b = box_of(turned, -v - h, u, -v, u + w);
    pk_box c = box_of(mirrored, -u - w, v, -u, v + h);
    for (int medium = 0; medium < 3; medium++) {
      assert_near(fraction_of(&a, medium), fraction_of(&b, medium), exact);
      assert_near(fraction_of(&a, medium), fraction_of(&c, medium), exact);
    }
    /* Facing of a stretch of rounding length may be anything, so the tolerance is wider. */
    assert_near(a.facing[0], b.facing[2], 1e-10);
    assert_near(a.facing[1], -b.facing[1], 1e-10);
    assert_near(a.facing[0], c.facing[0], 1e-10);
    assert_near(a.facing[1], -c.facing[1], 1e-10);
    assert_int_equal(a.oblique, b.oblique);
  }
  pk_geometry_free(plane);
  pk_geometry_free(turned);
  pk_geometry_free(mirrored);
}

static void nine_media_are_too_many(void **state) {
  (void)state;
  pk_geometry *plane = open_plane(1);
  for (int i = 1; i <= PK_BOX_MEDIA; i++) {
    rect(plane, i, -0.9 + 0.2 * i, 0, 0.1, 0.1);
  }
  pk_box box = {.count = -7};
  double low[2] = {-1, -1};
  double high[2] = {1, 1};
  assert_int_equal(pk_geometry_box(plane, low, high, &box), PICKET_ERROR_UNSUPPORTED);
  assert_int_equal(box.count, -7);
  high[0] = 0.6;
  assert_int_equal(pk_geometry_box(plane, low, high, &box), PICKET_OK);
  assert_int_equal(box.count, PK_BOX_MEDIA);
  pk_geometry_free(plane);
}

static void every_allocation_can_fail(void **state) {
  (void)state;
  memory_watch watch = {0, 0, -1};
  picket_context *context = context_new(&watch);
  pk_frame frame = {.from = {-1, -1}, .to = {1, 1}};
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &plane), PICKET_OK);
  uint64_t seed = 77;
  paint_at_random(plane, 1, 30, &seed); /* enough crossings for the list of cuts to grow */
  long alive = watch.alive;
  int failures = 0;
  picket_status status = PICKET_ERROR_MEMORY;
  for (; status == PICKET_ERROR_MEMORY; failures++) {
    pk_box box = {.count = -7};
    watch.fail_at = watch.requests + 1 + failures;
    status = pk_geometry_box(plane, (double[2]){-1, -1}, (double[2]){1, 1}, &box);
    assert_true((box.count == -7) == (status != PICKET_OK));
    assert_int_equal(watch.alive, alive);
  }
  assert_int_equal(status, PICKET_OK);
  assert_true(failures > 5);
  pk_geometry_free(plane);
  picket_context_free(context);
  assert_int_equal(watch.alive, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(rectangle_fraction),
      cmocka_unit_test(disc_fraction),
      cmocka_unit_test(thin_and_small_boxes_of_a_disc),
      cmocka_unit_test(polygon_fraction),
      cmocka_unit_test(a_sheared_edge_faces_along_its_normal),
      cmocka_unit_test(later_shapes_cover_earlier_ones),
      cmocka_unit_test(two_discs_overlap_in_a_lens),
      cmocka_unit_test(one_medium_has_no_interface),
      cmocka_unit_test(near_coincidences_leave_no_slivers),
      cmocka_unit_test(stripes_run_to_infinity),
      cmocka_unit_test(what_wraps_equals_what_is_shifted),
      cmocka_unit_test(the_row_above_is_advanced_by_the_shift),
      cmocka_unit_test(parts_add_up_to_the_box),
      cmocka_unit_test(a_grid_of_boxes_adds_up_to_the_area),
      cmocka_unit_test(boxes_agree_with_sampling),
      cmocka_unit_test(turning_and_mirroring_change_nothing),
      cmocka_unit_test(nine_media_are_too_many),
      cmocka_unit_test(every_allocation_can_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
