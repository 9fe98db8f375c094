/* Bloch modes of a channel: a guide whose section (x, y) changes stepwise along z with a pitch Λ.
 *
 * Finite differences in the section, a few Floquet harmonics along z. With h = Z0 H,
 *   E(x, y, z) = Σ_m e_m(x, y) exp(iβ_m z),  β_m = k + 2πm/Λ,  E_z = i e_z,
 * Maxwell's curl equations become, on the staggered grid of section.h,
 *
 *   T(k) e = Cᵀ(β) W C(β) e - k0² M e = 0
 *   C e:  ∂y e_z - β e_y,  β e_x - ∂x e_z,  ∂x e_y - ∂y e_x   (one m at a time)
 *   M:    [[ε_x]] on e_x, [[ε_y]] on e_y, [[1/ε_z]]⁻¹ on e_z  (one site at a time, all m together)
 *
 * [[f]] is the Toeplitz matrix f_{m-m'} of the exact Fourier coefficients of a function that is
 * constant in each slice of z. e_x and e_y are tangential to the walls between slices and take the
 * plain product, e_z is normal to them and takes the inverse rule (L. Li, J. Opt. Soc. Am. A 13,
 * 1870 (1996)). ε of a slice at a site is the section's own average, with its corrections of the
 * corners, so that one slice and the single harmonic m = 0 is the section itself.
 *
 * T is quadratic in k. It is Hermitian for real k without loss, and symmetric (complex where there
 * is loss or an absorbing layer) when the cell has a mirror plane in z: the coefficients are then
 * real functions of the media, and without loss T is real. A left vector l, lᵀT = 0, is then the
 * right one.
 *
 * A wave k also shows at k + 2π/Λ; a finite set of harmonics does not keep that to rounding. The
 * set -M-1..M is balanced about the edge of the zone: with β_m → -β_{-1-m} the wave 2π/Λ - k is the
 * reverse of the wave k to rounding, for k in (0, π/Λ]. The set -M..M is balanced about k = 0.
 *
 * Averages over the boxes of the section come before the products along z, so the walls of a tooth
 * are exact in z on every grid, and errors of harmonics and of the grid are nearly independent of
 * each other. Measured on 450 × 220 nm of 3.4757 in 1.444, teeth of 150 in 300 nm, for the index
 * k/k0 of the te-like (te) and tm-like (tm) mode at k = 0.7 π/Λ and at the edge (e), harmonics
 * -M-1..M:
 *
 *   harmonics: relative error C (M + 1)⁻³ with C = -0.0125 te, -0.006 tm, -0.015 te-e and tm-e
 *     for even M, on steps of 40, 27 and 20 nm alike; the third power because h = (Ce) is
 *     continuous at the walls and its slope is not. For odd M a fifth of it at M = 3 and less
 *     beyond. That parity belongs to teeth of half the pitch, whose even coefficients vanish; at
 *     other lengths the error swings below the same envelope (teeth of 0.37 Λ, te: 4e-5, -2e-4,
 *     -3e-5, 0, -3e-5, 1e-5 for M = 2 to 7).
 *   grid: h^{2α} and h², α = 0.77046 of the edges parallel to x and y, where the teeth end;
 *     they are not corrected, as edges parallel to z are. te with steps of 40, 27, 20, 13 nm:
 *     relative errors 2.0e-3, 1.1e-3, 7e-4, 4e-4; the first three extrapolate to 1.67322, the
 *     last three to 1.67324. tm-e has 3.5 times these errors.
 *
 * The law of the grid holds for steps at the teeth up to about Λ/6. Where a pitch is a few steps or
 * less the average of a box no longer stands for what it holds along z, and the error falls as h
 * only: halve the steps with the pitch.
 *
 * Unknowns: site by site, all e_x, all e_y, all e_z, y fastest as in section.h; harmonics
 * innermost. e_x lies at (i+½, j), e_y at (i, j+½), e_z at (i, j). */
#ifndef PK_CHANNEL_CHANNEL_H
#define PK_CHANNEL_CHANNEL_H

#include <complex.h>
#include <stdbool.h>

#include "geometry/geometry.h"
#include "grid/axis.h"
#include "sparse/sparse.h"

typedef struct pk_channel pk_channel;

/* What it is made of. Arrays, geometries and axes are used during creation only. */
typedef struct pk_channel_plan {
  double pitch;                       /* Λ, µm */
  int slices;                         /* at least 1 */
  const double *from;                 /* [slices + 1] rising; from[slices] = from[0] + pitch */
  const pk_geometry *const *geometry; /* [slices] u = x, v = y */
  const pk_axis *x, *y;
  int media;            /* media numbers run from 0 to media - 1 */
  bool correct_corners; /* cure the singular E at corners of rectangles in x, y (corner_patch.h) */
  int low, high;        /* harmonics m = low..high */
  double origin;        /* z where all harmonics are in phase; NAN: a mirror plane in z, or 0 where
                           there is none. Vectors of channels that are compared need one origin. */
} pk_channel_plan;

picket_status pk_channel_create(picket_context *context, const pk_channel_plan *plan,
                                pk_channel **out);
void pk_channel_free(pk_channel *channel); /* accepts null */

int64_t pk_channel_size(const pk_channel *channel); /* unknowns n */
double pk_channel_pitch(const pk_channel *channel);
double pk_channel_origin(const pk_channel *channel);

/* True if there is a mirror plane in z at the origin (or half a pitch away from it). */
bool pk_channel_is_mirrored(const pk_channel *channel);

/* True if medium m has a share in any site of any slice. */
bool pk_channel_uses(const pk_channel *channel, int medium);

/* Gives the media their permittivities: [3][media], the entries xx, yy and zz.
 * PICKET_ERROR_NUMERIC when a block of the inverse rule is singular. */
picket_status pk_channel_load(pk_channel *channel, const double complex *permittivity);

/* True when mirrored and the permittivities and the lengths of the axes are real. */
bool pk_channel_is_real(const pk_channel *channel);

/* values [pattern nnz] of T(k). `_real` needs a real channel. */
const pk_pattern *pk_channel_pattern(const pk_channel *channel);
void pk_channel_values(const pk_channel *channel, double complex k, double complex k0_square,
                       double complex *values);
void pk_channel_values_real(const pk_channel *channel, double k, double k0_square, double *values);

/* What the last factorisation cost. */
pk_factor_facts pk_channel_cost(const pk_channel *channel);

#endif
