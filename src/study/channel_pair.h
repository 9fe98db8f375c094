/* The two standing waves of a channel's fundamental mode at the edge of the zone, k = π/Λ, on one
 * grid: the edges of its first stop band.
 *
 * Of a te-like and a tm-like mode in one family the larger transverse component tells which is
 * which; that two waves are edges of one stop band is told by their main harmonics, which differ in
 * a sign, not in shape. */
#ifndef PK_STUDY_CHANNEL_PAIR_H
#define PK_STUDY_CHANNEL_PAIR_H

#include "channel/modes.h"
#include "study/channel_level.h"

enum { PK_LONG, PK_SHORT };

typedef struct pk_channel_pair {
  bool found[2]; /* confined: below the light line of every side that the survey holds */
  double k0[2];  /* 1/µm */
  bool known[2]; /* materials are known there */
} pk_channel_pair;

/* Whether a mode is of the polarization asked for. */
bool pk_channel_is_alike(const pk_channel_survey *survey, const pk_channel_level *level,
                         const double complex *e);

/* Part of the shape of the main harmonic of one wave that is in that of another, 0 to 1. */
double pk_channel_likeness(const pk_channel_level *level, int harmonics, const double complex *a,
                           const double complex *b);

/* Searches all k0 from that of the densest medium up to `most`. found[PK_LONG] false: no mode. */
picket_status pk_channel_pair_search(const pk_channel_survey *survey, pk_channel_level *level,
                                     int harmonics, double most, pk_channel_pair *out);

/* The pair nearest to a known one, with the media at its own frequencies. PICKET_ERROR_NUMERIC if
 * there is none. vectors: null, or receives the modes, [2]; those found are the caller's. */
picket_status pk_channel_pair_near(const pk_channel_survey *survey, pk_channel_level *level,
                                   int harmonics, const pk_channel_pair *guess,
                                   pk_channel_mode *modes, pk_channel_pair *out);

/* The lowest modes of the polarization at a k, below `most`: k0[0..*found - 1] rising, at most
 * `wanted` of them. */
picket_status pk_channel_lowest(const pk_channel_survey *survey, pk_channel_level *level, double k,
                                double most, int wanted, double *k0, int *found);

/* Modes at a k nearest to guesses, [count] rising, the media at their own frequencies; NaN where
 * there is none. `known` as in pk_channel_pair. */
picket_status pk_channel_near(const pk_channel_survey *survey, pk_channel_level *level, double k,
                              int count, const double *guess, double *k0, bool *known);

#endif
