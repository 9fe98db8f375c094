/* Singular solutions at a point where sectors of different media meet.
 *
 *   ∇·(η ∇H) = 0,  H = r^α φ(θ),  η = 1/ε constant in each sector
 *
 * In sector q, which begins at the angle θ_q, φ = a_q cos α(θ - θ_q) + b_q sin α(θ - θ_q). Across
 * an interface φ and ηφ' are continuous, so going once around, M(α) = Π T_q(α),  T = [cos αΘ, sin
 * αΘ / η; -η sin αΘ, cos αΘ]  on  (φ, ηφ'/α), must have the eigenvalue 1; det M = 1 makes that tr
 * M(α) = 2. For positive ε this is a Hill equation (W. Magnus and S. Winkler, Hill's Equation,
 * 1966): tr M swings between extremes at or below -2 and at or above +2, so every maximum holds two
 * exponents, which coincide where it just touches 2. */
#ifndef PK_OPERATOR_CORNER_EXPONENT_H
#define PK_OPERATOR_CORNER_EXPONENT_H

#include <complex.h>
#include <stdbool.h>

enum { PK_SECTORS = 8, PK_CORNER_EXPONENTS = 16 };

typedef struct pk_sectors {
  int count;                /* 2 to PK_SECTORS */
  double angle[PK_SECTORS]; /* opening angles, radians, each above 0; they add up to 2π */
  double complex permittivity[PK_SECTORS];
} pk_sectors;

/* The exponents with real part in (0, 2), by rising real part, double ones twice; their number is
 * returned. -1, and nothing written, where the real part of a permittivity is not positive (metals:
 * the exponents need not be discrete steps of a Hill equation) or a complex one could not be
 * followed from its real part. */
int pk_corner_exponents(const pk_sectors *sectors, double complex alpha[PK_CORNER_EXPONENTS]);

/* a and b of a solution at an exponent, scaled so that the largest |a|² + |b|² is 1. `which`
 * chooses between the two solutions of a double exponent (0 or 1) and is ignored at single ones. */
void pk_corner_shape(const pk_sectors *sectors, double complex alpha, int which,
                     double complex a[PK_SECTORS], double complex b[PK_SECTORS]);

/* tr M(α) - 2: zero at an exponent. */
double complex pk_corner_mismatch(const pk_sectors *sectors, double complex alpha);

#endif
