/* A Gaussian beam has the same diameter by every definition. (The fibre, whose diameters differ, is
 * in tests/cli/test_modes.py.) */
#include "section/widths.h"

#include "section/climb.h"
#include "unit/section/beam.h"
#include "unit/short_memory.h"

static void check(double found, double expected) {
  /* Differences over steps of w/20: (1/20)² and less. */
  assert_near(found, expected, 2.5e-3 * expected);
}

static void a_beam_is_as_wide_as_it_is(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  for (int y = 0; y < 2; y++) {
    beam b = {{4, 3}, {0.4, -0.3}, 1.5, y ? PK_V : PK_U, 9, 0.08};
    pk_section_whole whole;
    pk_section_widths w;
    assert_int_equal(beam_take(context, &b, &whole), PICKET_OK);
    assert_int_equal(pk_section_widths_take(&whole, NULL, &w), PICKET_OK);
    for (int axis = 0; axis < 2; axis++) {
      check(w.petermann_along[axis], b.diameter[axis]);
      check(w.rms_along[axis], b.diameter[axis]);
      check(w.fall_along[axis], b.diameter[axis]);
      check(w.oval_along[axis], b.diameter[axis]);
      assert_near(w.centroid[axis], b.centre[axis], 1e-6);
    }
    check(w.rms, sqrt((16 + 9) / 2.0));
    check(w.petermann, sqrt(2 / (1 / 16.0 + 1 / 9.0)));
    assert_near(w.oval_overlap, 1, 1e-5);
    /* The round beam between: 2ad/(a² + d²) · 2bd/(b² + d²) is largest at d² = ab. */
    check(w.beam, sqrt(12));
    check(w.beam_overlap, 4 * 12 / ((4 + 3) * (4 + 3.0)));
    assert_int_equal(w.beam_polarization, b.along);
    pk_section_whole_clear(&whole);
  }
  picket_context_free(context);
}

/* x times a Gaussian: no beam about its middle resembles it. On the line along y through its
 * middle there is nothing. */
static void a_node_has_no_beam(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  beam b = {{4, 4}, {0, 0}, 1, PK_U, 8.8, 0.2}; /* a grid that is its own mirror image */
  pk_section_whole whole;
  pk_section_widths w;
  assert_int_equal(beam_take(context, &b, &whole), PICKET_OK);
  for (int c = 0; c < PK_WHOLE_NAMES; c++) {
    const double *x = pk_whole_places(&whole, c, PK_U);
    int rows = pk_whole_count(&whole, c, PK_V);
    for (int i = 0; i < pk_whole_count(&whole, c, PK_U); i++) {
      for (int j = 0; j < rows; j++) {
        whole.field[c][i * rows + j] *= x[i];
      }
    }
  }
  assert_int_equal(pk_section_widths_take(&whole, NULL, &w), PICKET_OK);
  assert_true(isnan(w.beam) && isnan(w.beam_overlap) && isnan(w.oval_overlap));
  assert_true(isnan(w.oval_along[0]) && isnan(w.oval_along[1]));
  assert_true(isnan(w.fall_along[1]));
  assert_true(w.fall_along[0] > 4);
  /* ⟨x²⟩ of x² exp(-2x²/w²) is three times that of the Gaussian. */
  check(w.rms_along[0], 4 * sqrt(3));
  check(w.rms_along[1], 4);
  pk_section_whole_clear(&whole);
  picket_context_free(context);
}

/* A hill off the start, in a narrow slanting valley of heights. */
static double hill(const double *at, void *user) {
  double u = at[0] + at[1] - 3, v = at[0] - at[1] + 1;
  ++*(int *)user;
  return 7 - 100 * u * u - v * v;
}

static void the_summit_is_found(void **state) {
  (void)state;
  int calls = 0;
  double at[2] = {0, 0};
  assert_near(pk_climb(2, at, (double[2]){0.3, 0.3}, hill, &calls), 7, 1e-8);
  assert_near(at[0], 1, 1e-4);
  assert_near(at[1], 2, 1e-4);
  assert_true(calls < 1000);
}

static void short_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  const beam small = {{1, 1}, {0, 0}, 1, PK_U, 2, 0.5};
  for (long n = 1; status == PICKET_ERROR_MEMORY && n < 100; n++) {
    short_memory memory = {0};
    picket_context *context = short_memory_context(&memory);
    pk_section_whole whole = {0};
    pk_section_widths w;
    memory.fail_at = memory.asked + n;
    status = beam_take(context, &small, &whole);
    if (status == PICKET_OK) {
      status = pk_section_widths_take(&whole, NULL, &w);
    }
    pk_section_whole_clear(&whole);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_beam_is_as_wide_as_it_is),
      cmocka_unit_test(a_node_has_no_beam),
      cmocka_unit_test(the_summit_is_found),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
