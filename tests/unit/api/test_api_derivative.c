/* Derivatives through the public face: values of other methods, arguments, and values at which
 * there is no derivative. */
#include <picket/derivative.h>
#include <picket/index.h>
#include <stdbool.h>
#include <string.h>

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

/* A segmented slab seen from the side, ey: a closed-form-like reference (Fourier modal method with
 * a uniform middle, digits of the project's notes) gives its index 2.1543451, group index 2.92743
 * and the derivatives below. */
static const char GUIDE[] =
    "format: 1\nlight: {wavelength_nm: 1550, polarization: ey}\ntemperature_c: 20\nmaterials:\n"
    "  oxide: {constant: {index: 1.444, dn_dt_per_k: 0.85e-5}}\n"
    "  silicon: {constant: {index: 3.476, dn_dt_per_k: 1.84e-4}}\n"
    "cell:\n  pitch_nm: 200\n  cladding: oxide\n  lateral: open\n  shapes:\n"
    "    - rect: {fill: silicon, length_nm: 100, width_nm: 220}\n";

static const char STACK[] =
    "format: 1\nlight: {polarization: ey}\nmaterials:\n"
    "  oxide: {constant: {index: 1.444}}\n  silicon: {constant: {index: 3.476}}\n"
    "cell:\n  pitch_nm: 200\n  cladding: oxide\n  lateral: uniform\n  shapes:\n"
    "    - stripe: {fill: silicon, across: z, from_nm: -50, to_nm: 50}\n";

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

/* dn/dp at 1550 nm, and its bar. */
static picket_quantity index_slope(picket_problem *problem, const char *path) {
  picket_result *result = NULL;
  picket_index_derivatives answer;
  if (picket_index_derivatives_find(problem, path, NULL, &result) != PICKET_OK) {
    fail_msg("%s: %s", path, picket_context_message(context));
  }
  assert_int_equal(picket_index_derivatives_count(result), 1);
  assert_int_equal(picket_edge_derivatives_count(result), 0);
  assert_int_equal(picket_index_derivatives_get(result, 0, &answer), PICKET_OK);
  assert_int_equal(answer.polarization, PICKET_EY);
  assert_int_equal(answer.point_count, 1);
  assert_near(answer.points[0].wavelength_um, 1.55, 1e-12);
  picket_quantity q = answer.points[0].bloch_index;
  picket_result_free(result);
  return q;
}

/* Four to six digits are given; the bar must cover what is not rounding of the last one. */
static void check_slope(picket_quantity q, double unit, double expected, double last_digit) {
  assert_near(unit * q.value, expected, 1e-4 * expected);
  assert_near(unit * q.value, expected, unit * q.uncertainty + 0.5 * last_digit);
}

static void segmented_slab(void **state) {
  (void)state;
  const double pitch = 200, duty = 0.5, wavelength = 1.55e6 /* pm */, group_index = 2.92743;
  picket_problem *problem = read(GUIDE);
  picket_quantity by_length = index_slope(problem, "cell.shapes.0.length_nm");
  picket_quantity by_pitch = index_slope(problem, "cell.pitch_nm"); /* with the length fixed */
  by_pitch.value += duty * by_length.value;
  by_pitch.uncertainty += duty * by_length.uncertainty;
  picket_quantity by_tooth = index_slope(problem, "materials.silicon.constant.index");
  picket_quantity by_oxide = index_slope(problem, "materials.oxide.constant.index");
  check_slope(by_pitch, 1e3, 0.9428, 1e-4);
  check_slope(by_length, pitch, 1.6359, 1e-4);
  check_slope(index_slope(problem, "cell.shapes.0.width_nm"), 1e3, 2.6569, 1e-4);
  check_slope(by_tooth, 1, 0.67249, 1e-5);
  check_slope(by_oxide, 1, 0.40848, 1e-5);
  picket_quantity by_kelvin = index_slope(problem, "temperature_c");
  assert_near(by_kelvin.value, 1.272e-4, 0.6e-7);
  /* What a filter drifts by: at a fixed phase. */
  assert_near(by_kelvin.value * wavelength / group_index, 67.4, 0.05);
  /* Two routes to the same number. */
  assert_near(by_kelvin.value, 1.84e-4 * by_tooth.value + 0.85e-5 * by_oxide.value, 1e-11);
  picket_problem_free(problem);
}

