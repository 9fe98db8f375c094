/* Index models: what a material's permittivity is at a wavelength and a temperature.
 *
 * Time convention exp(-iωt): absorption is n + iκ with κ >= 0. A material asked for outside the
 * wavelengths or temperatures it is known for is an error that names the range. */
#ifndef PK_MATERIAL_MATERIAL_H
#define PK_MATERIAL_MATERIAL_H

#include <complex.h>
#include <stdbool.h>

#include "base/context.h"
#include "slab/slab.h"

/* A set of named materials of one problem; they may refer to each other (a slab to its films). */
typedef struct pk_materials pk_materials;

/* A material at one wavelength and temperature. */
typedef struct pk_medium {
  double complex permittivity;      /* ε = (n + iκ)² */
  double complex slope;             /* k0 dε/dk0, at constant temperature */
  double complex temperature_slope; /* dε/dT, 1/K */
} pk_medium;

/* The known range; where there is no limit 0 and INFINITY, and -273.15 (absolute zero). */
typedef struct pk_material_range {
  double shortest_um, longest_um;
  double coldest_c, hottest_c;
} pk_material_range;

picket_status pk_materials_create(picket_context *context, pk_materials **out);
void pk_materials_free(pk_materials *materials); /* accepts null */

int pk_materials_count(const pk_materials *materials);
/* The number of a name, -1 if there is none. */
int pk_materials_find(const pk_materials *materials, const char *name);
const char *pk_materials_name(const pk_materials *materials, int material);
/* One line for people: model, source, range; borrowed. */
const char *pk_materials_source(const pk_materials *materials, int material);
pk_material_range pk_materials_range(const pk_materials *materials, int material);
/* Where all materials marked in used [count] are known; 0 to infinity if none is marked, shortest
 * above longest where they have nothing in common. */
pk_material_range pk_materials_common_range(const pk_materials *materials, const bool *used);

/* Adding materials. Each takes a new unique `name` and the `place` it was defined (for messages at
 * evaluation), and on success the new material has the number pk_materials_count() - 1.
 * Values out of range are PICKET_ERROR_INPUT at `place`. */

/* n + iκ at 20 °C, linear in temperature: n(T) = index + dn_dt (T - 20 °C).
 * index > 0; extinction >= 0. */
picket_status pk_materials_add_constant(pk_materials *materials, pk_place place, const char *name,
                                        double index, double extinction, double dn_dt_per_k);
/* The same for a medium that may amplify: extinction of either sign. */
picket_status pk_materials_add_amplifier(pk_materials *materials, pk_place place, const char *name,
                                         double index, double extinction, double dn_dt_per_k);

/* n² = 1 + Σ B λ²/(λ² - C²), `count` terms, 1 to 8; λ in µm. Poles inside a wanted wavelength are
 * met at evaluation: n² <= 0 or λ = C is PICKET_ERROR_RANGE. */
picket_status pk_materials_add_sellmeier(pk_materials *materials, pk_place place, const char *name,
                                         int count, const double *b, const double *c_um);

/* n and κ at `count` rising wavelengths (µm), at least 4; a cubic spline between them (natural
 * ends), valid from the first to the last. n > 0 and κ >= 0; κ is clipped at zero between points.
 */
picket_status pk_materials_add_table(pk_materials *materials, pk_place place, const char *name,
                                     int count, const double *wavelength_um, const double *n,
                                     const double *k);

/* One of the built-in materials; an unknown entry names the nearest one and lists all. */
picket_status pk_materials_add_catalogue(pk_materials *materials, pk_place place, const char *name,
                                         const char *entry);
/* Entry i of the catalogue, null past its end: for lists and completion. */
const char *pk_catalogue_entry(int i);

/* The effective index of a film stack (effective index method), dispersive and temperature
 * dependent through its films; a mode of order `order`. Films are numbers of materials of this set
 * that were added before; slabs may stand on slabs, PK_SLAB_NESTING deep. A cut-off slab is
 * PICKET_ERROR_NO_MODE at evaluation. */
enum { PK_SLAB_NESTING = 4, PK_SLAB_FILMS = 1000 };
typedef struct pk_slab_recipe {
  int substrate, cover;
  int film_count;
  const int *film_material;
  const double *film_thickness_um;
  pk_slab_polarization polarization;
  int order;
} pk_slab_recipe;
picket_status pk_materials_add_slab(pk_materials *materials, pk_place place, const char *name,
                                    const pk_slab_recipe *recipe);

/* A stack of layers across z, repeated without end, as one anisotropic material by second-order
 * homogenisation (Rytov 1956): the segmented core of a section. `films` of the recipe are the
 * layers of one period; its other entries do not matter. Layers are numbers of materials of this
 * set that were added before and are not layered themselves. */
picket_status pk_materials_add_layered(pk_materials *materials, pk_place place, const char *name,
                                       const pk_slab_recipe *recipe);
bool pk_materials_is_layered(const pk_materials *materials, int material);

/* xx, yy and zz entries of a material: three equal ones unless it is layered. As pk_materials_at,
 * which gives the xx entry. */
picket_status pk_materials_tensor_at(const pk_materials *materials, int material,
                                     double wavelength_um, double temperature_c, pk_medium out[3]);

/* The material at a vacuum wavelength and a temperature.
 * PICKET_ERROR_RANGE outside its range, PICKET_ERROR_NO_MODE for a cut-off slab; the message names
 * the material, the value and the range. */
picket_status pk_materials_at(const pk_materials *materials, int material, double wavelength_um,
                              double temperature_c, pk_medium *out);

/* The films of a recipe at a wavelength as pk_slab, in `slab` and `films` (film_count long). */
picket_status pk_materials_slab_at(const pk_materials *materials, const pk_slab_recipe *recipe,
                                   double wavelength_um, double temperature_c, pk_slab *slab,
                                   pk_slab_film *films);

#endif
