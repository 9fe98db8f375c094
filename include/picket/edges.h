/* The stop bands of a segmented guide and how far the operating band is from them. */
#ifndef PICKET_EDGES_H
#define PICKET_EDGES_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* One stop band of the fundamental guided mode's own family. Wavelengths are vacuum wavelengths. */
typedef struct picket_stop_band {
  int order;                /* m: the band opens at k = mπ/pitch */
  picket_quantity short_um; /* short-wavelength edge */
  picket_quantity long_um;  /* long-wavelength edge */
  bool short_confined;      /* below the light line of every open side */
  bool long_confined;
  picket_quantity attenuation_db_per_pitch; /* the largest inside */
} picket_stop_band;

/* The operating band (`light` of the problem) against the first stop band. */
typedef struct picket_operating_band {
  bool given;
  double from_um, to_um;
  picket_regime regime;         /* the worst over the band */
  picket_quantity clearance_um; /* from_um - long edge of order 1; negative: reaches into it */
} picket_operating_band;

/* The estimate everyone starts from: second-order Rytov homogenisation of the core, the slab of
 * that core, and the Bragg condition λ = 2 Λ n(λ). */
typedef struct picket_edge_estimate {
  const char *method;       /* static text; null if the estimate does not apply */
  double centre_um;         /* estimated centre of the first stop band; NaN if there is none */
  picket_quantity error_um; /* estimate minus the centre found */
} picket_edge_estimate;

typedef struct picket_edges_answer {
  picket_polarization polarization;
  int band_count;
  const picket_stop_band *bands; /* borrowed from the result */
  picket_operating_band operating;
  picket_edge_estimate estimate;
  const char *note; /* why the answer could not be computed, in a sweep; null otherwise */
  int failed;       /* 1 if it could not: there are no bands then */
} picket_edges_answer;

/* Finds the stop bands of the problem's cell, for each polarization of its `light` (both without
 * one), `options->count` orders (default 1).
 *   options  null for the defaults
 *   out      receives the result, yours to free
 * PICKET_ERROR_INPUT if the problem is wrong or has no cell, PICKET_ERROR_NO_MODE if the cell
 * guides no mode, PICKET_ERROR_RANGE, PICKET_ERROR_NUMERIC, PICKET_ERROR_MEMORY,
 * PICKET_ERROR_STOPPED. Cost: two or three grids, on each a few sparse factorisations per edge. */
PICKET_EXPORT picket_status picket_edges_find(picket_problem *problem,
                                              const picket_options *options, picket_result **out);

/* How many polarizations the result of picket_edges_find holds; 0 for another kind of result. */
PICKET_EXPORT int picket_edges_count(const picket_result *result);

/* The answer for polarization number i, 0 <= i < picket_edges_count(result).
 * PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_edges_get(const picket_result *result, int i,
                                             picket_edges_answer *out);

/* What a two-dimensional model of a channel says of the long edge of its first stop band. */
typedef struct picket_edge_comparison {
  int answer;               /* number of the answer it stands beside */
  const char *method;       /* static text */
  picket_quantity long_um;  /* NaN with a note where the model has no such edge */
  picket_quantity error_um; /* minus the edge of the channel */
} picket_edge_comparison;

/* As picket_edges_find for a channel, with the models in use beside each answer: the cell seen from
 * above with slab indices, and the section of the homogenised row.
 * PICKET_ERROR_INPUT also for a problem with a cell. */
PICKET_EXPORT picket_status picket_edges_compare(picket_problem *problem,
                                                 const picket_options *options,
                                                 picket_result **out);

/* Comparisons in the result of picket_edges_compare; 0 for another result. */
PICKET_EXPORT int picket_edges_comparison_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_edges_comparison_get(const picket_result *result, int i,
                                                        picket_edge_comparison *out);

#ifdef __cplusplus
}
#endif

#endif
