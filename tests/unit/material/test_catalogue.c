/* The catalogue against published values (digits as in the sources, worked out apart from this
 * code), and its slopes against differences of itself. */
#include <math.h>
#include <string.h>

#include "material/material.h"
#include "unit/near.h"

static picket_context *context;
static pk_materials *set;
static const pk_place nowhere = {"chip.yaml", 12, 5};

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

static int entry(const char *name) {
  int found = pk_materials_find(set, name);
  if (found < 0) {
    assert_int_equal(pk_materials_add_catalogue(set, nowhere, name, name), PICKET_OK);
    found = pk_materials_count(set) - 1;
  }
  return found;
}

static pk_medium at(const char *name, double wavelength_um, double temperature_c) {
  pk_medium medium;
  assert_int_equal(pk_materials_at(set, entry(name), wavelength_um, temperature_c, &medium),
                   PICKET_OK);
  return medium;
}

static double index_at(const char *name, double wavelength_um, double temperature_c) {
  return creal(csqrt(at(name, wavelength_um, temperature_c).permittivity));
}

static void refuse(const char *name, double wavelength_um, double temperature_c, const char *word) {
  pk_medium medium = {77, 77, 77};
  assert_int_equal(pk_materials_at(set, entry(name), wavelength_um, temperature_c, &medium),
                   PICKET_ERROR_RANGE);
  assert_true(creal(medium.permittivity) == 77);
  assert_non_null(strstr(picket_context_message(context), word));
  assert_non_null(strstr(picket_context_message(context), "chip.yaml:12:5: "));
}

/* Seven digits shown after the point (six for n_g): half a unit of the last. Sources as the
 * catalogue names them. Silicon at 293 K, the others at 20 °C. */
static void published_values(void **state) {
  (void)state;
  static const struct {
    const char *name;
    double temperature_c, n131, n155, group155; /* 0: not in the range */
  } rows[] = {
      {"silicon", 293 - 273.15, 3.5002691, 3.4756878, 3.599036},
      {"silicon_1957", 20, 0, 3.4777238, 3.605295},
      {"silica", 20, 1.4468043, 1.4440236, 1.462596},
      {"nitride", 20, 2.0031299, 1.9962797, 2.039573},
      {"sapphire_o", 20, 1.7502583, 1.7461816, 1.773174},
      {"rutile_o", 20, 2.4621583, 0, 0},
      {"water", 20, 1.3200499, 1.3153545, 1.350413},
  };
  for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
    if (rows[i].n131 > 0) {
      assert_near(index_at(rows[i].name, 1.31, rows[i].temperature_c), rows[i].n131, 0.51e-7);
    } else {
      refuse(rows[i].name, 1.31, rows[i].temperature_c, "wavelength is 1310 nm");
    }
    if (rows[i].n155 > 0) {
      pk_medium medium = at(rows[i].name, 1.55, rows[i].temperature_c);
      double complex n = csqrt(medium.permittivity);
      assert_near(creal(n), rows[i].n155, 0.51e-7);
      /* n_g = n + k0 dn/dk0. */
      assert_near(creal(n + medium.slope / (2 * n)), rows[i].group155, 0.51e-6);
    } else {
      refuse(rows[i].name, 1.55, rows[i].temperature_c, "wavelength is 1550 nm");
    }
  }
  refuse("germanium", 1.55, 20, "allowed 1900 to 18000 nm");
}

/* dn/dT of silicon at 298 K, 1.55 µm is 1.833e-4 per K by Li's formula; silica and nitride as
 * reported (Rego 2023; Arbabi & Goddard 2013). */
static void heat(void **state) {
  (void)state;
  pk_medium medium = at("silicon", 1.55, 298 - 273.15);
  assert_near(creal(medium.temperature_slope) / (2 * sqrt(creal(medium.permittivity))), 1.833e-4,
              0.5e-7);
  medium = at("silica", 1.55, 30);
  assert_near(creal(medium.temperature_slope) / (2 * sqrt(creal(medium.permittivity))), 8.5e-6,
              1e-12);
  assert_near(index_at("silica", 1.55, 30) - index_at("silica", 1.55, 20), 8.5e-5, 1e-12);
  assert_near(index_at("nitride", 1.55, 60) - index_at("nitride", 1.55, 20), 40 * 2.45e-5, 1e-12);
  assert_near(index_at("water", 1.55, 60), index_at("water", 1.55, 20), 0);
}

/* The branches of Li's formula do not meet at 293 K; 293 K is on the upper one. The step worked out
 * in 30 digits is 3.47568780169 - 3.47568704629. */
static void the_branches_of_silicon(void **state) {
  (void)state;
  double below = index_at("silicon", 1.55, 293 - 1e-6 - 273.15);
  double exactly = index_at("silicon", 1.55, 293 - 273.15);
  double above = index_at("silicon", 1.55, 293 + 1e-6 - 273.15);
  assert_near(exactly, above, 1e-9);
  assert_near(exactly - below, 7.554e-7, 1e-9);
}

