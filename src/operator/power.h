/* Where the power of a Bloch wave goes: discrete Poynting flux, absorption and radiation.
 *
 * From row r of T u = 0 times conj(u_r), the imaginary part is a balance that holds exactly on the
 * grid: what leaves node r to its neighbours c,
 *   F_rc = -½ Im( conj(u_r) A_rc u_c - conj(u_c) A_cr u_r ),
 * and what its media absorb add up to nothing. All powers here share one factor (1/(2ωμ) for ey,
 * 1/(2ωε₀) for hy) and are per unit height out of the plane. */
#ifndef PK_OPERATOR_POWER_H
#define PK_OPERATOR_POWER_H

#include "operator/operator.h"

/* Lines of v between which power is counted: unknowns low..high, inside any absorbing layer. */
typedef struct pk_power_window {
  int low, high;
} pk_power_window;

typedef struct pk_power {
  double forward;     /* through the cell boundary z = -pitch/2, towards +z */
  double absorbed;    /* by the media in one pitch */
  double radiated[2]; /* out of the window towards -x and +x in one pitch */
} pk_power;

/* The window that leaves out the absorbing layers. */
pk_power_window pk_power_window_of(const pk_operator *op);

/* For a field u that satisfies T u = 0 at `phase` and k0. A closed or halved side radiates nothing.
 */
pk_power pk_power_balance(const pk_operator *op, pk_phase phase, double k0, pk_power_window window,
                          const double complex *u);

/* lᵀ (S ∂T/∂S) r, S the strength of the absorbing layers (all of them together): how much a wave
 * depends on the layers. Zero without layers. */
double complex pk_operator_layer_form(picket_context *context, const pk_operator *op,
                                      pk_phase phase, double k0, const double complex *l,
                                      const double complex *r, picket_status *status);

#endif
