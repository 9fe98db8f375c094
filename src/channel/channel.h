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
