/* The edges of a cell on any grid of a family: what edges and their derivatives share. A coarse
 * look with roomy sides comes first; it tells where the edges are, how far the sides must reach,
 * and which edges lie inside the zone. */
#ifndef PK_STUDY_EDGE_FAMILY_H
#define PK_STUDY_EDGE_FAMILY_H

#include <picket/options.h>

#include "bloch/stop_band.h"
#include "study/level.h"
#include "study/survey.h"

typedef struct pk_edge_family {
  const pk_problem *problem;
  pk_polarization polarization;
  pk_survey survey;
  pk_stop_band_request request;
  bool mirror;        /* cells are halved at a lateral mirror plane */
  pk_stop_band *last; /* [request.last_order] of the last grid */
  bool *inside;       /* [last_order][2] edges whose band has its extreme inside the zone */
} pk_edge_family;

/* PICKET_ERROR_INPUT without a cell, PICKET_ERROR_UNSUPPORTED with a lateral shift,
 * PICKET_ERROR_NO_MODE if the cell guides nothing at the zone edge. */
picket_status pk_edge_family_open(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, bool mirror, pk_edge_family *out);
void pk_edge_family_close(pk_edge_family *family); /* accepts zeros */

/* Fills `last` for a level of this problem and polarization. */
picket_status pk_edge_family_solve(pk_edge_family *family, pk_level *level);

/* Why an edge is missing; static text. */
const char *pk_edge_note(pk_edge_state state);

#endif
