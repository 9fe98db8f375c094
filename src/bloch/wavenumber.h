/* k(ω): the complex Bloch wavenumber at a given frequency, on the matrices of ω(k).
 *
 *   T(ξ) v = (ξ C₊ + K + ξ⁻¹ C₋) v = 0,   ξ = exp(ikΛ),   Im k > 0: decays along +z
 *
 * a quadratic eigenproblem in ξ; T(ξ)ᵀ = T(1/ξ), so solutions come in pairs (ξ, 1/ξ) and the left
 * vector of ξ is the right vector of 1/ξ (D. S. Mackey et al., SIAM J. Matrix Anal. Appl. 28, 1029
 * (2006), palindromic eigenproblems). */
#ifndef PK_BLOCH_WAVENUMBER_H
#define PK_BLOCH_WAVENUMBER_H

#include "bloch/media.h"
#include "bloch/solver.h"

typedef struct pk_wave {
  double complex xi;
  double complex *right, *left; /* [n] each, owned; Tr = 0, lᵀT = 0 */
  double residual;              /* |T v| / (k0² |B v|) */
} pk_wave;

/* The wave nearest to a guess of ξ, for the media as loaded.
 *   start  null, or a guess of the field
 * PICKET_ERROR_NUMERIC if nothing near the guess converged to PK_RESIDUAL_LIMIT. */
picket_status pk_wave_near(pk_solver *solver, pk_phase phase, double k0, double complex xi_guess,
                           const double complex *start, pk_wave *out);
void pk_wave_clear(picket_context *context, pk_wave *wave);

/* dk/dk0 along the branch of a wave, by first-order perturbation with media dispersion; Λ = pitch:
 * the group index is its real part for a propagating wave. `shift` is the lateral shift as a
 * fraction of the pitch. */
picket_status pk_wave_slope(const pk_media *media, const pk_operator *op, pk_phase phase, double k0,
                            double pitch_um, double shift, const pk_wave *wave,
                            double complex *dk_dk0);

#endif
