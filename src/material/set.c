/* The named materials of a problem: keeping, finding, and evaluating them within their ranges.
 *
 * Every model gives ε(λ, T) = (n + iκ)², its slope k0 dε/dk0 = -λ dε/dλ, and dε/dT, all from the
 * derivative of its formula. */
#include <assert.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "material/material_private.h"

pk_medium pk_medium_of_index(pk_index index) {
  return (pk_medium){index.n * index.n, -2 * index.n * index.wavelength_slope,
                     2 * index.n * index.temperature_slope};
}

picket_status pk_materials_create(picket_context *context, pk_materials **out) {
  pk_materials *materials = PK_NEW(context, 1, pk_materials);
  if (!materials) {
    return PICKET_ERROR_MEMORY;
  }
  materials->context = pk_context_hold(context);
  *out = materials;
  return PICKET_OK;
}

void pk_material_clear(picket_context *context, pk_material *item) {
  pk_free(context, item->name);
  pk_free(context, item->file);
  pk_free(context, item->table.wavelength_um);
  pk_free(context, item->table.n);
  pk_free(context, item->table.k);
  pk_free(context, item->table.n_bend);
  pk_free(context, item->table.k_bend);
  /* The recipe shows its arrays as const; they are ours. */
  pk_free(context, (void *)item->recipe.film_material);
  pk_free(context, (void *)item->recipe.film_thickness_um);
  memset(item, 0, sizeof *item);
}

void pk_materials_free(pk_materials *materials) {
  if (!materials) {
    return;
  }
  picket_context *context = materials->context;
  for (int i = 0; i < materials->count; i++) {
    pk_material_clear(context, &materials->items[i]);
  }
  pk_free(context, materials->items);
  pk_free(context, materials);
  pk_context_release(context);
}

int pk_materials_count(const pk_materials *materials) {
  return materials->count;
}

int pk_materials_find(const pk_materials *materials, const char *name) {
  for (int i = 0; i < materials->count; i++) {
    if (strcmp(materials->items[i].name, name) == 0) {
      return i;
    }
  }
  return -1;
}

static const pk_material *item_of(const pk_materials *materials, int material) {
  assert(material >= 0 && material < materials->count);
  return &materials->items[material];
}

const char *pk_materials_name(const pk_materials *materials, int material) {
  return item_of(materials, material)->name;
}

const char *pk_materials_source(const pk_materials *materials, int material) {
  return item_of(materials, material)->source;
}

pk_material_range pk_materials_range(const pk_materials *materials, int material) {
  return item_of(materials, material)->range;
}

pk_material_range pk_materials_common_range(const pk_materials *materials, const bool *used) {
  pk_material_range common = {.shortest_um = 0, .longest_um = INFINITY};
  for (int m = 0; m < pk_materials_count(materials); m++) {
    if (used[m]) {
      pk_material_range range = pk_materials_range(materials, m);
      common.shortest_um = fmax(common.shortest_um, range.shortest_um);
      common.longest_um = fmin(common.longest_um, range.longest_um);
    }
  }
  return common;
}

picket_status pk_material_begin(pk_materials *materials, pk_place place, const char *name,
                                pk_material *item) {
  picket_context *context = materials->context;
  memset(item, 0, sizeof *item);
  if (name[0] == '\0') {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "a material has an empty name, must have at least one letter");
  }
  if (pk_materials_find(materials, name) >= 0) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s' is defined a second time, each name may stand once", name);
  }
  item->name = pk_text_copy(context, name);
  item->file = item->name && place.file ? pk_text_copy(context, place.file) : NULL;
  if (!item->name || (place.file && !item->file)) {
    pk_material_clear(context, item);
    return PICKET_ERROR_MEMORY;
  }
  item->place = place;
  item->place.file = item->file;
  item->range = (pk_material_range){0, INFINITY, -273.15, INFINITY};
  return PICKET_OK;
}

picket_status pk_materials_append(pk_materials *materials, pk_material *item) {
  if (materials->count == materials->capacity) {
    int capacity = 2 * materials->capacity + 4;
    pk_material *items = pk_regrow(materials->context, materials->items, (size_t)materials->count,
                                   (size_t)capacity, sizeof *items);
    if (!items) {
      pk_material_clear(materials->context, item);
      return PICKET_ERROR_MEMORY;
    }
    materials->items = items;
    materials->capacity = capacity;
  }
  materials->items[materials->count++] = *item;
  return PICKET_OK;
}

picket_status pk_materials_add_constant(pk_materials *materials, pk_place place, const char *name,
                                        double index, double extinction, double dn_dt_per_k) {
  if (!(extinction >= 0)) {
    return pk_fail_at(materials->context, PICKET_ERROR_INPUT, place,
                      "material '%s': extinction is %g, must be 0 or more and finite", name,
                      extinction);
  }
  return pk_materials_add_amplifier(materials, place, name, index, extinction, dn_dt_per_k);
}

