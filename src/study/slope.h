/* lᵀ (∂T/∂p) r for a value p of the problem, the grid moving with the geometry.
 *
 * The operator is assembled at two values below p and two above, on grids that correspond line by
 * line, for T is smooth in p: f' = (f₋₂ - 8 f₋₁ + 8 f₁ - f₂)/12 per step. Geometry and grid are
 * differenced with the media held; how T changes with the media is known exactly
 * (pk_operator_media_forms), and only their permittivities are differenced: corrections of corners
 * are known to 5e-11, too little for the small change that a kelvin makes. */
#ifndef PK_STUDY_SLOPE_H
#define PK_STUDY_SLOPE_H

#include "study/derivative.h"
#include "study/level.h"

/* The neighbouring operators of a grid. */
typedef struct pk_slope {
  const pk_variation *variation;
  pk_level level[PK_NEIGHBOURS];
} pk_slope;

/* On member m of the family of a base grid of variation->problem. PICKET_ERROR_UNSUPPORTED where
 * interfaces meet or part. */
picket_status pk_slope_open(const pk_variation *variation, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_slope *out);
void pk_slope_close(pk_slope *slope); /* accepts zeros */

/* The slope of what has these values at the neighbours. */
double pk_variation_slope(const pk_variation *variation, const double values[PK_NEIGHBOURS]);

/* lᵀ (∂T/∂p) r at the phase (held) and frequency of a level of variation->problem on the same grid;
 * the frequency itself may depend on p: k0[i] of the neighbours. The level is left with the media
 * at its k0 loaded. */
picket_status pk_slope_form(pk_slope *slope, pk_level *level, pk_phase phase, double level_k0,
                            const double k0[PK_NEIGHBOURS], const double complex *l,
                            const double complex *r, double complex *out);

#endif
