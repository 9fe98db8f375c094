/* The border of fields of sections: nonsense is refused with nothing touched, and every allocation
 * may fail. What is in a field is looked at in tests/cli/test_section_fields.py. */
#include <math.h>
#include <picket.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "study/section_field.h"
#include "unit/near.h"
#include "unit/short_memory.h"

/* One medium between electric walls: small, and known. */
static const char BOX[] =
    "format: 1\n"
    "materials: {oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1000}\n"
    "section: {cladding: oxide, span_nm: [1000, 600], shapes: [{rect: {fill: oxide, width_nm: 500, "
    "height_nm: 300}}]}\n";

static picket_context *context;
static picket_problem *problem;
static picket_options rough;

static int set_up(void **state) {
  (void)state;
  picket_options_init(&rough);
  rough.accuracy = 1e-2;
  if (picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, BOX, strlen(BOX), "test", &problem);
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}

static void assert_says(picket_status status, picket_status expected, const char *word) {
  if (status != expected) {
    fail_msg("status %d: %s", (int)status, picket_context_message(context));
  }
  if (!strstr(picket_context_message(context), word)) {
    fail_msg("\"%s\" lacks \"%s\"", picket_context_message(context), word);
  }
}

static void questions_that_make_no_sense(void **state) {
  (void)state;
  static const double wavelengths[] = {0, -1, NAN, INFINITY};
  static const int orders[] = {-1, 200, 2147483647};
  const picket_status argument = PICKET_ERROR_ARGUMENT;
  picket_section_field *field = NULL;
  assert_int_equal(picket_section_field_find(NULL, NULL, 1, 0, &field), argument);
  assert_says(picket_section_field_find(problem, NULL, 1, 0, NULL), argument, "out");
  for (int i = 0; i < 4; i++) {
    assert_says(picket_section_field_find(problem, NULL, wavelengths[i], 0, &field), argument,
                "wavelength_um");
  }
  for (int i = 0; i < 3; i++) {
    assert_says(picket_section_field_find(problem, NULL, 1, orders[i], &field), argument,
                "order is");
  }
  picket_options options = rough;
  options.accuracy = NAN;
  assert_says(picket_section_field_find(problem, &options, 1, 0, &field), argument, "accuracy");
  assert_says(picket_section_fields_write(problem, &options, "x.h5"), argument, "accuracy");
  assert_int_equal(picket_section_fields_write(NULL, NULL, "x.h5"), argument);
  assert_says(picket_section_fields_write(problem, NULL, NULL), argument, "path is null");
  assert_says(picket_section_fields_write(problem, NULL, ""), argument, "path is empty");
  /* A wave of 3 µm does not fit: cut-off is at 2 × 1.444 µm. */
  assert_says(picket_section_field_find(problem, &rough, 3, 0, &field), PICKET_ERROR_NO_MODE,
              "3000 nm");
  assert_says(picket_section_field_find(problem, &rough, 1, 15, &field), PICKET_ERROR_NO_MODE,
              "order 15");
  assert_null(field);
}

static void outputs_that_make_no_sense(void **state) {
  (void)state;
  picket_section_field *field = NULL;
  assert_int_equal(picket_section_field_find(problem, &rough, 1, 0, &field), PICKET_OK);
  picket_section_field_description about;
  int nx = -7, ny = -7;
  double buffer[1] = {42};
  const picket_status argument = PICKET_ERROR_ARGUMENT;
  const picket_component ex = PICKET_COMPONENT_EX;
  assert_int_equal(picket_section_field_describe(NULL, &about), argument);
  assert_int_equal(picket_section_field_describe(field, NULL), argument);
  assert_int_equal(picket_section_field_size(NULL, ex, &nx, &ny), argument);
  assert_int_equal(picket_section_field_size(field, ex, NULL, &ny), argument);
  assert_int_equal(picket_section_field_size(field, ex, &nx, NULL), argument);
  for (int c = -1; c <= 6; c++) {
    picket_component which = (picket_component)c;
    assert_int_equal(picket_section_field_component(field, which, buffer, 1), argument);
    assert_int_equal(picket_section_field_component(NULL, which, buffer, 1), argument);
    assert_int_equal(picket_section_field_permittivity(field, which, buffer, 1), argument);
    assert_int_equal(picket_section_field_places(field, which, PICKET_AXIS_X, buffer, 1), argument);
  }
  assert_int_equal(picket_section_field_size(field, (picket_component)6, &nx, &ny), argument);
  double *large = calloc(100000, sizeof *large);
  assert_int_equal(picket_section_field_places(field, ex, PICKET_AXIS_Z, large, 100000), argument);
  assert_int_equal(picket_section_field_places(field, ex, (picket_axis)3, large, 100000), argument);
  assert_int_equal(picket_section_field_places(field, ex, PICKET_AXIS_X, NULL, 100000), argument);
  assert_int_equal(picket_section_field_component(field, ex, NULL, 100000), argument);
  assert_int_equal(picket_section_field_permittivity(field, PICKET_COMPONENT_HX, large, 100000),
                   argument);
  free(large);
  assert_true(nx == -7 && ny == -7 && buffer[0] == 42);
  assert_int_equal(picket_section_field_describe(field, &about), PICKET_OK);
  assert_int_equal(about.order, 0);
  assert_near(about.x_from_um, -0.5, 1e-12);
  assert_near(about.y_to_um, 0.3, 1e-12);
  /* β² = k0² n² - (π/a)² with a = 1 µm; a coarse grid is off by 1e-3. */
  assert_near(about.index_re, sqrt(1.444 * 1.444 - 0.25), 1e-2);
  picket_section_field_free(field);
  picket_section_field_free(NULL);
}

static picket_status find_and_write(short_memory *memory, const char *path) {
  picket_context *lean = short_memory_context(memory);
  if (!lean) {
    return PICKET_ERROR_MEMORY;
  }
  picket_problem *box = NULL;
  picket_section_field *field = NULL;
  picket_options options = rough;
  options.count = 1;
  picket_status status = picket_problem_read_text(lean, BOX, strlen(BOX), NULL, &box);
  if (status == PICKET_OK) {
    status = picket_section_field_find(box, &options, 1, 0, &field);
  }
  if (status == PICKET_OK) {
    status = picket_section_fields_write(box, &options, path);
  }
  if (status != PICKET_OK) {
    assert_true(strlen(picket_context_message(lean)) > 0);
    assert_int_equal(access(path, F_OK), -1);
  }
  picket_section_field_free(field);
  picket_problem_free(box);
  picket_context_free(lean);
  return status;
}

/* With growing steps: a factorisation makes many. */
static void allocations_may_fail(void **state) {
  (void)state;
  char path[] = "/tmp/picket-section-XXXXXX";
  int file = mkstemp(path);
  assert_true(file >= 0 && close(file) == 0 && unlink(path) == 0);
  short_memory whole = {0};
  assert_int_equal(find_and_write(&whole, path), PICKET_OK);
  assert_int_equal(whole.living, 0);
  assert_int_equal(unlink(path), 0);
  for (long at = 1; at <= whole.asked; at += 1 + whole.asked / 150) {
    short_memory memory = {.fail_at = at};
    picket_status status = find_and_write(&memory, path);
    assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
    assert_int_equal(memory.living, 0);
    (void)unlink(path);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(questions_that_make_no_sense, set_up, tear_down),
      cmocka_unit_test_setup_teardown(outputs_that_make_no_sense, set_up, tear_down),
      cmocka_unit_test_setup_teardown(allocations_may_fail, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
