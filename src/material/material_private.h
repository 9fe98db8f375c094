/* The inside of the material room. */
#ifndef PK_MATERIAL_MATERIAL_PRIVATE_H
#define PK_MATERIAL_MATERIAL_PRIVATE_H

#include "material/material.h"

enum { PK_SELLMEIER_TERMS = 8, PK_SOURCE_CAPACITY = 320, PK_BRIEF_CAPACITY = 64 };

/* ε = base + Σ B λ²/(λ² - C²). */
typedef struct pk_sellmeier {
  int count;
  double base;
  double b[PK_SELLMEIER_TERMS];
  double c_squared_um2[PK_SELLMEIER_TERMS];
} pk_sellmeier;

/* Columns of a table and the second derivatives of their splines, [count] each. */
typedef struct pk_table {
  int count;
  double *wavelength_um, *n, *k, *n_bend, *k_bend;
} pk_table;

typedef struct pk_constant {
  double complex index;
  double dn_dt;
} pk_constant;

typedef enum pk_model {
  PK_MODEL_CONSTANT,
  PK_MODEL_SELLMEIER,
  PK_MODEL_TABLE,
  PK_MODEL_CATALOGUE,
  PK_MODEL_SLAB,
  PK_MODEL_LAYERED
} pk_model;

typedef struct pk_material {
  char *name;
  char *file; /* of place, owned */
  pk_place place;
  char brief[PK_BRIEF_CAPACITY]; /* the model in a word or two, for messages */
  char source[PK_SOURCE_CAPACITY];
  pk_material_range range;
  pk_model model;
  int nesting; /* slabs upon slabs: 0 for a plain material */
  pk_constant constant;
  pk_sellmeier sellmeier;
  pk_table table;
  int entry;             /* of the catalogue */
  pk_slab_recipe recipe; /* its arrays are owned; of a layered material films are layers */
} pk_material;

struct pk_materials {
  picket_context *context;
  int count, capacity;
  pk_material *items; /* [capacity] */
};

/* What a model says at a wavelength: n + iκ, λ d(n + iκ)/dλ and d(n + iκ)/dT. */
typedef struct pk_index {
  double complex n, wavelength_slope, temperature_slope;
} pk_index;

/* ε and its slopes of an index: ε = n², k0 dε/dk0 = -λ dε/dλ. */
pk_medium pk_medium_of_index(pk_index index);

/* Starts a material: checks the name and copies it and the place into *item, which is otherwise
 * zeroed. The item is not yet in the set: pk_materials_append puts it there (and owns it from then
 * on), pk_material_clear undoes it. */
picket_status pk_material_begin(pk_materials *materials, pk_place place, const char *name,
                                pk_material *item);
picket_status pk_materials_append(pk_materials *materials, pk_material *item);
void pk_material_clear(picket_context *context, pk_material *item);

/* Evaluation of one model; range is checked before. */
picket_status pk_sellmeier_at(const pk_materials *materials, const pk_material *item,
                              double wavelength_um, pk_medium *out);
/* False where ε <= 0, which is a pole or a band of absorption. */
bool pk_sellmeier_permittivity(const pk_sellmeier *model, double wavelength_um,
                               double *permittivity, double *slope);
picket_status pk_table_at(const pk_materials *materials, const pk_material *item,
                          double wavelength_um, pk_medium *out);
void pk_catalogue_at(int entry, double wavelength_um, double temperature_c, pk_medium *out);
picket_status pk_slab_material_at(const pk_materials *materials, const pk_material *item,
                                  double wavelength_um, double temperature_c, pk_medium *out);

/* xx, yy and zz of a layered material. */
picket_status pk_layered_material_at(const pk_materials *materials, const pk_material *item,
                                     double wavelength_um, double temperature_c, pk_medium out[3]);

#endif
