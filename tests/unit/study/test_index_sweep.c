/* A sweep of Bloch indices: the points, what is marked when some fail, journals, processes, a stop.
 * The cell is a stack of layers, which costs next to nothing and is known in closed form. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "study/index.h"
#include "study/study.h"
#include "study/sweep_point.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

/* 3.476/1.444, halves, pitch 200 nm: Bloch index 2.78665517 at 1550 nm (Yeh, Yariv & Hong 1977). */
#define STACK(core, wavelengths)                                                             \
  "format: 1\n"                                                                              \
  "materials: {core: " core                                                                  \
  ", oxide: {constant: {index: 1.444}}}\n"                                                   \
  "light: {wavelength_nm: " wavelengths                                                      \
  ", polarization: ey}\n"                                                                    \
  "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, " \
  "across: z, from_nm: -50, to_nm: 50}}]}\n"

static const char GOOD[] = STACK("{constant: {index: 3.476}}", "[1500, 1550, 1600]");
/* Silicon is known from 1200 nm. */
static const char ONE_OUTSIDE[] = STACK("{catalogue: silicon}", "[1100, 1550, 1600]");
static const char ALL_OUTSIDE[] = STACK("{catalogue: silicon}", "[1000, 1100]");
static const double EXACT = 2.78665517;

static char path[64];

static picket_options options_of(double jobs) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  options.jobs = jobs;
  return options;
}

static int set_up(void **state) {
  (void)state;
  strcpy(path, "/tmp/picket-sweep-XXXXXX");
  int file = mkstemp(path);
  return file < 0 ? -1 : close(file);
}

static int tear_down(void **state) {
  (void)state;
  return unlink(path);
}

static void points_are_right_and_alike_in_any_process(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, GOOD);
  picket_result *results[3] = {NULL};
  for (int jobs = 0; jobs < 3; jobs++) {
    picket_options options = options_of(jobs);
    assert_int_equal(pk_study_index(u.problem, &options, &results[jobs]), PICKET_OK);
    assert_true(results[jobs]->complete);
    assert_int_equal(results[jobs]->count, 1);
    assert_string_equal(picket_result_json(results[jobs]), picket_result_json(results[0]));
  }
  const picket_index_answer *answer = &results[0]->index[0];
  assert_int_equal(answer->polarization, PICKET_EY);
  assert_int_equal(answer->point_count, 3);
  const picket_index_point *point = &answer->points[1];
  assert_near(point->wavelength_um, 1.55, 1e-12);
  assert_int_equal(point->mode_count, 1);
  /* The reference has eight digits. */
  assert_near(point->modes[0].bloch_index.value, EXACT,
              point->modes[0].bloch_index.uncertainty + 1e-8);
  for (int i = 0; i < 3; i++) {
    picket_result_free(results[i]);
  }
  picket_problem_free(u.owner);
  picket_context_free(context);
}

static void a_failed_point_does_not_stop_the_rest(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, ONE_OUTSIDE);
  for (int jobs = 1; jobs <= 2; jobs++) {
    picket_result *result = NULL;
    picket_options options = options_of(jobs);
    assert_int_equal(pk_study_index(u.problem, &options, &result), PICKET_OK);
    assert_false(result->complete);
    assert_non_null(strstr(result->shortfall, "1 of 3 points"));
    assert_non_null(strstr(result->shortfall, "1100 nm"));
    const picket_index_point *points = result->index[0].points;
    assert_int_equal(points[0].failed, 1);
    assert_non_null(strstr(points[0].note, "core"));
    assert_int_equal(points[0].mode_count, 0);
    assert_int_equal(points[1].failed + points[2].failed, 0);
    assert_int_equal(points[1].mode_count, 1);
    picket_result_free(result);
  }
  picket_problem_free(u.owner);
  picket_context_free(context);
}

static void refuse(const char *text, picket_status status, const char *says) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, text);
  picket_options options = options_of(1);
  picket_result *result = NULL;
  assert_int_equal(pk_study_index(u.problem, &options, &result), status);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), says));
  picket_problem_free(u.owner);
  picket_context_free(context);
}

static void problems_without_an_answer(void **state) {
  (void)state;
  refuse("format: 1\n", PICKET_ERROR_INPUT, "cell");
  refuse(ALL_OUTSIDE, PICKET_ERROR_RANGE, "core");
  refuse(
      "format: 1\nmaterials: {a: {constant: {index: 2}}}\n"
      "light: {polarization: ey}\n"
      "cell: {pitch_nm: 200, cladding: a, lateral: uniform, shapes: [{stripe: {fill: a, across: z, "
      "from_nm: -50, to_nm: 50}}]}\n",
      PICKET_ERROR_INPUT, "light.wavelength_nm");
}

/* A first run that is stopped, and a second one that takes it up. */
typedef struct stopper {
  int asked, stop_at;
} stopper;

