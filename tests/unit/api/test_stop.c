/* Every question is stopped at its first, second, ... call of progress, and made to run out of
 * memory here and there: it says so, gives back what it took, and fills its output only with what
 * is marked as partial. */
#include <picket.h>
#include <stdio.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

static const char TEXT[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: [1540, 1550], polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n"
    "section: {cladding: oxide, span_nm: [600, 400], shapes: [{rect: {fill: core, width_nm: 300, "
    "height_nm: 200}}]}\n"
    "aim: {vary: cell.pitch_nm, between: [150, 300], quantity: long_nm, target: 1000}\n";

typedef picket_status (*question)(picket_problem *problem, const picket_options *options,
                                  picket_result **out);

static picket_status derivatives(picket_problem *problem, const picket_options *options,
                                 picket_result **out) {
  return picket_edge_derivatives_find(problem, "cell.pitch_nm", options, out);
}

static picket_status sweep(picket_problem *problem, const picket_options *options,
                           picket_result **out) {
  static const double values[] = {200, 210, 220};
  picket_sweep_request request;
  picket_sweep_request_init(&request);
  request.path = "cell.pitch_nm";
  request.count = 3;
  request.values = values;
  return picket_sweep_find(problem, &request, options, out);
}

static picket_status match(picket_problem *problem, const picket_options *options,
                           picket_result **out) {
  picket_match_request request;
  picket_match_request_init(&request);
  request.gaussian_x_um = request.gaussian_y_um = 0.4;
  request.offset_given = 1;
  return picket_match_find(problem, NULL, &request, options, out);
}

/* Fields have objects of their own; here it is only told whether one came. */
static picket_status field(picket_problem *problem, const picket_options *options,
                           picket_result **out) {
  (void)out;
  picket_field *made = NULL;
  picket_status status = picket_field_find(problem, options, PICKET_HY, 1.55, 0, &made);
  assert_true((status == PICKET_OK) == (made != NULL));
  picket_field_free(made);
  return status;
}

static picket_status section_field(picket_problem *problem, const picket_options *options,
                                   picket_result **out) {
  (void)out;
  picket_section_field *made = NULL;
  picket_status status = picket_section_field_find(problem, options, 1.55, 0, &made);
  assert_true((status == PICKET_OK) == (made != NULL));
  picket_section_field_free(made);
  return status;
}

typedef struct asked {
  const char *name;
  question ask;
  bool partial;     /* what was finished is given all the same */
  long allocations; /* one of so many is made to fail */
} asked;

static const asked QUESTIONS[] = {{"edges", picket_edges_find, false, 17},
                                  {"bands", picket_bands_find, false, 17},
                                  {"index", picket_index_find, true, 31},
                                  {"slab", picket_slab_find, true, 1},
                                  {"modes", picket_modes_find, true, 997},
                                  {"aim", picket_aim_find, false, 199},
                                  {"derivatives", derivatives, false, 31},
                                  {"sweep", sweep, true, 47},
                                  {"match", match, false, 1999},
                                  {"field", field, false, 13},
                                  {"section field", section_field, false, 499}};

typedef struct stopper {
  int asked, at;
} stopper;

static picket_verdict stop(const picket_progress *progress, void *user) {
  stopper *s = user;
  assert_true(progress->fraction >= 0 && progress->fraction <= 1);
  return ++s->asked == s->at ? PICKET_STOP : PICKET_CONTINUE;
}

/* A question in a context of its own; everything is counted back at the end. */
static picket_status run(const asked *q, short_memory *memory, stopper *s) {
  picket_context *context = short_memory_context(memory);
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  options.count = 1;
  options.points = 2;
  if (!context) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &problem);
  if (status == PICKET_OK) {
    assert_int_equal(picket_context_set_progress(context, stop, s), PICKET_OK);
    status = q->ask(problem, &options, &result);
  }
  if (status != PICKET_OK) {
    assert_string_not_equal(picket_context_message(context), "");
    assert_true(!result || (q->partial && !picket_result_complete(result)));
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
  if (memory->living != 0) {
    print_error("%s: %ld blocks left, stopped at %d, memory short at %ld\n", q->name,
                memory->living, s->at, memory->fail_at);
    fail();
  }
  return status;
}

static void stopped_everywhere(void **state) {
  (void)state;
  for (size_t i = 0; i < sizeof QUESTIONS / sizeof *QUESTIONS; i++) {
    stopper whole = {0, 0};
    short_memory memory = {0};
    assert_int_equal(run(&QUESTIONS[i], &memory, &whole), PICKET_OK);
    assert_true(whole.asked > 0);
    for (int at = 1; at <= whole.asked; at += at < 6 ? 1 : 1 + whole.asked / 6) {
      stopper s = {0, at};
      short_memory counted = {0};
      assert_int_equal(run(&QUESTIONS[i], &counted, &s), PICKET_ERROR_STOPPED);
      assert_int_equal(s.asked, at); /* asked no more once it was told to stop */
    }
  }
}

static void short_of_memory(void **state) {
  (void)state;
  for (size_t i = 0; i < sizeof QUESTIONS / sizeof *QUESTIONS; i++) {
    stopper s = {0, 0};
    short_memory whole = {0};
    assert_int_equal(run(&QUESTIONS[i], &whole, &s), PICKET_OK);
    for (long at = 1; at <= whole.asked;
         at += QUESTIONS[i].allocations * (1 + whole.asked / 5000)) {
      short_memory memory = {.fail_at = at};
      picket_status status = run(&QUESTIONS[i], &memory, &s);
      /* An optional part may do without. */
      assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(stopped_everywhere),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
