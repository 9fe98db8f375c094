/* A result: what a study found, kept until it is freed. Ask it for numbers through the header of
 * the study (edges.h, bands.h, slab.h), or for a document. */
#ifndef PICKET_RESULT_H
#define PICKET_RESULT_H

#include <stdbool.h>

#include <picket/context.h>
#include <picket/quantity.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_result picket_result;

/* Polarization of a cell, by the field normal to the drawing plane; of the modes of a channel, by
 * the larger transverse electric component, in x (te-like) or in y (tm-like). Seen from above, the
 * drawing plane of a cell (z, x) has the normal y: te-like is then its hy, tm-like its ey. */
typedef enum picket_polarization {
  PICKET_EY = 0,
  PICKET_HY = 1,
  PICKET_TM_LIKE = 2,
  PICKET_TE_LIKE = 3
} picket_polarization;

/* The word of a polarization: "ey", "hy", "tm-like", "te-like". Static text. */
PICKET_EXPORT const char *picket_polarization_name(picket_polarization polarization);

/* How a segmented guide works at a wavelength. */
typedef enum picket_regime {
  PICKET_REGIME_UNKNOWN = 0,
  PICKET_REGIME_SUBWAVELENGTH = 1, /* on the long side of the first stop band: guides as if solid */
  PICKET_REGIME_STOP_BAND = 2,     /* a mirror */
  PICKET_REGIME_RADIATING = 3      /* leaks into an open side */
} picket_regime;

/* The word of a regime: "subwavelength", "stop-band", "radiating", "unknown". Static text. */
PICKET_EXPORT const char *picket_regime_name(picket_regime regime);

/* True if every number that was asked for reached the accuracy asked for; false: the result is
 * partial, its notes say why. A number whose bar cannot be vouched for makes a result partial. */
PICKET_EXPORT bool picket_result_complete(const picket_result *result);

/* One sentence on what is missing when the result is partial; "" otherwise. Borrowed. */
PICKET_EXPORT const char *picket_result_shortfall(const picket_result *result);

/* The result as a JSON document (see the problem-file contract), or as comma-separated values with
 * one header line, units in the names of the columns. Lengths are nm in both. Borrowed until the
 * result is freed; null if memory is out or another call is using the context. */
PICKET_EXPORT const char *picket_result_json(picket_result *result);
PICKET_EXPORT const char *picket_result_csv(picket_result *result);

/* The same with a status that says why there is none.
 *   out   receives the text, borrowed until the result is freed
 * PICKET_ERROR_ARGUMENT, PICKET_ERROR_MEMORY, PICKET_ERROR_BUSY. */
PICKET_EXPORT picket_status picket_result_json_get(picket_result *result, const char **out);
PICKET_EXPORT picket_status picket_result_csv_get(picket_result *result, const char **out);

/* Lets go of a result; null is accepted. */
PICKET_EXPORT void picket_result_free(picket_result *result);

#ifdef __cplusplus
}
#endif

#endif
