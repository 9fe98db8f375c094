/* The border of the studies: nonsense is refused with nothing changed, results answer only the
 * questions of their kind, and one context serves one call at a time. */
#include "api/border.h"

#include <picket.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

static const char GOOD[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: [1500, 1550]}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n"
    "section: {cladding: oxide, span_nm: [600, 400], shapes: [{rect: {fill: core, width_nm: 300, "
    "height_nm: 200}}]}\n";

typedef picket_status (*find)(picket_problem *, const picket_options *, picket_result **);
static const find finds[] = {picket_edges_find, picket_bands_find, picket_slab_find,
                             picket_index_find, picket_modes_find};
enum { FINDS = sizeof finds / sizeof *finds };

static picket_context *context;
static picket_problem *problem;

static int set_up(void **state) {
  (void)state;
  if (picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, GOOD, strlen(GOOD), "test", &problem);
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}

static picket_result *slab_result(void) {
  picket_result *result = NULL;
  assert_int_equal(picket_slab_find(problem, NULL, &result), PICKET_OK);
  return result;
}

static void null_arguments(void **state) {
  (void)state;
  picket_result *result = NULL;
  for (int i = 0; i < FINDS; i++) {
    assert_int_equal(finds[i](NULL, NULL, &result), PICKET_ERROR_ARGUMENT);
    assert_int_equal(finds[i](problem, NULL, NULL), PICKET_ERROR_ARGUMENT);
    assert_non_null(strstr(picket_context_message(context), "out"));
  }
  assert_int_equal(picket_summary_find(NULL, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_summary_find(problem, NULL), PICKET_ERROR_ARGUMENT);
  assert_null(result);
}

static void options_out_of_range(void **state) {
  (void)state;
  const double accuracies[] = {0, -1, 1e-9, 0.1, NAN, INFINITY};
  const double counts[] = {-1, 201, 1.5, NAN};
  picket_result *result = NULL;
  for (int i = 0; i < FINDS; i++) {
    picket_options options;
    for (size_t k = 0; k < sizeof accuracies / sizeof *accuracies; k++) {
      picket_options_init(&options);
      options.accuracy = accuracies[k];
      assert_int_equal(finds[i](problem, &options, &result), PICKET_ERROR_ARGUMENT);
      assert_non_null(strstr(picket_context_message(context), "accuracy"));
    }
    for (size_t k = 0; k < sizeof counts / sizeof *counts; k++) {
      picket_options_init(&options);
      options.count = counts[k];
      assert_int_equal(finds[i](problem, &options, &result), PICKET_ERROR_ARGUMENT);
      assert_non_null(strstr(picket_context_message(context), "count"));
    }
    picket_options_init(&options);
    options.size--;
    assert_int_equal(finds[i](problem, &options, &result), PICKET_ERROR_ARGUMENT);
    assert_non_null(strstr(picket_context_message(context), "size"));
  }
  assert_null(result);
}

static void a_wrong_problem_is_refused(void **state) {
  (void)state;
  picket_result *result = NULL;
  assert_int_equal(picket_problem_set(problem, "cell.pitch_nm", "-3"), PICKET_OK);
  for (int i = 0; i < FINDS; i++) {
    assert_int_equal(finds[i](problem, NULL, &result), PICKET_ERROR_INPUT);
    assert_non_null(strstr(picket_context_message(context), "cell.pitch_nm"));
  }
  assert_int_equal(picket_summary_find(problem, &result), PICKET_ERROR_INPUT);
  assert_null(result);
}

static void success_clears_the_message(void **state) {
  (void)state;
  picket_result *result = NULL;
  assert_int_equal(picket_slab_find(problem, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_string_not_equal(picket_context_message(context), "");
  result = slab_result();
  assert_string_equal(picket_context_message(context), "");
  picket_result_free(result);
}

static void a_result_answers_its_own_questions_only(void **state) {
  (void)state;
  picket_result *result = slab_result();
  picket_edges_answer edges;
  picket_bands_answer bands;
  picket_slab_answer slab;
  picket_index_answer index;
  memset(&slab, 0x55, sizeof slab);
  const picket_slab_answer before = slab;
  assert_int_equal(picket_slab_count(result), 2);
  assert_int_equal(picket_edges_count(result), 0);
  assert_int_equal(picket_bands_count(result), 0);
  assert_int_equal(picket_slab_count(NULL), 0);
  assert_int_equal(picket_edges_count(NULL), 0);
  assert_int_equal(picket_bands_count(NULL), 0);
  assert_int_equal(picket_index_count(result), 0);
  assert_int_equal(picket_index_count(NULL), 0);
  assert_int_equal(picket_index_get(result, 0, &index), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edges_get(result, 0, &edges), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_bands_get(result, 0, &bands), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_slab_get(result, -1, &slab), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_slab_get(result, 2, &slab), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_slab_get(result, 0, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_slab_get(NULL, 0, &slab), PICKET_ERROR_ARGUMENT);
  assert_memory_equal(&slab, &before, sizeof slab);
  assert_null(picket_summary_line(result, 0));
  assert_int_equal(picket_slab_get(result, 1, &slab), PICKET_OK);
  assert_int_equal(slab.polarization, PICKET_TM);
  picket_result_free(result);
}

static void null_results(void **state) {
  (void)state;
  assert_null(picket_result_json(NULL));
  assert_null(picket_result_csv(NULL));
  assert_false(picket_result_complete(NULL));
  assert_string_equal(picket_result_shortfall(NULL), "");
  picket_result_free(NULL);
}

static void documents_are_written_once(void **state) {
  (void)state;
  picket_result *result = slab_result();
  assert_true(picket_result_complete(result));
  assert_string_equal(picket_result_shortfall(result), "");
  const char *json = picket_result_json(result);
  const char *csv = picket_result_csv(result);
  assert_non_null(strstr(json, "\"command\": \"slab\""));
  assert_non_null(strstr(csv, "polarization,wavelength_nm"));
  assert_ptr_equal(picket_result_json(result), json);
  assert_ptr_equal(picket_result_csv(result), csv);
  picket_result_free(result);
}

static void a_result_outlives_its_makers(void **state) {
  (void)state;
  picket_result *result = slab_result();
  picket_problem_free(problem);
  picket_context_free(context);
  problem = NULL;
  context = NULL;
  assert_non_null(picket_result_json(result));
  picket_result_free(result);
}

static void words_of_regimes(void **state) {
  (void)state;
  assert_string_equal(picket_regime_name(PICKET_REGIME_SUBWAVELENGTH), "subwavelength");
  assert_string_equal(picket_regime_name(PICKET_REGIME_STOP_BAND), "stop-band");
  assert_string_equal(picket_regime_name(PICKET_REGIME_RADIATING), "radiating");
  assert_string_equal(picket_regime_name(PICKET_REGIME_UNKNOWN), "unknown");
  assert_string_equal(picket_regime_name((picket_regime)99), "unknown");
}

/* ---- a call inside a call ---- */

typedef struct inner {
  picket_problem *problem;
  picket_result *finished;
  picket_status seen;
  bool document;
  int asked;
} inner;

static picket_verdict call_again(const picket_progress *progress, void *user) {
  inner *in = user;
  picket_result *result = NULL;
  assert_true(progress->fraction >= 0 && progress->fraction <= 1);
  assert_non_null(progress->phase);
  in->seen = picket_slab_find(in->problem, NULL, &result);
  in->document = in->finished && picket_result_json(in->finished) != NULL;
  in->asked++;
  return in->finished ? PICKET_STOP : PICKET_CONTINUE;
}

static void one_call_at_a_time(void **state) {
  (void)state;
  inner in = {0};
  picket_context_options options;
  picket_context *own = NULL;
  picket_result *result = NULL;
  picket_context_options_init(&options);
  options.progress = call_again;
  options.progress_user = &in;
  assert_int_equal(picket_context_create(&options, &own), PICKET_OK);
  assert_int_equal(picket_problem_read_text(own, GOOD, strlen(GOOD), NULL, &in.problem), PICKET_OK);
  assert_int_equal(picket_slab_find(in.problem, NULL, &in.finished), PICKET_OK);
  assert_true(in.asked > 0);
  assert_int_equal(in.seen, PICKET_ERROR_BUSY);
  /* Now a finished result is there: its document has to wait, and the callback stops the work. */
  assert_int_equal(picket_slab_find(in.problem, NULL, &result), PICKET_ERROR_STOPPED);
  assert_null(result);
  assert_false(in.document);
  assert_non_null(strstr(picket_context_message(own), "stopped"));
  assert_non_null(picket_result_json(in.finished));
  picket_result_free(in.finished);
  picket_problem_free(in.problem);
  picket_context_free(own);
}

static void documents_out_of_memory(void **state) {
  (void)state;
  short_memory memory = {0};
  picket_context *scarce = short_memory_context(&memory);
  picket_problem *own = NULL;
  picket_result *result = NULL;
  assert_int_equal(picket_problem_read_text(scarce, GOOD, strlen(GOOD), NULL, &own), PICKET_OK);
  assert_int_equal(picket_summary_find(own, &result), PICKET_OK);
  memory.fail_at = memory.asked + 1;
  assert_null(picket_result_json(result));
  assert_string_not_equal(picket_context_message(scarce), "");
  memory.fail_at = memory.asked + 1;
  assert_null(picket_result_csv(result));
  assert_non_null(picket_result_json(result)); /* a second try with memory is a new one */
  assert_non_null(picket_result_csv(result));
  picket_result_free(result);
  picket_problem_free(own);
  picket_context_free(scarce);
  assert_int_equal(memory.living, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(null_arguments, set_up, tear_down),
      cmocka_unit_test_setup_teardown(options_out_of_range, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_wrong_problem_is_refused, set_up, tear_down),
      cmocka_unit_test_setup_teardown(success_clears_the_message, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_result_answers_its_own_questions_only, set_up, tear_down),
      cmocka_unit_test_setup_teardown(null_results, set_up, tear_down),
      cmocka_unit_test_setup_teardown(documents_are_written_once, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_result_outlives_its_makers, set_up, tear_down),
      cmocka_unit_test_setup_teardown(words_of_regimes, set_up, tear_down),
      cmocka_unit_test_setup_teardown(one_call_at_a_time, set_up, tear_down),
      cmocka_unit_test_setup_teardown(documents_out_of_memory, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
