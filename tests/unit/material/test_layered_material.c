/* Layered materials: Rytov's two-layer formula, its limits, slopes against differences. */
#include <complex.h>

#include "material/material.h"
#include "unit/near.h"
#include "unit/short_memory.h"

static const pk_place nowhere = {NULL, 0, 0};

static picket_context *context;
static pk_materials *materials;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK &&
                 pk_materials_create(context, &materials) == PICKET_OK
             ? 0
             : -1;
}

static int tear_down(void **state) {
  (void)state;
  pk_materials_free(materials);
  picket_context_free(context);
  return 0;
}

static picket_status add_layers(int count, const int *medium, const double *thickness_um) {
  pk_slab_recipe recipe = {
      .film_count = count, .film_material = medium, .film_thickness_um = thickness_um};
  return pk_materials_add_layered(materials, nowhere, "layers", &recipe);
}

static void two_media(double dn_dt) {
  assert_int_equal(pk_materials_add_constant(materials, nowhere, "core", 3.476, 0, dn_dt),
                   PICKET_OK);
  assert_int_equal(pk_materials_add_constant(materials, nowhere, "oxide", 1.444, 0, 0), PICKET_OK);
}

/* Halves of 3.476 and 1.444, pitch 0.2 at 1.55 µm: 2.725072 along and 1.930880 across the layers
 * (Rytov 1956, second order, evaluated to all digits shown); 2.661551 and 1.885872 for a pitch that
 * vanishes. */
static void gives_the_values_of_the_formula(void **state) {
  (void)state;
  two_media(0);
  pk_medium at[3];
  assert_int_equal(add_layers(2, (int[2]){0, 1}, (double[2]){0.1, 0.1}), PICKET_OK);
  assert_int_equal(pk_materials_tensor_at(materials, 2, 1.55, 20, at), PICKET_OK);
  assert_near(creal(csqrt(at[0].permittivity)), 2.725072, 5e-7);
  assert_near(creal(csqrt(at[1].permittivity)), 2.725072, 5e-7);
  assert_near(creal(csqrt(at[2].permittivity)), 1.930880, 5e-7);
  assert_int_equal(pk_materials_tensor_at(materials, 2, 1.55e4, 20, at), PICKET_OK);
  assert_near(creal(csqrt(at[0].permittivity)), 2.661551, 5e-7);
  assert_near(creal(csqrt(at[2].permittivity)), 1.885872, 5e-7);
  assert_true(pk_materials_is_layered(materials, 2));
  assert_false(pk_materials_is_layered(materials, 0));
}

/* Where the period begins and how often it is counted does not matter. */
static void a_period_is_a_period(void **state) {
  (void)state;
  two_media(0);
  pk_medium once[3], turned[3];
  assert_int_equal(add_layers(2, (int[2]){0, 1}, (double[2]){0.06, 0.14}), PICKET_OK);
  pk_slab_recipe recipe = {.film_count = 3,
                           .film_material = (int[3]){1, 0, 1},
                           .film_thickness_um = (double[3]){0.05, 0.06, 0.09}};
  assert_int_equal(pk_materials_add_layered(materials, nowhere, "turned", &recipe), PICKET_OK);
  assert_int_equal(pk_materials_tensor_at(materials, 2, 1.55, 20, once), PICKET_OK);
  assert_int_equal(pk_materials_tensor_at(materials, 3, 1.55, 20, turned), PICKET_OK);
  for (int c = 0; c < 3; c++) {
    assert_near(cabs(once[c].permittivity - turned[c].permittivity), 0, 1e-12);
  }
}

static void slopes_are_derivatives(void **state) {
  (void)state;
  two_media(2e-4);
  pk_medium at[3], side[2][3];
  assert_int_equal(add_layers(2, (int[2]){0, 1}, (double[2]){0.08, 0.12}), PICKET_OK);
  assert_int_equal(pk_materials_tensor_at(materials, 2, 1.5, 30, at), PICKET_OK);
  const double step = 1e-4;
  for (int i = 0; i < 2; i++) {
    double k = i == 0 ? 1 - step : 1 + step;
    assert_int_equal(pk_materials_tensor_at(materials, 2, 1.5 / k, 30, side[i]), PICKET_OK);
  }
  for (int c = 0; c < 3; c++) { /* differences of smooth formulas: the square of the step */
    double complex slope = (side[1][c].permittivity - side[0][c].permittivity) / (2 * step);
    assert_near(cabs(at[c].slope - slope), 0, 1e-6);
    assert_true(cabs(slope) > 0.1);
  }
  for (int i = 0; i < 2; i++) {
    assert_int_equal(pk_materials_tensor_at(materials, 2, 1.5, i == 0 ? 29 : 31, side[i]),
                     PICKET_OK);
  }
  for (int c = 0; c < 3; c++) {
    double complex slope = (side[1][c].permittivity - side[0][c].permittivity) / 2;
    assert_near(cabs(at[c].temperature_slope - slope), 0, 1e-9);
  }
}

static void plain_materials_have_three_equal_entries(void **state) {
  (void)state;
  two_media(0);
  pk_medium at[3];
  assert_int_equal(pk_materials_tensor_at(materials, 1, 1.55, 20, at), PICKET_OK);
  for (int c = 0; c < 3; c++) {
    assert_near(creal(at[c].permittivity), 1.444 * 1.444, 1e-14);
  }
}

static void refuses_bad_layers(void **state) {
  (void)state;
  two_media(0);
  assert_int_equal(add_layers(0, (int[1]){0}, (double[1]){1}), PICKET_ERROR_INPUT);
  assert_int_equal(add_layers(1, (int[1]){0}, (double[1]){0}), PICKET_ERROR_INPUT);
  assert_int_equal(add_layers(1, (int[1]){0}, (double[1]){NAN}), PICKET_ERROR_INPUT);
  assert_int_equal(add_layers(1, (int[1]){7}, (double[1]){1}), PICKET_ERROR_INPUT);
  assert_int_equal(pk_materials_count(materials), 2);
  pk_medium at[3];
  assert_int_equal(add_layers(1, (int[1]){0}, (double[1]){1}), PICKET_OK);
  assert_int_equal(pk_materials_tensor_at(materials, 2, -1, 20, at), PICKET_ERROR_RANGE);
}

/* Each allocation fails once. */
static void short_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status == PICKET_ERROR_MEMORY && n < 100; n++) {
    short_memory memory = {0};
    picket_context *short_one = short_memory_context(&memory);
    pk_materials *set = NULL;
    pk_medium at[3];
    assert_int_equal(pk_materials_create(short_one, &set), PICKET_OK);
    assert_int_equal(pk_materials_add_constant(set, nowhere, "core", 3, 0, 0), PICKET_OK);
    memory.fail_at = memory.asked + n;
    pk_slab_recipe recipe = {
        .film_count = 1, .film_material = (int[1]){0}, .film_thickness_um = (double[1]){0.1}};
    status = pk_materials_add_layered(set, nowhere, "layers", &recipe);
    if (status == PICKET_OK) {
      status = pk_materials_tensor_at(set, 1, 1.55, 20, at);
    }
    assert_true(status == PICKET_OK || status == PICKET_ERROR_MEMORY);
    pk_materials_free(set);
    picket_context_free(short_one);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(gives_the_values_of_the_formula, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_period_is_a_period, set_up, tear_down),
      cmocka_unit_test_setup_teardown(slopes_are_derivatives, set_up, tear_down),
      cmocka_unit_test_setup_teardown(plain_materials_have_three_equal_entries, set_up, tear_down),
      cmocka_unit_test_setup_teardown(refuses_bad_layers, set_up, tear_down),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
