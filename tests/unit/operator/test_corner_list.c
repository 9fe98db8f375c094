/* Corners as a grid sees them: lines, spacings, walls, the period, and corners that no line meets.
 */
#include "operator/corner_list.h"

#include "unit/cells.h"

static const double INDEX[] = {1.4, 3.4, 2};

static pk_corner_list take(test_cell *c) {
  pk_corner_list list;
  assert_int_equal(pk_corner_list_take(c->context, c->cell.geometry, &c->base.u, &c->base.v, &list),
                   PICKET_OK);
  return list;
}

static void corners_stand_on_lines(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, INDEX);
  cell_rect(&c, 1, 0.05, -0.1, 0.3, 0.2);
  cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 9});
  pk_corner_list list = take(&c);
  assert_int_equal(list.count, 4);
  assert_int_equal(list.other_count + list.lost_count, 0);
  const double at[4][2] = {{-0.1, -0.2}, {0.2, -0.2}, {-0.1, 0}, {0.2, 0}};
  const int inside[4] = {0, 1, 3, 2}; /* the quadrant that the rectangle fills */
  for (int i = 0; i < 4; i++) {
    const pk_grid_corner *corner = &list.corner[i];
    const pk_axis *axis[2] = {&c.base.u, &c.base.v};
    for (int a = 0; a < 2; a++) {
      const double *line = axis[a]->line + corner->line[a];
      assert_near(line[0], at[i][a], 1e-9);
      assert_near(corner->spacing[a], line[1] - line[0], 1e-15);
      assert_near(corner->spacing[a + 2], line[0] - line[-1], 1e-15);
    }
    for (int q = 0; q < 4; q++) {
      assert_int_equal(corner->medium[q], q == inside[i]);
    }
  }
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
}

/* A rectangle that ends at the period in both directions: its corners stand on the first lines,
 * with the last intervals below them. */
static void the_period_is_crossed(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, INDEX);
  cell_rect(&c, 1, 0.2, 0.3, 0.2, 0.2);
  cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 9});
  pk_corner_list list = take(&c);
  assert_int_equal(list.count, 4);
  assert_int_equal(list.lost_count, 0);
  const pk_grid_corner *corner = &list.corner[0]; /* the upper right one, wrapped */
  const pk_axis *u = &c.base.u, *v = &c.base.v;
  assert_int_equal(corner->line[0] + corner->line[1], 0);
  assert_near(corner->spacing[2], u->line[u->intervals] - u->line[u->intervals - 1], 1e-15);
  assert_near(corner->spacing[3], v->line[v->intervals] - v->line[v->intervals - 1], 1e-15);
  assert_int_equal(corner->medium[2], 1);
  assert_int_equal(corner->medium[0], 0);
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
}

/* Half a cell holds half the corners; where a rectangle meets a wall there is none. */
static void walls_and_mirrors_hide_corners(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_OPEN, 0.6, 0, 0, 3, INDEX);
  cell_rect(&c, 1, 0, 0, 0.3, 0.4);
  pk_cell_grid_wish wish = {.steps_per_pitch = 9,
                            .mirror = true,
                            .zero_walls = true,
                            .decay_um = {0.1, 0.1},
                            .reach = {4, 4}};
  cell_lay(&c, &wish);
  assert_true(c.base.halved);
  pk_corner_list list = take(&c);
  assert_int_equal(list.count, 2);
  assert_int_equal(list.lost_count, 0);
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
  c = cell_of(PK_LATERAL_ELECTRIC, 0.6, 0.8, 0, 3, INDEX);
  cell_rect(&c, 1, 0, 0.3, 0.3, 0.2);
  cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 9});
  list = take(&c);
  assert_int_equal(list.count, 2);
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
}

static void other_corners_are_counted(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, INDEX);
  static const double TRIANGLE[3][2] = {{-0.2, -0.15}, {0.15, -0.1}, {0.05, 0.1}};
  cell_polygon(&c, 1, 3, TRIANGLE);
  cell_rect(&c, 2, 0.1, 0.25, 0.2, 0.1);
  cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 9});
  pk_corner_list list = take(&c);
  assert_int_equal(list.count, 4);
  assert_int_equal(list.other_count, 3);
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
}

/* An even grid meets none of the corners of this rectangle. */
static void corners_between_lines_are_lost(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, INDEX);
  cell_rect(&c, 1, 0.013, 0, 0.3, 0.4);
  cell_lay_even(&c, 12, 16);
  pk_corner_list list = take(&c);
  assert_int_equal(list.count, 0);
  assert_int_equal(list.lost_count, 4);
  pk_corner_list_clear(c.context, &list);
  cell_close(&c);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(corners_stand_on_lines),         cmocka_unit_test(the_period_is_crossed),
      cmocka_unit_test(walls_and_mirrors_hide_corners), cmocka_unit_test(other_corners_are_counted),
      cmocka_unit_test(corners_between_lines_are_lost),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
