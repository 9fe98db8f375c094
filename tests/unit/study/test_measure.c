/* Quantities by their names: against closed forms and the reference of a segmented slab, on both
 * sides of a break of an index model, followed or refused. */
#include "study/measure.h"

#include <complex.h>
#include <stdio.h>

#include "io/vary.h"
#include "understood.h"

#define MEDIA                                                   \
  "format: 1\nmaterials:\n"                                     \
  "  oxide: {constant: {index: 1.444, dn_dt_per_k: 0.85e-5}}\n" \
  "  core: {constant: {index: 3.476, dn_dt_per_k: 1.84e-4}}\n"  \
  "  silicon: {catalogue: silicon}\n"

/* Seen from the side: n 2.1543451, n_g 2.92743 (Fourier modal method, digits of the project's
 * notes), with dn/dT 1.272e-4 and a drift of 67.4 pm/K. */
static const char GUIDE[] = MEDIA
    "light: {wavelength_nm: [1550, 1600], polarization: ey}\n"
    "cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, width_nm: "
    "220}}]}\n";

static const char STACK[] = MEDIA
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n";

/* Silicon everywhere: what light sees is its index. */
static const char SILICON[] = MEDIA
    "temperature_c: 20\nlight: {wavelength_nm: 1550, polarization: ey}\n"
    "cell: {pitch_nm: 100, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: silicon, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n";

/* One medium between electric walls: n² = n_0² - (λ/2a)² for the mode with one half wave across. */
static const char BOX[] = MEDIA
    "light: {wavelength_nm: 950}\n"
    "section: {cladding: oxide, span_nm: [1000, 600], shapes: [{rect: {fill: oxide, width_nm: 500, "
    "height_nm: 300}}]}\n";

static picket_context *context;
static picket_options options;

