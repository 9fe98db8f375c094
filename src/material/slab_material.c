/* A film stack as one material: ε = n², n the index of one of its modes (the effective index
 * method: H. Furuta, H. Noda, A. Ihaya, Appl. Opt. 13, 322 (1974)).
 *
 * Dispersion from the group index, k0 dε/dk0 = 2 n (n_g - n). Heat from the pulls of the media on
 * n²: dε/dT = Σ pull dε_i/dT, exact to first order and so the exact derivative; thermal expansion
 * of the films is left out. */
#include <math.h>
#include <stdio.h>

#include "base/memory.h"
#include "material/material_private.h"

static int material_of_layer(const pk_slab_recipe *recipe, int i) {
  if (i == 0) {
    return recipe->substrate;
  }
  return i == recipe->film_count + 1 ? recipe->cover : recipe->film_material[i - 1];
}

static picket_status check(pk_materials *materials, pk_place place, const char *name,
                           const pk_slab_recipe *recipe) {
  picket_context *context = materials->context;
  if (recipe->film_count < 1 || recipe->film_count > PK_SLAB_FILMS) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': the slab has %d films, must have 1 to %d", name,
                      recipe->film_count, PK_SLAB_FILMS);
  }
  for (int i = 0; i < recipe->film_count; i++) {
    double thickness = recipe->film_thickness_um[i];
    if (!(thickness > 0 && thickness < INFINITY)) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "material '%s': thickness of film %d is %g nm, must be above 0 and finite",
                        name, i + 1, 1e3 * thickness);
    }
  }
  if (recipe->order < 0) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': order is %d, must be 0 or more", name, recipe->order);
  }
  return PICKET_OK;
}

/* Range and nesting of a slab from its layers. */
static picket_status inherit(pk_materials *materials, pk_material *item) {
  const pk_slab_recipe *recipe = &item->recipe;
  for (int i = 0; i < recipe->film_count + 2; i++) {
    int number = material_of_layer(recipe, i);
    if (number < 0 || number >= materials->count) {
      return pk_fail_at(materials->context, PICKET_ERROR_INPUT, item->place,
                        "material '%s': layer %d of the slab is made of material %d, must be one "
                        "defined before it (0 to %d)",
                        item->name, i + 1, number, materials->count - 1);
    }
    const pk_material *layer = &materials->items[number];
    item->range.shortest_um = fmax(item->range.shortest_um, layer->range.shortest_um);
    item->range.longest_um = fmin(item->range.longest_um, layer->range.longest_um);
    item->range.coldest_c = fmax(item->range.coldest_c, layer->range.coldest_c);
    item->range.hottest_c = fmin(item->range.hottest_c, layer->range.hottest_c);
    item->nesting = layer->nesting >= item->nesting ? layer->nesting + 1 : item->nesting;
  }
  if (!(item->range.shortest_um <= item->range.longest_um) ||
      !(item->range.coldest_c <= item->range.hottest_c)) {
    return pk_fail_at(materials->context, PICKET_ERROR_INPUT, item->place,
                      "material '%s': the layers of the slab are known for no common wavelength or "
                      "temperature (from %g to %g nm and %g to %g °C), must share a range",
                      item->name, 1e3 * item->range.shortest_um, 1e3 * item->range.longest_um,
                      item->range.coldest_c, item->range.hottest_c);
  }
  if (item->nesting > PK_SLAB_NESTING) {
    return pk_fail_at(materials->context, PICKET_ERROR_INPUT, item->place,
                      "material '%s': slabs stand on slabs %d deep, must be at most %d", item->name,
                      item->nesting, PK_SLAB_NESTING);
  }
  return PICKET_OK;
}

/* A material that keeps a copy of a recipe; brief and source are left to the caller. */
static picket_status begin(pk_materials *materials, pk_place place, const char *name,
                           const pk_slab_recipe *recipe, pk_material *item) {
  picket_context *context = materials->context;
  picket_status status = check(materials, place, name, recipe);
  if (status == PICKET_OK) {
    status = pk_material_begin(materials, place, name, item);
  }
  if (status != PICKET_OK) {
    return status;
  }
  size_t films = (size_t)recipe->film_count;
  item->recipe = *recipe;
  item->recipe.film_material = pk_copy(context, recipe->film_material, films, sizeof(int));
  item->recipe.film_thickness_um = NULL;
  if (item->recipe.film_material) {
    item->recipe.film_thickness_um =
        pk_copy(context, recipe->film_thickness_um, films, sizeof(double));
  }
  status = item->recipe.film_thickness_um ? inherit(materials, item) : PICKET_ERROR_MEMORY;
  if (status != PICKET_OK) {
    pk_material_clear(context, item);
  }
  return status;
}

