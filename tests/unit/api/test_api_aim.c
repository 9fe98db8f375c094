/* Aiming through the public face: closed forms, direct solves, no solution, rules of a mask,
 * arguments. */
#include <picket/aim.h>
#include <picket/edges.h>
#include <picket/index.h>
#include <picket/modes.h>
#include <string.h>

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

static const double PI = 3.141592653589793238;

#define MEDIA                                                   \
  "format: 1\nmaterials:\n"                                     \
  "  oxide: {constant: {index: 1.444, dn_dt_per_k: 0.85e-5}}\n" \
  "  core: {constant: {index: 3.476, dn_dt_per_k: 1.84e-4}}\n"  \
  "  polymer: {constant: {index: 1.5, dn_dt_per_k: -2.0e-4}}\n" \
  "light: {wavelength_nm: [1550, 1600], polarization: ey}\n"

/* A tooth of 60 nm; its pitch is what is aimed at. */
#define STACK                                                                          \
  MEDIA                                                                                \
  "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: " \
  "core, across: z, from_nm: -30, to_nm: 30}}]}\n"

#define GUIDE(cladding)                             \
  MEDIA "cell: {pitch_nm: 200, cladding: " cladding \
        ", shapes: [{rect: {fill: core, length_nm: 100, width_nm: 220}}]}\n"

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static picket_problem *read(const char *text) {
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_read_text(context, text, strlen(text), NULL, &problem),
                   PICKET_OK);
  return problem;
}

