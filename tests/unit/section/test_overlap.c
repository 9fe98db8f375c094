/* Overlaps of Gaussian beams in closed form: D. Marcuse, Bell Syst. Tech. J. 56, 703 (1977), from
 * memory of the source. For w1, w2, offset d and phase slope q along one axis:
 *   [2 w1 w2/(w1² + w2²)] exp(-2d²/(w1² + w2²)) exp(-q² w1² w2²/(2(w1² + w2²))) */
#include "section/overlap.h"

#include "unit/section/beam.h"
#include "unit/short_memory.h"

static double along_axis(double d1, double d2, double offset, double slope) {
  double a = d1 * d1 / 4, b = d2 * d2 / 4;
  return 2 * sqrt(a * b) / (a + b) * exp(-2 * offset * offset / (a + b)) *
         exp(-slope * slope * a * b / (2 * (a + b)));
}

static const beam FIRST = {{4, 3}, {0, 0}, 1.44, PK_U, 8, 0.1};
static const beam SECOND = {{5, 3.5}, {0.3, -0.2}, 2.1, PK_U, 9, 0.13};

static double closed_form(const double offset[2], const double slope[2]) {
  return along_axis(4, 5, offset[0] + 0.3, slope[0]) *
         along_axis(3, 3.5, offset[1] - 0.2, slope[1]);
}

static const double OFFSETS[4][2] = {{0, 0}, {1, 0}, {0.37, -0.81}, {-2, 1.5}};
static const double SLOPES[3][2] = {{0, 0}, {0.4, 0}, {-0.3, 0.5}};

static picket_context *open_context(void) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  return context;
}

/* Steps are a twentieth of w: where E is continued by its slope it errs by about (1/20)²/8. */
static void two_modes(void **state) {
  (void)state;
  picket_context *context = open_context();
  pk_section_whole a, b;
  pk_overlap overlap;
  assert_int_equal(beam_take(context, &FIRST, &a), PICKET_OK);
  assert_int_equal(beam_take(context, &SECOND, &b), PICKET_OK);
  assert_int_equal(pk_overlap_open(&a, &b, &overlap), PICKET_OK);
  for (int i = 0; i < 4; i++) {
    for (int j = 0; j < 3; j++) {
      pk_placement p = {{OFFSETS[i][0], OFFSETS[i][1]}, {SLOPES[j][0], SLOPES[j][1]}};
      assert_near(pk_overlap_modes(&overlap, &p), closed_form(p.offset, p.slope), 3e-4);
    }
  }
  pk_overlap_close(&overlap);
  pk_overlap_close(&overlap);
  pk_section_whole_clear(&a);
  pk_section_whole_clear(&b);
  picket_context_free(context);
}

/* Sums over a smooth field on a grid that resolves it are exact to far below this. */
static void a_mode_and_a_beam(void **state) {
  (void)state;
  picket_context *context = open_context();
  for (int y = 0; y < 2; y++) {
    beam mode = FIRST;
    mode.along = y ? PK_V : PK_U;
    pk_section_whole a;
    pk_overlap overlap;
    assert_int_equal(beam_take(context, &mode, &a), PICKET_OK);
    assert_int_equal(pk_overlap_open(&a, NULL, &overlap), PICKET_OK);
    for (int i = 0; i < 4; i++) {
      for (int j = 0; j < 3; j++) {
        pk_gaussian g = {.diameter = {5, 3.5}, .along = mode.along};
        for (int axis = 0; axis < 2; axis++) {
          g.centre[axis] = OFFSETS[i][axis] + SECOND.centre[axis];
          g.slope[axis] = SLOPES[j][axis];
        }
        double expected = closed_form(OFFSETS[i], SLOPES[j]);
        assert_near(pk_overlap_beam(&overlap, &g), expected, 1e-3 * expected);
        if (SLOPES[j][0] == 0 && SLOPES[j][1] == 0) {
          assert_near(pk_overlap_likeness(&overlap, &g), expected, 1e-3 * expected);
        }
        g.along = y ? PK_U : PK_V;
        assert_true(pk_overlap_beam(&overlap, &g) == 0);
        assert_true(pk_overlap_likeness(&overlap, &g) == 0);
      }
    }
    pk_overlap_close(&overlap);
    pk_section_whole_clear(&a);
  }
  picket_context_free(context);
}

static void itself_and_across(void **state) {
  (void)state;
  picket_context *context = open_context();
  beam across = FIRST;
  across.along = PK_V;
  pk_section_whole a, b;
  pk_overlap same, crossed;
  pk_placement none = {{0, 0}, {0, 0}};
  assert_int_equal(beam_take(context, &FIRST, &a), PICKET_OK);
  assert_int_equal(beam_take(context, &across, &b), PICKET_OK);
  assert_int_equal(pk_overlap_open(&a, &a, &same), PICKET_OK);
  assert_int_equal(pk_overlap_open(&a, &b, &crossed), PICKET_OK);
  assert_near(pk_overlap_modes(&same, &none), 1, 1e-14);
  assert_true(pk_overlap_modes(&crossed, &none) == 0);
  /* Far apart nothing is left, and nothing is read outside of the planes. */
  assert_true(pk_overlap_modes(&same, &(pk_placement){{1e3, -1e3}, {0, 0}}) == 0);
  pk_overlap_close(&same);
  pk_overlap_close(&crossed);
  pk_section_whole_clear(&a);
  pk_section_whole_clear(&b);
  picket_context_free(context);
}

/* A narrow field on a fine grid against a wide one whose grid is coarser than the narrow field: E
 * straight between places errs by (0.6/10)² and less. */
static void a_fine_and_a_coarse_grid(void **state) {
  (void)state;
  picket_context *context = open_context();
  beam narrow = {{0.6, 0.5}, {0, 0}, 3, PK_U, 1.2, 0.03},
       wide = {{10, 10}, {0, 0}, 1, PK_U, 14, 0.5};
  pk_section_whole a, b;
  pk_overlap overlap;
  assert_int_equal(beam_take(context, &narrow, &a), PICKET_OK);
  assert_int_equal(beam_take(context, &wide, &b), PICKET_OK);
  assert_int_equal(pk_overlap_open(&a, &b, &overlap), PICKET_OK);
  for (int i = 0; i < 4; i++) {
    pk_placement p = {{OFFSETS[i][0], OFFSETS[i][1]}, {0, 0}};
    double expected = along_axis(0.6, 10, p.offset[0], 0) * along_axis(0.5, 10, p.offset[1], 0);
    assert_near(pk_overlap_modes(&overlap, &p), expected, 4e-3 * expected);
  }
  pk_overlap_close(&overlap);
  pk_section_whole_clear(&a);
  pk_section_whole_clear(&b);
  picket_context_free(context);
}

static void short_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  const beam small = {{1, 1}, {0, 0}, 1, PK_U, 2, 0.5};
  for (long n = 1; status == PICKET_ERROR_MEMORY && n < 100; n++) {
    short_memory memory = {0};
    picket_context *context = short_memory_context(&memory);
    pk_section_whole a = {0};
    pk_overlap overlap = {0};
    memory.fail_at = memory.asked + n;
    status = beam_take(context, &small, &a);
    if (status == PICKET_OK) {
      status = pk_overlap_open(&a, &a, &overlap);
    }
    pk_overlap_close(&overlap);
    pk_section_whole_clear(&a);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(two_modes),         cmocka_unit_test(a_mode_and_a_beam),
      cmocka_unit_test(itself_and_across), cmocka_unit_test(a_fine_and_a_coarse_grid),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
