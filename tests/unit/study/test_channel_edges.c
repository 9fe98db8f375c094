/* Questions that a channel declines, and a stop band on a coarse accuracy. */
#include "study/channel_edges.h"

#include "study/study.h"
#include "unit/study/understood.h"

#define MEDIA "materials: {oxide: {constant: {index: 1.444}}, si: {constant: {index: 3.4757}}}\n"
#define TOOTH "{rect: {fill: si, width_nm: 450, height_nm: 220, along_nm: [-75, 75]}}"
#define ROW(light)                        \
  "format: 1\nlight: {" light "}\n" MEDIA \
  "channel: {pitch_nm: 300, cladding: oxide, shapes: [" TOOTH "]}\n"

static void declines(const char *text,
                     picket_status (*study)(const pk_problem *, const picket_options *,
                                            picket_result **),
                     double count, picket_status expected, const char *words) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, text);
  picket_options options;
  picket_options_init(&options);
  options.count = count;
  picket_result *result = NULL;
  assert_int_equal(study(u.problem, &options, &result), expected);
  assert_null(result);
  if (!strstr(picket_context_message(context), words)) {
    fail_msg("%s\nis not: %s", picket_context_message(context), words);
  }
  picket_problem_free(u.owner);
  picket_context_free(context);
}

static void declines_what_it_cannot_do(void **state) {
  (void)state;
  declines(ROW("polarization: hy"), pk_study_edges, 2, PICKET_ERROR_UNSUPPORTED, "count is 2");
  declines(ROW("wavelength_nm: 1550, polarization: hy"), pk_study_index, 3,
           PICKET_ERROR_UNSUPPORTED, "count is 3");
  declines(ROW("polarization: hy"), pk_study_index, 0, PICKET_ERROR_INPUT, "wavelength_nm");
  declines(ROW("polarization: hy") "path: [{at: [0.5, 0]}, {at: [1, 0.5]}]\n", pk_study_bands, 1,
           PICKET_ERROR_UNSUPPORTED, "must be 0 for a channel");
  declines("format: 1\n" MEDIA
           "channel: {pitch_nm: 300, cladding: si, shapes: [{rect: {fill: oxide, width_nm: 450, "
           "height_nm: 220}}]}\n",
           pk_study_edges, 0, PICKET_ERROR_NO_MODE, "confines no");
}

/* The long edge of the prototype (section grid 12.5 nm, 7 harmonics) was 1240 nm. */
static void finds_the_stop_band_of_a_tooth(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, ROW("wavelength_nm: 1550, polarization: hy"));
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  picket_result *result = NULL;
  assert_int_equal(pk_study_edges(u.problem, &options, &result), PICKET_OK);
  const picket_edges_answer *answer = &result->edges[0];
  assert_int_equal(result->count, 1);
  assert_int_equal(answer->polarization, PICKET_TE_LIKE);
  assert_true(result->complete);
  const picket_stop_band *band = &answer->bands[0];
  assert_true(fabs(band->long_um.value - 1.240) < 1.5e-3);
  assert_true(band->long_confined && band->short_confined);
  assert_true(band->long_um.uncertainty < 1e-2 * band->long_um.value);
  assert_true(band->attenuation_db_per_pitch.value > 1);
  assert_int_equal(answer->operating.regime, PICKET_REGIME_SUBWAVELENGTH);
  assert_near(answer->operating.clearance_um.value, 1.55 - band->long_um.value, 1e-12);
  pk_result_free(result);
  picket_problem_free(u.owner);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(declines_what_it_cannot_do),
      cmocka_unit_test(finds_the_stop_band_of_a_tooth),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