/* All lengths together scale the wavelength: Σ p ∂λ/∂p = λ. */
static void edges_of_a_stack_scale(void **state) {
  (void)state;
  picket_problem *problem = read(STACK);
  const char *paths[] = {"cell.pitch_nm", "cell.shapes.0.from_nm", "cell.shapes.0.to_nm"};
  const double value[] = {200, -50, 50};
  const double exact[2] = {0.2 / 0.24209664, 0.2 / 0.15512759}; /* eight digits */
  double sum[2] = {0, 0};
  for (int i = 0; i < 3; i++) {
    picket_result *result = NULL;
    picket_edge_derivatives answer;
    assert_int_equal(picket_edge_derivatives_find(problem, paths[i], NULL, &result), PICKET_OK);
    assert_int_equal(picket_edge_derivatives_count(result), 1);
    assert_int_equal(picket_index_derivatives_count(result), 0);
    assert_int_equal(picket_edge_derivatives_get(result, 0, &answer), PICKET_OK);
    assert_int_equal(answer.band_count, 1);
    assert_int_equal(answer.bands[0].order, 1);
    sum[0] += value[i] * answer.bands[0].short_um.value;
    sum[1] += value[i] * answer.bands[0].long_um.value;
    picket_result_free(result);
  }
  assert_near(sum[0], exact[0], 1e-7);
  assert_near(sum[1], exact[1], 1e-7);
  picket_problem_free(problem);
}

