/* The built-in materials: published fits with the range they were fitted in.
 *
 * Three kinds: Sellmeier formulas (with dn/dT constant about 20 °C, or none known), the formula
 * of Li for silicon and germanium with the temperature T in kelvin,
 *   ε = e(T) + A(T) exp(-3 d(T)) / λ²,
 * with λ in µm, and water, which has absorption besides. All derivatives are those of the formula.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/words.h"
#include "material/material_private.h"

typedef enum { SELLMEIER, LI_SILICON, LI_GERMANIUM, WATER } kind;

typedef struct {
  const char *name;
  const char *brief; /* author and year */
  const char *source;
  kind kind;
  pk_material_range range;
  pk_sellmeier formula;
  double dn_dt; /* 1/K, about 20 °C */
} entry;

/* 0 °C in kelvin. */
#define ZERO_C 273.15

static const entry entries[] = {
    {"silicon",
     "Li 1980",
     "Li, J. Phys. Chem. Ref. Data 9, 561 (1980), 1200 to 14000 nm, 100 to 750 K",
     LI_SILICON,
     {1.2, 14, 100 - ZERO_C, 750 - ZERO_C},
     {0},
     0},
    {"silicon_1957",
     "Salzberg & Villa 1957",
     "Salzberg & Villa, J. Opt. Soc. Am. 47, 244 (1957), fit of Tatian (1984), 1357 to 11000 nm; "
     "no "
     "temperature model",
     SELLMEIER,
     {1.357, 11, -ZERO_C, INFINITY},
     {3,
      1,
      {10.6684293, 0.0030434748, 1.54133408},
      {0.301516485 * 0.301516485, 1.13475115 * 1.13475115, 1104.0 * 1104.0}},
     0},
    /* 8.2e-6 to 8.5e-6 are reported for dn/dT (Rego, 2023); the upper one, common in practice. */
    {"silica",
     "Malitson 1965",
     "Malitson, J. Opt. Soc. Am. 55, 1205 (1965), 210 to 3710 nm; dn/dT 8.5e-6 per K (Rego 2023) "
     "held "
     "for -40 to 125 °C",
     SELLMEIER,
     {0.21, 3.71, -40, 125},
     {3,
      1,
      {0.6961663, 0.4079426, 0.8974794},
      {0.0684043 * 0.0684043, 0.1162414 * 0.1162414, 9.896161 * 9.896161}},
     8.5e-6},
    {"nitride",
     "Luke 2015",
     "Luke et al., Opt. Lett. 40, 4823 (2015), 310 to 5500 nm; dn/dT 2.45e-5 per K (Arbabi & "
     "Goddard "
     "2013) held for -40 to 125 °C",
     SELLMEIER,
     {0.31, 5.5, -40, 125},
     {2, 1, {3.0249, 40314}, {0.1353406 * 0.1353406, 1239.842 * 1239.842}},
     2.45e-5},
    {"sapphire_o",
     "Malitson & Dodge 1972",
     "ordinary ray, Malitson & Dodge, J. Opt. Soc. Am. 62, 1405 (1972), 200 to 5000 nm; no "
     "temperature "
     "model",
     SELLMEIER,
     {0.2, 5, -ZERO_C, INFINITY},
     {3,
      1,
      {1.4313493, 0.65054713, 5.3414021},
      {0.0726631 * 0.0726631, 0.1193242 * 0.1193242, 18.028251 * 18.028251}},
     0},
    /* ε = 5.913 + 0.2441 / (λ² - C²) is base + B λ²/(λ² - C²) with B = 0.2441 / C². */
    {"rutile_o",
     "Devore 1951",
     "ordinary ray, Devore, J. Opt. Soc. Am. 41, 416 (1951), 430 to 1530 nm; no temperature model",
     SELLMEIER,
     {0.43, 1.53, -ZERO_C, INFINITY},
     {1, 5.913 - 0.2441 / 0.0803, {0.2441 / 0.0803}, {0.0803}},
     0},
    {"germanium",
     "Li 1980",
     "Li, J. Phys. Chem. Ref. Data 9, 561 (1980), 1900 to 18000 nm, 100 to 550 K",
     LI_GERMANIUM,
     {1.9, 18, 100 - ZERO_C, 550 - ZERO_C},
     {0},
     0},
    {"water",
     "Kedenburg 2012",
     "Kedenburg et al., Opt. Mater. Express 2, 1588 (2012), 20 °C, 500 to 1600 nm; extinction from "
     "its values at 1310 and 1550 nm, log-linear between, unknown and taken as 0 elsewhere; no "
     "temperature model",
     WATER,
     {0.5, 1.6, -ZERO_C, INFINITY},
     {2, 1, {0.75831, 0.08495}, {0.01007, 8.91377}},
     0},
};

enum { ENTRY_COUNT = sizeof entries / sizeof entries[0] };

const char *pk_catalogue_entry(int i) {
  return i >= 0 && i < ENTRY_COUNT ? entries[i].name : NULL;
}

