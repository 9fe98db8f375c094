/* Log and progress: changed after creation, asked everywhere, and rising to the end. */
#include <picket.h>
#include <stdio.h>
#include <string.h>

#include "unit/near.h"

static const char GOOD[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550, polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, "
    "width_nm: 300}}]}\n"
    "section: {cladding: oxide, span_nm: [600, 400], shapes: [{rect: {fill: core, width_nm: 300, "
    "height_nm: 200}}]}\n";

typedef struct listener {
  picket_context *context;
  int asked, stop_at; /* 0: never */
  char phase[64];
  double last, ends; /* the smallest fraction at which a phase ended */
  picket_status set; /* what a change from inside was answered with */
  int lines;
} listener;

static picket_verdict ask(const picket_progress *progress, void *user) {
  listener *l = user;
  assert_true(progress->fraction >= 0 && progress->fraction <= 1);
  if (strcmp(progress->phase, l->phase) != 0) {
    l->ends = l->phase[0] ? fmin(l->ends, l->last) : 1;
    snprintf(l->phase, sizeof l->phase, "%s", progress->phase);
    l->last = 0;
  }
  assert_true(progress->fraction >= l->last);
  l->last = progress->fraction;
  l->set = picket_context_set_progress(l->context, NULL, NULL);
  return ++l->asked == l->stop_at ? PICKET_STOP : PICKET_CONTINUE;
}

static void hear(picket_log_level level, const char *line, void *user) {
  listener *l = user;
  assert_true(level <= PICKET_LOG_INFO && line[0] != '\0');
  l->lines++;
}

static picket_context *context;
static picket_problem *problem;
static picket_options options;

static int set_up(void **state) {
  (void)state;
  picket_options_init(&options);
  options.accuracy = 1e-2;
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

static void progress_rises_to_the_end(void **state) {
  (void)state;
  listener l = {.context = context};
  picket_result *result = NULL;
  assert_int_equal(picket_context_set_progress(context, ask, &l), PICKET_OK);
  assert_int_equal(picket_context_set_log(context, hear, &l, PICKET_LOG_INFO), PICKET_OK);
  assert_int_equal(picket_edges_find(problem, &options, &result), PICKET_OK);
  assert_true(l.asked > 3 && l.lines > 0);
  assert_true(fmin(l.ends, l.last) == 1);
  assert_int_equal(l.set, PICKET_ERROR_BUSY);
  picket_result_free(result);
  int asked = l.asked, lines = l.lines;
  assert_int_equal(picket_context_set_progress(context, NULL, NULL), PICKET_OK);
  assert_int_equal(picket_context_set_log(context, NULL, NULL, PICKET_LOG_INFO), PICKET_OK);
  result = NULL;
  assert_int_equal(picket_edges_find(problem, &options, &result), PICKET_OK);
  assert_true(asked == l.asked && lines == l.lines);
  picket_result_free(result);
  assert_int_equal(picket_context_set_progress(NULL, ask, &l), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_context_set_log(NULL, hear, &l, PICKET_LOG_INFO), PICKET_ERROR_ARGUMENT);
}

static void fields_can_be_stopped(void **state) {
  (void)state;
  picket_field *field = NULL;
  picket_section_field *section = NULL;
  for (int at = 1; at <= 2; at++) {
    listener l = {.context = context, .stop_at = at};
    assert_int_equal(picket_context_set_progress(context, ask, &l), PICKET_OK);
    assert_int_equal(picket_field_find(problem, &options, PICKET_HY, 1.55, 0, &field),
                     PICKET_ERROR_STOPPED);
    l = (listener){.context = context, .stop_at = at};
    assert_int_equal(picket_section_field_find(problem, &options, 1.55, 0, &section),
                     PICKET_ERROR_STOPPED);
  }
  assert_null(field);
  assert_null(section);
}

static void getters_say_what_is_wrong(void **state) {
  (void)state;
  double room[1];
  int n = 0;
  picket_field *field = NULL;
  picket_section_field *section = NULL;
  options.accuracy = 1e-3;
  assert_int_equal(picket_field_find(problem, &options, PICKET_HY, 1.55, 0, &field), PICKET_OK);
  assert_int_equal(picket_field_component(field, PICKET_COMPONENT_EX, room, 1),
                   PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "capacity is 1"));
  assert_int_equal(picket_field_lines(field, (picket_axis)7, room, 1), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "axis is 7"));
  assert_int_equal(picket_field_size(field, NULL, &n), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "null"));
  assert_int_equal(picket_section_field_find(problem, &options, 1.55, 0, &section), PICKET_OK);
  assert_int_equal(picket_section_field_component(section, (picket_component)9, room, 1),
                   PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "component is 9, must be 0 to 5"));
  assert_int_equal(picket_section_field_permittivity(section, PICKET_COMPONENT_HX, room, 1),
                   PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "component is 3, must be 0 to 2"));
  picket_field_free(field);
  picket_section_field_free(section);
}

