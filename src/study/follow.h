/* A mode that is followed from grid to grid: its last field with the lines it lives on, so that it
 * can start the solve on the next grid. */
#ifndef PK_STUDY_FOLLOW_H
#define PK_STUDY_FOLLOW_H

#include "bloch/character.h"
#include "study/profile.h"

typedef struct pk_followed {
  int order;
  pk_character character; /* on the last grid */
  double complex xi;
  double complex *field; /* [nu*nv] on the last grid */
  int nu, nv;
  double *u, *v;           /* its lines */
  pk_profile profile;      /* of the last grid of an index study */
  double dispersion_error; /* of the frequency difference, ps/(nm km) */
} pk_followed;

picket_status pk_follow_remember(picket_context *context, const pk_operator *op,
                                 const pk_wave *wave, pk_followed *mode);
void pk_follow_forget(picket_context *context, pk_followed *mode);

/* The remembered field on the lines of another grid, by linear interpolation: yours to free; null
 * (message set) when memory is out. */
double complex *pk_follow_prolonged(picket_context *context, const pk_operator *op,
                                    const pk_followed *mode);

#endif
