/* A set of materials: names, constant, Sellmeier, table and slab models, and their refusals. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "material/material.h"
#include "unit/near.h"
#include "unit/short_memory.h"

static picket_context *context;
static pk_materials *set;
static const pk_place here = {"chip.yaml", 12, 5};

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) || pk_materials_create(context, &set);
}

static int tear_down(void **state) {
  (void)state;
  pk_materials_free(set);
  picket_context_free(context);
  return 0;
}

/* The last material of the set. */
static pk_medium last_at(double wavelength_um, double temperature_c) {
  pk_medium medium;
  assert_int_equal(
      pk_materials_at(set, pk_materials_count(set) - 1, wavelength_um, temperature_c, &medium),
      PICKET_OK);
  return medium;
}

static void refused(picket_status status, picket_status expected, const char *word) {
  assert_int_equal(status, expected);
  assert_non_null(strstr(picket_context_message(context), "chip.yaml:12:5: "));
  assert_non_null(strstr(picket_context_message(context), word));
}

static void names(void **state) {
  (void)state;
  for (int i = 0; i < 20; i++) {
    char name[16];
    snprintf(name, sizeof name, "m%d", i);
    assert_int_equal(pk_materials_add_constant(set, here, name, 1 + i, 0, 0), PICKET_OK);
  }
  assert_int_equal(pk_materials_count(set), 20);
  assert_int_equal(pk_materials_find(set, "m13"), 13);
  assert_int_equal(pk_materials_find(set, "m20"), -1);
  assert_string_equal(pk_materials_name(set, 7), "m7");
  refused(pk_materials_add_constant(set, here, "m3", 1, 0, 0), PICKET_ERROR_INPUT, "'m3'");
  refused(pk_materials_add_constant(set, here, "", 1, 0, 0), PICKET_ERROR_INPUT, "empty");
  assert_int_equal(pk_materials_count(set), 20);
  pk_materials_free(NULL);
}

static void constant(void **state) {
  (void)state;
  assert_int_equal(pk_materials_add_constant(set, here, "resin", 1.5, 1e-4, -1e-4), PICKET_OK);
  pk_medium medium = last_at(0.5, 20);
  assert_near(cabs(medium.permittivity - (1.5 + 1e-4 * I) * (1.5 + 1e-4 * I)), 0, 1e-15);
  assert_true(medium.slope == 0);
  assert_near(cabs(medium.temperature_slope + 2e-4 * (1.5 + 1e-4 * I)), 0, 1e-15);
  assert_near(creal(csqrt(last_at(99, 70).permittivity)), 1.495, 1e-14);
  pk_medium kept = medium;
  refused(pk_materials_at(set, 0, 1.0, 15021, &medium), PICKET_ERROR_RANGE, "15021");
  refused(pk_materials_at(set, 0, 0, 20, &medium), PICKET_ERROR_RANGE, "0 nm");
  refused(pk_materials_at(set, 0, INFINITY, 20, &medium), PICKET_ERROR_RANGE, "inf");
  assert_memory_equal(&kept, &medium, sizeof medium);
  static const double bad[] = {0, -1, NAN, INFINITY};
  for (int i = 0; i < 4; i++) {
    refused(pk_materials_add_constant(set, here, "x", bad[i], 0, 0), PICKET_ERROR_INPUT, "index");
    if (i > 0) {
      refused(pk_materials_add_constant(set, here, "x", 1.5, bad[i], 0), PICKET_ERROR_INPUT,
              "extinction");
    }
    if (i > 1) {
      refused(pk_materials_add_constant(set, here, "x", 1.5, 0, bad[i]), PICKET_ERROR_INPUT,
              "dn_dt");
    }
  }
}