static picket_verdict stop_in_time(const picket_progress *progress, void *user) {
  stopper *s = user;
  (void)progress;
  return s->stop_at > 0 && ++s->asked >= s->stop_at ? PICKET_STOP : PICKET_CONTINUE;
}

static picket_status sweep(stopper *s, double jobs, const char *journal, char **json) {
  picket_context_options how;
  picket_context_options_init(&how);
  how.progress = stop_in_time;
  how.progress_user = s;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(&how, &context), PICKET_OK);
  understood u = understand_good(context, GOOD);
  picket_options options = options_of(jobs);
  picket_result *result = NULL;
  picket_status status = journal ? picket_index_find_resumable(u.owner, &options, journal, &result)
                                 : picket_index_find(u.owner, &options, &result);
  if (status == PICKET_ERROR_STOPPED && result) {
    assert_false(picket_result_complete(result));
    assert_non_null(strstr(picket_result_shortfall(result), "stopped before"));
    assert_non_null(strstr(picket_context_message(context), "stopped on request"));
  } else if (status != PICKET_OK) {
    assert_null(result);
  }
  *json = NULL;
  if (result) {
    const char *text = picket_result_json(result);
    *json = malloc(strlen(text) + 1);
    strcpy(*json, text);
  }
  picket_result_free(result);
  picket_problem_free(u.owner);
  picket_context_free(context);
  return status;
}

static void stopped_and_taken_up_again(void **state) {
  (void)state;
  char *whole = NULL;
  stopper never = {0};
  assert_int_equal(sweep(&never, 1, NULL, &whole), PICKET_OK);
  bool with_part = false, without = false;
  for (int stop_at = 1; stop_at < 40; stop_at += 3) {
    char *part = NULL, *rest = NULL;
    stopper s = {0, stop_at};
    assert_int_equal(truncate(path, 0), 0);
    picket_status status = sweep(&s, 1, path, &part);
    with_part = with_part || (status == PICKET_ERROR_STOPPED && part);
    without = without || (status == PICKET_ERROR_STOPPED && !part);
    assert_int_equal(sweep(&never, stop_at % 2 + 1, path, &rest), PICKET_OK);
    assert_string_equal(rest, whole);
    free(part);
    free(rest);
  }
  assert_true(with_part);
  assert_true(without);
  free(whole);
}

static void a_whole_journal_needs_no_solving(void **state) {
  (void)state;
  char *first = NULL, *second = NULL;
  stopper never = {0}, at_once = {0, 1};
  struct stat before, after;
  assert_int_equal(sweep(&never, 1, path, &first), PICKET_OK);
  assert_int_equal(stat(path, &before), 0);
  assert_int_equal(sweep(&at_once, 1, path, &second), PICKET_OK);
  assert_int_equal(stat(path, &after), 0);
  assert_string_equal(second, first);
  assert_int_equal(before.st_size, after.st_size);
  free(first);
  free(second);
}

static picket_status with_change(const char *key, double value, const picket_options *options) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, GOOD);
  picket_result *result = NULL;
  if (key) {
    assert_int_equal(picket_problem_set_number(u.owner, key, value), PICKET_OK);
  }
  picket_status status = picket_index_find_resumable(u.owner, options, path, &result);
  picket_result_free(result);
  picket_problem_free(u.owner);
  picket_context_free(context);
  return status;
}

static void a_journal_belongs_to_one_problem(void **state) {
  (void)state;
  picket_options usual = options_of(1), other = usual;
  assert_int_equal(with_change(NULL, 0, &usual), PICKET_OK);
  assert_int_equal(with_change("cell.pitch_nm", 201, &usual), PICKET_ERROR_INPUT);
  assert_int_equal(with_change("temperature_c", 21, &usual), PICKET_ERROR_INPUT);
  assert_int_equal(with_change("light.wavelength_nm.0", 1501, &usual), PICKET_ERROR_INPUT);
  other.accuracy = 1e-2;
  assert_int_equal(with_change(NULL, 0, &other), PICKET_ERROR_INPUT);
  other = usual;
  other.count = 2;
  assert_int_equal(with_change(NULL, 0, &other), PICKET_ERROR_INPUT);
  /* Neither changes a number. */
  other = usual;
  other.jobs = 2;
  other.points = 3;
  assert_int_equal(with_change(NULL, 0, &other), PICKET_OK);
}

