/* Bent sections: a wire loses less the larger its radius is, over two decades, and becomes the
 * straight one. */
#include <math.h>
#include <picket/modes.h>
#include <stdio.h>

#include "study/study.h"
#include "unit/study/understood.h"

/* The first mode of a wire of index 1.9 in 1.444; `bend` is a line of its section or nothing. */
static picket_section_mode wire(const char *bend) {
  char text[512];
  picket_context *context = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  options.count = 1;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  snprintf(text, sizeof text,
           "format: 1\nlight: {wavelength_nm: 1550}\n"
           "materials: {core: {constant: {index: 1.9}}, oxide: {constant: {index: 1.444}}}\n"
           "section: {cladding: oxide, %sshapes: [{rect: {fill: core, width_nm: 700, height_nm: "
           "400}}]}\n",
           bend);
  understood u = understand_good(context, text);
  if (pk_study_modes(u.problem, &options, &result) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  assert_int_equal(result->modes->points[0].mode_count, 1);
  picket_section_mode mode = result->modes->points[0].modes[0];
  mode.confinement = NULL;
  mode.loss_db_per_cm.note = NULL;
  picket_problem_free(u.owner);
  pk_result_free(result);
  picket_context_free(context);
  return mode;
}

static void loses_less_the_straighter_it_is(void **state) {
  (void)state;
  static const double RADII[] = {2, 20, 60, 200};
  picket_section_mode straight = wire(""), before = {0};
  assert_true(isnan(straight.bend_loss_db_per_90_deg.value));
  assert_true(straight.loss_db_per_cm.value == 0);
  for (int i = 0; i < 4; i++) {
    char bend[64];
    snprintf(bend, sizeof bend, "bend_radius_um: %g, ", RADII[i]);
    picket_section_mode mode = wire(bend);
    picket_quantity loss = mode.loss_db_per_cm;
    assert_true(loss.value > loss.uncertainty);
    assert_true(i == 0 || loss.value < before.loss_db_per_cm.value);
    assert_true(mode.index.value > straight.index.value - straight.index.uncertainty);
    assert_true(i == 0 || mode.index.value < before.index.value);
    /* a quarter turn is π/2 R long */
    assert_near(mode.bend_loss_db_per_90_deg.value / loss.value,
                1.57079632679489661923 * RADII[i] * 1e-4, 1e-12);
    before = mode;
  }
  /* What is left falls as 1/R²: 0.0053 at 20 µm, 5.3e-5 at 200 µm. */
  assert_near(before.index.value, straight.index.value,
              5.3e-5 + before.index.uncertainty + straight.index.uncertainty);
}

int main(void) {
  const struct CMUnitTest tests[] = {cmocka_unit_test(loses_less_the_straighter_it_is)};
  return cmocka_run_group_tests(tests, NULL, NULL);
}
