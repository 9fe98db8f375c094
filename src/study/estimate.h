/* The estimate everyone starts from: an effective medium in the place of the periodic core. Cheap,
 * and good for finding where to look; a study says how far off it is. */
#ifndef PK_STUDY_ESTIMATE_H
#define PK_STUDY_ESTIMATE_H

#include <picket/edges.h>

#include "study/problem.h"

/* Effective permittivities of a stack of layers, for fields along the layers and across them. */
typedef struct pk_rytov {
  double along, across;
} pk_rytov;

/* Second-order homogenisation of one period of a lossless stack.
 *   boundaries    [count + 1] rising, µm; the period is boundaries[count] - boundaries[0]
 *   permittivity  [count], none 0
 *   k0            vacuum wavenumber, 1/µm; 0 gives the first order, which is the static limit */
pk_rytov pk_rytov_average(int count, const double *boundaries, const double *permittivity,
                          double k0);

/* Centre of the first stop band of a cell, estimated: λ = 2 Λ n(λ) with n the index of the
 * fundamental slab mode of the homogenised core (open), or of the homogenised stack (uniform).
 *   out   method null: the estimate does not apply to such a cell; centre NaN: the condition has no
 *         solution where the materials are known. The error is left open, NaN with a note.
 * PICKET_ERROR_MEMORY. */
picket_status pk_estimate(const pk_problem *problem, pk_polarization polarization,
                          picket_edge_estimate *out);

/* Index of the homogenised guide at a wavelength; NaN where the estimate does not apply (also past
 * the pitch at which it would exceed every medium), is unknown
 * or guides nothing. PICKET_ERROR_MEMORY. */
picket_status pk_estimated_index(const pk_problem *problem, pk_polarization polarization,
                                 double wavelength_um, double *index);

/* The vacuum wavelength at which a plane wave in a material meets the zone edge, λ = 2 Λ n(λ): the
 * light line of a side of that material. NaN if it is outside the range of the material. */
picket_status pk_light_line(const pk_problem *problem, int material, double *wavelength_um);

#endif
