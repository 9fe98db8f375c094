/* Bilinear forms lᵀ(…)r of a channel and first-order changes of its modes.
 *
 * For a mode with right vector r and left vector l, a change δT of T (media, grid, pitch) moves
 *   k at a frequency by  -lᵀ δT r / lᵀ(∂T/∂k)r,   k0 at a wavenumber by  -lᵀ δT r / lᵀ(∂T/∂k0)r.
 * Curls are taken before products, so nothing large cancels and forms of neighbouring grids may be
 * subtracted. */
#ifndef PK_CHANNEL_FORMS_H
#define PK_CHANNEL_FORMS_H

#include "channel/channel.h"

/* y = T(k) x, and Tᵀ x, with the media as loaded. */
void pk_channel_times(const pk_channel *channel, double complex k, double complex k0_square,
                      const double complex *x, double complex *y);
void pk_channel_transposed_times(const pk_channel *channel, double complex k,
                                 double complex k0_square, const double complex *x,
                                 double complex *y);

/* lᵀ T(k) r with the media as loaded; lᵀ M r; lᵀ (∂T/∂k) r. */
double complex pk_channel_form(const pk_channel *channel, double complex k,
                               double complex k0_square, const double complex *l,
                               const double complex *r);
double complex pk_channel_mass_form(const pk_channel *channel, const double complex *l,
                                    const double complex *r);
double complex pk_channel_k_form(const pk_channel *channel, double complex k,
                                 const double complex *l, const double complex *r);

/* lᵀ (∂T/∂k0) r.
 *   slope  [3][media] k0 dε/dk0, null without dispersion */
picket_status pk_channel_k0_form(pk_channel *channel, double complex k0,
                                 const double complex *slope, const double complex *l,
                                 const double complex *r, double complex *out);

/* lᵀ (dT/dt) r for permittivities ε + t·direction, [3][media]. */
picket_status pk_channel_media_form(pk_channel *channel, double complex k0_square,
                                    const double complex *direction, const double complex *l,
                                    const double complex *r, double complex *out);

/* lᵀ (∂T/∂ε_m) r of each medium (all its entries together), [media]. */
picket_status pk_channel_pulls(pk_channel *channel, double complex k0_square,
                               const double complex *l, const double complex *r,
                               double complex *pulls);

/* What a mode looks like: integrals over a pitch without stretch, of the part that the grid holds.
 */
typedef struct pk_channel_looks {
  double ex_share; /* ∫ε|E_x|² over ∫ε(|E_x|² + |E_y|²): above ½ is te-like */
  double ez_share; /* ∫ε|E_z|² over ∫ε|E|² */
} pk_channel_looks;

void pk_channel_look(const pk_channel *channel, const double complex *e, pk_channel_looks *out);

#endif
