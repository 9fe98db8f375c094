/* The summary of a problem: derived values against closed forms. */
#include <picket/summary.h>
#include <stdio.h>

#include "study/study.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

static const char WHOLE[] =
    "format: 1\n"
    "name: row of teeth\n"
    "temperature_c: 25\n"
    "light: {wavelength_nm: {from: 1500, to: 1580, points: 5}, polarization: hy}\n"
    "materials:\n"
    "  core: {constant: {index: 3.476, extinction: 0.01}}\n"
    "  oxide: {constant: {index: 1.444}}\n"
    "  resin: {constant: {index: 1.5}}\n"
    "cell:\n"
    "  pitch_nm: 300\n"
    "  cladding: oxide\n"
    "  shapes:\n"
    "    - rect: {fill: core, length_nm: 120, width_nm: 450, at_nm: [0, 600]}\n"
    "    - stripe: {fill: resin, across: x, from_nm: -.inf, to_nm: -2000}\n"
    "slab: {substrate: oxide, films: [{fill: resin, thickness_nm: 5000}], cover: oxide, "
    "polarization: te}\n";

static picket_context *context;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static const pk_summary_item *find(const picket_result *result, const char *name) {
  for (int i = 0; i < result->count; i++) {
    if (strcmp(result->summary[i].name, name) == 0) {
      return &result->summary[i];
    }
  }
  return NULL;
}

static double number(const picket_result *result, const char *name, const char *unit) {
  const pk_summary_item *item = find(result, name);
  if (!item) {
    fail_msg("there is no item %s", name);
  }
  assert_null(item->text);
  assert_string_equal(item->unit, unit);
  return item->value;
}

static picket_result *summary(const char *text) {
  picket_result *result = NULL;
  understood u = understand_good(context, text);
  assert_int_equal(pk_study_summary(u.problem, &result), PICKET_OK);
  picket_problem_free(u.owner);
  return result;
}

static void derived_values(void **state) {
  (void)state;
  const double round = 1e-9; /* nm to µm and back, of numbers around 1000 */
  picket_result *r = summary(WHOLE);
  assert_string_equal(r->name, "row of teeth");
  assert_near(number(r, "problem.temperature", "°C"), 25, 0);
  assert_near(number(r, "light.from", "nm"), 1500, round);
  assert_near(number(r, "light.to", "nm"), 1580, round);
  assert_near(number(r, "light.points", ""), 5, 0);
  assert_string_equal(find(r, "light.polarization")->text, "hy");
  assert_near(number(r, "materials.core.index_from", ""), 3.476, round);
  assert_near(number(r, "materials.core.extinction_to", ""), 0.01, round);
  assert_null(find(r, "materials.oxide.extinction_to"));
  assert_near(number(r, "cell.pitch", "nm"), 300, round);
  /* x = 0 and the middle of all shapes meet cladding only; the teeth lie between two edges. */
  assert_near(number(r, "cell.duty", ""), 120.0 / 300, round);
  assert_near(number(r, "cell.smallest_feature", "nm"), 120, round);
  assert_near(number(r, "cell.light_line.oxide", "nm"), 2 * 300 * 1.444, round);
  assert_near(number(r, "cell.light_line.resin", "nm"), 2 * 300 * 1.5, round);
  assert_null(find(r, "cell.estimate.ey.centre"));
  assert_true(number(r, "cell.estimate.hy.centre", "nm") > 2 * 300 * 1.5);
  /* M = floor(V/π) + 1 = floor(2·5 √(1.5² - 1.444²)/λ) + 1. */
  assert_near(number(r, "slab.te.modes_from", ""), floor(10 * sqrt(2.25 - 2.085136) / 1.5) + 1, 0);
  assert_null(find(r, "slab.tm.modes_from"));
  pk_result_free(r);
}

static void duty_along_the_axis_or_the_middle(void **state) {
  (void)state;
  static const char *const places[] = {"0", "900"};
  for (int i = 0; i < 2; i++) {
    char text[400];
    snprintf(text, sizeof text,
             "format: 1\nmaterials: {core: {constant: {index: 3}}, oxide: {constant: {index: 1}}}\n"
             "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 120, "
             "width_nm: 400, at_nm: [0, %s]}}]}\n",
             places[i]);
    picket_result *r = summary(text);
    assert_near(number(r, "cell.duty", ""), 0.4, 1e-9);
    assert_null(find(r, "light.from"));
    assert_null(find(r, "materials.core.index_from"));
    pk_result_free(r);
  }
}

static void lines_for_people(void **state) {
  (void)state;
  picket_result *r = summary(WHOLE);
  int units = 0;
  for (int i = 0; i < r->count; i++) {
    const char *line = picket_summary_line(r, i);
    assert_non_null(line);
    assert_ptr_equal(strstr(line, r->summary[i].name), line);
    units += strstr(line, "cell.pitch ") != NULL && strstr(line, "300 nm") != NULL;
  }
  assert_int_equal(units, 1);
  assert_null(picket_summary_line(r, r->count));
  assert_null(picket_summary_line(r, -1));
  assert_null(picket_summary_line(NULL, 0));
  pk_result_free(r);
}

static void an_empty_problem_is_sound(void **state) {
  (void)state;
  picket_result *r = summary("format: 1\n");
  assert_true(r->count > 0);
  assert_null(find(r, "cell.pitch"));
  pk_result_free(r);
}

static void unknown_materials_are_refused(void **state) {
  (void)state;
  understood u = understand_good(
      context, "format: 1\nmaterials: {core: {catalogue: silicon}}\nlight: {wavelength_nm: 633}\n");
  picket_result *result = NULL;
  assert_int_equal(pk_study_summary(u.problem, &result), PICKET_ERROR_RANGE);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), "633"));
  picket_problem_free(u.owner);
}

static void out_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n += 1 + n / 16) { /* the estimate allocates often */
    short_memory memory = {0};
    picket_context *scarce = short_memory_context(&memory);
    understood u = understand_good(scarce, WHOLE);
    memory.fail_at = memory.asked + n;
    picket_result *result = NULL;
    status = pk_study_summary(u.problem, &result);
    assert_true(status == PICKET_OK ? n > 10 : status == PICKET_ERROR_MEMORY && !result);
    pk_result_free(result);
    picket_problem_free(u.owner);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(derived_values),
      cmocka_unit_test(duty_along_the_axis_or_the_middle),
      cmocka_unit_test(lines_for_people),
      cmocka_unit_test(an_empty_problem_is_sound),
      cmocka_unit_test(unknown_materials_are_refused),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
