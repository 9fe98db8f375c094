/* Pieces: arcs cut at their extremes, rounded corners, crossings. */
#include "geometry/outline.h"
#include "plane.h"

static const double pi = 3.14159265358979323846;

static double area_of(const pk_outline *outline) {
  double area = 0; /* ∮ u dv, with the sense of each piece */
  for (int i = 0; i < outline->count; i++) {
    const pk_piece *piece = &outline->pieces[i];
    if (!pk_piece_is_level(piece, PK_V)) {
      double up = pk_piece_integral(piece, piece->low[1], piece->high[1], 0);
      area += piece->to[1] > piece->from[1] ? up : -up;
    }
  }
  return area;
}

static void an_arc_is_cut_at_its_extremes(void **state) {
  (void)state;
  picket_context *context = context_new(NULL);
  pk_outline outline;
  assert_int_equal(pk_outline_start(context, 5, &outline), PICKET_OK);
  double centre[2] = {1, 2};
  double from[2] = {1 + 0.5 * cos(0.3), 2 + 0.5 * sin(0.3)};
  pk_outline_add_arc(&outline, centre, 0.5, from, from);
  assert_int_equal(outline.count, 5); /* from, four extremes */
  assert_near(outline.low[0], 0.5, 1e-15);
  assert_near(outline.high[1], 2.5, 1e-15);
  for (int i = 0; i < outline.count; i++) {
    const pk_piece *piece = &outline.pieces[i];
    double v = (piece->low[1] + piece->high[1]) / 2;
    double u = pk_piece_at(piece, PK_V, v);
    assert_near(hypot(u - 1, v - 2), 0.5, 1e-15);
    assert_near(pk_piece_at(piece, PK_U, u), v, 1e-15);
  }
  assert_true(pk_outline_contains(&outline, 1.4, 2.2));
  assert_false(pk_outline_contains(&outline, 1.4, 2.4));
  pk_outline_clear(context, &outline);
  picket_context_free(context);
}

/* A square with rounded corners of radius r: area side² - (4 - π) r². */
static void a_rounded_square(void **state) {
  (void)state;
  picket_context *context = context_new(NULL);
  pk_outline outline;
  assert_int_equal(pk_outline_start(context, 8, &outline), PICKET_OK);
  const double r = 0.2;
  static const double turn[4][2] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  for (int q = 0; q < 4; q++) { /* the corner between the directions q and q + 1 */
    const double *a = turn[q];
    const double *b = turn[(q + 1) % 4];
    double centre[2] = {(0.5 - r) * (a[0] + b[0]), (0.5 - r) * (a[1] + b[1])};
    double from[2] = {centre[0] + r * a[0], centre[1] + r * a[1]};
    double to[2] = {centre[0] + r * b[0], centre[1] + r * b[1]};
    pk_outline_add_arc(&outline, centre, r, from, to);
    double next[2] = {to[0] + (1 - 2 * r) * turn[(q + 2) % 4][0],
                      to[1] + (1 - 2 * r) * turn[(q + 2) % 4][1]};
    pk_outline_add_line(&outline, to, next);
  }
  assert_int_equal(outline.count, 8);
  assert_near(area_of(&outline), 1 - (4 - pi) * r * r, 1e-14);
  assert_true(pk_outline_contains(&outline, 0.43, 0.43));
  assert_false(pk_outline_contains(&outline, 0.45, 0.45));
  assert_true(pk_outline_contains(&outline, 0.499, 0.1));
  double facing[3] = {0};
  for (int i = 0; i < outline.count; i++) {
    pk_piece_facing(&outline.pieces[i], outline.pieces[i].low[1], outline.pieces[i].high[1],
                    facing);
  }
  /* Level pieces have no extent along v and add nothing: two sides and the whole circle remain. */
  assert_near(facing[0], 2 * (1 - 2 * r) + pi * r, 1e-14);
  assert_near(facing[1], 0, 1e-14);
  assert_near(facing[2], pi * r, 1e-14);
  pk_outline_clear(context, &outline);
  picket_context_free(context);
}

static void crossings_lie_on_both_pieces(void **state) {
  (void)state;
  picket_context *context = context_new(NULL);
  uint64_t seed = 41;
  int crossings = 0;
  for (int trial = 0; trial < 200; trial++) {
    pk_outline outline;
    assert_int_equal(pk_outline_start(context, 14, &outline), PICKET_OK);
    for (int i = 0; i < 2; i++) {
      double centre[2] = {random_in(&seed, -1, 1), random_in(&seed, -1, 1)};
      double radius = random_in(&seed, 0.2, 1);
      double east[2] = {centre[0] + radius, centre[1]};
      pk_outline_add_arc(&outline, centre, radius, east, east);
      double a[2] = {random_in(&seed, -1, 1), random_in(&seed, -1, 1)};
      double b[2] = {random_in(&seed, -1, 1), trial % 3 ? random_in(&seed, -1, 1) : a[1]};
      pk_outline_add_line(&outline, a, b);
    }
    for (int i = 0; i < outline.count; i++) {
      for (int k = 0; k < i; k++) {
        double points[2][2];
        int count = pk_piece_crossings(&outline.pieces[i], &outline.pieces[k], 1e-12, points);
        crossings += count;
        for (int p = 0; p < count; p++) {
          for (int side = 0; side < 2; side++) {
            const pk_piece *piece = &outline.pieces[side ? i : k];
            /* On a circle by distance; on a line by the other coordinate. 1e-7: near tangency a
             * root of rounding errors. */
            double off =
                piece->radius > 0
                    ? hypot(points[p][0] - piece->centre[0], points[p][1] - piece->centre[1]) -
                          piece->radius
                    : (piece->to[0] - piece->from[0]) * (points[p][1] - piece->from[1]) -
                          (piece->to[1] - piece->from[1]) * (points[p][0] - piece->from[0]);
            assert_near(off, 0, 1e-7);
          }
        }
      }
    }
    pk_outline_clear(context, &outline);
  }
  assert_true(crossings > 400);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(an_arc_is_cut_at_its_extremes),
      cmocka_unit_test(a_rounded_square),
      cmocka_unit_test(crossings_lie_on_both_pieces),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
