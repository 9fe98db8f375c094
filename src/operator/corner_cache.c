/* See corner_cache.h. A list of the last corners in the order they came; a site is compared in its
 * eight turned and mirrored versions with each of them. Slopes are central differences of the
 * correction. */
#include "operator/corner_cache.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

/* A cell has a handful of different corners; a dispersive solve adds each again at every frequency.
 */
enum { KEPT = 64, VERSIONS = 8 };

/* Ratios closer than this are equal. Spacings of proportional grids agree to about 1e-12. Rounding
 * leaves 5e-11 in c (energies of 1e4 that differ by 1e-2), which sets the rest. */
static const double SAME_SPACING = 1e-9;
static const double SAME_PERMITTIVITY = 1e-11;

/* Relative step of the differences: curvature and rounding each leave some 3e-7 of the slope. */
static const double SLOPE_STEP = 5e-4;

typedef struct kept {
  pk_corner_site site;
  pk_corner_cure cure;
  bool has_slope;
  double complex slope[4];
} kept;

struct pk_corner_cache {
  picket_context *context;
  int count, next, misses;
  kept entry[KEPT];
};

picket_status pk_corner_cache_create(picket_context *context, pk_corner_cache **out) {
  pk_corner_cache *cache = PK_NEW(context, 1, pk_corner_cache);
  if (!cache) {
    return PICKET_ERROR_MEMORY;
  }
  cache->context = context;
  *out = cache;
  return PICKET_OK;
}

void pk_corner_cache_free(pk_corner_cache *cache) {
  if (cache) {
    pk_free(cache->context, cache);
  }
}

int pk_corner_cache_misses(const pk_corner_cache *cache) {
  return cache->misses;
}

/* Version 0 to 3 is a turn by that many quadrants, 4 to 7 a reflection that keeps one arm. Quadrant
 * q lies between the arms q and q + 1. */
static int arm_of(int version, int arm) {
  return version < 4 ? (arm + version) % 4 : (version - arm) % 4;
}

static int quadrant_of(int version, int quadrant) {
  return version < 4 ? (quadrant + version) % 4 : (version + 3 - quadrant) % 4;
}

static bool same_in_version(const pk_corner_site *a, const pk_corner_site *b, int version) {
  double spacing = b->spacing[arm_of(version, 0)] / a->spacing[0];
  double complex scale = b->permittivity[quadrant_of(version, 0)] / a->permittivity[0];
  for (int i = 1; i < 4; i++) {
    double h = b->spacing[arm_of(version, i)];
    double complex e = b->permittivity[quadrant_of(version, i)];
    if (fabs(h - spacing * a->spacing[i]) > SAME_SPACING * h ||
        cabs(e - scale * a->permittivity[i]) > SAME_PERMITTIVITY * cabs(e)) {
      return false;
    }
  }
  return true;
}

/* The entry that a site equals in some version, or null. */
static kept *recall(pk_corner_cache *cache, const pk_corner_site *site, int *version) {
  for (int i = 0; i < cache->count; i++) {
    for (int v = 0; v < VERSIONS; v++) {
      if (same_in_version(site, &cache->entry[i].site, v)) {
        *version = v;
        return &cache->entry[i];
      }
    }
  }
  return NULL;
}

static picket_status fetch(pk_corner_cache *cache, const pk_corner_site *site, kept **out,
                           int *version) {
  *out = recall(cache, site, version);
  if (*out) {
    return PICKET_OK;
  }
  kept fresh = {.site = *site};
  picket_status status = pk_corner_correction(cache->context, site, &fresh.cure);
  if (status != PICKET_OK) {
    return status;
  }
  cache->misses++;
  *out = &cache->entry[cache->next];
  **out = fresh;
  *version = 0;
  cache->next = (cache->next + 1) % KEPT;
  cache->count = cache->count < KEPT ? cache->count + 1 : KEPT;
  return PICKET_OK;
}

picket_status pk_corner_cache_cure(pk_corner_cache *cache, const pk_corner_site *site,
                                   pk_corner_cure *out) {
  kept *entry;
  int version;
  picket_status status = fetch(cache, site, &entry, &version);
  if (status == PICKET_OK) {
    *out = entry->cure;
  }
  return status;
}

/* c is homogeneous of degree 0 in the permittivities, Σ ε_q ∂c/∂ε_q = 0, which gives the last
 * slope. */
static picket_status find_slope(pk_corner_cache *cache, kept *entry) {
  double complex rest = 0;
  const double complex *e = entry->site.permittivity;
  for (int q = 0; q < 3 && entry->cure.alpha != 1; q++) {
    pk_corner_cure side[2];
    for (int i = 0; i < 2; i++) {
      pk_corner_site moved = entry->site;
      moved.permittivity[q] *= 1 + (i == 0 ? -SLOPE_STEP : SLOPE_STEP);
      picket_status status = pk_corner_correction(cache->context, &moved, &side[i]);
      if (status != PICKET_OK) {
        return status;
      }
    }
    entry->slope[q] = (side[1].c - side[0].c) / (2 * SLOPE_STEP * e[q]);
    rest += e[q] * entry->slope[q];
  }
  entry->slope[3] = -rest / e[3];
  entry->has_slope = true;
  return PICKET_OK;
}

picket_status pk_corner_cache_slope(pk_corner_cache *cache, const pk_corner_site *site,
                                    double complex slope[4]) {
  kept *entry;
  int version;
  picket_status status = fetch(cache, site, &entry, &version);
  if (status == PICKET_OK && !entry->has_slope) {
    status = find_slope(cache, entry);
  }
  for (int q = 0; status == PICKET_OK && q < 4; q++) {
    int from = quadrant_of(version, q);
    double complex scale = entry->site.permittivity[from] / site->permittivity[q];
    slope[q] = entry->slope[from] * scale;
  }
  return status;
}
