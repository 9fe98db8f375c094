/* What picket_match_find refuses, what it answers, and that nothing is left behind. */
#include <math.h>
#include <picket.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

/* A small window, so that it is quick. */
static const char BOX[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550}\n"
    "section: {cladding: oxide, span_nm: [900, 700], shapes: [{rect: {fill: core, width_nm: 450, "
    "height_nm: 220}}]}\n";
static const char NO_SECTION[] = "format: 1\nlight: {wavelength_nm: 1550}\n";

static picket_context *context;
static picket_problem *box;
static picket_problem *bare;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK &&
                 picket_problem_read_text(context, BOX, strlen(BOX), "box", &box) == PICKET_OK &&
                 picket_problem_read_text(context, NO_SECTION, strlen(NO_SECTION), "bare", &bare) ==
                     PICKET_OK
             ? 0
             : -1;
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(box);
  picket_problem_free(bare);
  picket_context_free(context);
  return 0;
}

static picket_match_request beam_request(void) {
  picket_match_request r;
  picket_match_request_init(&r);
  r.gaussian_x_um = r.gaussian_y_um = 0.5;
  return r;
}

static void refuse(picket_problem *other, const picket_match_request *r, picket_status expected,
                   const char *says) {
  picket_result *result = (picket_result *)&result; /* a value to be left alone */
  picket_result *before = result;
  assert_int_equal(picket_match_find(box, other, r, NULL, &result), expected);
  assert_ptr_equal(result, before);
  assert_non_null(strstr(picket_context_message(context), says));
}

static void nonsense_is_refused(void **state) {
  (void)state;
  picket_match_request r;
  picket_match_request_init(NULL);
  refuse(NULL, NULL, PICKET_ERROR_ARGUMENT, "neither");
  r = beam_request();
  refuse(box, &r, PICKET_ERROR_ARGUMENT, "both");
  r.size = 3;
  refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "size");
  const double wrong[] = {-1, NAN, INFINITY, 1001};
  for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
    r = beam_request();
    r.gaussian_y_um = wrong[i];
    refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "diameter along y");
    r = beam_request();
    r.tilt_x_rad = wrong[i];
    refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "tilt along x");
    r = beam_request();
    r.offset_y_um = 1000 * wrong[i] - 1;
    refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "offset along y");
    r = beam_request();
    r.medium_index = wrong[i];
    refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "medium");
  }
  r = beam_request();
  r.mode = -1;
  refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "mode is -1");
  r = beam_request();
  r.mode_b = 200;
  refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "mode_b is 200");
  r = beam_request();
  r.along = (picket_match_along)3;
  refuse(NULL, &r, PICKET_ERROR_ARGUMENT, "along is 3");
  r = beam_request();
  r.mode = 150;
  refuse(NULL, &r, PICKET_ERROR_INPUT, "mode 150");
  refuse(bare, NULL, PICKET_ERROR_INPUT, "second");
  r = beam_request();
  assert_int_equal(picket_match_find(NULL, NULL, &r, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_match_find(box, NULL, &r, NULL, NULL), PICKET_ERROR_ARGUMENT);
}

static void the_answer(void **state) {
  (void)state;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  picket_result *result = NULL;
  picket_match_request r = beam_request();
  r.offset_given = 1;
  r.offset_x_um = 0.1;
  assert_int_equal(picket_match_find(box, NULL, &r, &options, &result), PICKET_OK);
  picket_match_answer answer;
  assert_int_equal(picket_match_count(result), 1);
  assert_int_equal(picket_modes_count(result), 0);
  assert_int_equal(picket_match_get(result, 1, &answer), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_match_get(result, 0, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_match_get(result, 0, &answer), PICKET_OK);
  assert_null(answer.with);
  assert_int_equal(answer.point_count, 1);
  const picket_match_point *point = &answer.points[0];
  assert_true(point->coupling.share.value > 0.1 && point->coupling.share.value <= 1);
  assert_true(point->coupling.offset_x_um.value == 0.1);
  assert_true(isnan(point->best.share.value) && point->best.share.note);
  assert_int_equal(point->along, PICKET_MATCH_ALONG_X);
  assert_int_equal(point->mode_b, -1);
  picket_result_free(result);
  /* A section with itself, at the best offset: none. */
  assert_int_equal(picket_match_find(box, box, NULL, &options, &result), PICKET_OK);
  assert_int_equal(picket_match_get(result, 0, &answer), PICKET_OK);
  assert_near(answer.points[0].best.share.value, 1, 1e-9);
  assert_near(answer.points[0].best.offset_x_um.value, 0, 1e-4);
  assert_int_equal(answer.points[0].mode_b, 0);
  assert_non_null(picket_result_json(result));
  assert_non_null(picket_result_csv(result));
  picket_result_free(result);
}

static picket_status whole_call(picket_context *own) {
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  picket_match_request r;
  picket_match_request_init(&r);
  r.mode_b = 0;
  r.offset_given = 1;
  picket_status status = picket_problem_read_text(own, BOX, strlen(BOX), "box", &problem);
  if (status == PICKET_OK) {
    status = picket_match_find(problem, problem, &r, &options, &result);
  }
  if (status == PICKET_OK && !picket_result_csv(result)) {
    status = PICKET_ERROR_MEMORY;
  }
  picket_result_free(result);
  picket_problem_free(problem);
  return status;
}

/* Every allocation of the first hundred fails once, and of the thousands that follow some. */
static void short_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status == PICKET_ERROR_MEMORY && n < 1000000; n += n < 100 ? 1 : n / 5) {
    short_memory memory = {0};
    picket_context *own = short_memory_context(&memory);
    memory.fail_at = memory.asked + n;
    status = whole_call(own);
    assert_true(status == PICKET_OK || status == PICKET_ERROR_MEMORY);
    picket_context_free(own);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(nonsense_is_refused, set_up, tear_down),
      cmocka_unit_test_setup_teardown(the_answer, set_up, tear_down),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
