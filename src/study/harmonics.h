/* From values of a channel with rising numbers of harmonics to a value and a bar.
 *
 * With harmonics -N to N - 1,
 *   v(N) = X + N^-3 (A + B cos 2πNd),
 * where d is the distance of two walls between slices in pitches: the field has kinks there, so its
 * coefficients fall off as N^-2, and kinks a distance d apart beat. One tooth has one such
 * distance. Measured for one of 450 × 220 nm, silicon in oxide, duties 0.4 and 0.5: the exponent is
 * 3.0 to 3.1 for every edge, and X from N = 2 to 5 is within 1e-5 of that from N = 9 to 17. */
#ifndef PK_STUDY_HARMONICS_H
#define PK_STUDY_HARMONICS_H

#include <picket/quantity.h>

#include "study/problem.h"

enum { PK_HARMONIC_ROW = 4 };

/* Where the walls are: `single` with one distance. */
typedef struct pk_harmonic_law {
  bool uniform; /* one slice: nothing depends on N */
  bool single;
  double distance; /* in pitches */
} pk_harmonic_law;

pk_harmonic_law pk_harmonic_law_of(const pk_channel_block *channel);

/* count 3 or 4, n rising. */
picket_quantity pk_harmonics_extrapolate(const pk_harmonic_law *law, int count, const int *n,
                                         const double *values);

#endif
