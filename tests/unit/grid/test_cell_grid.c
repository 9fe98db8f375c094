/* Base grids of cells: what the axes become for each kind of side, mirror planes, lateral shifts.
 */
#include "unit/cells.h"
#include "unit/short_memory.h"

static const double ROUNDING = 1e-14;
static const double INDEX[] = {1.444, 3.476, 2.0};

static pk_cell_grid_wish usual(bool mirror) {
  return (pk_cell_grid_wish){.steps_per_pitch = 8,
                             .mirror = mirror,
                             .zero_walls = true,
                             .decay_um = {0.2, 0.3},
                             .reach = {8, 6}};
}

static bool has_line(const pk_axis *axis, double s) {
  for (int i = 0; i <= axis->intervals; i++) {
    if (fabs(axis->line[i] - s) < ROUNDING) {
      return true;
    }
  }
  return false;
}

static test_cell laid(test_cell c, bool mirror) {
  pk_cell_grid_wish wish = usual(mirror);
  cell_lay(&c, &wish);
  return c;
}

static test_cell open_cell(bool mirror) {
  test_cell c = cell_of(PK_LATERAL_OPEN, 0.3, 0, 0, 3, INDEX);
  cell_rect(&c, 1, 0.02, 0.05, 0.15, 0.22);
  return laid(c, mirror);
}

static void open_sides_reach_as_wished(void **state) {
  (void)state;
  test_cell c = open_cell(false);
  const pk_axis *v = &c.base.v;
  assert_near(v->line[0], -0.06 - 8 * 0.2, ROUNDING);
  assert_near(v->line[v->intervals], 0.16 + 6 * 0.3, ROUNDING);
  assert_int_equal(v->low, PK_END_ZERO);
  assert_int_equal(v->high, PK_END_ZERO);
  assert_true(has_line(v, -0.06) && has_line(v, 0.16));
  assert_true(has_line(&c.base.u, -0.055) && has_line(&c.base.u, 0.095));
  assert_near(c.base.u.line[c.base.u.intervals] - c.base.u.line[0], 0.3, ROUNDING);
  assert_int_equal(c.base.u.low, PK_END_PERIODIC);
  assert_false(c.base.halved || c.base.uniform_v);
  cell_close(&c);
}

static void a_mirror_plane_halves_an_open_cell(void **state) {
  (void)state;
  test_cell c = open_cell(true);
  assert_true(c.base.halved);
  assert_near(c.base.mirror_at, 0.05, ROUNDING);
  assert_true(c.base.v.line[0] == c.base.mirror_at);
  assert_int_equal(c.base.v.low, PK_END_FREE);
  assert_int_equal(c.base.v.high, PK_END_ZERO);
  cell_close(&c);
}

static void no_mirror_no_half(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_OPEN, 0.3, 0, 0, 3, INDEX);
  cell_rect(&c, 1, 0, 0, 0.15, 0.22);
  cell_rect(&c, 2, 0, 0.2, 0.15, 0.1);
  c = laid(c, true);
  assert_false(c.base.halved);
  cell_close(&c);
}

static void a_lateral_period_is_halved_to_free_ends(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.3, 0.6, 0, 3, INDEX);
  cell_rect(&c, 1, 0, 0, 0.15, 0.22);
  c = laid(c, true);
  assert_true(c.base.halved);
  assert_int_equal(c.base.v.low, PK_END_FREE);
  assert_int_equal(c.base.v.high, PK_END_FREE);
  assert_near(c.base.v.line[0], 0, 0);
  assert_near(c.base.v.line[c.base.v.intervals], 0.3, ROUNDING);
  cell_close(&c);
}

/* A mirror plane off the middle would move the walls. */
static void walls_keep_an_eccentric_cell_whole(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_ELECTRIC, 0.3, 0.6, 0, 3, INDEX);
  cell_rect(&c, 1, 0, 0.1, 0.15, 0.22);
  c = laid(c, true);
  assert_false(c.base.halved);
  assert_int_equal(c.base.v.low, PK_END_ZERO);
  assert_near(c.base.v.line[0], -0.3, ROUNDING);
  cell_close(&c);
}

static void a_stack_has_one_unknown_across(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.3, 0, 0, 3, INDEX);
  cell_layer(&c, 1, -0.05, 0.1);
  c = laid(c, true);
  assert_true(c.base.uniform_v);
  assert_false(c.base.halved);
  assert_true(has_line(&c.base.u, -0.05) && has_line(&c.base.u, 0.1));
  pk_cell_grid part;
  assert_int_equal(pk_cell_grid_divide(c.context, &c.base, 3, &part), PICKET_OK);
  assert_int_equal(part.v.intervals, 1);
  assert_int_equal(part.u.intervals, 3 * c.base.u.intervals);
  pk_cell_grid_clear(c.context, &part);
  cell_close(&c);
}

/* The row above is the row below moved by p/q of the pitch: the axis must map onto itself. */
static void a_lateral_shift_is_a_whole_number_of_lines(void **state) {
  (void)state;
  static const int SHIFTS[][2] = {{1, 2}, {1, 3}, {2, 3}, {3, 4}, {2, 5}, {5, 12}};
  for (size_t k = 0; k < sizeof SHIFTS / sizeof SHIFTS[0]; k++) {
    int p = SHIFTS[k][0], q = SHIFTS[k][1];
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.3, 0.5, (double)p / q, 3, INDEX);
    cell_rect(&c, 1, 0.01, 0, 0.12, 0.2);
    c = laid(c, true);
    assert_int_equal(c.base.copies, q);
    assert_false(c.base.halved);
    assert_int_equal(c.base.shift_lines * q, p * c.base.u.intervals);
    for (int m = 1; m <= 3; m++) {
      pk_cell_grid part;
      assert_int_equal(pk_cell_grid_divide(c.context, &c.base, m, &part), PICKET_OK);
      const pk_axis *u = &part.u;
      for (int i = 0; i + part.shift_lines <= u->intervals; i++) {
        assert_near(u->line[i + part.shift_lines] - u->line[i], 0.3 * p / q, ROUNDING);
      }
      pk_cell_grid_clear(c.context, &part);
    }
    cell_close(&c);
  }
}

static picket_status lay_and_divide(picket_context *context, const pk_cell *cell) {
  pk_cell_grid base = {0}, part = {0};
  pk_cell_grid_wish wish = usual(true);
  picket_status status = pk_cell_grid_lay(context, cell, &wish, &base);
  if (status == PICKET_OK) {
    status = pk_cell_grid_divide(context, &base, 2, &part);
  }
  pk_cell_grid_clear(context, &part);
  pk_cell_grid_clear(context, &base);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    test_cell c = cell_in(context, PK_LATERAL_OPEN, 0.3, 0, 0, 3, INDEX);
    cell_rect(&c, 1, 0.02, 0.05, 0.15, 0.22);
    memory.fail_at = memory.asked + n;
    picket_status status = lay_and_divide(context, &c.cell);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 12); /* it did ask for memory */
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(open_sides_reach_as_wished),
      cmocka_unit_test(a_mirror_plane_halves_an_open_cell),
      cmocka_unit_test(no_mirror_no_half),
      cmocka_unit_test(a_lateral_period_is_halved_to_free_ends),
      cmocka_unit_test(walls_keep_an_eccentric_cell_whole),
      cmocka_unit_test(a_stack_has_one_unknown_across),
      cmocka_unit_test(a_lateral_shift_is_a_whole_number_of_lines),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
