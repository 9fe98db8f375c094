/* Bands ω(k) of a cell along a path of wavenumbers, and the gaps between them. */
#ifndef PICKET_BANDS_H
#define PICKET_BANDS_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_band_point {
  double kz, kx;     /* in π/pitch and π/lateral span */
  const char *label; /* of the path point, or null */
  const picket_quantity
      *frequency; /* [band_count] pitch/λ, rising; a value of NaN: not guided (open
                     cells, above the light line) or a material is unknown there */
} picket_band_point;

/* A range of frequencies without a mode at any point of the path. */
typedef struct picket_gap {
  int below;            /* number of bands below the gap */
  picket_quantity from; /* pitch/λ, top of band `below` */
  picket_quantity to;   /* bottom of the next band */
} picket_gap;

typedef struct picket_bands_answer {
  picket_polarization polarization;
  int band_count;
  int point_count;
  const picket_band_point *points; /* borrowed from the result */
  int gap_count;
  const picket_gap *gaps; /* borrowed */
} picket_bands_answer;

/* Bands of the problem's cell along its `path` (default: zone centre to zone edge along z), with
 * `options->points` wavenumbers per leg and `options->count` bands (default 6).
 * Errors and cost as for picket_edges_find, with a factorisation per wavenumber and grid. */
PICKET_EXPORT picket_status picket_bands_find(picket_problem *problem,
                                              const picket_options *options, picket_result **out);

/* Polarizations in the result of picket_bands_find; 0 for another kind of result. */
PICKET_EXPORT int picket_bands_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_bands_get(const picket_result *result, int i,
                                             picket_bands_answer *out);

#ifdef __cplusplus
}
#endif

#endif
