/* Wavenumbers near a band edge.
 *
 * At an edge k(ω) has a square-root branch: k = K ± (c (ω - ω_e))^½ with K = mπ/Λ. Its square,
 *   s = ((k - K) Λ/π)²,
 * is smooth in ω and in the grid spacing, through the edge and into the stop band (s < 0), so s is
 * extrapolated in the place of k, and g = (dk/dk0) (k - K) Λ/π in the place of the group index. */
#ifndef PK_STUDY_BRANCH_H
#define PK_STUDY_BRANCH_H

#include <complex.h>

#include <picket/quantity.h>

typedef struct pk_branch {
  double pitch_um;
  int boundary; /* m of K, at least 1 */
  int side;     /* -1: Re k below K, 1: above */
} pk_branch;

/* The branch of a wavenumber (1/µm): the nearest boundary. */
pk_branch pk_branch_of(double complex k, double pitch_um);

/* The same for every spatial harmonic of a wave, and for its reflection. */
double complex pk_branch_square(const pk_branch *branch, double complex k);
double complex pk_branch_product(const pk_branch *branch, double complex k, double complex dk_dk0);

/* The side of K on which the wave lies, from g: its sign is that of (k - K) dk/dk0, the same for a
 * wave and for its reflection, so grids may disagree about which of the two they found. */
void pk_branch_take_side(pk_branch *branch, double product);

/* k from an extrapolated s: its real and imaginary parts with bars (the largest change over the
 * corners of the bars of s). */
void pk_branch_wavenumber(const pk_branch *branch, picket_quantity square_real,
                          picket_quantity square_imaginary, picket_quantity *k_real,
                          picket_quantity *k_imaginary);

/* The group index Re(g/√s) from extrapolated g and s, {real, imaginary} each; NaN inside the stop
 * band. */
picket_quantity pk_branch_group_index(const picket_quantity product[2],
                                      const picket_quantity square[2]);

/* The uncertainty of s that leaves k with a relative uncertainty. */
double pk_branch_allowed(const pk_branch *branch, double square_real, double relative);

#endif
