/* Sweeps through the public interface: what is declined, what comes out, short of memory, stopped.
 * The cell is a stack of layers, which costs next to nothing. */
#include <picket.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "unit/near.h"
#include "unit/short_memory.h"

static const char STACK[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n";

static const double PITCHES[] = {190, 80, 200};

static picket_problem *read_stack(picket_context *context) {
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_read_text(context, STACK, strlen(STACK), "test", &problem),
                   PICKET_OK);
  return problem;
}

static picket_sweep_request pitches(picket_question question) {
  picket_sweep_request request;
  picket_sweep_request_init(&request);
  request.question = question;
  request.path = "cell.pitch_nm";
  request.values = PITCHES;
  request.count = 3;
  return request;
}

static picket_options rough(double jobs) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  options.jobs = jobs;
  return options;
}

static void answers_carry_their_value(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  picket_problem *problem = read_stack(context);
  picket_sweep_request request = pitches(PICKET_QUESTION_INDEX);
  picket_options options = rough(1);
  picket_result *result = NULL, *alone = NULL;
  double value = 0;
  assert_int_equal(picket_sweep_find(problem, &request, &options, &result), PICKET_OK);
  assert_int_equal(picket_index_count(result), 3);
  assert_int_equal(picket_edges_count(result), 0);
  assert_string_equal(picket_sweep_path(result), "cell.pitch_nm");
  for (int i = 0; i < 3; i++) {
    assert_int_equal(picket_sweep_value(result, i, &value), PICKET_OK);
    assert_true(value == PITCHES[i]);
  }
  assert_int_equal(picket_sweep_value(result, 3, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_value(result, -1, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_value(NULL, 0, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_value(result, 0, NULL), PICKET_ERROR_ARGUMENT);
  assert_true(value == 200);
  picket_index_answer answer, same;
  assert_int_equal(picket_index_get(result, 1, &answer), PICKET_OK);
  assert_int_equal(answer.points[0].failed, 1); /* the layer is longer than a pitch of 80 nm */
  assert_false(picket_result_complete(result));
  /* The problem stands as it was. */
  assert_int_equal(picket_index_find(problem, &options, &alone), PICKET_OK);
  assert_null(picket_sweep_path(alone));
  assert_int_equal(picket_sweep_value(alone, 0, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_get(result, 2, &answer), PICKET_OK);
  assert_int_equal(picket_index_get(alone, 0, &same), PICKET_OK);
  assert_true(answer.points[0].modes[0].bloch_index.value ==
              same.points[0].modes[0].bloch_index.value);
  picket_result_free(alone);
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
}

static void nonsense(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  picket_problem *problem = read_stack(context);
  const double bad[] = {190, NAN}, endless[] = {INFINITY};
  picket_result *result = NULL;
  picket_sweep_request good = pitches(PICKET_QUESTION_EDGES), r = good;
  picket_options wrong = rough(-1);
  picket_sweep_request_init(NULL);
  assert_int_equal(picket_sweep_find(NULL, &good, NULL, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_find(problem, NULL, NULL, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_find(problem, &good, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_find(problem, &good, &wrong, &result), PICKET_ERROR_ARGUMENT);
#define REFUSED(change, expected, says)                                      \
  r = good;                                                                  \
  change;                                                                    \
  assert_int_equal(picket_sweep_find(problem, &r, NULL, &result), expected); \
  assert_non_null(strstr(picket_context_message(context), says))
  REFUSED(r.size = 8, PICKET_ERROR_ARGUMENT, "picket_sweep_request_init");
  REFUSED(r.question = (picket_question)4, PICKET_ERROR_ARGUMENT, "question is 4");
  REFUSED(r.question = (picket_question)-1, PICKET_ERROR_ARGUMENT, "question is -1");
  REFUSED(r.path = NULL, PICKET_ERROR_ARGUMENT, "path is null");
  REFUSED(r.path = "", PICKET_ERROR_ARGUMENT, "path is empty");
  REFUSED(r.values = NULL, PICKET_ERROR_ARGUMENT, "values is null");
  REFUSED(r.count = 0, PICKET_ERROR_ARGUMENT, "count is 0");
  REFUSED(r.count = PICKET_SWEEP_VALUES + 1, PICKET_ERROR_ARGUMENT, "count is 10002");
  REFUSED((r.values = bad, r.count = 2), PICKET_ERROR_ARGUMENT, "values[1]");
  REFUSED((r.values = endless, r.count = 1), PICKET_ERROR_ARGUMENT, "values[0]");
  REFUSED(r.journal_path = "", PICKET_ERROR_ARGUMENT, "journal_path is empty");
  REFUSED(r.path = "cell.pich_nm", PICKET_ERROR_INPUT, "cell.pich_nm");
  REFUSED(r.path = "cell.cladding", PICKET_ERROR_INPUT, "single finite number");
  REFUSED(r.question = PICKET_QUESTION_MODES, PICKET_ERROR_INPUT, "section");
  assert_null(result);
  double out[3] = {7, 7, 7};
  assert_int_equal(picket_sweep_spread(0, 1, 1, out), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_spread(0, 1, PICKET_SWEEP_VALUES + 1, out), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_spread(0, NAN, 3, out), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_spread(-1e308, 1e308, 3, out), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_spread(2, 2, 3, out), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_sweep_spread(0, 1, 3, NULL), PICKET_ERROR_ARGUMENT);
  assert_true(out[0] == 7 && out[2] == 7);
  assert_int_equal(picket_sweep_spread(0.1, -0.3, 3, out), PICKET_OK);
  assert_true(out[0] == 0.1 && out[2] == -0.3);
  assert_near(out[1], -0.1, 1e-16);
  picket_problem_free(problem);
  picket_context_free(context);
}

static picket_status documents(short_memory *memory, picket_question question) {
  picket_context *context = short_memory_context(memory);
  if (!context) {
    return PICKET_ERROR_MEMORY;
  }
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options = rough(1);
  picket_sweep_request request = pitches(question);
  picket_status status = picket_problem_read_text(context, STACK, strlen(STACK), NULL, &problem);
  if (status == PICKET_OK) {
    status = picket_sweep_find(problem, &request, &options, &result);
  }
  if (status == PICKET_OK) {
    status =
        picket_result_json(result) && picket_result_csv(result) ? PICKET_OK : PICKET_ERROR_MEMORY;
  } else {
    assert_null(result);
    assert_true(strlen(picket_context_message(context)) > 0);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
  return status;
}

/* One by one at first, then with growing steps: a sweep makes thousands. */
static void allocations_may_fail(void **state) {
  (void)state;
  for (int question = PICKET_QUESTION_EDGES; question <= PICKET_QUESTION_SLAB; question++) {
    if (question == PICKET_QUESTION_MODES) {
      continue; /* tests/unit/study/test_modes_record.c */
    }
    short_memory whole = {0};
    assert_int_equal(documents(&whole, (picket_question)question), PICKET_OK);
    assert_int_equal(whole.living, 0);
    for (long at = 1; at <= whole.asked; at += at < 300 ? 1 : 1 + at / 12) {
      short_memory memory = {.fail_at = at};
      picket_status status = documents(&memory, (picket_question)question);
      assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
      assert_int_equal(memory.living, 0);
    }
  }
}

typedef struct stopper {
  int asked, stop_at;
} stopper;

static picket_verdict stop_in_time(const picket_progress *progress, void *user) {
  stopper *s = user;
  (void)progress;
  return s->stop_at > 0 && ++s->asked >= s->stop_at ? PICKET_STOP : PICKET_CONTINUE;
}

static char *sweep(stopper *s, double jobs, const char *journal, picket_status expected) {
  picket_context_options how;
  picket_context_options_init(&how);
  how.progress = stop_in_time;
  how.progress_user = s;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(&how, &context), PICKET_OK);
  picket_problem *problem = read_stack(context);
  picket_options options = rough(jobs);
  picket_sweep_request request = pitches(PICKET_QUESTION_EDGES);
  picket_result *result = NULL;
  request.journal_path = journal;
  picket_status status = picket_sweep_find(problem, &request, &options, &result);
  assert_true(status == expected || (expected != PICKET_OK && status == PICKET_OK));
  char *json = NULL;
  if (result) {
    const char *text = picket_result_json(result);
    json = malloc(strlen(text) + 1);
    strcpy(json, text);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
  return json;
}

/* At any moment; taken up again the digits are the same. */
static void stopped_and_taken_up_again(void **state) {
  (void)state;
  char path[] = "/tmp/picket-sweep-XXXXXX";
  int file = mkstemp(path);
  assert_true(file >= 0 && close(file) == 0);
  stopper never = {0};
  char *whole = sweep(&never, 1, NULL, PICKET_OK);
  for (int stop_at = 1; stop_at < 30; stop_at += 2) {
    stopper s = {0, stop_at};
    assert_int_equal(truncate(path, 0), 0);
    free(sweep(&s, 1, path, PICKET_ERROR_STOPPED));
    char *rest = sweep(&never, 1 + stop_at % 4 / 2, path, PICKET_OK);
    assert_string_equal(rest, whole);
    free(rest);
  }
  free(whole);
  assert_int_equal(unlink(path), 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(answers_carry_their_value),
      cmocka_unit_test(nonsense),
      cmocka_unit_test(allocations_may_fail),
      cmocka_unit_test(stopped_and_taken_up_again),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