static int open_context(void **state) {
  (void)state;
  picket_options_init(&options);
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static pk_measurement measure(const pk_problem *problem, pk_measured what, pk_structure structure,
                              pk_family family, double at_um, pk_measure_memory *memory) {
  pk_measurement m;
  pk_question question = {what, structure, family, at_um};
  if (pk_measure(problem, &question, &options, memory, &m) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  return m;
}

static pk_measurement measure_cell(const pk_problem *problem, pk_measured what, double at_um,
                                   pk_measure_memory *memory) {
  return measure(problem, what, PK_STRUCTURE_CELL, PK_FAMILY_EY, at_um, memory);
}

static void segmented_slab(void **state) {
  (void)state;
  understood u = understand_good(context, GUIDE);
  pk_measurement n = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 1.55, NULL);
  assert_true(n.reached);
  assert_near(n.q.value, 2.1543451, n.q.uncertainty + 5e-8);
  pk_measurement group = measure_cell(u.problem, PK_MEASURED_GROUP_INDEX, 1.55, NULL);
  assert_near(group.q.value, 2.92743, group.q.uncertainty + 5e-6);
  pk_measurement rate = measure_cell(u.problem, PK_MEASURED_INDEX_RATE, 1.55, NULL);
  assert_near(rate.q.value, 1.272e-4, rate.q.uncertainty + 0.5e-7);
  pk_measurement drift = measure_cell(u.problem, PK_MEASURED_DRIFT, 1.55, NULL);
  assert_near(drift.q.value, 67.4, drift.q.uncertainty + 0.05);
  /* λ (dn/dT)/n_g, in pm. */
  assert_near(drift.q.value, 1.55e6 * rate.q.value / group.q.value,
              drift.q.uncertainty + 1e-9 * drift.q.value);
  pk_measurement edge = measure_cell(u.problem, PK_MEASURED_LONG, NAN, NULL);
  assert_near(edge.q.value, 1121.894, edge.q.uncertainty + 5e-4);
  pk_measurement clear = measure_cell(u.problem, PK_MEASURED_CLEARANCE, NAN, NULL);
  assert_near(clear.q.value, 1550 - edge.q.value, 1e-9);
  assert_near(clear.scale, edge.q.value, 1e-9);
  picket_problem_free(u.owner);
}

/* The drift of an edge is a difference of edges ten kelvins apart: the media are linear in the
 * temperature, and what is left is the curvature of the edge in them, some 1e-4. */
static void edge_moves_with_temperature(void **state) {
  (void)state;
  double edge[2];
  for (int i = 0; i < 2; i++) {
    understood u = understand_good(context, STACK);
    assert_int_equal(picket_problem_set_number(u.owner, "temperature_c", i ? 25 : 15), PICKET_OK);
    assert_int_equal(pk_problem_understand(u.owner, &u.problem), PICKET_OK);
    edge[i] = measure_cell(u.problem, PK_MEASURED_LONG, NAN, NULL).q.value;
    picket_problem_free(u.owner);
  }
  understood u = understand_good(context, STACK);
  pk_measurement drift = measure_cell(u.problem, PK_MEASURED_EDGE_DRIFT, NAN, NULL);
  assert_near(drift.q.value, (edge[1] - edge[0]) / 10, 2e-4 * drift.q.value);
  picket_problem_free(u.owner);
}

/* Li's two branches meet with a step at 19.85 C; dn/dT is that of the branch the temperature is on,
 * as the material itself says. */
static void one_side_of_a_break(void **state) {
  (void)state;
  static const double at[] = {10, 19.845, 19.8499, 19.85, 19.8501, 19.855, 20, 60};
  for (size_t i = 0; i < sizeof at / sizeof *at; i++) {
    understood u = understand_good(context, SILICON);
    assert_int_equal(picket_problem_set_number(u.owner, "temperature_c", at[i]), PICKET_OK);
    assert_int_equal(pk_problem_understand(u.owner, &u.problem), PICKET_OK);
    pk_medium medium;
    int silicon = pk_materials_find(u.problem->materials, "silicon");
    assert_int_equal(pk_materials_at(u.problem->materials, silicon, 1.55, at[i], &medium),
                     PICKET_OK);
    double rate = creal(medium.temperature_slope / (2 * csqrt(medium.permittivity)));
    pk_measurement m = measure_cell(u.problem, PK_MEASURED_INDEX_RATE, 1.55, NULL);
    /* Half of 0.0203 K, by which the centre may move, times d²n/dT² of some 3e-7. */
    assert_near(m.q.value, rate, 1e-4 * rate);
    assert_true(rate > 1e-4 && rate < 3e-4);
    picket_problem_free(u.owner);
  }
}

/* From the dispersion relation of Yeh, Yariv & Hong 1977: this stack has its first stop band
 * between the pitches 240 and 375 nm at 1550 nm, and 2.78665517 at 200 nm. */
static void does_not_jump(void **state) {
  (void)state;
  pk_measure_memory memory = {0};
  static const double pitch[] = {200, 300, 450};
  pk_measurement m[3];
  for (int i = 0; i < 3; i++) {
    understood u = understand_good(context, STACK);
    picket_problem_set_number(u.owner, "cell.pitch_nm", pitch[i]);
    picket_problem_set_number(u.owner, "cell.shapes.0.from_nm", -pitch[i] / 4);
    picket_problem_set_number(u.owner, "cell.shapes.0.to_nm", pitch[i] / 4);
    assert_int_equal(pk_problem_understand(u.owner, &u.problem), PICKET_OK);
    m[i] = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 1.55, &memory);
    assert_true(memory.known && memory.zone == 0);
    if (i == 2) { /* without a memory it is a mode like any other */
      pk_measurement free = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 1.55, NULL);
      assert_true(free.q.value > 1.55 / 0.9 && free.q.value < 1.55 / 0.45);
    }
    picket_problem_free(u.owner);
  }
  assert_near(m[0].q.value, 2.78665517, m[0].q.uncertainty + 5e-9);
  assert_true(isnan(m[1].q.value) && strstr(m[1].reason, "inside a stop band"));
  assert_true(isnan(m[2].q.value) && strstr(m[2].reason, "other side of a stop band"));
}

