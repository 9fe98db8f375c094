/* The discrete operator of a cell on a grid.
 *
 *   T(ξ, χ, k0) = A(ξ, χ) - k0² B,   ξ = exp(i k_z Λ),  χ = exp(i k·a₂)
 *
 * from  ey:  -∂z² E - ∂x² E = k0² ε E
 *       hy:  -∂z(η_xx ∂z H) - ∂x(η_zz ∂x H) + ∂z(η_xz ∂x H) + ∂x(η_xz ∂z H) = k0² H,  η = ε⁻¹
 * (the sign of the mixed term follows from curl η curl; here the tensor is written for the
 * gradient, w = adj(η), so that A = Dᴴ W D with W positive.) Unknowns sit at grid nodes, v (x)
 * fastest: unknown iu·nv + iv. A is Dᴴ W D with differences D on the edges between neighbouring
 * nodes and weights W on the same edges; B is diagonal. So T is Hermitian for lossless cells and
 * real k, and complex symmetric under ξ → 1/ξ, χ → 1/χ in general. The Bloch phase stands on the
 * few edges that wrap around, as ξ^wu χ^wv.
 *
 * Material averages: ey takes the exact area average of ε over the dual cell of a node; hy takes
 *   η = ⟨1/ε⟩ N + ⟨ε⟩⁻¹ (1 - N),  N = mean of n nᵀ over the interface in the box,
 * over the box of an edge, which keeps the normal component of D and the tangential one of E
 * continuous (A. Farjadpour et al., Opt. Lett. 31, 2972 (2006)). */
#ifndef PK_OPERATOR_OPERATOR_H
#define PK_OPERATOR_OPERATOR_H

#include <complex.h>
#include <stdbool.h>

#include "geometry/geometry.h"
#include "grid/axis.h"
#include "sparse/sparse.h"

typedef enum pk_polarization { PK_EY = 0, PK_HY = 1 } pk_polarization;

typedef struct pk_operator pk_operator;

/* What the operator is made of. Geometry and axes are used during creation only. */
typedef struct pk_operator_plan {
  pk_polarization polarization;
  const pk_geometry *geometry;
  const pk_axis *u, *v;
  bool uniform_v;  /* one unknown along v, which varies as exp(i k_x x) only */
  int shift_lines; /* lines along u by which crossing the v boundary advances; 0 without a shift */
  int media;       /* media numbers run from 0 to media - 1 */
} pk_operator_plan;

/* Bloch phases. kx is used by a uniform v axis only, in 1/µm. */
typedef struct pk_phase {
  double complex xi, chi;
  double kx;
} pk_phase;

picket_status pk_operator_create(picket_context *context, const pk_operator_plan *plan,
                                 pk_operator **out);
void pk_operator_free(pk_operator *op); /* accepts null */

/* hy: corrects the weights of the edges that meet at corners of rectangles (corner_patch.h), from
 * the next load on; once, with the geometry of the plan. Without it the error of a frequency falls
 * as h^{2α}, with it as h². Corners with oblique or curved interfaces and corners between grid
 * lines stay as they are. ey is regular at corners and needs nothing: no change. */
picket_status pk_operator_correct_corners(pk_operator *op, const pk_geometry *geometry);

/* Unknowns, and the pattern shared by every matrix of this operator. */
int64_t pk_operator_size(const pk_operator *op);
const pk_pattern *pk_operator_pattern(const pk_operator *op);

/* True if medium m has a share in any site. */
bool pk_operator_uses(const pk_operator *op, int medium);

/* Gives the media their permittivities [media]: computes A and B. Can fail only with corrected
 * corners: PICKET_ERROR_MEMORY. */
picket_status pk_operator_load(pk_operator *op, const double complex *permittivity);

/* True when A (at a real phase) and B are real. */
bool pk_operator_is_real(const pk_operator *op);

/* The diagonal of B, [n]. Borrowed, changes with a load. */
const double complex *pk_operator_mass(const pk_operator *op);

/* values [pattern nnz] of A(phase) - shift B. `_real` needs real ξ, χ and a real operator. */
void pk_operator_values(const pk_operator *op, pk_phase phase, double complex shift,
                        double complex *values);
void pk_operator_values_real(const pk_operator *op, pk_phase phase, double shift, double *values);

/* The parts of T = ξ C₊ + K + ξ⁻¹ C₋ (K includes -k0² B): y = C₊ x, y = C₋ x. */
void pk_operator_forward_times(const pk_operator *op, double complex chi, const double complex *x,
                               double complex *y);
void pk_operator_backward_times(const pk_operator *op, double complex chi, const double complex *x,
                                double complex *y);

/* Bilinear forms lᵀ M r, with l an unknown of the transposed problem (phase 1/ξ, 1/χ); for a
 * lossless cell and real k it is conj(r).
 *   phase_form   M = Σ (weight_u wu + weight_v wv) of the wrapped entries: ∂T/∂k_z = iΛ × that with
 *                weight_u = 1 and weight_v = the lateral shift as a fraction of the pitch
 *   media_forms  stiff[m] = lᵀ ∂A/∂ε_m r, mass[m] = lᵀ ∂B/∂ε_m r for the loaded permittivities,
 *                the change of corner corrections included (PICKET_ERROR_MEMORY) */
double complex pk_operator_phase_form(const pk_operator *op, pk_phase phase, double weight_u,
                                      double weight_v, const double complex *l,
                                      const double complex *r);
picket_status pk_operator_media_forms(const pk_operator *op, pk_phase phase,
                                      const double complex *l, const double complex *r,
                                      double complex *stiff, double complex *mass);
double complex pk_operator_mass_form(const pk_operator *op, const double complex *l,
                                     const double complex *r);

/* Unknowns along an axis; coordinate and (unstretched) dual length of the i-th. */
int pk_operator_lines(const pk_operator *op, pk_axis_name axis);
void pk_operator_line(const pk_operator *op, pk_axis_name axis, int i, double *at, double *length);

#endif
