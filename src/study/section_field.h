/* Fields of modes of a section: see picket/section_field.h for what is stored and how it is scaled.
 */
#ifndef PK_STUDY_SECTION_FIELD_H
#define PK_STUDY_SECTION_FIELD_H

#include <picket/section_field.h>

#include "section/unfold.h"
#include "study/problem.h"

enum { PK_ELECTRIC = 3 }; /* components of E, first among those of pk_whole_name */

struct picket_section_field {
  picket_context *context; /* held */
  picket_section_field_description about;
  pk_section_whole whole;                    /* E in V/m, h scaled to H in A/m */
  double complex *permittivity[PK_ELECTRIC]; /* at the places of E */
};

void pk_section_field_free(picket_section_field *field); /* accepts null and half-built fields */

/* One mode at one wavelength. Errors as picket_section_field_find. */
picket_status pk_section_field(const pk_problem *problem, double wavelength_um,
                               const picket_options *options, int order,
                               picket_section_field **out);

/* Takes what a sweep finds; a status other than PICKET_OK ends the sweep with it. */
typedef struct pk_section_sink {
  picket_status (*take)(void *user, const picket_section_field *field); /* borrowed for the call */
  /* A wavelength without fields, and why. */
  picket_status (*miss)(void *user, double wavelength_um, const char *why);
  void *user;
} pk_section_sink;

/* All wavelengths and modes of a problem. If nothing could be had anywhere, the failure of the
 * first wavelength is the failure of the whole. */
picket_status pk_study_section_fields(const pk_problem *problem, const picket_options *options,
                                      const pk_section_sink *sink);

#endif
