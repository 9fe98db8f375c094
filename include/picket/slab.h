/* Guided modes of a stack of films, analytic. */
#ifndef PICKET_SLAB_H
#define PICKET_SLAB_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Polarization of a slab mode in the planar-waveguide sense: te has E along the films. */
typedef enum picket_slab_polarization { PICKET_TE = 0, PICKET_TM = 1 } picket_slab_polarization;

/* "te" or "tm"; "unknown" for any other number. Static text. */
PICKET_EXPORT const char *picket_slab_polarization_name(picket_slab_polarization polarization);

typedef struct picket_slab_mode {
  int order; /* number of zeros of the field */
  picket_quantity index;
  picket_quantity group_index; /* with material dispersion */
} picket_slab_mode;

typedef struct picket_slab_point {
  double wavelength_um;
  int mode_count;
  const picket_slab_mode *modes; /* by falling index; borrowed from the result */
} picket_slab_point;

typedef struct picket_slab_answer {
  picket_slab_polarization polarization;
  int point_count;
  const picket_slab_point *points; /* borrowed */
  const char *note; /* why the answer could not be computed, in a sweep; null otherwise */
  int failed;       /* 1 if it could not: there are no points then */
} picket_slab_answer;

/* All guided modes of the problem's `slab` at each wavelength of its `light`, for the polarization
 * of the slab block (both without one); the first `options->count` of them unless that is 0. The
 * other options do not matter here. PICKET_ERROR_INPUT if there is no slab or no light,
 * PICKET_ERROR_RANGE outside a material's range. A stack that guides nothing gives points without
 * modes. */
PICKET_EXPORT picket_status picket_slab_find(picket_problem *problem, const picket_options *options,
                                             picket_result **out);

PICKET_EXPORT int picket_slab_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_slab_get(const picket_result *result, int i,
                                            picket_slab_answer *out);

#ifdef __cplusplus
}
#endif

#endif
