/* The lateral shape of a mode at a few places that stay the same through a sweep: what tells a mode
 * from the others at the next wavelength. */
#ifndef PK_STUDY_PROFILE_H
#define PK_STUDY_PROFILE_H

#include "bloch/character.h"

/* Many for the shapes of guided modes, few for a line of text. */
enum { PK_PROFILE_PLACES = 64 };

/* Values are whole numbers, so that a line of text holds them exactly. */
typedef struct pk_profile {
  bool known; /* false where there is nothing lateral to tell modes by */
  int real[PK_PROFILE_PLACES], imaginary[PK_PROFILE_PLACES];
} pk_profile;

/* A value of a profile is at most this. */
enum { PK_PROFILE_UNIT = 100000 };

/* The main harmonic of a wave, k its wavenumber, from half a width below the structure to half a
 * width above it. */
picket_status pk_profile_take(picket_context *context, const pk_operator *op,
                              const pk_character_request *request, double complex k,
                              const double complex *u, pk_profile *out);

/* |⟨a, b⟩|² of the normalised shapes, 0 to 1: the part of one that is in the other. NaN unless both
 * are known. */
double pk_profile_overlap(const pk_profile *a, const pk_profile *b);

#endif
