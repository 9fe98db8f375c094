/* Axes: lines where they must be, families that are exactly proportional, dual lengths. */
#include "grid/axis.h"

#include "base/memory.h"
#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

/* Rounding of a coordinate of order 1 after a few sums. */
static const double ROUNDING = 1e-14;

static picket_context *context;

static int setup(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int teardown(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static const double LINES[] = {-0.31, -0.1, 0.1, 0.12, 0.37};
enum { LINE_COUNT = sizeof LINES / sizeof LINES[0] };

static pk_axis_wish usual(void) {
  return (pk_axis_wish){.low = PK_END_FREE,
                        .high = PK_END_ZERO,
                        .from = -1.5,
                        .to = 1.2,
                        .line_count = LINE_COUNT,
                        .lines = LINES,
                        .step = 0.05,
                        .inner_from = -0.31,
                        .inner_to = 0.37,
                        .outer_step = 0.3,
                        .growth = 0.2,
                        .least_intervals = 2};
}

static pk_axis lay(const pk_axis_wish *wish) {
  pk_axis axis;
  assert_int_equal(pk_axis_lay(context, wish, &axis), PICKET_OK);
  return axis;
}

static double distance_to_line(const pk_axis *axis, double s) {
  double nearest = INFINITY;
  for (int i = 0; i <= axis->intervals; i++) {
    nearest = fmin(nearest, fabs(axis->line[i] - s));
  }
  return nearest;
}

static void lines_stand_on_every_interface_and_rise(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  pk_axis axis = lay(&wish);
  assert_true(axis.line[0] == wish.from);
  assert_true(axis.line[axis.intervals] == wish.to);
  for (int i = 0; i < LINE_COUNT; i++) {
    assert_near(distance_to_line(&axis, LINES[i]), 0, 0);
  }
  for (int i = 0; i < axis.intervals; i++) {
    assert_true(axis.line[i + 1] > axis.line[i]);
    assert_true(creal(axis.length[i]) == axis.line[i + 1] - axis.line[i]);
    assert_true(cimag(axis.length[i]) == 0);
  }
  pk_axis_clear(context, &axis);
}

/* Intervals are placed at equal parts of ∫ ds/h, rounded up but for 2 %: none is longer than 1.03
 * of its cap; and with h growing by 0.2 per length, by less than a factor 1.3 from one to the next.
 */
static void spacing_keeps_its_caps_and_grows_slowly(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  wish.least_intervals = 1;
  pk_axis axis = lay(&wish);
  for (int i = 0; i < axis.intervals; i++) {
    double middle = 0.5 * (axis.line[i] + axis.line[i + 1]);
    bool inner = middle > wish.inner_from && middle < wish.inner_to;
    assert_true(creal(axis.length[i]) <= 1.03 * (inner ? wish.step : wish.outer_step));
    if (i > 0 && axis.line[i] > 0.371) {
      assert_true(creal(axis.length[i]) < 1.3 * creal(axis.length[i - 1]));
    }
  }
  pk_axis_clear(context, &axis);
}

static void every_gap_between_lines_has_its_least_intervals(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  for (wish.least_intervals = 1; wish.least_intervals <= 5; wish.least_intervals++) {
    pk_axis axis = lay(&wish);
    for (int k = 0; k + 1 < LINE_COUNT; k++) {
      int inside = 0;
      for (int i = 0; i < axis.intervals; i++) {
        double middle = 0.5 * (axis.line[i] + axis.line[i + 1]);
        inside += middle > LINES[k] && middle < LINES[k + 1];
      }
      assert_true(inside >= wish.least_intervals);
    }
    pk_axis_clear(context, &axis);
  }
}

static void without_lines_an_axis_is_even(void **state) {
  (void)state;
  pk_axis_wish wish = {.from = -0.5,
                       .to = 0.5,
                       .step = 0.1,
                       .inner_from = -0.5,
                       .inner_to = 0.5,
                       .outer_step = 0.1,
                       .growth = 0.2,
                       .least_intervals = 1,
                       .low = PK_END_PERIODIC,
                       .high = PK_END_PERIODIC};
  pk_axis axis = lay(&wish);
  assert_int_equal(axis.intervals, 10);
  for (int i = 0; i <= 10; i++) {
    assert_near(axis.line[i], -0.5 + 0.1 * i, ROUNDING);
  }
  pk_axis_clear(context, &axis);
}

/* A wish and its mirror image give axes that are mirror images. */
static void mirrored_wish_gives_mirrored_axis(void **state) {
  (void)state;
  pk_axis_wish wish = usual(), mirrored = wish;
  double lines[LINE_COUNT];
  for (int i = 0; i < LINE_COUNT; i++) {
    lines[i] = -LINES[LINE_COUNT - 1 - i];
  }
  mirrored.from = -wish.to;
  mirrored.to = -wish.from;
  mirrored.inner_from = -wish.inner_to;
  mirrored.inner_to = -wish.inner_from;
  mirrored.lines = lines;
  pk_axis axis = lay(&wish), other = lay(&mirrored);
  assert_int_equal(axis.intervals, other.intervals);
  for (int i = 0; i <= axis.intervals; i++) {
    assert_near(other.line[i], -axis.line[axis.intervals - i], 1e-13);
  }
  pk_axis_clear(context, &axis);
  pk_axis_clear(context, &other);
}

/* The spacing follows a size function between neighbouring lines, so it is the same on both sides
 * of a periodic boundary to within its growth. */
static void periodic_ends_have_like_spacing(void **state) {
  (void)state;
  double lines[] = {-0.49, 0.2};
  pk_axis_wish wish = {.low = PK_END_PERIODIC,
                       .high = PK_END_PERIODIC,
                       .from = -0.5,
                       .to = 0.5,
                       .line_count = 2,
                       .lines = lines,
                       .step = 0.1,
                       .inner_from = -0.5,
                       .inner_to = 0.5,
                       .outer_step = 0.1,
                       .growth = 0.2,
                       .least_intervals = 2};
  pk_axis axis = lay(&wish);
  double first = creal(axis.length[0]), last = creal(axis.length[axis.intervals - 1]);
  assert_true(last < 1.4 * first && first < 1.4 * last);
  pk_axis_clear(context, &axis);
}

/* Two interfaces a thousandth of the step apart, and one as close to an end: no slivers. */
static void interfaces_too_close_share_a_line(void **state) {
  (void)state;
  double lines[] = {-0.99995, 0.1, 0.10005, 0.99995};
  pk_axis_wish wish = {.from = -1,
                       .to = 1,
                       .line_count = 4,
                       .lines = lines,
                       .step = 0.05,
                       .inner_from = -1,
                       .inner_to = 1,
                       .outer_step = 0.05,
                       .growth = 0.2,
                       .least_intervals = 1,
                       .low = PK_END_ZERO,
                       .high = PK_END_ZERO};
  pk_axis axis = lay(&wish);
  for (int i = 0; i < axis.intervals; i++) {
    assert_true(creal(axis.length[i]) > 0.01);
  }
  assert_near(distance_to_line(&axis, 0.1), 0, 0);
  pk_axis_clear(context, &axis);
}

/* Line i m of member m is line i of the base, to the last bit; the parts are equal to rounding. */
static void families_are_proportional(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  pk_axis base = lay(&wish);
  for (int m = 1; m <= 7; m++) {
    pk_axis axis;
    assert_int_equal(pk_axis_divide(context, &base, m, &axis), PICKET_OK);
    assert_int_equal(axis.intervals, m * base.intervals);
    assert_int_equal(axis.low, base.low);
    assert_int_equal(axis.high, base.high);
    for (int i = 0; i <= base.intervals; i++) {
      assert_true(axis.line[i * m] == base.line[i]);
    }
    for (int i = 0; i < axis.intervals; i++) {
      assert_near(creal(axis.length[i]), creal(base.length[i / m]) / m, ROUNDING);
    }
    pk_axis_clear(context, &axis);
  }
  pk_axis_clear(context, &base);
}

static void repeated_axes_map_onto_themselves(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  wish.low = wish.high = PK_END_PERIODIC;
  for (int copies = 1; copies <= 5; copies++) {
    pk_axis axis;
    assert_int_equal(pk_axis_lay_repeated(context, &wish, copies, &axis), PICKET_OK);
    assert_int_equal(axis.intervals % copies, 0);
    int part = axis.intervals / copies;
    double repeat = (wish.to - wish.from) / copies;
    for (int i = 0; i + part <= axis.intervals; i++) {
      assert_near(axis.line[i + part] - axis.line[i], repeat, ROUNDING);
    }
    for (int i = 0; i < LINE_COUNT; i++) {
      assert_near(distance_to_line(&axis, LINES[i]), 0, ROUNDING);
    }
    pk_axis_clear(context, &axis);
  }
}

/* Unknowns and dual lengths for each pair of ends: with the half intervals at walls that carry no
 * unknown the dual lengths add up to the extent, and neighbouring duals touch. */
static void dual_lengths_add_up_to_the_extent(void **state) {
  (void)state;
  static const pk_end ENDS[][2] = {{PK_END_PERIODIC, PK_END_PERIODIC},
                                   {PK_END_ZERO, PK_END_ZERO},
                                   {PK_END_FREE, PK_END_FREE},
                                   {PK_END_FREE, PK_END_ZERO},
                                   {PK_END_ZERO, PK_END_FREE}};
  for (size_t k = 0; k < sizeof ENDS / sizeof ENDS[0]; k++) {
    pk_axis_wish wish = usual();
    wish.low = ENDS[k][0];
    wish.high = ENDS[k][1];
    pk_axis axis = lay(&wish);
    int first = pk_axis_first_line(&axis), unknowns = pk_axis_unknowns(&axis);
    bool periodic = wish.low == PK_END_PERIODIC;
    assert_int_equal(first, wish.low == PK_END_ZERO);
    assert_int_equal(unknowns, axis.intervals + 1 - (wish.low == PK_END_ZERO) -
                                   (wish.high == PK_END_ZERO) - periodic);
    double sum = 0, before = NAN;
    if (wish.low == PK_END_ZERO) {
      sum += 0.5 * creal(axis.length[0]);
    }
    if (wish.high == PK_END_ZERO) {
      sum += 0.5 * creal(axis.length[axis.intervals - 1]);
    }
    for (int i = 0; i < unknowns; i++) {
      double low, high;
      double complex length;
      pk_axis_dual(&axis, first + i, &low, &high, &length);
      assert_near(creal(length), high - low, ROUNDING);
      assert_true(low <= axis.line[first + i] && high >= axis.line[first + i]);
      if (i > 0) {
        assert_near(low, before, ROUNDING);
      }
      before = high;
      sum += creal(length);
    }
    assert_near(sum, wish.to - wish.from, 1e-13);
    pk_axis_clear(context, &axis);
  }
}

static void stretched_lengths_reach_the_dual(void **state) {
  (void)state;
  pk_axis_wish wish = usual();
  pk_axis axis = lay(&wish);
  axis.length[3] *= 1 + 2 * I;
  double low, high;
  double complex length;
  pk_axis_dual(&axis, 3, &low, &high, &length);
  assert_near(creal(length), high - low, ROUNDING);
  assert_near(cimag(length), axis.line[4] - axis.line[3], ROUNDING);
  pk_axis_clear(context, &axis);
}

static picket_status everything(picket_context *c) {
  pk_axis_wish wish = usual();
  pk_axis base = {0}, part = {0};
  picket_status status = pk_axis_lay_repeated(c, &wish, 2, &base);
  if (status == PICKET_OK) {
    status = pk_axis_divide(c, &base, 2, &part);
  }
  pk_axis_clear(c, &part);
  pk_axis_clear(c, &base);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 2;; n++) { /* the first one makes the context */
    short_memory memory = {.fail_at = n};
    picket_context *c = short_memory_context(&memory);
    picket_status status = everything(c);
    bool failed = memory.asked >= n;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    picket_context_free(c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 9);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(lines_stand_on_every_interface_and_rise),
      cmocka_unit_test(spacing_keeps_its_caps_and_grows_slowly),
      cmocka_unit_test(every_gap_between_lines_has_its_least_intervals),
      cmocka_unit_test(without_lines_an_axis_is_even),
      cmocka_unit_test(mirrored_wish_gives_mirrored_axis),
      cmocka_unit_test(periodic_ends_have_like_spacing),
      cmocka_unit_test(interfaces_too_close_share_a_line),
      cmocka_unit_test(families_are_proportional),
      cmocka_unit_test(repeated_axes_map_onto_themselves),
      cmocka_unit_test(dual_lengths_add_up_to_the_extent),
      cmocka_unit_test(stretched_lengths_reach_the_dual),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, setup, teardown);
}
