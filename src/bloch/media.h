/* The media of an operator at a frequency: permittivities and their slopes, from the materials of
 * the problem at its temperature. Only media that the operator uses are evaluated. */
#ifndef PK_BLOCH_MEDIA_H
#define PK_BLOCH_MEDIA_H

#include <complex.h>

#include "material/material.h"
#include "operator/operator.h"

typedef struct pk_media {
  picket_context *context;
  const pk_materials *materials; /* borrowed */
  double temperature_c;
  int count;
  bool *used;                     /* [count] */
  double shortest_um, longest_um; /* wavelengths at which every used material is known */
  bool dispersive;                /* after a set: any slope is not zero */
  bool clamped;                   /* after a set: the frequency was moved into the known range */
  double complex *permittivity;   /* [count] */
  double complex *slope;          /* [count] k0 dε/dk0 */
} pk_media;

/* Which media count is said by `op`. */
picket_status pk_media_open(picket_context *context, const pk_materials *materials,
                            double temperature_c, const pk_operator *op, pk_media *out);
void pk_media_close(pk_media *media); /* accepts zeros */

/* Evaluates the media at k0 (1/µm) and loads them into the operator. A frequency outside the known
 * range is moved to its end and marked `clamped`: an iteration may pass there, a result may not
 * stay there. PICKET_ERROR_NO_MODE for a cut-off slab material. */
picket_status pk_media_set(pk_media *media, double k0, pk_operator *op);

/* lᵀ (∂T/∂k0) r with T = A - k0² B at fixed phase, media slopes included. */
picket_status pk_media_frequency_form(const pk_media *media, const pk_operator *op, pk_phase phase,
                                      double k0, const double complex *l, const double complex *r,
                                      double complex *out);

#endif
