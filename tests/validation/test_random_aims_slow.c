/* Thirty random aims: each is solved, and then verified by a direct solve, or declined with the
 * reason; on average they take no more than six direct solves.
 *
 * Stacks and segmented slabs seen from the side, of random media and dimensions; a random number of
 * them is varied between random bounds. Two targets of three are the value at a random place
 * between the bounds, so there is a solution; the others are drawn without looking. The numbers
 * come from a fixed seed. */
#include <math.h>
#include <picket.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>
/* cmocka wants some of the above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */

enum { AIMS = 30, TEXT = 2048, MOST_SOLVES_ON_AVERAGE = 6 };

static uint64_t seed = 20240607;

/* Evenly spread over [0, 1): linear congruence with the constants of D. Knuth's MMIX. */
static double draw(void) {
  seed = 6364136223846793005u * seed + 1442695040888963407u;
  return (double)(seed >> 11) / 9007199254740992.0;
}

static double draw_from(double low, double high) {
  return low + (high - low) * draw();
}

typedef struct question {
  char text[TEXT];  /* the problem without its aim */
  const char *path; /* what is varied */
  double low, high;
  const char *quantity;
  double accuracy;
} question;

static const char *const QUANTITIES[] = {"long_nm", "clearance_nm", "short_nm", "bloch_index",
                                         "group_index"};

static question draw_question(int i) {
  question q = {.accuracy = i % 2 ? 1e-2 : 1e-3};
  bool stack = i % 3 != 0;
  double pitch = draw_from(180, 260), tooth = draw_from(0.35, 0.65) * pitch;
  double width = draw_from(200, 350), index = draw_from(2.4, 3.5);
  const char *const stack_paths[] = {"cell.pitch_nm", "cell.shapes.0.to_nm",
                                     "materials.core.constant.index"};
  const char *const slab_paths[] = {"cell.pitch_nm", "cell.shapes.0.length_nm",
                                    "cell.shapes.0.width_nm"};
  int which = (int)(3 * draw());
  double value;
  char shape[256];
  if (stack) {
    snprintf(shape, sizeof shape, "stripe: {fill: core, across: z, from_nm: 0, to_nm: %.6f}",
             tooth);
    value = which == 0 ? pitch : which == 1 ? tooth : index;
  } else {
    snprintf(shape, sizeof shape, "rect: {fill: core, length_nm: %.6f, width_nm: %.6f}", tooth,
             width);
    value = which == 0 ? pitch : which == 1 ? tooth : width;
  }
  q.path = stack ? stack_paths[which] : slab_paths[which];
  q.low = value * draw_from(0.75, 0.95);
  q.high = value * draw_from(1.05, 1.3);
  q.quantity = QUANTITIES[(int)(5 * draw())];
  snprintf(q.text, sizeof q.text,
           "format: 1\nmaterials: {oxide: {constant: {index: 1.444}}, core: {constant: {index: "
           "%.6f}}}\nlight: {wavelength_nm: [1550, 1600], polarization: %s}\n"
           "cell: {pitch_nm: %.6f, cladding: oxide, lateral: %s, shapes: [{%s}]}\n",
           index,
           stack   ? "ey"
           : i % 2 ? "ey"
                   : "hy",
           pitch, stack ? "uniform" : "open", shape);
  return q;
}

static picket_context *context;

static picket_problem *read(const char *text) {
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_read_text(context, text, strlen(text), NULL, &problem),
                   PICKET_OK);
  return problem;
}

static double edge_of(picket_problem *problem, const question *q, const picket_options *options) {
  picket_result *result = NULL;
  picket_edges_answer answer;
  double um = NAN;
  if (picket_edges_find(problem, options, &result) == PICKET_OK &&
      picket_edges_get(result, 0, &answer) == PICKET_OK) {
    um = strcmp(q->quantity, "long_nm") == 0    ? answer.bands[0].long_um.value
         : strcmp(q->quantity, "short_nm") == 0 ? answer.bands[0].short_um.value
                                                : answer.operating.clearance_um.value;
  }
  picket_result_free(result);
  return 1e3 * um;
}

static double index_of(picket_problem *problem, const question *q, const picket_options *options) {
  picket_result *result = NULL;
  picket_index_answer answer;
  double value = NAN;
  picket_problem_set(problem, "light.wavelength_nm", "1550");
  if (picket_index_find(problem, options, &result) == PICKET_OK &&
      picket_index_get(result, 0, &answer) == PICKET_OK && answer.points[0].mode_count > 0) {
    const picket_bloch_mode *mode = &answer.points[0].modes[0];
    value =
        strcmp(q->quantity, "bloch_index") == 0 ? mode->bloch_index.value : mode->group_index.value;
    value = mode->regime == PICKET_REGIME_STOP_BAND ? NAN : value;
  }
  picket_result_free(result);
  return value;
}

