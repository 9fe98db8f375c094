/* What a Bloch wave is made of: its main spatial harmonic, its lateral shape, its power, and how
 * much it owes to the absorbing layers. With these, waves are recognised, unfolded and told from
 * artefacts. */
#ifndef PK_BLOCH_CHARACTER_H
#define PK_BLOCH_CHARACTER_H

#include "bloch/media.h"
#include "bloch/wavenumber.h"
#include "operator/power.h"

typedef struct pk_character {
  double complex k;   /* unfolded: along the main harmonic, 1/µm */
  int harmonic;       /* m of the main harmonic: k = folded k + 2πm/Λ */
  int nodes;          /* of its lateral shape inside the structure */
  bool at_boundary;   /* Re k is a multiple of π/Λ and the wave decays: inside a stop band */
  double inside;      /* part of |u|² within the structure and half its width around it, 0 to 1 */
  double layer_share; /* |S dk/dS| / k0: sensitivity to the layers */
  pk_power power;
} pk_character;

typedef struct pk_character_request {
  double pitch_um, k0;
  pk_phase phase;      /* its xi is taken from the wave */
  double structure[2]; /* lateral extent of the shapes */
  double least_inside; /* see search.c; 0: the usual part */
} pk_character_request;

picket_status pk_character_of(picket_context *context, const pk_operator *op,
                              const pk_character_request *request, const pk_wave *wave,
                              pk_character *out);

/* The harmonic with wavenumber k of a field u over the lateral lines, times the pitch: shape [lines
 * of v] = ∫ u exp(-ikz) dz. */
void pk_harmonic_shape(const pk_operator *op, double complex k, const double complex *u,
                       double complex *shape);

/* Im k of a wave is taken for zero below this part of k0: rounding and residual of a lossless wave.
 */
#define PK_LOSSLESS 1e-9

#endif
