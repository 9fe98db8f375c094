/* A segmented core as a stack of homogenised films.
 *
 * The core is cut along the guide at every axis-parallel interface; a strip between two cuts is, in
 * its middle, a stack of layers along z and becomes a film whose permittivity is the second-order
 * average of that stack (rytov.c). A field along the layers is E_y or E_x, one across them E_z; so
 * with x normal to the films
 *   ey:  ε_y = ε∥₂                 hy:  ε_x = ε∥₂, ε_z = ε⊥₂.
 * Discs and oblique edges have no such cuts: their extent is cut into equal strips besides. */
#include "study/core.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "study/bragg.h"
#include "study/estimate.h"

/* Of the averages: a core of one medium must not be refused for its last bits. */
static const double ROUNDING = 1e-12;

enum {
  OBLIQUE_STRIPS = 24,   /* staircase of a curved core: its error is far below the estimate's */
  FIRST_INTERVALS = 16,  /* of a profile; doubled until it fits */
  MOST_INTERVALS = 65536 /* more than the shapes of a file can make */
};
static const double SAME = 1e-9; /* of the pitch: cuts closer than this are one (geometry.h) */
static const double PI = 3.14159265358979323846;

static void strip_clear(picket_context *context, pk_strip *strip) {
  pk_free(context, strip->boundary_um);
  pk_free(context, strip->material);
  pk_free(context, strip->permittivity);
  *strip = (pk_strip){0};
}

void pk_core_free(pk_core *core) {
  if (!core || !core->problem) {
    return;
  }
  picket_context *context = core->problem->context;
  for (int i = 0; core->strips && i < core->count; i++) {
    strip_clear(context, &core->strips[i]);
  }
  pk_free(context, core->strips);
  pk_free(context, core->films);
  *core = (pk_core){0};
}

static picket_status strip_allocate(picket_context *context, int capacity, pk_strip *strip) {
  strip->boundary_um = PK_NEW(context, capacity + 1, double);
  strip->material = strip->boundary_um ? PK_NEW(context, capacity, int) : NULL;
  strip->permittivity = strip->material ? PK_NEW(context, capacity, double) : NULL;
  return strip->permittivity ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* The profile at x, with as much room as it turns out to need. */
static picket_status strip_fill(const pk_problem *problem, double x, pk_strip *strip) {
  picket_context *context = problem->context;
  for (int capacity = FIRST_INTERVALS;; capacity *= 2) {
    picket_status status = strip_allocate(context, capacity, strip);
    if (status == PICKET_OK) {
      status = pk_geometry_profile(problem->cell.geometry, x, capacity, strip->boundary_um,
                                   strip->material, &strip->count);
    }
    if (status == PICKET_OK) {
      return PICKET_OK;
    }
    strip_clear(context, strip);
    if (status != PICKET_ERROR_UNSUPPORTED || capacity >= MOST_INTERVALS) {
      return status;
    }
    pk_message_clear(context);
  }
}

static int compare(const void *a, const void *b) {
  double x = *(const double *)a;
  double y = *(const double *)b;
  return (x > y) - (x < y);
}

/* Sorted cuts from low to high without doubles, in *out (the caller's). */
static picket_status find_cuts(const pk_problem *problem, double low, double high, double **out,
                               int *count) {
  picket_context *context = problem->context;
  double *lines = NULL;
  int line_count = 0;
  picket_status status = pk_geometry_lines(problem->cell.geometry, PK_V, &lines, &line_count);
  if (status != PICKET_OK) {
    return status;
  }
  int extra = pk_geometry_is_rectangular(problem->cell.geometry) ? 1 : OBLIQUE_STRIPS;
  double *cuts = PK_NEW(context, line_count + extra + 1, double);
  if (!cuts) {
    pk_free(context, lines);
    return PICKET_ERROR_MEMORY;
  }
  int used = 0;
  for (int i = 0; i <= extra; i++) {
    cuts[used++] = i == extra ? high : low + (high - low) * i / extra;
  }
  for (int i = 0; i < line_count; i++) {
    if (lines[i] > low && lines[i] < high) {
      cuts[used++] = lines[i];
    }
  }
  qsort(cuts, (size_t)used, sizeof *cuts, compare);
  int kept = 1;
  for (int i = 1; i < used; i++) {
    if (cuts[i] - cuts[kept - 1] > SAME * problem->cell.pitch_um) {
      cuts[kept++] = cuts[i];
    }
  }
  pk_free(context, lines);
  *out = cuts;
  *count = kept;
  return PICKET_OK;
}

static picket_status add_strips(pk_core *core, int count, const double *cuts) {
  picket_context *context = core->problem->context;
  core->strips = PK_NEW(context, count, pk_strip);
  core->films = core->strips ? PK_NEW(context, count, pk_slab_film) : NULL;
  if (!core->films) {
    return PICKET_ERROR_MEMORY;
  }
  core->count = count;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    double low = cuts ? cuts[i] : 0;
    double high = cuts ? cuts[i + 1] : 0;
    core->strips[i].thickness_um = high - low;
    status = strip_fill(core->problem, low + (high - low) / 2, &core->strips[i]);
  }
  return status;
}

static void limit_to(pk_core *core, int material) {
  pk_material_range range = pk_materials_range(core->problem->materials, material);
  core->shortest_um = fmax(core->shortest_um, range.shortest_um);
  core->longest_um = fmin(core->longest_um, range.longest_um);
}