/* The quantity at a value of what is varied, by the studies that know nothing of aiming. */
static double direct(const question *q, double value) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = q->accuracy;
  picket_problem *problem = read(q->text);
  assert_int_equal(picket_problem_set_number(problem, q->path, value), PICKET_OK);
  bool index = strcmp(q->quantity, "bloch_index") == 0 || strcmp(q->quantity, "group_index") == 0;
  double found = index ? index_of(problem, q, &options) : edge_of(problem, q, &options);
  picket_problem_free(problem);
  return found;
}

/* A target, true if there is a solution for it. */
static bool draw_target(const question *q, double *target) {
  double place = q->low + draw_from(0.05, 0.95) * (q->high - q->low);
  double wild = strstr(q->quantity, "index") ? draw_from(1.5, 3.5) : draw_from(300, 1600);
  double there = draw() < 0.67 ? direct(q, place) : NAN;
  *target = isnan(there) ? wild : there;
  return !isnan(there);
}

typedef struct tally {
  int solved, declined, solves, passes;
} tally;

static void check(const question *q, double target, bool solvable, const picket_aim_answer *answer,
                  tally *t) {
  const picket_aim_part *part = &answer->parts[0];
  t->solves += answer->solves;
  t->passes += answer->derivative_passes;
  if (!answer->found) {
    t->declined++;
    assert_true(answer->reason && strlen(answer->reason) > 20);
    if (solvable) {
      fail_msg("%s\n%s between %.10g and %.10g for %s = %.10g declined: %s", q->text, q->path,
               q->low, q->high, q->quantity, target, answer->reason);
    }
    return;
  }
  t->solved++;
  assert_true(part->value.value >= q->low && part->value.value <= q->high);
  double there = direct(q, part->value.value);
  bool clearance = strcmp(q->quantity, "clearance_nm") == 0;
  double scale = clearance ? 1550 - there : there;
  if (!(fabs(there - target) <= 0.5 * q->accuracy * scale * (1 + 1e-9))) {
    fail_msg("%s\n%s = %.10g for %s = %.10g gives %.10g", q->text, q->path, part->value.value,
             q->quantity, target, there);
  }
  /* And the bar of the value says how far the target may lie in it. */
  double miss = fabs(there - target) / fabs(part->derivative.value);
  assert_true(part->value.uncertainty >= miss * (1 - 1e-6));
}

static void thirty_aims(void **state) {
  (void)state;
  tally t = {0};
  for (int i = 0; i < AIMS; i++) {
    question q = draw_question(i);
    double target = 0;
    bool solvable = draw_target(&q, &target);
    char block[TEXT];
    snprintf(block, sizeof block,
             "{vary: %s, between: [%.10g, %.10g], quantity: %s, target: %.17g%s}", q.path, q.low,
             q.high, q.quantity, target, strstr(q.quantity, "index") ? ", at_nm: 1550" : "");
    picket_problem *problem = read(q.text);
    picket_result *result = NULL;
    picket_aim_answer answer;
    picket_options options;
    picket_options_init(&options);
    options.accuracy = q.accuracy;
    assert_int_equal(picket_problem_set(problem, "aim", block), PICKET_OK);
    if (picket_aim_find(problem, &options, &result) != PICKET_OK) {
      fail_msg("%s\n%s\n%s", q.text, block, picket_context_message(context));
    }
    assert_int_equal(picket_aim_get(result, 0, &answer), PICKET_OK);
    print_message("%2d: %s, %s: %s, %d solves, %d passes\n", i, q.quantity, q.path,
                  answer.found ? "found" : answer.reason, answer.solves, answer.derivative_passes);
    check(&q, target, solvable, &answer, &t);
    picket_result_free(result);
    picket_problem_free(problem);
  }
  print_message("%d solved, %d declined, %.2f direct solves and %.2f passes on average\n", t.solved,
                t.declined, (double)t.solves / AIMS, (double)t.passes / AIMS);
  assert_true(t.solved >= AIMS / 2);
  assert_true(t.solves <= MOST_SOLVES_ON_AVERAGE * AIMS);
}

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

int main(void) {
  const struct CMUnitTest tests[] = {cmocka_unit_test(thirty_aims)};
  return cmocka_run_group_tests(tests, open_context, close_context);
}
