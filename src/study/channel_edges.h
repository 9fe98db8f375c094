/* The first stop band of a channel. */
#ifndef PK_STUDY_CHANNEL_EDGES_H
#define PK_STUDY_CHANNEL_EDGES_H

#include <picket/edges.h>

#include "study/channel_pair.h"

/* Where the edges lie, from a coarse grid. */
typedef struct pk_channel_outlook {
  pk_channel_survey survey; /* at the wavelength of the long edge; the caller's to clear */
  bool leaks;               /* sides were set apart: every mode leaks into them */
  double light_line;        /* k0 above which a state at the zone edge is not confined */
  double index;             /* of the edge that reaches farthest */
  pk_channel_pair pair;
} pk_channel_outlook;

/* PICKET_ERROR_NO_MODE if nothing is confined at the zone edge. */
picket_status pk_channel_outlook_take(const pk_problem *problem, pk_polarization polarization,
                                      pk_channel_outlook *out);
void pk_channel_outlook_clear(pk_channel_outlook *look); /* accepts zeros */

/* As pk_edges_of. */
picket_status pk_channel_edges_of(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_edges_answer *answer,
                                  picket_result *result);

/* PICKET_ERROR_INPUT without a channel, PICKET_ERROR_UNSUPPORTED for more than the first order. */
picket_status pk_channel_edges_check(const pk_problem *problem, const picket_options *options);

#endif
