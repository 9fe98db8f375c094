/* The Sellmeier formula ε = base + Σ B λ²/(λ² - C²), λ in µm, without a temperature model.
 * Its slope is -λ dε/dλ = Σ 2 B C² λ²/(λ² - C²)². W. Sellmeier, Ann. Phys. 219, 272 (1871). */
#include <math.h>
#include <stdio.h>

#include "material/material_private.h"

bool pk_sellmeier_permittivity(const pk_sellmeier *model, double wavelength_um,
                               double *permittivity, double *slope) {
  double square = wavelength_um * wavelength_um;
  *permittivity = model->base;
  *slope = 0;
  for (int i = 0; i < model->count; i++) {
    double distance = square - model->c_squared_um2[i];
    double share = model->b[i] * square / distance;
    *permittivity += share;
    *slope += 2 * share * model->c_squared_um2[i] / distance;
  }
  return *permittivity > 0 && isfinite(*permittivity) && isfinite(*slope);
}

static picket_status check(pk_materials *materials, pk_place place, const char *name, int count,
                           const double *b, const double *c_um) {
  picket_context *context = materials->context;
  if (count < 1 || count > PK_SELLMEIER_TERMS) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': sellmeier has %d terms, must have 1 to %d", name, count,
                      PK_SELLMEIER_TERMS);
  }
  for (int i = 0; i < count; i++) {
    if (!isfinite(b[i])) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "material '%s': sellmeier b[%d] is %g, must be finite", name, i, b[i]);
    }
    if (!(c_um[i] >= 0 && c_um[i] < INFINITY)) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "material '%s': sellmeier c_um[%d] is %g, must be 0 or more and finite",
                        name, i, c_um[i]);
    }
  }
  return PICKET_OK;
}

picket_status pk_materials_add_sellmeier(pk_materials *materials, pk_place place, const char *name,
                                         int count, const double *b, const double *c_um) {
  picket_status status = check(materials, place, name, count, b, c_um);
  if (status != PICKET_OK) {
    return status;
  }
  pk_material item;
  status = pk_material_begin(materials, place, name, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_SELLMEIER;
  item.sellmeier.count = count;
  item.sellmeier.base = 1;
  for (int i = 0; i < count; i++) {
    item.sellmeier.b[i] = b[i];
    item.sellmeier.c_squared_um2[i] = c_um[i] * c_um[i];
  }
  snprintf(item.brief, sizeof item.brief, "sellmeier");
  snprintf(item.source, sizeof item.source,
           "Sellmeier formula of %d term%s; no stated range, no temperature model", count,
           count == 1 ? "" : "s");
  return pk_materials_append(materials, &item);
}

picket_status pk_sellmeier_at(const pk_materials *materials, const pk_material *item,
                              double wavelength_um, pk_medium *out) {
  double permittivity, slope;
  if (!pk_sellmeier_permittivity(&item->sellmeier, wavelength_um, &permittivity, &slope)) {
    return pk_fail_at(materials->context, PICKET_ERROR_RANGE, item->place,
                      "material '%s' (sellmeier): at %g nm the square of the index is %g, must be "
                      "above 0 and finite; the wavelength is at or next to a pole of the formula",
                      item->name, 1e3 * wavelength_um, permittivity);
  }
  *out = (pk_medium){permittivity, slope, 0};
  return PICKET_OK;
}
