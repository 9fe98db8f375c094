/* Contexts are independent: four threads with one each find what one thread finds, to the last
 * digit, while they are inside the walls at the same time. One context serves one call: a second
 * thread is answered "busy" and changes nothing. Run under ThreadSanitizer by the preset `tsan`. */
#include <picket.h>
#include <pthread.h>
#include <stdlib.h>
#include <string.h>

#include "unit/near.h"

/* A cell that varies in both directions (UMFPACK, ARPACK), films (LAPACK) and a section. */
static const char TEXT[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550, polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, "
    "width_nm: 300}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n"
    "section: {cladding: oxide, span_nm: [600, 400], shapes: [{rect: {fill: core, width_nm: 300, "
    "height_nm: 200}}]}\n";

enum { THREADS = 4, DOCUMENTS = 4 };

typedef picket_status (*study)(picket_problem *problem, const picket_options *options,
                               picket_result **out);
static const study STUDIES[DOCUMENTS] = {picket_edges_find, picket_index_find, picket_slab_find,
                                         picket_modes_find};

/* Not assertions of cmocka: those are for the thread of the test only. */
static bool ask(picket_problem *problem, study find, char **out) {
  picket_options options;
  picket_result *result = NULL;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  options.count = 1;
  const char *text = NULL;
  bool good = find(problem, &options, &result) == PICKET_OK &&
              picket_result_json_get(result, &text) == PICKET_OK;
  if (good) {
    *out = malloc(strlen(text) + 1);
    strcpy(*out, text);
  }
  picket_result_free(result);
  return good;
}

typedef struct worker {
  char *document[DOCUMENTS];
  int first; /* study to begin with, so that threads meet in different ones */
  bool good;
} worker;

static void work_once(worker *w) {
  picket_context *context = NULL;
  picket_problem *problem = NULL;
  w->good = picket_context_create(NULL, &context) == PICKET_OK &&
            picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &problem) == PICKET_OK;
  for (int i = 0; w->good && i < DOCUMENTS; i++) {
    int k = (w->first + i) % DOCUMENTS;
    free(w->document[k]);
    w->document[k] = NULL;
    w->good = ask(problem, STUDIES[k], &w->document[k]);
  }
  picket_problem_free(problem);
  picket_context_free(context);
}

static void *work(void *user) {
  work_once(user);
  return NULL;
}

static void threads_find_what_one_finds(void **state) {
  (void)state;
  worker alone = {0}, together[THREADS] = {{{0}, 0, false}};
  pthread_t thread[THREADS];
  /* The threads come first, so that what is set up at the first call is set up by all at once. */
  for (int t = 0; t < THREADS; t++) {
    together[t].first = t;
    assert_int_equal(pthread_create(&thread[t], NULL, work, &together[t]), 0);
  }
  for (int t = 0; t < THREADS; t++) {
    assert_int_equal(pthread_join(thread[t], NULL), 0);
  }
  work_once(&alone);
  assert_true(alone.good);
  for (int t = 0; t < THREADS; t++) {
    assert_true(together[t].good);
    for (int k = 0; k < DOCUMENTS; k++) {
      assert_string_equal(together[t].document[k], alone.document[k]);
      free(together[t].document[k]);
    }
  }
  for (int k = 0; k < DOCUMENTS; k++) {
    free(alone.document[k]);
  }
}

/* ---- one context, two threads ---- */

typedef struct intruder {
  picket_context *context;
  picket_problem *problem;
  picket_result *finished;
  bool tried, untouched;
  picket_status find, set, read, choose, json, made;
  int count;
} intruder;

static void *intrude(void *user) {
  intruder *in = user;
  picket_result *result = NULL;
  picket_problem *made = NULL;
  picket_options options;
  const char *text = NULL;
  double value = 7;
  picket_options_init(&options);
  in->find = picket_slab_find(in->problem, NULL, &result);
  in->set = picket_problem_set_number(in->problem, "cell.pitch_nm", 1);
  in->read = picket_problem_number(in->problem, "cell.pitch_nm", &value);
  in->choose = picket_options_choose(in->context, &options, "count", 3);
  in->json = picket_result_json_get(in->finished, &text);
  in->made = picket_problem_create(in->context, &made);
  in->count = picket_problem_number_count(in->problem);
  in->untouched = !result && !made && !text && value == 7 && options.count == 0;
  return NULL;
}

static picket_verdict let_in(const picket_progress *progress, void *user) {
  intruder *in = user;
  pthread_t thread;
  (void)progress;
  if (!in->tried && pthread_create(&thread, NULL, intrude, in) == 0) {
    in->tried = pthread_join(thread, NULL) == 0;
  }
  return PICKET_CONTINUE;
}

static void a_second_thread_is_busy(void **state) {
  (void)state;
  intruder in = {0};
  picket_result *result = NULL;
  double pitch = 0;
  assert_int_equal(picket_context_create(NULL, &in.context), PICKET_OK);
  assert_int_equal(picket_problem_read_text(in.context, TEXT, sizeof TEXT - 1, NULL, &in.problem),
                   PICKET_OK);
  assert_int_equal(picket_slab_find(in.problem, NULL, &in.finished), PICKET_OK);
  assert_int_equal(picket_context_set_progress(in.context, let_in, &in), PICKET_OK);
  assert_int_equal(picket_slab_find(in.problem, NULL, &result), PICKET_OK);
  assert_true(in.tried && in.untouched);
  const picket_status seen[] = {in.find, in.set, in.read, in.choose, in.json, in.made};
  for (size_t i = 0; i < sizeof seen / sizeof *seen; i++) {
    assert_int_equal(seen[i], PICKET_ERROR_BUSY);
  }
  assert_int_equal(in.count, -1);
  assert_int_equal(picket_problem_number(in.problem, "cell.pitch_nm", &pitch), PICKET_OK);
  assert_true(pitch == 200);
  picket_result_free(result);
  picket_result_free(in.finished);
  picket_problem_free(in.problem);
  picket_context_free(in.context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(threads_find_what_one_finds),
      cmocka_unit_test(a_second_thread_is_busy),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
