/* The first look at a cell: how fine its base grid is. */
#include "study/survey.h"

#include <picket/index.h>
#include <stdio.h>

#include "unit/study/understood.h"

static const double PI = 3.141592653589793238;

#define MATERIALS                                                                \
  "format: 1\nlight: {wavelength_nm: 1550, polarization: ey}\nmaterials:\n"      \
  "  oxide: {constant: {index: 1.444}}\n  silicon: {constant: {index: 3.476}}\n" \
  "  unused: {constant: {index: 20}}\n"

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static double steps_per_wave(double pitch_nm, double *per_pitch) {
  char text[1024];
  snprintf(text, sizeof text,
           MATERIALS
           "cell:\n  pitch_nm: %g\n  cladding: oxide\n  lateral: open\n  shapes:\n"
           "    - rect: {fill: silicon, length_nm: %g, width_nm: 300}\n",
           pitch_nm, 0.5 * pitch_nm);
  understood u = understand_good(context, text);
  pk_survey survey;
  assert_int_equal(pk_survey_take(u.problem, PK_EY, &survey), PICKET_OK);
  pk_survey_resolve(&survey, 2 * PI / 1.55);
  picket_problem_free(u.owner);
  *per_pitch = survey.steps_per_pitch;
  return *per_pitch / (pitch_nm / 1550 * 3.476);
}

/* Eight steps in the shorter of the pitch and the wave in the densest medium of the cell. */
static void base_grids_resolve_pitch_and_wave(void **state) {
  (void)state;
  double per_pitch;
  for (double pitch = 100; pitch < 2e4; pitch *= 1.7) {
    double per_wave = steps_per_wave(pitch, &per_pitch);
    assert_true(per_pitch >= 8 && per_wave >= 8);
    assert_true(per_pitch == 8 || per_wave < 9 + 4e3 / pitch); /* no finer than needed */
  }
}

/* A stack nine waves long, where a grid by the pitch alone has less than three steps in a wave:
 * cos KΛ of the answer is that of the exact cell (P. Yeh, A. Yariv and C.-S. Hong, J. Opt. Soc. Am.
 * 67, 423 (1977)). */
static void long_pitches_have_the_exact_index(void **state) {
  (void)state;
  const char *text = MATERIALS
      "cell:\n  pitch_nm: 5210\n  cladding: oxide\n  lateral: uniform\n  shapes:\n"
      "    - stripe: {fill: silicon, across: z, from_nm: -1000, to_nm: 1610}\n";
  double k0 = 2 * PI / 1.55, a = 3.476 * k0 * 2.61, b = 1.444 * k0 * 2.6, s = 3.476 / 1.444;
  double trace = cos(a) * cos(b) - 0.5 * (s + 1 / s) * sin(a) * sin(b);
  assert_true(fabs(trace) < 0.95); /* no stop band */
  understood u = understand_good(context, text);
  picket_result *result = NULL;
  picket_index_answer answer;
  assert_int_equal(picket_index_find(u.owner, NULL, &result), PICKET_OK);
  assert_int_equal(picket_index_get(result, 0, &answer), PICKET_OK);
  assert_int_equal(answer.points[0].mode_count, 1);
  picket_quantity q = answer.points[0].modes[0].bloch_index;
  double slope = fabs(k0 * 5.21 * sin(q.value * k0 * 5.21));
  assert_near(cos(q.value * k0 * 5.21), trace, slope * q.uncertainty + 1e-12);
  assert_true(q.uncertainty < 1e-4 * q.value);
  picket_result_free(result);
  picket_problem_free(u.owner);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(base_grids_resolve_pitch_and_wave),
      cmocka_unit_test(long_pitches_have_the_exact_index),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