/* The catalogue's silica typed in by hand is the same at 20 °C; its poles are errors. */
static void sellmeier(void **state) {
  (void)state;
  static const double b[3] = {0.6961663, 0.4079426, 0.8974794};
  static const double c[3] = {0.0684043, 0.1162414, 9.896161};
  assert_int_equal(pk_materials_add_catalogue(set, here, "silica", "silica"), PICKET_OK);
  pk_medium built_in = last_at(1.3, 20);
  assert_int_equal(pk_materials_add_sellmeier(set, here, "glass", 3, b, c), PICKET_OK);
  pk_medium typed = last_at(1.3, 20);
  assert_near(creal(typed.permittivity), creal(built_in.permittivity), 1e-14);
  assert_near(creal(typed.slope), creal(built_in.slope), 1e-14);
  assert_true(typed.temperature_slope == 0);
  /* At the pole, and just below it where the square is negative. */
  refused(pk_materials_at(set, 1, c[1], 20, &typed), PICKET_ERROR_RANGE, "pole");
  refused(pk_materials_at(set, 1, 9.8, 20, &typed), PICKET_ERROR_RANGE, "9800 nm");
  double nonsense[2] = {NAN, -1};
  refused(pk_materials_add_sellmeier(set, here, "x", 0, b, c), PICKET_ERROR_INPUT, "0 terms");
  refused(pk_materials_add_sellmeier(set, here, "x", 9, b, c), PICKET_ERROR_INPUT, "9 terms");
  refused(pk_materials_add_sellmeier(set, here, "x", 1, nonsense, c), PICKET_ERROR_INPUT, "b[0]");
  refused(pk_materials_add_sellmeier(set, here, "x", 2, b, nonsense), PICKET_ERROR_INPUT,
          "c_um[0]");
  refused(pk_materials_add_sellmeier(set, here, "x", 1, b, nonsense + 1), PICKET_ERROR_INPUT, "-1");
}

/* A natural spline through a straight line is the line; between even rows of a smooth curve the
 * error falls with h⁴ away from the ends. */
static void table(void **state) {
  (void)state;
  double x[41], n[41], k[41];
  for (int i = 0; i < 41; i++) {
    x[i] = 1 + 0.025 * i;
    n[i] = 2 - 0.1 * x[i];
    k[i] = 0.01 * x[i];
  }
  assert_int_equal(pk_materials_add_table(set, here, "line", 41, x, n, k), PICKET_OK);
  pk_medium medium = last_at(1.5137, 20);
  double complex index = 2 - 0.1 * 1.5137 + I * 0.015137, slope = 1.5137 * (-0.1 + 0.01 * I);
  assert_near(cabs(medium.permittivity - index * index), 0, 1e-13);
  assert_near(cabs(medium.slope + 2 * index * slope), 0, 1e-12);
  for (int i = 0; i < 41; i++) {
    n[i] = 1.5 + 0.01 / (x[i] * x[i]);
    k[i] = i == 20 ? 1e-3 : 0;
  }
  assert_int_equal(pk_materials_add_table(set, here, "curve", 41, x, n, k), PICKET_OK);
  double exact = 1.5 + 0.01 / (1.51 * 1.51);
  medium = last_at(1.51, 20);
  /* 5/384 h⁴ n⁗ with n⁗ = 1.2/λ⁶ of order 0.1, and h³/24 for the slope. */
  assert_near(creal(csqrt(medium.permittivity)), exact, 1e-9);
  assert_near(creal(medium.slope / (2 * csqrt(medium.permittivity))), 0.02 / (1.51 * 1.51), 1e-6);
  /* The spline of a lone spike swings below zero in the second interval from it: clipped. */
  assert_true(cimag(last_at(1.5375, 20).permittivity) == 0);
  assert_true(cimag(last_at(1.5, 20).permittivity) > 0);
  (void)last_at(1.0, 20);
  (void)last_at(2.0, 20);
  refused(pk_materials_at(set, 1, 0.999, 20, &medium), PICKET_ERROR_RANGE,
          "allowed 1000 to 2000 nm");
  refused(pk_materials_at(set, 1, 2.001, 20, &medium), PICKET_ERROR_RANGE, "2001 nm");
}

static void table_refusals(void **state) {
  (void)state;
  double x[4] = {1, 1.1, 1.2, 1.3}, n[4] = {2, 2, 2, 2}, k[4] = {0};
  refused(pk_materials_add_table(set, here, "x", 3, x, n, k), PICKET_ERROR_INPUT, "3 rows");
  x[2] = 1.1;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 3");
  x[2] = NAN;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 3");
  x[2] = 1.2;
  x[0] = 0;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 1");
  x[0] = 1;
  n[1] = 0;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 2");
  n[1] = INFINITY;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 2");
  n[1] = 2;
  k[3] = -1e-9;
  refused(pk_materials_add_table(set, here, "x", 4, x, n, k), PICKET_ERROR_INPUT, "row 4");
  k[3] = 0;
  /* Rows that jump: the curve through them dips below zero. */
  double wild[4] = {0.01, 0.01, 9, 0.01};
  assert_int_equal(pk_materials_add_table(set, here, "wild", 4, x, wild, k), PICKET_OK);
  pk_medium medium;
  refused(pk_materials_at(set, 0, 1.05, 20, &medium), PICKET_ERROR_RANGE, "more rows");
}

static const int silicon_film[1] = {0};
static const double film_220[1] = {0.22};

