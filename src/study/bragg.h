/* The Bragg condition of a dispersive medium, for the files of this room. */
#ifndef PK_STUDY_BRAGG_H
#define PK_STUDY_BRAGG_H

#include "study/problem.h"

/* The index at a wavelength; NaN where it is not known or there is no mode. */
typedef picket_status (*pk_index_at)(void *user, double wavelength_um, double *index);

/* The longest wavelength that solves λ = 2 Λ n(λ) within the range, to the last digits; NaN if
 * there is none. Fails only as `index_at` does. */
picket_status pk_bragg_solve(double pitch_um, double shortest_um, double longest_um,
                             pk_index_at index_at, void *user, double *wavelength_um);

/* The real part of a material's permittivity at the temperature of the problem; NaN (and no
 * message) where the material is not known. PICKET_ERROR_MEMORY. */
picket_status pk_permittivity_at(const pk_problem *problem, int material, double wavelength_um,
                                 double *permittivity);

/* Turns "there is no number here" into NaN and PICKET_OK; passes on what must stop the work. */
picket_status pk_unknown_is_nan(picket_context *context, picket_status status, double *value);

#endif
