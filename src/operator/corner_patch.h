/* The correction of the grid at a dielectric corner (hy).
 *
 * Near a corner of four quadrants the field is H = H0 + K r^α φ(θ) + ... with one exponent α below
 * 1 (corner_exponent.h; for right angles the exponents come in pairs α, 2 - α). The difference
 * scheme misjudges the energy ∫ η|∇H|² of that singular part by K² h^{2α} times a constant, which
 * then rules the error of every frequency. Multiplying the weights of the four edges that meet at
 * the corner by (1 + c) changes that constant; c is chosen so that it vanishes. It depends only on
 * the ratios of the four permittivities and of the four spacings. */
#ifndef PK_OPERATOR_CORNER_PATCH_H
#define PK_OPERATOR_CORNER_PATCH_H

#include <complex.h>

#include <stdbool.h>

#include "base/context.h"

/* A corner and the grid around it. Quadrants as in pk_corner: (+u +v), (-u +v), (-u -v), (+u -v);
 * arms counted the same way, each the first edge of its quadrant: +u, +v, -u, -v. */
typedef struct pk_corner_site {
  double complex permittivity[4];
  double spacing[4];
} pk_corner_site;

typedef struct pk_corner_cure {
  double complex alpha; /* the exponent below 1; 1 where there is none to speak of */
  double complex c;
  bool known; /* false (c 0, alpha 1) where the singular solutions are not known: a permittivity
                 whose real part is not positive */
} pk_corner_cure;

/* For complex permittivities α and c are continued analytically: the error of a complex frequency
 * is the same analytic function of the permittivities, so it is this c, not its real part, that
 * removes it; the operator stays complex symmetric. PICKET_ERROR_MEMORY. */
picket_status pk_corner_correction(picket_context *context, const pk_corner_site *site,
                                   pk_corner_cure *out);

/* Discrete less exact energy of the singular solution on a patch of n cells along each arm, corner
 * weights times (1 + c). For tests and for pk_corner_correction. */
picket_status pk_corner_patch_excess(picket_context *context, const pk_corner_site *site,
                                     double complex alpha, int n, int count,
                                     const double complex *c, double complex *excess);

#endif