/* The only answer; the caller frees the result. */
static picket_aim_answer aim(picket_problem *problem, double accuracy, picket_result **result) {
  picket_options options;
  picket_aim_answer answer;
  picket_options_init(&options);
  options.accuracy = accuracy;
  if (picket_aim_find(problem, &options, result) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  assert_int_equal(picket_aim_count(*result), 1);
  assert_int_equal(picket_aim_get(*result, 0, &answer), PICKET_OK);
  assert_true(answer.solves <= 12);
  return answer;
}

/* Yeh, Yariv & Hong 1977: at the edges of the first stop band of a quarter-wave stack
 * Δω/ω₀ = (4/π) asin((n1 - n2)/(n1 + n2)), about λ₀ = 4 n1 a. So a tooth of 60 nm and the long edge
 * of its quarter-wave stack lead back to the gap b = a n1/n2. */
static void quarter_wave_stack(void **state) {
  (void)state;
  const double n1 = 3.476, n2 = 1.444, a = 60;
  double long_nm = 4 * n1 * a / (1 - 2 / PI * asin((n1 - n2) / (n1 + n2)));
  picket_problem *problem =
      read(STACK "aim: {vary: cell.pitch_nm, between: [120, 300], quantity: long_nm, target: 0}\n");
  assert_int_equal(picket_problem_set_number(problem, "aim.target", long_nm), PICKET_OK);
  picket_result *result = NULL;
  picket_aim_answer answer = aim(problem, 1e-6, &result);
  assert_true(picket_result_complete(result));
  assert_int_equal(answer.found, 1);
  assert_null(answer.reason);
  assert_int_equal(answer.part_count, 1);
  const picket_aim_part *part = &answer.parts[0];
  double pitch = a + a * n1 / n2;
  assert_near(part->value.value, pitch, part->value.uncertainty);
  assert_true(part->value.uncertainty < 3e-6 * pitch);
  assert_near(part->achieved.value, long_nm, 0.5e-6 * long_nm);
  assert_int_equal(part->derivative_way, PICKET_DERIVATIVE_ANALYTIC);
  assert_int_equal(answer.unique, 1);
  assert_string_equal(answer.polarization, "ey");
  assert_string_equal(part->quantity, "long_nm");
  assert_near(answer.smallest_feature_um, 0.06, 1e-9);
  assert_int_equal(answer.respects_rules, -1);
  assert_int_equal(answer.snapped, 0);
  assert_true(isnan(part->snapped));
  picket_result_free(result);
  picket_problem_free(problem);
}

/* 2.78665517 at a pitch of 200 nm, halves (closed form): the tooth that gives it is 100 nm. */
static void index_of_a_stack(void **state) {
  (void)state;
  picket_problem *problem =
      read(MEDIA
           "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: "
           "{fill: core, across: z, from_nm: 0, to_nm: 60}}]}\n"
           "aim: {vary: cell.shapes.0.to_nm, between: [40, 150], quantity: bloch_index, "
           "target: 2.78665517, at_nm: 1550}\n");
  picket_result *result = NULL;
  picket_aim_answer answer = aim(problem, 1e-6, &result);
  assert_near(answer.parts[0].value.value, 100, answer.parts[0].value.uncertainty + 1e-6);
  assert_near(answer.parts[0].at_um, 1.55, 1e-15);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* What is found gives what was wanted when it is asked for directly. */
static void clearance(void **state) {
  (void)state;
  picket_problem *problem = read(GUIDE(
      "oxide") "aim: {vary: cell.pitch_nm, between: [220, 330], quantity: clearance_nm, "
               "target: 100}\n"
               "rules: {smallest_feature_nm: 60, grid_nm: 1}\n");
  picket_result *result = NULL, *edges = NULL;
  picket_aim_answer answer = aim(problem, 1e-4, &result);
  const picket_aim_part *part = &answer.parts[0];
  assert_int_equal(answer.found, 1);
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", part->value.value),
                   PICKET_OK);
  assert_int_equal(picket_edges_find(problem, NULL, &edges), PICKET_OK);
  picket_edges_answer direct;
  assert_int_equal(picket_edges_get(edges, 0, &direct), PICKET_OK);
  /* Half of the accuracy, relative to the edge near 1450 nm. */
  assert_near(1e3 * direct.operating.clearance_um.value, 100, 0.5e-4 * 1450);
  assert_near(1e3 * direct.operating.clearance_um.value, part->achieved.value, 1e-9);
  picket_result_free(edges);
  /* On the grid, by a direct solve too. */
  assert_int_equal(answer.snapped, 1);
  assert_near(part->snapped, round(part->value.value), 0);
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", part->snapped), PICKET_OK);
  assert_int_equal(picket_edges_find(problem, NULL, &edges), PICKET_OK);
  assert_int_equal(picket_edges_get(edges, 0, &direct), PICKET_OK);
  assert_near(1e3 * direct.operating.clearance_um.value, part->snapped_achieved.value, 1e-9);
  picket_result_free(edges);
  assert_int_equal(answer.respects_rules, 1);
  assert_int_equal(answer.snapped_respects_rules, 1);
  assert_true(answer.solves <= 6);
  picket_result_free(result);
  /* The tooth of 100 nm is the smallest feature. */
  picket_problem_set_number(problem, "rules.smallest_feature_nm", 101);
  answer = aim(problem, 1e-3, &result);
  assert_int_equal(answer.respects_rules, 0);
  assert_near(answer.smallest_feature_um, 0.1, 1e-9);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* With a polymer whose index falls with temperature there is a tooth at which nothing moves. The
 * index at two temperatures, solved directly, says so too. */
static void athermal_tooth(void **state) {
  (void)state;
  picket_problem *problem = read(GUIDE(
      "polymer") "temperature_c: 20\n"
                 "aim: {vary: cell.shapes.0.length_nm, between: [40, 150], quantity: "
                 "drift_pm_per_k, target: 0, at_nm: 1550}\n");
  picket_result *result = NULL;
  picket_aim_answer answer = aim(problem, 1e-4, &result);
  const picket_aim_part *part = &answer.parts[0];
  assert_int_equal(answer.found, 1);
  assert_true(part->at_from.value < -50 && part->at_to.value > 30);
  double index[2];
  picket_problem_set_number(problem, "cell.shapes.0.length_nm", part->value.value);
  picket_problem_set(problem, "light.wavelength_nm", "1550");
  for (int i = 0; i < 2; i++) {
    picket_result *found = NULL;
    picket_index_answer at;
    picket_problem_set_number(problem, "temperature_c", i ? 21 : 19);
    assert_int_equal(picket_index_find(problem, NULL, &found), PICKET_OK);
    assert_int_equal(picket_index_get(found, 0, &at), PICKET_OK);
    index[i] = at.points[0].modes[0].bloch_index.value;
    picket_result_free(found);
  }
  /* Of the polymer alone it would be 2e-4 per kelvin. */
  assert_near((index[1] - index[0]) / 2, 0, 2e-8);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* A wire of silicon in oxide: the width for an index, against a direct solve. */
static void width_of_a_section(void **state) {
  (void)state;
  picket_problem *problem =
      read(MEDIA
           "section: {cladding: oxide, shapes: [{rect: {fill: core, width_nm: 450, "
           "height_nm: 220}}]}\n"
           "rules: {smallest_feature_nm: 300, grid_nm: 5}\n"
           "aim: {vary: section.shapes.0.width_nm, between: [350, 550], quantity: index, "
           "target: 2.3, at_nm: 1550}\n");
  picket_result *result = NULL, *modes = NULL;
  picket_aim_answer answer = aim(problem, 1e-3, &result);
  const picket_aim_part *part = &answer.parts[0];
  assert_int_equal(answer.found, 1);
  assert_string_equal(answer.polarization, "te-like");
  /* Across: the film of 220 nm is no feature of a mask. */
  assert_int_equal(answer.respects_rules, 1);
  assert_near(answer.smallest_feature_um, 1e-3 * part->value.value, 1e-9);
  assert_near(fmod(part->snapped, 5), 0, 1e-9);
  picket_problem_set_number(problem, "section.shapes.0.width_nm", part->value.value);
  picket_problem_set(problem, "light.wavelength_nm", "1550");
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  options.count = 1;
  picket_modes_answer direct;
  assert_int_equal(picket_modes_find(problem, &options, &modes), PICKET_OK);
  assert_int_equal(picket_modes_get(modes, 0, &direct), PICKET_OK);
  assert_near(direct.points[0].modes[0].index.value, 2.3, 0.5e-3 * 2.3);
  picket_result_free(modes);
  picket_result_free(result);
  picket_problem_free(problem);
}

static void two_targets(void **state) {
  (void)state;
  picket_problem *problem = read(GUIDE(
      "oxide") "aim: {vary: cell.pitch_nm, between: [150, 280], quantity: bloch_index, target: "
               "2.2, "
               "at_nm: 1550,\n  also: {vary: cell.shapes.0.length_nm, between: [60, 145], "
               "quantity: "
               "clearance_nm, target: 400}}\n");
  picket_result *result = NULL, *edges = NULL, *index = NULL;
  picket_aim_answer answer = aim(problem, 1e-3, &result);
  assert_int_equal(answer.found, 1);
  assert_int_equal(answer.part_count, 2);
  for (int k = 0; k < 2; k++) {
    const picket_aim_part *part = &answer.parts[k];
    assert_true(part->value.value > part->from && part->value.value < part->to);
    assert_true(part->value.uncertainty > 0);
    picket_problem_set_number(problem, part->vary, part->value.value);
  }
  picket_edges_answer edge;
  picket_index_answer n;
  assert_int_equal(picket_edges_find(problem, NULL, &edges), PICKET_OK);
  assert_int_equal(picket_edges_get(edges, 0, &edge), PICKET_OK);
  assert_near(1e3 * edge.operating.clearance_um.value, 400, 0.6e-3 * 1150);
  picket_problem_set(problem, "light.wavelength_nm", "1550");
  assert_int_equal(picket_index_find(problem, NULL, &index), PICKET_OK);
  assert_int_equal(picket_index_get(index, 0, &n), PICKET_OK);
  assert_near(n.points[0].modes[0].bloch_index.value, 2.2, 0.6e-3 * 2.2);
  picket_result_free(edges);
  picket_result_free(index);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* An outcome: the two ends, and why. */
static void no_solution(void **state) {
  (void)state;
  picket_problem *problem = read(
      STACK "aim: {vary: cell.pitch_nm, between: [120, 300], quantity: long_nm, target: 5000}\n");
  picket_result *result = NULL;
  picket_aim_answer answer = aim(problem, 1e-3, &result);
  assert_int_equal(answer.found, 0);
  assert_false(picket_result_complete(result));
  assert_true(strlen(answer.reason) > 20);
  assert_non_null(strstr(picket_result_shortfall(result), "does not meet 5000"));
  assert_true(isnan(answer.parts[0].value.value));
  assert_non_null(answer.parts[0].value.note);
  assert_true(answer.parts[0].at_from.value > 400);
  assert_true(answer.parts[0].at_to.value > answer.parts[0].at_from.value);
  picket_result_free(result);
  /* An index that no propagating mode has: the stop band begins before. */
  picket_problem_set(problem, "aim",
                     "{vary: cell.pitch_nm, between: [200, 900], quantity: bloch_index, target: "
                     "3.4, at_nm: 1550}");
  answer = aim(problem, 1e-3, &result);
  assert_int_equal(answer.found, 0);
  assert_true(isfinite(answer.parts[0].at_from.value));
  assert_true(isnan(answer.parts[0].at_to.value));
  assert_non_null(answer.parts[0].at_to.note);
  picket_result_free(result);
  /* A bound at which the problem itself would be wrong: the pitch is shorter than the tooth. */
  picket_problem_set(problem, "aim",
                     "{vary: cell.pitch_nm, between: [10, 300], quantity: long_nm, target: 700}");
  answer = aim(problem, 1e-3, &result);
  assert_int_equal(answer.found, 1);
  assert_true(isnan(answer.parts[0].at_from.value));
  assert_int_equal(answer.unique, -1);
  assert_near(answer.parts[0].achieved.value, 700, 0.5e-3 * 700);
  picket_result_free(result);
  picket_problem_free(problem);
}

static void refuse(picket_problem *problem, picket_status status, const char *words) {
  picket_result *result = NULL;
  assert_int_equal(picket_aim_find(problem, NULL, &result), status);
  assert_null(result);
  if (!strstr(picket_context_message(context), words)) {
    fail_msg("%s: not %s", picket_context_message(context), words);
  }
}

static void arguments(void **state) {
  (void)state;
  picket_result *result = NULL;
  picket_aim_answer answer;
  picket_options options;
  picket_options_init(&options);
  assert_int_equal(picket_aim_find(NULL, NULL, &result), PICKET_ERROR_ARGUMENT);
  picket_problem *problem = read(STACK);
  assert_int_equal(picket_aim_find(problem, NULL, NULL), PICKET_ERROR_ARGUMENT);
  options.accuracy = 2;
  assert_int_equal(picket_aim_find(problem, &options, &result), PICKET_ERROR_ARGUMENT);
  assert_null(result);
  refuse(problem, PICKET_ERROR_INPUT, "no \"aim\"");
  picket_problem_set(problem, "aim",
                     "{vary: cell.pitch_nm, between: [120, 300], quantity: index, "
                     "target: 2, at_nm: 1550}");
  refuse(problem, PICKET_ERROR_INPUT, "needs a section");
  picket_problem_set(problem, "aim.quantity", "clearance_nm");
  picket_problem_set(problem, "light", "{polarization: ey}");
  refuse(problem, PICKET_ERROR_INPUT, "light.wavelength_nm");
  assert_int_equal(picket_aim_count(NULL), 0);
  assert_int_equal(picket_aim_get(NULL, 0, &answer), PICKET_ERROR_ARGUMENT);
  picket_problem_set(problem, "aim.quantity", "long_nm");
  picket_problem_set(problem, "aim.target", "700");
  options.accuracy = 1e-2;
  assert_int_equal(picket_aim_find(problem, &options, &result), PICKET_OK);
  assert_int_equal(picket_aim_count(result), 1);
  assert_int_equal(picket_aim_get(result, 1, &answer), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_aim_get(result, -1, &answer), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_aim_get(result, 0, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edges_count(result), 0);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* The document of a problem is as it was after an aim. */
static void leaves_the_problem_alone(void **state) {
  (void)state;
  picket_problem *problem = read(
      STACK "aim: {vary: cell.pitch_nm, between: [120, 300], quantity: long_nm, target: 700}\n");
  picket_result *before = NULL, *after = NULL, *result = NULL;
  picket_edges_answer a, b;
  assert_int_equal(picket_edges_find(problem, NULL, &before), PICKET_OK);
  (void)aim(problem, 1e-2, &result);
  assert_int_equal(picket_edges_find(problem, NULL, &after), PICKET_OK);
  assert_int_equal(picket_edges_get(before, 0, &a), PICKET_OK);
  assert_int_equal(picket_edges_get(after, 0, &b), PICKET_OK);
  assert_near(a.bands[0].long_um.value, b.bands[0].long_um.value, 0);
  picket_result_free(before);
  picket_result_free(after);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* Every allocation fails once: out of memory or, where an optional part can do without, an answer;
 * nothing is lost. */
static picket_status whole_run(short_memory *memory, const char *text) {
  picket_context *own = short_memory_context(memory);
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  if (!own) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = picket_problem_read_text(own, text, strlen(text), NULL, &problem);
  if (status == PICKET_OK) {
    status = picket_aim_find(problem, &options, &result);
  }
  if (status == PICKET_OK) {
    status =
        picket_result_json(result) && picket_result_csv(result) ? PICKET_OK : PICKET_ERROR_MEMORY;
  } else {
    assert_null(result);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(own);
  return status;
}

static void memory_runs_out(void **state) {
  (void)state;
  static const char *const texts[] = {
      STACK
      "rules: {grid_nm: 1, smallest_feature_nm: 60}\naim: {vary: cell.pitch_nm, between: "
      "[120, 300], quantity: long_nm, target: 700}\n",
      STACK "aim: {vary: cell.pitch_nm, between: [120, 300], quantity: long_nm, target: 9000}\n",
      STACK
      "aim: {vary: cell.pitch_nm, between: [120, 300], quantity: long_nm, target: 700, also: "
      "{vary: cell.shapes.0.to_nm, between: [10, 60], quantity: short_nm, target: 500}}\n"};
  for (size_t t = 0; t < sizeof texts / sizeof *texts; t++) {
    short_memory whole = {0};
    assert_int_equal(whole_run(&whole, texts[t]), PICKET_OK);
    assert_int_equal(whole.living, 0);
    /* The reading at every allocation, the long rest at every 4999th. */
    for (long at = 1; at <= whole.asked; at += at < 300 ? 1 : 4999) {
      short_memory memory = {.fail_at = at};
      picket_status status = whole_run(&memory, texts[t]);
      assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
      assert_int_equal(memory.living, 0);
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(quarter_wave_stack),
      cmocka_unit_test(index_of_a_stack),
      cmocka_unit_test(clearance),
      cmocka_unit_test(athermal_tooth),
      cmocka_unit_test(width_of_a_section),
      cmocka_unit_test(two_targets),
      cmocka_unit_test(no_solution),
      cmocka_unit_test(arguments),
      cmocka_unit_test(leaves_the_problem_alone),
      cmocka_unit_test(memory_runs_out),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