/* Silicon film in oxide, as constants of the slab table: TE 2.8477822434, n_g 3.57675748. */
static void slab_of_constants(void **state) {
  (void)state;
  assert_int_equal(pk_materials_add_constant(set, here, "si", 3.476, 0, 1.84e-4), PICKET_OK);
  assert_int_equal(pk_materials_add_constant(set, here, "ox", 1.444, 0, 0.85e-5), PICKET_OK);
  pk_slab_recipe recipe = {1, 1, 1, silicon_film, film_220, PK_SLAB_TE, 0};
  assert_int_equal(pk_materials_add_slab(set, here, "guide", &recipe), PICKET_OK);
  pk_medium medium = last_at(1.55, 20);
  double n = sqrt(creal(medium.permittivity));
  assert_near(n, 2.8477822434, 0.51e-10);
  assert_near(n + creal(medium.slope) / (2 * n), 3.57675748, 0.51e-8);
  pk_slab slab;
  pk_slab_film films[1];
  assert_int_equal(pk_materials_slab_at(set, &recipe, 1.55, 20, &slab, films), PICKET_OK);
  assert_near(creal(films[0].medium.across), 3.476 * 3.476, 0);
  assert_near(creal(slab.cover.normal), 1.444 * 1.444, 0);
  recipe.order = 1;
  assert_int_equal(pk_materials_add_slab(set, here, "high", &recipe), PICKET_OK);
  refused(pk_materials_at(set, 3, 1.55, 20, &medium), PICKET_ERROR_NO_MODE,
          "te mode of order 1 is cut off at 1550 nm");
  assert_non_null(strstr(picket_context_message(context), "guides 1 te mode; take a thicker film"));
}

/* Slopes of dispersive, absorbing slabs against differences of the exact solution: fourth order in
 * 1e-3, second order in 0.5 K. */
static void slab_slopes(void **state) {
  (void)state;
  assert_int_equal(pk_materials_add_catalogue(set, here, "si", "silicon"), PICKET_OK);
  assert_int_equal(pk_materials_add_catalogue(set, here, "ox", "silica"), PICKET_OK);
  assert_int_equal(pk_materials_add_catalogue(set, here, "sea", "water"), PICKET_OK);
  for (int pol = 0; pol < 2; pol++) {
    pk_slab_recipe recipe = {1, 2, 1, silicon_film, film_220, (pk_slab_polarization)pol, 0};
    assert_int_equal(pk_materials_add_slab(set, here, pol ? "tm" : "te", &recipe), PICKET_OK);
    const double k0 = 1 / 1.45, h = 1e-3;
    double complex e[4];
    static const int steps[4] = {-2, -1, 1, 2};
    for (int i = 0; i < 4; i++) {
      e[i] = last_at(1 / (k0 * (1 + h * steps[i])), 30).permittivity;
    }
    pk_medium medium = last_at(1 / k0, 30);
    double complex slope = (e[0] - 8 * e[1] + 8 * e[2] - e[3]) / (12 * h);
    assert_near(cabs(slope - medium.slope), 0, 1e-8);
    assert_true(cimag(medium.permittivity) > 0);
    double complex heat = last_at(1 / k0, 30.5).permittivity - last_at(1 / k0, 29.5).permittivity;
    assert_near(cabs(heat - medium.temperature_slope), 0, 1e-8);
    assert_true(creal(heat) > 1e-4);
  }
  pk_material_range range = pk_materials_range(set, 3);
  assert_near(range.shortest_um, 1.2, 0);
  assert_near(range.longest_um, 1.6, 0);
  assert_near(range.coldest_c, -40, 0);
  assert_near(range.hottest_c, 125, 0);
  pk_medium medium;
  refused(pk_materials_at(set, 3, 1.61, 20, &medium), PICKET_ERROR_RANGE,
          "allowed 1200 to 1600 nm");
}

