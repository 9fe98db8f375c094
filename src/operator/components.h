/* The field of a wave at the nodes of its grid: the unknown, and the flow W ∇u that belongs to it.
 *
 *   ey:  W = 1,       H_x =  (i/ωμ₀) J_z,   H_z = -(i/ωμ₀) J_x      (J = W ∇u, u = E_y)
 *   hy:  W = adj(η),  E_x = -(i/ωε₀) J_z,   E_z =  (i/ωε₀) J_x      (u = H_y)
 *
 * from ∇×E = iωμ₀H and ∇×H = -iωε₀εE with fields as exp(-iωt) and (z, x, y) right-handed:
 * (∇×yu)_x = -∂z u, (∇×yu)_z = ∂x u. */
#ifndef PK_OPERATOR_COMPONENTS_H
#define PK_OPERATOR_COMPONENTS_H

#include "operator/power.h"

/* Arrays over all lines of both axes, both ends among them (walls, and the line that repeats the
 * first one of a period): [nz][nx], x fastest. A uniform v axis has one line, at 0. */
typedef struct pk_components {
  picket_context *context; /* borrowed */
  int nz, nx;
  double *z, *x;                  /* [nz], [nx] rising, µm */
  double complex *u;              /* [nz*nx] × exp(-ikz) */
  double complex *along, *across; /* [nz*nx] J_z and J_x × exp(-ikz), per µm */
  double complex *permittivity;   /* [nz*nx] mean over the cell around the node */
} pk_components;

/* The periodic part, exp(-ikz) × field, of a wave u [n] at a phase with ξ = exp(ikΛ) and kx = 0.
 * J lives on the edges, where it is exact for the scheme (corner corrections included), and comes
 * to the nodes by linear interpolation between the middles of the two edges along its axis. On an
 * interface the component of E normal to it is so the mean of its values on both sides, whose D is
 * the same. On a wall where u vanishes J_x is that of the last edge. In absorbing layers ∂x is the
 * stretched derivative.
 *   geometry  the one that the operator was made of */
picket_status pk_components_take(picket_context *context, const pk_operator *op,
                                 const pk_geometry *geometry, pk_phase phase, double complex k,
                                 const double complex *u, pk_components *out);
void pk_components_clear(pk_components *components); /* accepts zeros */

/* ∫ Im(J_z conj(u)) dx between the lines of a window, mean over a pitch (uniform v axis: per unit
 * length): 2ωμ₀ (ey) or 2ωε₀ (hy) times the power through a plane z = constant. For a lossless wave
 * it is the `forward` of pk_power. */
double pk_components_flux(const pk_operator *op, pk_phase phase, pk_power_window window,
                          const double complex *u);

#endif