static void names_and_texts(void **state) {
  (void)state;
  assert_string_equal(picket_side_name(PICKET_SIDE_HIGH), "high");
  assert_string_equal(picket_side_name((picket_side)5), "unknown");
  assert_string_equal(picket_question_name(PICKET_QUESTION_MODES), "modes");
  assert_string_equal(picket_question_name((picket_question)-1), "unknown");
  assert_string_equal(picket_derivative_way_name(PICKET_DERIVATIVE_SAMPLES), "samples");
  assert_string_equal(picket_derivative_way_name((picket_derivative_way)9), "unknown");
  assert_string_equal(picket_slab_polarization_name(PICKET_TM), "tm");
  assert_string_equal(picket_slab_polarization_name((picket_slab_polarization)2), "unknown");
  for (int status = PICKET_ERROR_OUTPUT; status <= PICKET_OK; status++) {
    assert_string_not_equal(picket_status_text((picket_status)status), "unknown status");
  }
  assert_string_equal(picket_status_text((picket_status)1), "unknown status");
}

static void options_with_a_message(void **state) {
  (void)state;
  assert_int_equal(picket_options_choose(context, &options, "count", 3), PICKET_OK);
  assert_true(options.count == 3);
  assert_string_equal(picket_context_message(context), "");
  assert_int_equal(picket_options_choose(context, &options, "count", NAN), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "count is"));
  assert_int_equal(picket_options_choose(context, &options, "depth", 1), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "\"depth\""));
  assert_int_equal(picket_options_choose(context, NULL, "count", 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_options_choose(context, &options, NULL, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_options_choose(NULL, &options, "count", 1), PICKET_ERROR_ARGUMENT);
  assert_true(options.count == 3);
}

static void versions(void **state) {
  (void)state;
  assert_string_equal(picket_version(), PICKET_VERSION);
  char numbers[32];
  snprintf(numbers, sizeof numbers, "%d.%d.%d", PICKET_VERSION_MAJOR, PICKET_VERSION_MINOR,
           PICKET_VERSION_PATCH);
  assert_string_equal(numbers, PICKET_VERSION);
  assert_int_equal(picket_abi(), PICKET_ABI);
  assert_non_null(strstr(picket_build(), PICKET_VERSION));
  assert_int_equal(picket_struct_size("picket_quantity"), sizeof(picket_quantity));
  assert_int_equal(picket_struct_size("picket_problem"), 0); /* opaque */
  assert_int_equal(picket_struct_size(NULL), 0);
  assert_null(picket_struct_name(-1));
  int i = 0;
  for (; picket_struct_name(i); i++) {
    assert_true(picket_struct_size(picket_struct_name(i)) > 0);
  }
  assert_true(i > 20);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(progress_rises_to_the_end, set_up, tear_down),
      cmocka_unit_test_setup_teardown(fields_can_be_stopped, set_up, tear_down),
      cmocka_unit_test_setup_teardown(getters_say_what_is_wrong, set_up, tear_down),
      cmocka_unit_test(names_and_texts),
      cmocka_unit_test_setup_teardown(options_with_a_message, set_up, tear_down),
      cmocka_unit_test(versions),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