static void refuses_what_is_not_due(void **state) {
  (void)state;
  understood u = understand_good(context, STACK);
  pk_measure_memory memory = {.known = true, .expected = 2.5, .reach = 0.1};
  pk_measurement m = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 1.55, &memory);
  assert_true(isnan(m.q.value) && strstr(m.reason, "jumps"));
  memory.expected = 2.75;
  m = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 1.55, &memory);
  assert_near(m.q.value, 2.78665517, m.q.uncertainty + 5e-9);
  picket_problem_free(u.owner);
}

/* A material that is not known is an outcome. */
static void outcomes(void **state) {
  (void)state;
  understood u = understand_good(context, SILICON);
  pk_measurement m = measure_cell(u.problem, PK_MEASURED_BLOCH_INDEX, 0.633, NULL);
  assert_true(isnan(m.q.value) && strstr(m.reason, "silicon"));
  assert_string_equal(picket_context_message(context), "");
  picket_problem_free(u.owner);
}

/* --- Derivatives ---- */

typedef struct moved {
  pk_document *document;
  pk_node *node;
} moved;

static picket_status make(void *user, const double *values, pk_problem **out) {
  moved *m = user;
  return pk_vary_read_all(context, m->document, 1, &m->node, values, out);
}

static pk_measured_slope slope_of(const char *text, const char *path, pk_question question) {
  understood u = understand_good(context, text);
  double value = 0;
  moved m = {.document = u.owner->document};
  assert_int_equal(pk_vary_value(m.document, path, &m.node, &value), PICKET_OK);
  pk_variants variants = {.context = context, .count = 1, .paths = &path, .user = &m, .make = make};
  pk_measure_memory memory = {0};
  pk_measurement here;
  pk_measured_slope slope;
  assert_int_equal(pk_measure(u.problem, &question, &options, &memory, &here), PICKET_OK);
  assert_int_equal(pk_measure_slope(&variants, &value, 0, &question, &options, &memory, &slope),
                   PICKET_OK);
  picket_problem_free(u.owner);
  return slope;
}

/* cos KΛ of the stack of halves; its Bloch index and group index follow. */
static double stack_index(double pitch, double length, double wavelength) {
  const double pi = 3.141592653589793238, n1 = 3.476, n2 = 1.444;
  double k0 = 2 * pi / wavelength, a = k0 * n1 * length, b = k0 * n2 * (pitch - length);
  double c = cos(a) * cos(b) - 0.5 * (n1 / n2 + n2 / n1) * sin(a) * sin(b);
  return acos(c) / (pitch * k0);
}

static double stack_group(double pitch, double length, double wavelength) {
  const double h = 1e-4;
  double rate =
      (stack_index(pitch, length, wavelength + h) - stack_index(pitch, length, wavelength - h)) /
      (2 * h);
  return stack_index(pitch, length, wavelength) - wavelength * rate;
}