static void find_range(pk_core *core) {
  core->shortest_um = 0;
  core->longest_um = INFINITY;
  for (int i = 0; i < core->count; i++) {
    for (int k = 0; k < core->strips[i].count; k++) {
      limit_to(core, core->strips[i].material[k]);
    }
  }
  if (core->low_side >= 0) {
    limit_to(core, core->low_side);
    limit_to(core, core->high_side);
  }
}

/* The strips of an open cell; *applies is false if there are none. */
static picket_status cut_open(pk_core *core, bool *applies) {
  const pk_geometry *geometry = core->problem->cell.geometry;
  double low = 0;
  double high = 0;
  *applies = pk_geometry_extent(geometry, PK_V, &low, &high) &&
             high - low > SAME * core->problem->cell.pitch_um &&
             pk_geometry_side_media(geometry, PK_V, &core->low_side, &core->high_side);
  if (!*applies) {
    return PICKET_OK;
  }
  double *cuts = NULL;
  int count = 0;
  picket_status status = find_cuts(core->problem, low, high, &cuts, &count);
  if (status == PICKET_OK) {
    status = add_strips(core, count - 1, cuts);
  }
  pk_free(core->problem->context, cuts);
  return status;
}

picket_status pk_core_create(const pk_problem *problem, pk_polarization polarization, pk_core *out,
                             bool *applies) {
  pk_core core = {
      .problem = problem, .polarization = polarization, .low_side = -1, .high_side = -1};
  picket_status status = PICKET_OK;
  bool does = problem->cell.lateral == PK_LATERAL_UNIFORM;
  if (does) {
    status = add_strips(&core, 1, NULL);
  } else if (problem->cell.lateral == PK_LATERAL_OPEN) {
    status = cut_open(&core, &does);
  }
  if (status != PICKET_OK || !does) {
    pk_core_free(&core);
  } else {
    find_range(&core);
  }
  if (status == PICKET_OK) {
    *out = core;
    *applies = does;
  }
  return status;
}

/* Permittivities of the layers of a strip; *known is false where one is unknown or not above 0. */
static picket_status load(const pk_core *core, pk_strip *strip, double wavelength_um, bool *known) {
  for (int k = 0; k < strip->count; k++) {
    int earlier = 0; /* segments repeat two or three materials, some of which are costly */
    while (strip->material[earlier] != strip->material[k]) {
      earlier++;
    }
    if (earlier < k) {
      strip->permittivity[k] = strip->permittivity[earlier];
      continue;
    }
    picket_status status = pk_permittivity_at(core->problem, strip->material[k], wavelength_um,
                                              &strip->permittivity[k]);
    if (status != PICKET_OK) {
      return status;
    }
    *known = *known && strip->permittivity[k] > 0;
  }
  return PICKET_OK;
}

static picket_status homogenise(pk_core *core, double wavelength_um, bool *known) {
  for (int i = 0; i < core->count; i++) {
    pk_strip *strip = &core->strips[i];
    picket_status status = load(core, strip, wavelength_um, known);
    if (status != PICKET_OK || !*known) {
      return status;
    }
    pk_rytov e = pk_rytov_average(strip->count, strip->boundary_um, strip->permittivity,
                                  2 * PI / wavelength_um);
    pk_slab_film *film = &core->films[i];
    film->thickness_um = strip->thickness_um;
    film->medium = pk_slab_isotropic(e.along, 0);
    film->medium.along = e.across; /* along z, which is across the layers */
  }
  return PICKET_OK;
}

static picket_status side(const pk_core *core, int material, double wavelength_um,
                          pk_slab_medium *medium, bool *known) {
  double permittivity = NAN;
  picket_status status = pk_permittivity_at(core->problem, material, wavelength_um, &permittivity);
  *known = *known && permittivity > 0;
  *medium = pk_slab_isotropic(permittivity, 0);
  return status;
}

/* The second-order term grows as (pitch/λ)² without bound. An average above the densest medium it
 * is made of is past where the expansion holds, and no estimate. */
static double within_media(const pk_core *core, double index) {
  double densest = 0;
  for (int i = 0; i < core->count; i++) {
    for (int j = 0; j < core->strips[i].count; j++) {
      densest = fmax(densest, core->strips[i].permittivity[j]);
    }
  }
  return index * index <= densest * (1 + ROUNDING) ? index : NAN;
}

picket_status pk_core_index(pk_core *core, double wavelength_um, double *index) {
  picket_context *context = core->problem->context;
  bool known = true;
  pk_slab slab = {.film_count = core->count, .films = core->films};
  pk_slab_mode mode = {0};
  picket_status status = homogenise(core, wavelength_um, &known);
  if (status == PICKET_OK && known && core->low_side < 0) {
    *index = within_media(core, sqrt(creal(core->films[0].medium.across)));
    return PICKET_OK;
  }
  if (status == PICKET_OK && known) {
    status = side(core, core->low_side, wavelength_um, &slab.substrate, &known);
  }
  if (status == PICKET_OK && known) {
    status = side(core, core->high_side, wavelength_um, &slab.cover, &known);
  }
  if (status != PICKET_OK || !known) {
    *index = NAN;
    return status;
  }
  status =
      pk_slab_mode_of_order(context, &slab, core->polarization == PK_EY ? PK_SLAB_TE : PK_SLAB_TM,
                            wavelength_um, 0, &mode, NULL, NULL);
  *index = within_media(core, creal(mode.index));
  return pk_unknown_is_nan(context, status, index);
}