/* Slopes against fourth-order differences: h⁴ of 1e-3 or less leaves 1e-11 times derivatives. */
static void slopes_are_derivatives(void **state) {
  (void)state;
  static const struct {
    const char *name;
    double wavelength_um, temperature_c;
  } points[] = {{"silicon", 1.55, 50}, {"silicon", 3, -100},  {"silicon_1957", 1.55, 20},
                {"silica", 0.4, 20},   {"silica", 1.55, 90},  {"nitride", 0.6, 20},
                {"sapphire_o", 3, 20}, {"rutile_o", 0.6, 20}, {"germanium", 4, 30},
                {"water", 0.8, 20},    {"water", 1.4, 20},    {"germanium", 10, -150}};
  for (size_t i = 0; i < sizeof points / sizeof points[0]; i++) {
    const char *name = points[i].name;
    double k0 = 1 / points[i].wavelength_um, t = points[i].temperature_c, h = 1e-3;
    double complex e[4], warm[4];
    static const int steps[4] = {-2, -1, 1, 2};
    for (int s = 0; s < 4; s++) {
      e[s] = at(name, 1 / (k0 * (1 + steps[s] * h)), t).permittivity;
      warm[s] = at(name, 1 / k0, t + steps[s]).permittivity;
    }
    pk_medium medium = at(name, 1 / k0, t);
    double complex slope = (e[0] - 8 * e[1] + 8 * e[2] - e[3]) / (12 * h);
    assert_near(cabs(slope - medium.slope), 0, 1e-9);
    double complex heating = (warm[0] - 8 * warm[1] + 8 * warm[2] - warm[3]) / 12;
    assert_near(cabs(heating - medium.temperature_slope), 0, 1e-11);
  }
}

/* k → loss: 8.685889638 (2π/λ) κ 1e4 dB/cm; water at 1.55 µm: 52.5 dB/cm (Kedenburg 2012). */
static void absorption_of_water(void **state) {
  (void)state;
  const double factor = 8.685889638 * 2 * 3.14159265358979323846 / 1.55 * 1e4;
  assert_near(factor * 1e-8, 0.0035210, 0.51e-7);
  assert_near(factor * cimag(csqrt(at("water", 1.55, 20).permittivity)), 52.5, 0.06);
  assert_near(cimag(csqrt(at("water", 1.31, 20).permittivity)), 1.595e-5, 1e-15);
  /* Log-linear: the geometric mean half way. */
  assert_near(cimag(csqrt(at("water", 1.43, 20).permittivity)), sqrt(1.595e-5 * 1.4925e-4), 1e-15);
  assert_true(cimag(at("water", 1.0, 20).permittivity) == 0);
  assert_non_null(strstr(pk_materials_source(set, entry("water")), "unknown"));
}

static void ranges(void **state) {
  (void)state;
  refuse("silicon", 0.8, 20,
         "material 'silicon' (catalogue silicon, Li 1980): wavelength is 800 nm, "
         "allowed 1200 to 14000 nm");
  refuse("silicon", 14.001, 20, "14001 nm");
  refuse("silicon", NAN, 20, "nan");
  refuse("silicon", -1, 20, "-1000 nm");
  refuse("silicon", 1.55, -200, "temperature is -200 °C, allowed -173.15 to 476.85 °C");
  refuse("silicon", 1.55, 480, "480 °C");
  refuse("silicon", 1.55, NAN, "nan");
  refuse("silica", 1.55, 126, "allowed -40 to 125 °C");
  refuse("water", 1.61, 20, "allowed 500 to 1600 nm");
  refuse("rutile_o", 1.55, 20, "allowed 430 to 1530 nm");
  refuse("sapphire_o", 1.55, -300, "-273.15");
  (void)at("silicon", 1.2, 100 - 273.15);
  (void)at("silicon", 14 * (1 + 1e-15), 750 - 273.15);
}

static void unknown_entries(void **state) {
  (void)state;
  int count = pk_materials_count(set);
  assert_int_equal(pk_materials_add_catalogue(set, nowhere, "core", "silicone"),
                   PICKET_ERROR_INPUT);
  const char *message = picket_context_message(context);
  assert_non_null(strstr(message, "nearest is 'silicon'"));
  for (int i = 0; pk_catalogue_entry(i); i++) {
    assert_non_null(strstr(message, pk_catalogue_entry(i)));
  }
  assert_int_equal(pk_materials_add_catalogue(set, nowhere, "core", ""), PICKET_ERROR_INPUT);
  assert_null(strstr(picket_context_message(context), "nearest"));
  assert_int_equal(pk_materials_count(set), count);
  assert_null(pk_catalogue_entry(-1));
  assert_null(pk_catalogue_entry(8));
  assert_string_equal(pk_catalogue_entry(0), "silicon");
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(published_values),        cmocka_unit_test(heat),
      cmocka_unit_test(the_branches_of_silicon), cmocka_unit_test(slopes_are_derivatives),
      cmocka_unit_test(absorption_of_water),     cmocka_unit_test(ranges),
      cmocka_unit_test(unknown_entries),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