static picket_status refuse(pk_materials *materials, pk_place place, const char *name,
                            const char *wanted) {
  const char *names[ENTRY_COUNT];
  char all[256] = "", hint[80] = "";
  size_t used = 0;
  for (int i = 0; i < ENTRY_COUNT; i++) {
    names[i] = entries[i].name;
    used += (size_t)snprintf(all + used, sizeof all - used, "%s%s", i ? ", " : "", names[i]);
  }
  const char *near = pk_nearest_word(wanted, names, ENTRY_COUNT);
  if (near) {
    snprintf(hint, sizeof hint, " (nearest is '%s')", near);
  }
  return pk_fail_at(materials->context, PICKET_ERROR_INPUT, place,
                    "material '%s': catalogue entry is '%.80s'%s, must be one of %s", name, wanted,
                    hint, all);
}

static int number_of(const char *name) {
  for (int i = 0; i < ENTRY_COUNT; i++) {
    if (strcmp(entries[i].name, name) == 0) {
      return i;
    }
  }
  return -1;
}

picket_status pk_materials_add_catalogue(pk_materials *materials, pk_place place, const char *name,
                                         const char *wanted) {
  int found = number_of(wanted);
  if (found < 0) {
    return refuse(materials, place, name, wanted);
  }
  pk_material item;
  picket_status status = pk_material_begin(materials, place, name, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_CATALOGUE;
  item.entry = found;
  item.range = entries[found].range;
  snprintf(item.brief, sizeof item.brief, "catalogue %s, %s", entries[found].name,
           entries[found].brief);
  snprintf(item.source, sizeof item.source, "catalogue %s, %s", entries[found].name,
           entries[found].source);
  return pk_materials_append(materials, &item);
}

/* Value and derivative of c0 + c1 T + c2 T² + c3 T³. */
static double cubic(const double c[4], double t, double *derivative) {
  *derivative = c[1] + t * (2 * c[2] + t * 3 * c[3]);
  return c[0] + t * (c[1] + t * (c[2] + t * c[3]));
}

/* ε = e + a/λ²: slope -λ dε/dλ = 2a/λ². */
static pk_medium inverse_square(double e, double a, double e_dt, double a_dt,
                                double wavelength_um) {
  double square = wavelength_um * wavelength_um;
  return (pk_medium){e + a / square, 2 * a / square, e_dt + a_dt / square};
}

/* The branches of d do not meet at 293 K; each is differentiated on its own side, and 293 K
 * itself is on the upper one. */
static pk_medium li_silicon(double wavelength_um, double kelvin) {
  static const double e[4] = {11.4445, 2.7739e-4, 1.7050e-6, -8.1347e-10};
  static const double a[4] = {0.8948, 4.3977e-4, 7.3835e-8, 0};
  static const double warm[4] = {-7.1e-4, 1.887e-6, 1.934e-9, -4.554e-13};
  static const double cold[4] = {-2.1e-4, -4.149e-7, -4.620e-10, 1.482e-11};
  double e_dt, a_dt, d_dt;
  double e_now = cubic(e, kelvin, &e_dt), a_now = cubic(a, kelvin, &a_dt);
  /* 1e-9 K: 293 K given in °C may come back a rounding below. */
  double d_now = cubic(kelvin >= 293 - 1e-9 ? warm : cold, kelvin, &d_dt);
  double factor = exp(-3 * d_now);
  return inverse_square(e_now, a_now * factor, e_dt, (a_dt - 3 * a_now * d_dt) * factor,
                        wavelength_um);
}

static pk_medium li_germanium(double wavelength_um, double kelvin) {
  static const double e[4] = {15.2892, 1.4549e-3, 3.5078e-6, -1.2071e-9};
  static const double a[4] = {2.5381, 1.8260e-3, 2.8888e-6, 0};
  double e_dt, a_dt;
  double e_now = cubic(e, kelvin, &e_dt), a_now = cubic(a, kelvin, &a_dt);
  return inverse_square(e_now, a_now, e_dt, a_dt, wavelength_um);
}

/* κ of water and λ dκ/dλ: ln κ is a straight line between the two wavelengths it is known at. */
static double complex water_extinction(double wavelength_um, double complex *slope) {
  const double short_um = 1.31, long_um = 1.55, short_k = 1.595e-5, long_k = 1.4925e-4;
  const double slack = 1e-12; /* as in the range check */
  *slope = 0;
  if (wavelength_um < short_um * (1 - slack) || wavelength_um > long_um * (1 + slack)) {
    return 0;
  }
  double rate = log(long_k / short_k) / (long_um - short_um);
  double k = short_k * exp(rate * (wavelength_um - short_um));
  *slope = I * (wavelength_um * rate * k);
  return I * k;
}

void pk_catalogue_at(int number, double wavelength_um, double temperature_c, pk_medium *out) {
  const entry *this = &entries[number];
  if (this->kind == LI_SILICON || this->kind == LI_GERMANIUM) {
    double kelvin = temperature_c + ZERO_C;
    *out = this->kind == LI_SILICON ? li_silicon(wavelength_um, kelvin)
                                    : li_germanium(wavelength_um, kelvin);
    return;
  }
  double permittivity, slope;
  (void)pk_sellmeier_permittivity(&this->formula, wavelength_um, &permittivity, &slope);
  double n = sqrt(permittivity);
  pk_index index = {n + this->dn_dt * (temperature_c - 20), -slope / (2 * n), this->dn_dt};
  if (this->kind == WATER) {
    double complex k_slope;
    index.n += water_extinction(wavelength_um, &k_slope);
    index.wavelength_slope += k_slope;
  }
  *out = pk_medium_of_index(index);
}