picket_status pk_materials_add_slab(pk_materials *materials, pk_place place, const char *name,
                                    const pk_slab_recipe *recipe) {
  pk_material item;
  picket_status status = begin(materials, place, name, recipe, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_SLAB;
  snprintf(item.brief, sizeof item.brief, "slab, %s order %d",
           recipe->polarization == PK_SLAB_TE ? "te" : "tm", recipe->order);
  snprintf(item.source, sizeof item.source,
           "effective index of a slab of %d film%s, %s order %d; thermal expansion left out",
           recipe->film_count, recipe->film_count == 1 ? "" : "s",
           recipe->polarization == PK_SLAB_TE ? "te" : "tm", recipe->order);
  return pk_materials_append(materials, &item);
}

picket_status pk_materials_add_layered(pk_materials *materials, pk_place place, const char *name,
                                       const pk_slab_recipe *recipe) {
  pk_slab_recipe layers = *recipe;
  layers.order = 0;
  if (layers.film_count > 0) { /* nothing lies outside: `inherit` looks at both ends all the same */
    layers.substrate = layers.cover = layers.film_material[0];
  }
  pk_material item;
  picket_status status = begin(materials, place, name, &layers, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_LAYERED;
  double period = 0;
  for (int i = 0; i < layers.film_count; i++) {
    period += layers.film_thickness_um[i];
  }
  snprintf(item.brief, sizeof item.brief, "layered");
  snprintf(item.source, sizeof item.source,
           "%d layers across z, %g nm a period, homogenised to second order (Rytov 1956): an "
           "estimate; the entry along the layers",
           layers.film_count, 1e3 * period);
  return pk_materials_append(materials, &item);
}

/* The slab of a recipe; heat is null or receives dε/dT of the film_count + 2 layers. */
static picket_status gather(const pk_materials *materials, const pk_slab_recipe *recipe,
                            double wavelength_um, double temperature_c, pk_slab *slab,
                            pk_slab_film *films, double complex *heat) {
  for (int i = 0; i < recipe->film_count + 2; i++) {
    pk_medium medium;
    picket_status status = pk_materials_at(materials, material_of_layer(recipe, i), wavelength_um,
                                           temperature_c, &medium);
    if (status != PICKET_OK) {
      return status;
    }
    pk_slab_medium layer = pk_slab_isotropic(medium.permittivity, medium.slope);
    if (i == 0) {
      slab->substrate = layer;
    } else if (i == recipe->film_count + 1) {
      slab->cover = layer;
    } else {
      films[i - 1] = (pk_slab_film){layer, recipe->film_thickness_um[i - 1]};
    }
    if (heat) {
      heat[i] = medium.temperature_slope;
    }
  }
  slab->film_count = recipe->film_count;
  slab->films = films;
  return PICKET_OK;
}

picket_status pk_materials_slab_at(const pk_materials *materials, const pk_slab_recipe *recipe,
                                   double wavelength_um, double temperature_c, pk_slab *slab,
                                   pk_slab_film *films) {
  pk_slab found;
  picket_status status =
      gather(materials, recipe, wavelength_um, temperature_c, &found, films, NULL);
  if (status == PICKET_OK) {
    *slab = found;
  }
  return status;
}

static picket_status cut_off(const pk_materials *materials, const pk_material *item,
                             double wavelength_um, int guided) {
  const pk_slab_recipe *recipe = &item->recipe;
  const char *polarization = recipe->polarization == PK_SLAB_TE ? "te" : "tm";
  return pk_fail_at(
      materials->context, PICKET_ERROR_NO_MODE, item->place,
      "material '%s' (slab): the %s mode of order %d is cut off at %g nm, where the slab "
      "guides %d %s mode%s; take a thicker film, a film of higher index, a lower order "
      "or the other polarization, or use the film's own index",
      item->name, polarization, recipe->order, 1e3 * wavelength_um, guided, polarization,
      guided == 1 ? "" : "s");
}

static picket_status solve(const pk_materials *materials, const pk_material *item,
                           double wavelength_um, double temperature_c, pk_slab_film *films,
                           double complex *heat, pk_slab_pull *pulls, pk_medium *out) {
  const pk_slab_recipe *recipe = &item->recipe;
  pk_slab slab;
  pk_slab_mode mode;
  int guided = 0;
  picket_status status =
      gather(materials, recipe, wavelength_um, temperature_c, &slab, films, heat);
  if (status == PICKET_OK) {
    status = pk_slab_mode_of_order(materials->context, &slab, recipe->polarization, wavelength_um,
                                   recipe->order, &mode, pulls, &guided);
    if (status == PICKET_ERROR_NO_MODE) {
      return cut_off(materials, item, wavelength_um, guided);
    }
  }
  if (status != PICKET_OK) {
    return status;
  }
  out->permittivity = mode.index * mode.index;
  out->slope = 2 * mode.index * (mode.group_index - mode.index);
  out->temperature_slope = 0;
  for (int i = 0; i < recipe->film_count + 2; i++) {
    out->temperature_slope += (pulls[i].normal + pulls[i].across + pulls[i].along) * heat[i];
  }
  return PICKET_OK;
}

picket_status pk_slab_material_at(const pk_materials *materials, const pk_material *item,
                                  double wavelength_um, double temperature_c, pk_medium *out) {
  picket_context *context = materials->context;
  int layers = item->recipe.film_count + 2;
  picket_status status = PICKET_ERROR_MEMORY;
  pk_slab_film *films = PK_NEW(context, layers, pk_slab_film);
  double complex *heat = films ? PK_NEW(context, layers, double complex) : NULL;
  pk_slab_pull *pulls = heat ? PK_NEW(context, layers, pk_slab_pull) : NULL;
  if (pulls) {
    status = solve(materials, item, wavelength_um, temperature_c, films, heat, pulls, out);
  }
  pk_free(context, pulls);
  pk_free(context, heat);
  pk_free(context, films);
  return status;
}
