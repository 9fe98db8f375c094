/* Fields of Bloch modes: see picket/field.h for what is stored and how it is scaled. */
#ifndef PK_STUDY_FIELDS_H
#define PK_STUDY_FIELDS_H

#include <complex.h>

#include <picket/field.h>

#include "operator/components.h"
#include "study/look.h"

struct picket_field {
  picket_context *context; /* held */
  picket_field_description about;
  int nz, nx;
  double *z, *x;                      /* [nz], [nx] µm */
  double complex *along, *across, *y; /* [nz*nx] components of y: the unknown; z and x of the other
                                         field */
  double complex *permittivity;       /* [nz*nx] */
};

/* The array of a component; null if it is zero for the polarization. */
const double complex *pk_mode_field_values(const picket_field *field, picket_component which);
void pk_mode_field_free(picket_field *field); /* accepts null and half-built fields */

/* One mode at one wavelength. Errors as picket_field_find. */
picket_status pk_mode_field(const pk_problem *problem, pk_polarization polarization,
                            double wavelength_um, const picket_options *options, int order,
                            picket_field **out);

/* One mode of a look on a grid of the caller's. PICKET_ERROR_NUMERIC if it cannot be followed
 * there.
 */
picket_status pk_field_on(const pk_look *look, pk_level *level, const pk_followed *mode,
                          picket_field **out);

/* Takes what a sweep finds; a status other than PICKET_OK ends the sweep with it. */
typedef struct pk_field_sink {
  picket_status (*take)(void *user, const picket_field *field); /* borrowed for the call */
  /* A wavelength without fields, and why. */
  picket_status (*miss)(void *user, pk_polarization polarization, double wavelength_um,
                        const char *why);
  void *user;
} pk_field_sink;

/* All wavelengths, polarizations and modes of a problem. If nothing could be had anywhere, the
 * failure of the first point is the failure of the whole. */
picket_status pk_study_fields(const pk_problem *problem, const picket_options *options,
                              const pk_field_sink *sink);

#endif
