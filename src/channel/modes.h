/* Bloch modes of a channel: ω at a real k, and k at a frequency.
 *
 * Every mode is returned with its true relative residual, none above PK_CHANNEL_RESIDUAL. Lossless
 * channels with a mirror plane in z are factored in real arithmetic. The channel keeps the ordering
 * of its matrix, so further solves are cheaper than the first. */
#ifndef PK_CHANNEL_MODES_H
#define PK_CHANNEL_MODES_H

#include "channel/media.h"

/* |T e| / |k0² M e|. The error of a value is of its square, by the left vector. */
#define PK_CHANNEL_RESIDUAL 1e-8

typedef struct pk_channel_mode {
  double complex k;         /* 1/µm */
  double complex k0_square; /* (ω/c)², real for a mode at a given frequency */
  double complex *right;    /* [n] T e = 0; owned; of unit norm, the largest entry real */
  double complex *left;     /* [n] lᵀ T = 0; owned, or `right` where the channel is mirrored */
  double residual;          /* the larger of the two vectors */
} pk_channel_mode;

void pk_channel_modes_clear(picket_context *context, int count, pk_channel_mode *modes);

/* The modes at a real k nearest to `shift` of k0², by rising Re k0², for the media as loaded.
 *   wanted  how many to ask for
 *   start   null, or a guess of the wanted e [n]
 *   modes   [wanted]; pk_channel_modes_clear
 *   found   how many hold
 * PICKET_ERROR_NUMERIC when none converged or a residual is too large. */
picket_status pk_channel_modes_at_k(pk_channel *channel, double k, double shift, int wanted,
                                    const double complex *start, pk_channel_mode *modes,
                                    int *found);

/* The mode at a real k near k0_guess that looks most like `reference` (null: the nearest one), the
 * media at its own frequency (Re k0): Newton steps on λ(k0) - k0². The media are left there.
 *   known  false if a material is not known at that frequency; may be null
 * PICKET_ERROR_NUMERIC if the steps do not settle. */
picket_status pk_channel_mode_near_k0(pk_channel *channel, pk_channel_media *media, double k,
                                      double k0_guess, const double complex *reference,
                                      pk_channel_mode *out, bool *known);

/* The waves at a frequency nearest to `guess` of k, nearest first, for the media as loaded. Of a
 * pair (k, 2π/Λ - k) only the one nearer to the guess is returned, with the balanced set of a
 * mirrored channel; on Re k = π/Λ, inside a stop band, that with Im k > 0, which decays along +z.
 */
picket_status pk_channel_waves(pk_channel *channel, double k0, double complex guess, int wanted,
                               const double complex *start, pk_channel_mode *modes, int *found);

/* |⟨a, b⟩|² / (⟨a, a⟩ ⟨b, b⟩) with the electric energy, 0 to 1. */
double pk_channel_overlap(const pk_channel *channel, const double complex *a,
                          const double complex *b);

/* max(|T r|, |Tᵀ l|) over the norms of k0² M r and k0² Mᵀ l; NaN when memory is
 * out. */
double pk_channel_residual(const pk_channel *channel, const pk_channel_mode *mode);

#endif
