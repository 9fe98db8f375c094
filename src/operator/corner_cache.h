/* Corrections of corners met so far, so that each is computed once.
 *
 * A correction does not change when all permittivities or all spacings are scaled, or when the
 * corner is turned or mirrored, so the corners of a rectangle share one, and so do the members of a
 * family of proportional grids. */
#ifndef PK_OPERATOR_CORNER_CACHE_H
#define PK_OPERATOR_CORNER_CACHE_H

#include "operator/corner_patch.h"

typedef struct pk_corner_cache pk_corner_cache;

picket_status pk_corner_cache_create(picket_context *context, pk_corner_cache **out);
void pk_corner_cache_free(pk_corner_cache *cache); /* accepts null */

picket_status pk_corner_cache_cure(pk_corner_cache *cache, const pk_corner_site *site,
                                   pk_corner_cure *out);

/* ∂c/∂ε of the four quadrants. */
picket_status pk_corner_cache_slope(pk_corner_cache *cache, const pk_corner_site *site,
                                    double complex slope[4]);

/* How many corrections were computed, not remembered. */
int pk_corner_cache_misses(const pk_corner_cache *cache);

#endif