static void slab_refusals(void **state) {
  (void)state;
  assert_int_equal(pk_materials_add_constant(set, here, "si", 3.476, 0, 0), PICKET_OK);
  assert_int_equal(pk_materials_add_constant(set, here, "ox", 1.444, 0, 0), PICKET_OK);
  assert_int_equal(pk_materials_add_constant(set, here, "metal", 0.1, 10, 0), PICKET_OK);
  static const double bad[4] = {0, -0.1, NAN, INFINITY};
  const pk_slab_recipe good = {1, 1, 1, silicon_film, film_220, PK_SLAB_TE, 0};
  pk_slab_recipe recipe = good;
  for (int i = 0; i < 4; i++) {
    recipe.film_thickness_um = &bad[i];
    refused(pk_materials_add_slab(set, here, "x", &recipe), PICKET_ERROR_INPUT, "thickness");
  }
  recipe = good;
  recipe.film_count = 0;
  refused(pk_materials_add_slab(set, here, "x", &recipe), PICKET_ERROR_INPUT, "0 films");
  recipe = good;
  recipe.order = -1;
  refused(pk_materials_add_slab(set, here, "x", &recipe), PICKET_ERROR_INPUT, "order is -1");
  recipe = good;
  recipe.cover = 3;
  refused(pk_materials_add_slab(set, here, "x", &recipe), PICKET_ERROR_INPUT, "material 3");
  static const int metal_film[1] = {2};
  recipe = good;
  recipe.film_material = metal_film;
  assert_int_equal(pk_materials_add_slab(set, here, "plasmon", &recipe), PICKET_OK);
  pk_medium medium;
  assert_int_equal(pk_materials_at(set, 3, 1.55, 20, &medium), PICKET_ERROR_UNSUPPORTED);
  /* Slabs on slabs: four deep, not five. */
  for (int depth = 1; depth <= 5; depth++) {
    char name[16];
    snprintf(name, sizeof name, "s%d", depth);
    int film[1] = {depth == 1 ? 0 : pk_materials_count(set) - 1};
    double thick[1] = {3.0};
    recipe = good;
    recipe.film_material = film;
    recipe.film_thickness_um = thick;
    picket_status status = pk_materials_add_slab(set, here, name, &recipe);
    if (depth <= 4) {
      assert_int_equal(status, PICKET_OK);
      (void)last_at(1.55, 20);
    } else {
      refused(status, PICKET_ERROR_INPUT, "5 deep");
    }
  }
  assert_int_equal(pk_materials_add_catalogue(set, here, "ge", "germanium"), PICKET_OK);
  assert_int_equal(pk_materials_add_catalogue(set, here, "ti", "rutile_o"), PICKET_OK);
  recipe = good;
  recipe.cover = pk_materials_find(set, "ge");
  recipe.substrate = pk_materials_find(set, "ti");
  refused(pk_materials_add_slab(set, here, "x", &recipe), PICKET_ERROR_INPUT, "no common");
}

/* One material of each model, and one evaluation. */
static picket_status build_all(picket_context *scarce, pk_materials **out) {
  static const double x[4] = {1, 1.2, 1.4, 1.6}, n[4] = {2, 2, 2, 2}, k[4] = {0};
  pk_materials *materials = NULL;
  picket_status status = pk_materials_create(scarce, &materials);
  if (status == PICKET_OK) {
    status = pk_materials_add_constant(materials, here, "a", 3.476, 0.001, 0);
  }
  if (status == PICKET_OK) {
    status = pk_materials_add_sellmeier(materials, here, "b", 1, n, k);
  }
  if (status == PICKET_OK) {
    status = pk_materials_add_table(materials, here, "c", 4, x, n, k);
  }
  if (status == PICKET_OK) {
    status = pk_materials_add_catalogue(materials, here, "d", "silica");
  }
  pk_slab_recipe recipe = {3, 3, 1, silicon_film, film_220, PK_SLAB_TE, 0};
  if (status == PICKET_OK) {
    status = pk_materials_add_slab(materials, here, "e", &recipe);
  }
  pk_medium medium;
  if (status == PICKET_OK) {
    status = pk_materials_at(materials, 4, 1.55, 20, &medium);
  }
  *out = materials;
  return status;
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  long n = 2;
  for (; status == PICKET_ERROR_MEMORY; n++) {
    short_memory memory = {.fail_at = n};
    picket_context *scarce = short_memory_context(&memory);
    pk_materials *materials = NULL;
    status = build_all(scarce, &materials);
    assert_true(status == PICKET_OK || strlen(picket_context_message(scarce)) > 0);
    pk_materials_free(materials);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
  assert_true(n > 30);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(names, set_up, tear_down),
      cmocka_unit_test_setup_teardown(constant, set_up, tear_down),
      cmocka_unit_test_setup_teardown(sellmeier, set_up, tear_down),
      cmocka_unit_test_setup_teardown(table, set_up, tear_down),
      cmocka_unit_test_setup_teardown(table_refusals, set_up, tear_down),
      cmocka_unit_test_setup_teardown(slab_of_constants, set_up, tear_down),
      cmocka_unit_test_setup_teardown(slab_slopes, set_up, tear_down),
      cmocka_unit_test_setup_teardown(slab_refusals, set_up, tear_down),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