static void refuses_nonsense(void **state) {
  (void)state;
  picket_problem *problem = read(GUIDE);
  picket_result *result = NULL, *const untouched = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = NAN;
  assert_int_equal(picket_index_derivatives_find(NULL, "cell.pitch_nm", NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_derivatives_find(problem, NULL, NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_derivatives_find(problem, "cell.pitch_nm", NULL, NULL),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_derivatives_find(problem, "cell.pitch_nm", &options, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edge_derivatives_find(NULL, "cell.pitch_nm", NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edge_derivatives_find(problem, NULL, NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edge_derivatives_find(problem, "cell.pitch_nm", NULL, NULL),
                   PICKET_ERROR_ARGUMENT);
  const char *no_number[] = {"",
                             ".",
                             "cell",
                             "cell.pitch",
                             "cell.shapes",
                             "cell.shapes.7.width_nm",
                             "cell.shapes.-1.width_nm",
                             "cell.lateral",
                             "cell.pitch_nm.0",
                             "light.wavelength_nm.0"};
  for (size_t i = 0; i < sizeof no_number / sizeof *no_number; i++) {
    assert_int_equal(picket_edge_derivatives_find(problem, no_number[i], NULL, &result),
                     PICKET_ERROR_INPUT);
    assert_true(strlen(picket_context_message(context)) > 0);
  }
  picket_edge_derivatives edges = {.band_count = 42};
  picket_index_derivatives index = {.point_count = 42};
  assert_int_equal(picket_edge_derivatives_count(NULL), 0);
  assert_int_equal(picket_index_derivatives_count(NULL), 0);
  assert_int_equal(picket_edge_derivatives_get(NULL, 0, &edges), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_index_derivatives_get(NULL, 0, &index), PICKET_ERROR_ARGUMENT);
  assert_true(edges.band_count == 42 && index.point_count == 42);
  assert_ptr_equal(result, untouched);
  picket_problem_free(problem);
}

static void the_answer_has_an_end(void **state) {
  (void)state;
  picket_problem *problem = read(STACK);
  picket_result *result = NULL;
  picket_edge_derivatives answer = {.band_count = 42};
  assert_int_equal(picket_edge_derivatives_find(problem, "cell.pitch_nm", NULL, &result),
                   PICKET_OK);
  assert_int_equal(picket_edge_derivatives_get(result, -1, &answer), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edge_derivatives_get(result, 1, &answer), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edge_derivatives_get(result, 0, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(answer.band_count, 42);
  picket_result_free(result);
  picket_problem_free(problem);
}

static void check_declined(const char *shapes, const char *path) {
  char text[1024] =
      "format: 1\nlight: {wavelength_nm: 1550, polarization: ey}\nmaterials:\n"
      "  oxide: {constant: {index: 1.444}}\n  silicon: {constant: {index: 3.476}}\n"
      "  nitride: {constant: {index: 2}}\n"
      "cell: {pitch_nm: 300, cladding: oxide, lateral: electric, lateral_span_nm: 600, shapes: [";
  strncat(text, shapes, sizeof text - strlen(text) - 1);
  strncat(text, "]}\n", sizeof text - strlen(text) - 1);
  picket_problem *problem = read(text);
  picket_result *result = NULL;
  assert_int_equal(picket_edge_derivatives_find(problem, path, NULL, &result),
                   PICKET_ERROR_UNSUPPORTED);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), "there is no derivative here"));
  picket_problem_free(problem);
}

static void no_derivative_where_interfaces_meet(void **state) {
  (void)state;
  /* Two blocks that touch; a block that ends where another does; one that passes another's end
   * within the step, so that the number of interfaces never changes. */
  check_declined(
      "{rect: {fill: silicon, length_nm: 100, width_nm: 200, at_nm: [-50, 0]}}, "
      "{rect: {fill: nitride, length_nm: 100, width_nm: 300, at_nm: [50, 0]}}",
      "cell.shapes.1.at_nm.0");
  check_declined(
      "{rect: {fill: silicon, length_nm: 60, width_nm: 200, at_nm: [-60, 0]}}, "
      "{rect: {fill: nitride, length_nm: 60, width_nm: 200, at_nm: [60, 0]}}",
      "cell.shapes.0.width_nm");
  check_declined(
      "{rect: {fill: silicon, length_nm: 60, width_nm: 200, at_nm: [-60, 0]}}, "
      "{rect: {fill: nitride, length_nm: 60, width_nm: 200.01, at_nm: [60, 0]}}",
      "cell.shapes.0.width_nm");
}

static void values_at_the_end_of_their_range_are_refused(void **state) {
  (void)state;
  /* A tooth as long as the pitch cannot grow. */
  char text[sizeof GUIDE];
  memcpy(text, GUIDE, sizeof GUIDE);
  memcpy(strstr(text, "length_nm: 100"), "length_nm: 200", 14);
  picket_problem *problem = read(text);
  picket_result *result = NULL;
  assert_int_equal(picket_edge_derivatives_find(problem, "cell.shapes.0.length_nm", NULL, &result),
                   PICKET_ERROR_INPUT);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), "longer than one period"));
  picket_problem_free(problem);
}

/* Without walls in the way of memory: each of the first allocations, and then ever fewer. */
static void allocations_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n += 1 + n / 4) {
    short_memory memory = {.fail_at = 0};
    picket_context *short_context = short_memory_context(&memory);
    picket_problem *problem = NULL;
    picket_result *result = NULL;
    assert_int_equal(picket_problem_read_text(short_context, STACK, strlen(STACK), NULL, &problem),
                     PICKET_OK);
    memory.fail_at = memory.asked + n;
    picket_status status =
        picket_edge_derivatives_find(problem, "cell.shapes.0.to_nm", NULL, &result);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_true(failed == (result == NULL));
    picket_result_free(result);
    picket_problem_free(problem);
    picket_context_free(short_context);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(segmented_slab),
      cmocka_unit_test(edges_of_a_stack_scale),
      cmocka_unit_test(refuses_nonsense),
      cmocka_unit_test(the_answer_has_an_end),
      cmocka_unit_test(no_derivative_where_interfaces_meet),
      cmocka_unit_test(values_at_the_end_of_their_range_are_refused),
      cmocka_unit_test(allocations_may_fail),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
