/* How fast an answer changes with a value of the problem.
 *
 * By the theorem of Hellmann and Feynman on the discrete operator, with the grid moving along with
 * the geometry: no second solve, and the derivative of what is computed, to rounding. Extrapolated
 * and given bars like the values themselves. */
#ifndef PICKET_DERIVATIVE_H
#define PICKET_DERIVATIVE_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Derivatives of the edges of one stop band, in µm per unit of the varied value. An edge that is
 * missing has NaN with a note. */
typedef struct picket_edge_derivative {
  int order;
  picket_quantity short_um;
  picket_quantity long_um;
} picket_edge_derivative;

typedef struct picket_edge_derivatives {
  picket_polarization polarization;
  int band_count;
  const picket_edge_derivative *bands; /* borrowed from the result */
} picket_edge_derivatives;

/* Derivative of the fundamental mode's Bloch index at a wavelength, per unit of the varied value.
 */
typedef struct picket_index_derivative {
  double wavelength_um;
  picket_quantity bloch_index;
} picket_index_derivative;

typedef struct picket_index_derivatives {
  picket_polarization polarization;
  int point_count;
  const picket_index_derivative *points; /* borrowed from the result */
} picket_index_derivatives;

/* Derivatives of the stop-band edges with respect to the number at a dotted path of the problem,
 * e.g. "cell.pitch_nm", "cell.shapes.0.width_nm", "materials.resin.constant.index",
 * "temperature_c".
 *   path     must name a single finite number that the document states
 *   options  null for the defaults; count as in picket_edges_find
 * PICKET_ERROR_INPUT if the path names no number or moving the value by a thousandth makes the
 * problem wrong; PICKET_ERROR_UNSUPPORTED where interfaces meet or part, so that there is no
 * derivative. Cost: as picket_edges_find on whole cells, plus four assemblies per grid. */
PICKET_EXPORT picket_status picket_edge_derivatives_find(picket_problem *problem, const char *path,
                                                         const picket_options *options,
                                                         picket_result **out);
PICKET_EXPORT int picket_edge_derivatives_count(const picket_result *result);
PICKET_EXPORT picket_status picket_edge_derivatives_get(const picket_result *result, int i,
                                                        picket_edge_derivatives *out);

/* Derivatives of the Bloch index at each wavelength of `light`, as above; the path may also be
 * "light.wavelength_nm" where that is a single number. */
PICKET_EXPORT picket_status picket_index_derivatives_find(picket_problem *problem, const char *path,
                                                          const picket_options *options,
                                                          picket_result **out);
PICKET_EXPORT int picket_index_derivatives_count(const picket_result *result);
PICKET_EXPORT picket_status picket_index_derivatives_get(const picket_result *result, int i,
                                                         picket_index_derivatives *out);

#ifdef __cplusplus
}
#endif

#endif