static void nonsense_at_the_border(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, GOOD);
  picket_result *result = NULL;
  picket_options options = options_of(-1);
  assert_int_equal(picket_index_find_resumable(NULL, NULL, path, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_find_resumable(u.owner, NULL, NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_find_resumable(u.owner, NULL, "", &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_find_resumable(u.owner, NULL, path, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_find(u.owner, &options, &result), PICKET_ERROR_ARGUMENT);
  assert_null(result);
  picket_problem_free(u.owner);
  picket_context_free(context);
}

/* Every quantity of a mode goes through the line: all are different here. */
static void a_point_survives_its_line(void **state) {
  (void)state;
  picket_context *context = NULL;
  picket_result *result = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_result_create(context, PK_RESULT_INDEX, "", 1, &result), PICKET_OK);
  picket_radiated_order waves[2] = {{-1, PICKET_SIDE_LOW, -0.5, 0.25},
                                    {-2, PICKET_SIDE_HIGH, 0.75, 0.75}};
  picket_bloch_mode modes[2] = {{.order = 3, .regime = PICKET_REGIME_RADIATING}, {.order = 4}};
  picket_quantity *q = &modes[0].bloch_index;
  for (int i = 0; i < 9; i++) {
    q[i] = (picket_quantity){1 + i / 3.0, i % 2 ? NAN : 0.1 * i, i % 2 ? "no bar" : NULL};
  }
  modes[0].radiated = waves;
  modes[0].radiated_count = 2;
  pk_profile profile[2] = {{.known = true}, {.known = false}};
  for (int p = 0; p < PK_PROFILE_PLACES; p++) {
    profile[0].real[p] = p % 2 ? PK_PROFILE_UNIT - p : -PK_PROFILE_UNIT;
    profile[0].imaginary[p] = 3 * p;
  }
  pk_sweep_point before = {.point = {1.55, 2, modes, 2.5, "far\noff", 0}, .profile = profile};
  pk_record record = {.context = context}, again = {.context = context};
  pk_sweep_point_write(&before, &record);
  pk_sweep_point after = {.profile = NULL};
  pk_record_reader reader = {record.text, true};
  assert_int_equal(pk_sweep_point_read(result, &reader, &after), PICKET_OK);
  assert_true(pk_record_read_end(&reader));
  pk_sweep_point_write(&after, &again);
  assert_string_equal(again.text, record.text);
  assert_int_equal(after.point.mode_count, 2);
  const picket_quantity *back = &after.point.modes[0].bloch_index;
  for (int i = 0; i < 9; i++) {
    assert_true(back[i].value == q[i].value);
    assert_int_equal(back[i].note != NULL, q[i].note != NULL);
  }
  assert_true(after.point.modes[0].radiated[1].angle_rad == 0.75);
  assert_string_equal(after.point.note, "far\noff");
  assert_memory_equal(after.profile[0].real, profile[0].real, sizeof profile[0].real);
  assert_memory_equal(after.profile[0].imaginary, profile[0].imaginary, sizeof profile[0].real);
  assert_true(after.profile[0].known && !after.profile[1].known);
  pk_sweep_point_clear(context, &after);
  /* Cut off anywhere it is not a point. */
  for (size_t cut = 0; cut < record.used; cut++) {
    char kept = record.text[cut];
    record.text[cut] = '\0';
    reader = (pk_record_reader){record.text, true};
    after = (pk_sweep_point){.profile = NULL};
    assert_int_equal(pk_sweep_point_read(result, &reader, &after), PICKET_OK);
    /* But inside the last number, which is then another number. */
    assert_true(!pk_record_read_end(&reader) || cut > record.used - 4);
    pk_sweep_point_clear(context, &after);
    record.text[cut] = kept;
  }
  pk_record_clear(&record);
  pk_record_clear(&again);
  picket_result_free(result);
  picket_context_free(context);
}

/* Every allocation from the first point to the last; the steps grow, for a sweep makes thousands.
 */
static void allocations_may_fail(void **state) {
  (void)state;
  for (long n = 2;; n += 1 + n / 6) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    understood u;
    assert_int_equal(understand(context, GOOD, &u), PICKET_OK);
    picket_options options = options_of(1);
    picket_result *result = NULL;
    long before = memory.asked, living = memory.living;
    memory.fail_at = before + n;
    picket_status status = pk_study_index(u.problem, &options, &result);
    bool met = memory.asked >= memory.fail_at;
    assert_int_equal(status, met ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_int_equal(result != NULL, !met);
    if (met) {
      assert_int_equal(memory.living, living);
    }
    picket_result_free(result);
    picket_problem_free(u.owner);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (!met) {
      assert_true(n > 100);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(points_are_right_and_alike_in_any_process),
      cmocka_unit_test(a_failed_point_does_not_stop_the_rest),
      cmocka_unit_test(problems_without_an_answer),
      cmocka_unit_test_setup_teardown(stopped_and_taken_up_again, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_whole_journal_needs_no_solving, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_journal_belongs_to_one_problem, set_up, tear_down),
      cmocka_unit_test_setup_teardown(nonsense_at_the_border, set_up, tear_down),
      cmocka_unit_test(a_point_survives_its_line),
      cmocka_unit_test(allocations_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
