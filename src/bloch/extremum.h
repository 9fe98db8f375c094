/* Edges that lie inside the zone.
 *
 * By reciprocity every band has a horizontal tangent at k = mπ/Λ, but where families repel each
 * other the extreme of a band can lie beside it. It is found as a zero of the slope dω/dk (Hellmann
 * and Feynman), not by sampling ω. */
#ifndef PK_BLOCH_EXTREMUM_H
#define PK_BLOCH_EXTREMUM_H

#include "bloch/resonance.h"

typedef struct pk_extremum_request {
  double pitch_um;
  double lateral_shift; /* fraction of the pitch */
  int order;            /* the zone boundary is k = order π/Λ */
  bool maximum;         /* long-wavelength edge: the top of a band; else the bottom of one */
} pk_extremum_request;

/* Moves an edge that was found at the zone boundary to the extreme of its band.
 *   edge    in: at the boundary; out: at the extreme, with its field (replaced)
 *   offset  distance from the boundary in π/Λ, 0 if the boundary is the extreme
 * PICKET_ERROR_NUMERIC if the band is lost on the way. */
picket_status pk_extremum_find(pk_solver *solver, pk_media *media,
                               const pk_extremum_request *request, pk_resonance *edge,
                               double *offset);

#endif
