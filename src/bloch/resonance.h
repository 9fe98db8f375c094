/* One Bloch mode at a real Bloch phase, with the media taken at the mode's own frequency.
 *
 * With dispersive media A(k0) v = λ B(k0) v, λ = k0² is nonlinear in k0: Newton steps on
 * f(k0) = λ(k0) - k0² with the exact derivative by Hellmann and Feynman. */
#ifndef PK_BLOCH_RESONANCE_H
#define PK_BLOCH_RESONANCE_H

#include "bloch/media.h"
#include "bloch/solver.h"

typedef struct pk_resonance {
  double k0;             /* ω/c, 1/µm */
  double complex *field; /* [n], owned */
  double residual;
  bool known; /* every material is known at this frequency */
} pk_resonance;

/* The mode near k0_guess that looks most like `reference` (null: the nearest one).
 * PICKET_ERROR_NUMERIC if the steps do not settle or the mode is lost. */
picket_status pk_resonance_near(pk_solver *solver, pk_media *media, pk_phase phase, double k0_guess,
                                const double complex *reference, pk_resonance *out);
void pk_resonance_clear(picket_context *context, pk_resonance *resonance);

/* dk0/dk along the band of a resonance (1/n_g, signed); media as left by pk_resonance_near. */
picket_status pk_resonance_slope(const pk_media *media, const pk_operator *op, pk_phase phase,
                                 double pitch_um, double shift, const pk_resonance *resonance,
                                 double *dk0_dk);

/* The next frequency of Newton's method on f(k0) = λ(k0) - k0², from a mode of the media at k0. */
picket_status pk_mode_newton(const pk_media *media, const pk_operator *op, pk_phase phase,
                             double k0, const pk_mode *mode, double *next);

/* |⟨a, B b⟩|² / (⟨a, B a⟩ ⟨b, B b⟩), 0 to 1. */
double pk_overlap(const pk_operator *op, const double complex *a, const double complex *b);

#endif
