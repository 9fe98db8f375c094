/* A mode and what it meets, on one grid of each: the overlap where they are put, and at the best
 * offset. */
#ifndef PK_STUDY_MATCH_MEET_H
#define PK_STUDY_MATCH_MEET_H

#include "section/overlap.h"

/* What meets the mode. */
typedef struct pk_partner {
  const pk_overlap *overlap; /* of the mode, and of the second one if there is one */
  bool is_beam;
  pk_gaussian beam; /* its centre is the offset */
  double slope[2];  /* of the second mode, 1/µm */
} pk_partner;

double pk_partner_overlap(const pk_partner *partner, const double offset[2]);

/* The largest overlap; `offset` receives where.
 *   wide    true: all around is looked over first, from the centroids; false: the summit is near
 *           `offset` */
double pk_partner_best(const pk_partner *partner, bool wide, double offset[2]);

#endif