picket_status pk_materials_add_amplifier(pk_materials *materials, pk_place place, const char *name,
                                         double index, double extinction, double dn_dt_per_k) {
  picket_context *context = materials->context;
  if (!(index > 0 && index < INFINITY)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': index is %g, must be above 0 and finite", name, index);
  }
  if (!isfinite(extinction)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': extinction is %g, must be 0 or more and finite", name,
                      extinction);
  }
  if (!isfinite(dn_dt_per_k)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': dn_dt_per_k is %g, must be finite", name, dn_dt_per_k);
  }
  pk_material item;
  picket_status status = pk_material_begin(materials, place, name, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_CONSTANT;
  item.constant = (pk_constant){index + I * extinction, dn_dt_per_k};
  snprintf(item.brief, sizeof item.brief, "constant");
  snprintf(item.source, sizeof item.source,
           "constant index %g, extinction %g, dn/dT %g per K about 20 °C; any wavelength", index,
           extinction, dn_dt_per_k);
  return pk_materials_append(materials, &item);
}

static picket_status constant_at(const pk_materials *materials, const pk_material *item,
                                 double temperature_c, pk_medium *out) {
  const pk_constant *model = &item->constant;
  double complex n = model->index + model->dn_dt * (temperature_c - 20);
  if (!(creal(n) > 0)) {
    return pk_fail_at(materials->context, PICKET_ERROR_RANGE, item->place,
                      "material '%s' (constant): index is %g at %g °C, must be above 0", item->name,
                      creal(n), temperature_c);
  }
  *out = pk_medium_of_index((pk_index){n, 0, model->dn_dt});
  return PICKET_OK;
}

static picket_status check_range(const pk_materials *materials, const pk_material *item,
                                 double wavelength_um, double temperature_c) {
  const pk_material_range *range = &item->range;
  /* A wavelength that went through a frequency and back may be off by a rounding or two. */
  const double slack = 1e-12;
  if (!(wavelength_um >= range->shortest_um * (1 - slack) && wavelength_um > 0 &&
        wavelength_um <= range->longest_um * (1 + slack) && wavelength_um < INFINITY)) {
    if (range->shortest_um == 0 && range->longest_um == INFINITY) {
      return pk_fail_at(materials->context, PICKET_ERROR_RANGE, item->place,
                        "material '%s' (%s): wavelength is %g nm, must be above 0 and finite",
                        item->name, item->brief, 1e3 * wavelength_um);
    }
    return pk_fail_at(materials->context, PICKET_ERROR_RANGE, item->place,
                      "material '%s' (%s): wavelength is %g nm, allowed %g to %g nm", item->name,
                      item->brief, 1e3 * wavelength_um, 1e3 * range->shortest_um,
                      1e3 * range->longest_um);
  }
  /* 1e-9 K: kelvin and °C differ by a constant that is no binary fraction. */
  if (!(temperature_c >= range->coldest_c - 1e-9 && temperature_c <= range->hottest_c + 1e-9 &&
        isfinite(temperature_c))) {
    return pk_fail_at(materials->context, PICKET_ERROR_RANGE, item->place,
                      "material '%s' (%s): temperature is %g °C, allowed %g to %g °C", item->name,
                      item->brief, temperature_c, range->coldest_c, range->hottest_c);
  }
  return PICKET_OK;
}

bool pk_materials_is_layered(const pk_materials *materials, int material) {
  return item_of(materials, material)->model == PK_MODEL_LAYERED;
}

picket_status pk_materials_tensor_at(const pk_materials *materials, int material,
                                     double wavelength_um, double temperature_c, pk_medium out[3]) {
  const pk_material *item = item_of(materials, material);
  if (item->model == PK_MODEL_LAYERED) {
    picket_status status = check_range(materials, item, wavelength_um, temperature_c);
    return status == PICKET_OK
               ? pk_layered_material_at(materials, item, wavelength_um, temperature_c, out)
               : status;
  }
  pk_medium medium;
  picket_status status =
      pk_materials_at(materials, material, wavelength_um, temperature_c, &medium);
  for (int c = 0; status == PICKET_OK && c < 3; c++) {
    out[c] = medium;
  }
  return status;
}

picket_status pk_materials_at(const pk_materials *materials, int material, double wavelength_um,
                              double temperature_c, pk_medium *out) {
  const pk_material *item = item_of(materials, material);
  picket_status status = check_range(materials, item, wavelength_um, temperature_c);
  if (status != PICKET_OK) {
    return status;
  }
  switch (item->model) {
    case PK_MODEL_CONSTANT: return constant_at(materials, item, temperature_c, out);
    case PK_MODEL_SELLMEIER: return pk_sellmeier_at(materials, item, wavelength_um, out);
    case PK_MODEL_TABLE: return pk_table_at(materials, item, wavelength_um, out);
    case PK_MODEL_CATALOGUE:
      pk_catalogue_at(item->entry, wavelength_um, temperature_c, out);
      return PICKET_OK;
    case PK_MODEL_SLAB:
      return pk_slab_material_at(materials, item, wavelength_um, temperature_c, out);
    case PK_MODEL_LAYERED: {
      pk_medium tensor[3];
      status = pk_layered_material_at(materials, item, wavelength_um, temperature_c, tensor);
      *out = status == PICKET_OK ? tensor[0] : *out;
      return status;
    }
  }
  return pk_fail(materials->context, PICKET_ERROR_INTERNAL, "material model %d is unknown",
                 (int)item->model);
}
