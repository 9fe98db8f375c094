/* The slab study: published-style table values with their bars, and what it does with the rest. */
#include <picket/slab.h>
#include <stdlib.h>

#include "study/study.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

#define MATERIALS                                            \
  "format: 1\n"                                              \
  "materials:\n"                                             \
  "  core: {constant: {index: 3.476}}\n"                     \
  "  lossy: {constant: {index: 3.476, extinction: 0.001}}\n" \
  "  oxide: {constant: {index: 1.444}}\n"
#define SLAB(film) "slab: {substrate: oxide, films: [{" film "}], cover: oxide}\n"
#define CORE_220 SLAB("fill: core, thickness_nm: 220")

static picket_context *context;
static picket_options options;

static int set_up(void **state) {
  (void)state;
  picket_options_init(&options);
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static picket_result *study(const char *text, double count) {
  picket_result *result = NULL;
  understood u = understand_good(context, text);
  picket_options chosen = options;
  chosen.count = count;
  assert_int_equal(pk_study_slab(u.problem, &chosen, &result), PICKET_OK);
  picket_problem_free(u.owner);
  return result;
}

/* Closed-form roots, ten digits: 220 nm of 3.476 in 1.444 at 1550 nm. */
static void table_values_within_their_bars(void **state) {
  (void)state;
  picket_result *r = study(MATERIALS CORE_220 "light: {wavelength_nm: 1550}\n", 0);
  assert_int_equal(r->count, 2);
  assert_int_equal(r->slab[0].polarization, PICKET_TE);
  assert_int_equal(r->slab[1].polarization, PICKET_TM);
  assert_true(r->complete);
  const picket_slab_mode *te = &r->slab[0].points[0].modes[0];
  const picket_slab_mode *tm = &r->slab[1].points[0].modes[0];
  assert_near(te->index.value, 2.8477822434, 5e-11 + te->index.uncertainty);
  assert_near(te->group_index.value, 3.57675748, 5e-9 + te->group_index.uncertainty);
  assert_near(tm->index.value, 2.0533196788, 5e-11 + tm->index.uncertainty);
  assert_near(tm->group_index.value, 3.85992095, 5e-9 + tm->group_index.uncertainty);
  assert_near(te->index.uncertainty, 1e-12 * te->index.value, 1e-20);
  assert_null(te->index.note);
  pk_result_free(r);
}

static void polarization_and_wavelengths_of_the_file(void **state) {
  (void)state;
  picket_result *r = study(MATERIALS
                           "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], "
                           "cover: oxide, polarization: tm}\n"
                           "light: {wavelength_nm: [1310, 1550, 1600]}\n",
                           0);
  assert_int_equal(r->count, 1);
  assert_int_equal(r->slab[0].polarization, PICKET_TM);
  assert_int_equal(r->slab[0].point_count, 3);
  assert_near(r->slab[0].points[1].wavelength_um, 1.55, 1e-15);
  assert_true(r->slab[0].points[0].modes[0].index.value >
              r->slab[0].points[2].modes[0].index.value);
  pk_result_free(r);
}

/* M = floor(V/π) + 1 modes of a symmetric film, V = (2π/λ) d √(n₁² - n₂²). */
static void many_modes_and_a_limit(void **state) {
  (void)state;
  static const char text[] =
      MATERIALS SLAB("fill: core, thickness_nm: 20000") "light: {wavelength_nm: 1550}\n";
  int expected = (int)(2 * 20 / 1.55 * sqrt(3.476 * 3.476 - 1.444 * 1.444)) + 1;
  assert_true(expected > 16); /* more than the first guess of the study */
  picket_result *r = study(text, 0);
  assert_int_equal(r->slab[0].points[0].mode_count, expected);
  for (int i = 0; i < expected; i++) {
    assert_int_equal(r->slab[0].points[0].modes[i].order, i);
  }
  pk_result_free(r);
  r = study(text, 3);
  assert_int_equal(r->slab[0].points[0].mode_count, 3);
  pk_result_free(r);
}

static void nothing_guided_is_an_outcome(void **state) {
  (void)state;
  picket_result *r = study(
      "format: 1\nmaterials: {core: {constant: {index: 1.4}}, oxide: {constant: {index: "
      "1.444}}}\n" CORE_220 "light: {wavelength_nm: 1550}\n",
      0);
  assert_int_equal(r->slab[0].points[0].mode_count, 0);
  pk_result_free(r);
}

static void absorption_has_no_bar(void **state) {
  (void)state;
  picket_result *r =
      study(MATERIALS SLAB("fill: lossy, thickness_nm: 220") "light: {wavelength_nm: 1550}\n", 0);
  const picket_slab_mode *te = &r->slab[0].points[0].modes[0];
  /* An extinction of 1e-3 moves the real index by about its square. */
  assert_near(te->index.value, 2.8477822434, 1e-6);
  assert_true(isnan(te->index.uncertainty));
  assert_non_null(te->index.note);
  pk_result_free(r);
}

static void what_is_missing_is_said(void **state) {
  (void)state;
  static const char *const texts[] = {MATERIALS "light: {wavelength_nm: 1550}\n",
                                      MATERIALS CORE_220,
                                      MATERIALS CORE_220 "light: {polarization: hy}\n"};
  static const char *const words[] = {"slab", "wavelength_nm", "wavelength_nm"};
  for (int i = 0; i < 3; i++) {
    picket_result *result = (picket_result *)&options;
    understood u = understand_good(context, texts[i]);
    assert_int_equal(pk_study_slab(u.problem, &options, &result), PICKET_ERROR_INPUT);
    assert_ptr_equal(result, &options);
    assert_non_null(strstr(picket_context_message(context), words[i]));
    picket_problem_free(u.owner);
  }
}

static void out_of_range_names_the_material(void **state) {
  (void)state;
  understood u =
      understand_good(context,
                      "format: 1\nmaterials: {core: {catalogue: silicon}, oxide: {constant: "
                      "{index: 1.444}}}\n" CORE_220 "light: {wavelength_nm: 633}\n");
  picket_result *result = NULL;
  assert_int_equal(pk_study_slab(u.problem, &options, &result), PICKET_ERROR_RANGE);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), "core"));
  picket_problem_free(u.owner);
}

static void out_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0};
    picket_context *scarce = short_memory_context(&memory);
    understood u = understand_good(
        scarce,
        MATERIALS SLAB("fill: core, thickness_nm: 20000") "light: {wavelength_nm: [1310, 1550]}\n");
    memory.fail_at = memory.asked + n;
    picket_result *result = NULL;
    status = pk_study_slab(u.problem, &options, &result);
    assert_true(status == PICKET_OK ? n > 10 : status == PICKET_ERROR_MEMORY && !result);
    pk_result_free(result);
    picket_problem_free(u.owner);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(table_values_within_their_bars),
      cmocka_unit_test(polarization_and_wavelengths_of_the_file),
      cmocka_unit_test(many_modes_and_a_limit),
      cmocka_unit_test(nothing_guided_is_an_outcome),
      cmocka_unit_test(absorption_has_no_bar),
      cmocka_unit_test(what_is_missing_is_said),
      cmocka_unit_test(out_of_range_names_the_material),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
