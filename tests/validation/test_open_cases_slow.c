/* How much accuracy few unknowns give: rectangles against a boundary-integral computation with
 * panels graded to the corners, good to 1e-11 (reference cases O08 to O13 of the project; lengths
 * in µm), and slabs seen from the side against digits of an independent semi-analytic one.
 *
 * On 20,000 unknowns at most: ey to 1e-6, hy, whose field is singular at corners, to 5e-6. */
#include <math.h>
#include <picket.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>
/* cmocka wants some of the above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */

static const double UNKNOWNS = 20000;
static const double GOAL[2] = {1e-6, 5e-6}; /* ey, hy */

typedef struct guide {
  const char *polarization;
  double pitch, length, width, tooth, gap, below, above; /* nm, indices */
} guide;

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

static picket_problem *describe(const guide *g, double wavelength) {
  char text[1024];
  picket_problem *problem = NULL;
  snprintf(text, sizeof text,
           "format: 1\nlight: {wavelength_nm: %.10g, polarization: %s}\nmaterials:\n"
           "  tooth: {constant: {index: %g}}\n  gap: {constant: {index: %g}}\n"
           "  below: {constant: {index: %g}}\n  above: {constant: {index: %g}}\n"
           "cell:\n  pitch_nm: %g\n  cladding: above\n  lateral: open\n  shapes:\n"
           "    - stripe: {fill: below, across: x, from_nm: -.inf, to_nm: %g}\n"
           "    - stripe: {fill: gap, across: x, from_nm: %g, to_nm: %g}\n"
           "    - rect: {fill: tooth, length_nm: %g, width_nm: %g}\n",
           wavelength, g->polarization, g->tooth, g->gap, g->below, g->above, g->pitch,
           -0.5 * g->width, -0.5 * g->width, 0.5 * g->width, g->length, g->width);
  if (picket_problem_read_text(context, text, strlen(text), "a guide", &problem) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  return problem;
}

/* As good as the unknowns allow. */
static picket_options thrifty(void) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-7;
  options.unknowns = UNKNOWNS;
  return options;
}

static void check(const guide *g, const char *what, picket_quantity q, double expected,
                  double digits) {
  double goal = GOAL[g->polarization[0] == 'h'] * expected + digits;
  double off = fabs(q.value - expected);
  print_message("%s, pitch %g nm, %s: off by %.1e, bar %.1e\n", g->polarization, g->pitch, what,
                off / expected, q.uncertainty / expected);
  if (!(off <= goal) || !(off <= q.uncertainty + digits)) {
    fail_msg("%s, pitch %g nm, %s: %.12g ± %.2g is not %.12g within %.2g", g->polarization,
             g->pitch, what, q.value, q.uncertainty, expected, goal);
  }
}

static void check_edges(const guide *g, double short_um, double long_um, double digits) {
  picket_problem *problem = describe(g, 1550);
  picket_options options = thrifty();
  picket_result *result = NULL;
  picket_edges_answer answer;
  assert_int_equal(picket_edges_find(problem, &options, &result), PICKET_OK);
  assert_int_equal(picket_edges_get(result, 0, &answer), PICKET_OK);
  check(g, "short edge", answer.bands[0].short_um, short_um, digits);
  check(g, "long edge", answer.bands[0].long_um, long_um, digits);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* modes[count] of the Bloch indices at a wavelength; 0 leaves the group index alone. */
static void check_index(const guide *g, double wavelength, int count, const double *index,
                        double group_index, double digits) {
  picket_problem *problem = describe(g, wavelength);
  picket_options options = thrifty();
  options.count = count;
  picket_result *result = NULL;
  picket_index_answer answer;
  assert_int_equal(picket_index_find(problem, &options, &result), PICKET_OK);
  assert_int_equal(picket_index_get(result, 0, &answer), PICKET_OK);
  assert_int_equal(answer.points[0].mode_count, count);
  for (int i = 0; i < count; i++) {
    check(g, "Bloch index", answer.points[0].modes[i].bloch_index, index[i], digits);
  }
  if (group_index > 0) {
    picket_quantity q = answer.points[0].modes[0].group_index;
    assert_true(fabs(q.value - group_index) <= q.uncertainty);
    assert_true(q.uncertainty < 1e-4 * group_index);
  }
  picket_result_free(result);
  picket_problem_free(problem);
}

static const guide BASE[2] = {{"ey", 240, 120, 450, 2.85, 1.444, 1.444, 1.444},
                              {"hy", 240, 120, 450, 2.85, 1.444, 1.444, 1.444}};

static void bloch_indices_of_a_subwavelength_guide(void **state) {
  (void)state;
  const double ey[2] = {2.187851581877047, 1.5441055392949146}; /* even, odd */
  check_index(&BASE[0], 1310, 2, ey, 0, 0);
  check_index(&BASE[0], 1550, 1, (double[]){2.070987030965829}, 2.5899373745356735, 0);
  check_index(&BASE[0], 1680, 1, (double[]){2.0317710773230786}, 0, 0);
  check_index(&BASE[1], 1310, 1, (double[]){1.902626105924014}, 0, 0);
  check_index(&BASE[1], 1550, 1, (double[]){1.8063517079189992}, 2.3358831070032506, 0);
  check_index(&BASE[1], 1680, 1, (double[]){1.7649958220988669}, 0, 0);
}

static void stop_bands(void **state) {
  (void)state;
  const guide wide = {"hy", 380, 190, 500, 2.85, 1.444, 1.444, 1.444};
  const guide narrow = {"ey", 340, 170, 300, 2.85, 1.444, 1.444, 1.444};
  check_edges(&wide, 1.284118529358188, 1.5547483453623079, 0);
  check_index(&wide, 1650, 1, (double[]){1.8686946280310124}, 0, 0);
  check_edges(&narrow, 1.1073262809492501, 1.5309677553142607, 0);
  check_index(&narrow, 1600, 1, (double[]){2.0298126154498775}, 0, 0);
}

/* Three media at a corner; the asymmetric guide has two modes. */
static void bridged_and_asymmetric_guides(void **state) {
  (void)state;
  const guide bridged = {"hy", 300, 150, 500, 2.85, 2.2, 1.444, 1.444};
  const guide asymmetric = {"ey", 260, 156, 500, 2.85, 1, 1.444, 1};
  check_edges(&bridged, 1.2794477392447918, 1.4117246583715042, 0);
  check_index(&bridged, 1550, 1, (double[]){2.186520973468334}, 2.9754582453541487, 0);
  check_index(&asymmetric, 1550, 2, (double[]){2.1729703844441355, 1.4562399785709652}, 0, 0);
}

/* Digits as printed in the project's notes. */
static void slabs_seen_from_the_side(void **state) {
  (void)state;
  const guide ey = {"ey", 250, 125, 220, 3.476, 1.444, 1.444, 1.444};
  const guide hy = {"hy", 300, 150, 220, 3.476, 1.444, 1.444, 1.444};
  check_edges(&ey, 0.902771, 1.348961, 5.1e-7);
  check_edges(&hy, 1.031064, 1.117870, 5.1e-7);
  check_index(&ey, 1550, 1, (double[]){2.2250665}, 3.45875, 5.1e-8);
  check_index(&hy, 1550, 1, (double[]){1.5955208}, 1.95287, 5.1e-8);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(bloch_indices_of_a_subwavelength_guide),
      cmocka_unit_test(stop_bands),
      cmocka_unit_test(bridged_and_asymmetric_guides),
      cmocka_unit_test(slabs_seen_from_the_side),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