static void slopes_of_a_stack(void **state) {
  (void)state;
  pk_question index = {PK_MEASURED_BLOCH_INDEX, PK_STRUCTURE_CELL, PK_FAMILY_EY, 1.55};
  pk_question group = {PK_MEASURED_GROUP_INDEX, PK_STRUCTURE_CELL, PK_FAMILY_EY, 1.55};
  const double h = 1e-5;
  pk_measured_slope s = slope_of(STACK, "cell.pitch_nm", index);
  assert_int_equal(s.way, PK_SLOPE_ANALYTIC);
  double known = (stack_index(0.2 + h, 0.1, 1.55) - stack_index(0.2 - h, 0.1, 1.55)) / (2 * h);
  assert_near(1e3 * s.q.value, known, 1e3 * s.q.uncertainty + 1e-6 * fabs(known));
  s = slope_of(STACK, "cell.pitch_nm", group);
  assert_int_equal(s.way, PK_SLOPE_DIFFERENCE);
  known = (stack_group(0.2 + h, 0.1, 1.55) - stack_group(0.2 - h, 0.1, 1.55)) / (2 * h);
  assert_near(1e3 * s.q.value, known, 1e3 * s.q.uncertainty);
  assert_near(1e3 * s.q.value, known, 1e-3 * fabs(known)); /* by (4 D1 - D2)/3 */
  s = slope_of(GUIDE, "light.wavelength_nm.0",
               (pk_question){PK_MEASURED_CLEARANCE, PK_STRUCTURE_CELL, PK_FAMILY_EY, NAN});
  assert_near(s.q.value, 1, 1e-9);
}

/* A tooth that ends at the end of the cell, all but 10 fm: moved on, it comes in at the other end.
 * No grid can follow it, and the derivative is that of the same tooth in the middle. */
static void slope_across_the_end_of_a_cell(void **state) {
  (void)state;
  static const char wrapped[] = MEDIA
      "light: {wavelength_nm: 1550, polarization: ey}\n"
      "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
      "across: z, from_nm: 0, to_nm: 99.99999}}]}\n";
  pk_question index = {PK_MEASURED_BLOCH_INDEX, PK_STRUCTURE_CELL, PK_FAMILY_EY, 1.55};
  pk_measured_slope s = slope_of(wrapped, "cell.shapes.0.to_nm", index);
  const double h = 1e-5;
  double known = (stack_index(0.2, 0.1 + h, 1.55) - stack_index(0.2, 0.1 - h, 1.55)) / (2 * h);
  assert_int_equal(s.way, PK_SLOPE_DIFFERENCE);
  assert_near(1e3 * s.q.value, known, 1e-3 * fabs(known));
}

static void slope_of_a_box(void **state) {
  (void)state;
  pk_question question = {PK_MEASURED_INDEX, PK_STRUCTURE_SECTION, PK_FAMILY_TM_LIKE, 0.95};
  options.accuracy = 1e-4;
  pk_measured_slope s = slope_of(BOX, "section.span_nm.0", question);
  double index = sqrt(1.444 * 1.444 - 0.475 * 0.475);
  assert_int_equal(s.way, PK_SLOPE_DIFFERENCE);
  assert_near(1e3 * s.q.value, 0.475 * 0.475 / index, 1e-3 * 0.475 * 0.475 / index);
}

static void structures_and_names(void **state) {
  (void)state;
  understood u = understand_good(context, STACK);
  pk_place nowhere = {0};
  pk_structure found = PK_STRUCTURE_CHANNEL;
  assert_int_equal(pk_question_structure(u.problem, PK_MEASURED_LONG, NULL, nowhere, &found),
                   PICKET_OK);
  assert_int_equal(found, PK_STRUCTURE_CELL);
  assert_int_equal(pk_question_structure(u.problem, PK_MEASURED_INDEX, NULL, nowhere, &found),
                   PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "needs a section"));
  picket_problem_free(u.owner);
  for (int i = 0; i < PK_MEASURED_COUNT; i++) {
    for (int k = 0; k < i; k++) {
      assert_string_not_equal(pk_measured_name((pk_measured)i), pk_measured_name((pk_measured)k));
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(segmented_slab),          cmocka_unit_test(edge_moves_with_temperature),
      cmocka_unit_test(one_side_of_a_break),     cmocka_unit_test(does_not_jump),
      cmocka_unit_test(refuses_what_is_not_due), cmocka_unit_test(outcomes),
      cmocka_unit_test(slopes_of_a_stack),       cmocka_unit_test(slope_across_the_end_of_a_cell),
      cmocka_unit_test(slope_of_a_box),          cmocka_unit_test(structures_and_names),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
