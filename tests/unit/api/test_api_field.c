/* The border of mode fields: nonsense is refused with nothing touched, and what comes out is what
 * the study made. */
#include <math.h>
#include <picket.h>
#include <string.h>

#include "study/fields.h"
#include "unit/near.h"

static const char STACK[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n";

static picket_context *context;
static picket_problem *problem;
static picket_options rough;

static int set_up(void **state) {
  (void)state;
  picket_options_init(&rough);
  rough.accuracy = 1e-2;
  if (picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, STACK, strlen(STACK), "test", &problem);
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}

static picket_field *good_field(void) {
  picket_field *field = NULL;
  assert_int_equal(picket_field_find(problem, &rough, PICKET_EY, 1.55, 0, &field), PICKET_OK);
  return field;
}

static void assert_says(picket_status status, const char *word) {
  assert_int_equal(status, PICKET_ERROR_ARGUMENT);
  if (!strstr(picket_context_message(context), word)) {
    fail_msg("\"%s\" lacks \"%s\"", picket_context_message(context), word);
  }
}

static void questions_that_make_no_sense(void **state) {
  (void)state;
  static const double wavelengths[] = {0, -1, NAN, INFINITY};
  static const int orders[] = {-1, 200, 2147483647};
  picket_field *field = NULL;
  assert_int_equal(picket_field_find(NULL, NULL, PICKET_EY, 1.55, 0, &field),
                   PICKET_ERROR_ARGUMENT);
  assert_says(picket_field_find(problem, NULL, PICKET_EY, 1.55, 0, NULL), "out");
  assert_says(picket_field_find(problem, NULL, (picket_polarization)2, 1.55, 0, &field),
              "polarization is 2");
  assert_says(picket_field_find(problem, NULL, (picket_polarization)-1, 1.55, 0, &field),
              "polarization is -1");
  for (int i = 0; i < 4; i++) {
    assert_says(picket_field_find(problem, NULL, PICKET_EY, wavelengths[i], 0, &field),
                "wavelength_um");
  }
  for (int i = 0; i < 3; i++) {
    assert_says(picket_field_find(problem, NULL, PICKET_EY, 1.55, orders[i], &field), "order is");
  }
  picket_options options = rough;
  options.accuracy = NAN;
  assert_says(picket_field_find(problem, &options, PICKET_EY, 1.55, 0, &field), "accuracy");
  assert_says(picket_fields_write(problem, &options, "x.h5"), "accuracy");
  assert_int_equal(picket_fields_write(NULL, NULL, "x.h5"), PICKET_ERROR_ARGUMENT);
  assert_says(picket_fields_write(problem, NULL, NULL), "path is null");
  assert_says(picket_fields_write(problem, NULL, ""), "path is empty");
  assert_null(field);
}

static void outputs_that_make_no_sense(void **state) {
  (void)state;
  picket_field *field = good_field();
  picket_field_description about;
  int nz = -7, nx = -7;
  double buffer[1] = {42};
  assert_int_equal(picket_field_describe(NULL, &about), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_describe(field, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_size(NULL, &nz, &nx), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_size(field, NULL, &nx), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_size(field, &nz, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_lines(NULL, PICKET_AXIS_X, buffer, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_lines(field, (picket_axis)2, buffer, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_lines(field, PICKET_AXIS_X, NULL, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_lines(field, PICKET_AXIS_X, buffer, 0), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_lines(field, PICKET_AXIS_Z, buffer, 1), PICKET_ERROR_ARGUMENT);
  for (int c = -1; c <= 6; c++) {
    assert_int_equal(picket_field_component(field, (picket_component)c, buffer, 1),
                     PICKET_ERROR_ARGUMENT);
    assert_int_equal(picket_field_component(NULL, (picket_component)c, buffer, 1),
                     PICKET_ERROR_ARGUMENT);
  }
  assert_int_equal(picket_field_permittivity(field, buffer, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_permittivity(field, NULL, 100000), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_field_permittivity(NULL, buffer, 1), PICKET_ERROR_ARGUMENT);
  assert_true(nz == -7 && nx == -7 && buffer[0] == 42);
  assert_null(picket_component_name((picket_component)-1));
  assert_null(picket_component_name((picket_component)6));
  assert_null(picket_component_unit((picket_component)6));
  picket_field_free(field);
  picket_field_free(NULL);
}

static void what_comes_out(void **state) {
  (void)state;
  static const char *const names[] = {"Ex", "Ey", "Ez", "Hx", "Hy", "Hz"};
  enum { ROOM = 2000 };
  double values[ROOM], z[ROOM], x[1];
  picket_field *field = good_field();
  picket_field_description about;
  int nz, nx;
  assert_int_equal(picket_field_describe(field, &about), PICKET_OK);
  assert_int_equal(picket_field_size(field, &nz, &nx), PICKET_OK);
  assert_true(nz > 10 && 2 * nz < ROOM && nx == 1);
  assert_int_equal(picket_field_lines(field, PICKET_AXIS_Z, z, (size_t)nz), PICKET_OK);
  assert_int_equal(picket_field_lines(field, PICKET_AXIS_X, x, 1), PICKET_OK);
  assert_near(z[0], -0.1, 1e-12);
  assert_near(z[nz - 1], 0.1, 1e-12);
  assert_near(x[0], 0, 0);
  assert_true(about.propagates && about.order == 0 && about.polarization == PICKET_EY);
  assert_near(about.wavelength_um, 1.55, 1e-12);
  assert_near(about.pitch_um, 0.2, 1e-12);
  for (int c = PICKET_COMPONENT_EX; c <= PICKET_COMPONENT_HZ; c++) {
    picket_component which = (picket_component)c;
    double largest = 0;
    assert_string_equal(picket_component_name(which), names[c]);
    assert_string_equal(picket_component_unit(which), c < 3 ? "V/m" : "A/m");
    assert_int_equal(picket_field_component(field, which, values, (size_t)(2 * nz)), PICKET_OK);
    for (int i = 0; i < 2 * nz; i++) {
      largest = fmax(largest, fabs(values[i]));
    }
    /* nothing varies along x, so ey has E_y and H_x only */
    assert_true((largest > 0) == (which == PICKET_COMPONENT_EY || which == PICKET_COMPONENT_HX));
  }
  assert_int_equal(picket_field_permittivity(field, values, (size_t)(2 * nz)), PICKET_OK);
  assert_near(values[0], 1.444 * 1.444, 1e-12);
  assert_near(values[2 * (nz / 2)], 3.476 * 3.476, 1e-12);
  assert_near(values[1], 0, 0);
  picket_field_free(field);
}

/* A field keeps its context alive. */
static void the_order_of_frees_does_not_matter(void **state) {
  (void)state;
  picket_field *field = good_field();
  picket_problem_free(problem);
  picket_context_free(context);
  problem = NULL;
  context = NULL;
  int nz, nx;
  assert_int_equal(picket_field_size(field, &nz, &nx), PICKET_OK);
  picket_field_free(field);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(questions_that_make_no_sense, set_up, tear_down),
      cmocka_unit_test_setup_teardown(outputs_that_make_no_sense, set_up, tear_down),
      cmocka_unit_test_setup_teardown(what_comes_out, set_up, tear_down),
      cmocka_unit_test_setup_teardown(the_order_of_frees_does_not_matter, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
