/* lᵀ (∂T/∂p) r for a value p of the problem, the grid moving with the geometry.
 *
 * The operator is assembled a little below and a little above p on grids that correspond line by
 * line; the difference of the two bilinear forms has no noise but rounding, for T is smooth in p.
 */
#ifndef PK_STUDY_SLOPE_H
#define PK_STUDY_SLOPE_H

#include "study/derivative.h"
#include "study/level.h"

/* The two neighbouring operators of a grid. */
typedef struct pk_slope {
  const pk_variation *variation;
  pk_level level[2]; /* minus, plus */
} pk_slope;

/* On member m of the family of a base grid of variation->problem. PICKET_ERROR_UNSUPPORTED where
 * interfaces meet or part. */
picket_status pk_slope_open(const pk_variation *variation, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_slope *out);
void pk_slope_close(pk_slope *slope); /* accepts zeros */

/* lᵀ (∂T/∂p) r with T at a phase (held) and a frequency, which itself may depend on p: k0 = {below,
 * above}. */
picket_status pk_slope_form(pk_slope *slope, pk_phase phase, const double k0[2],
                            const double complex *l, const double complex *r, double complex *out);

#endif
