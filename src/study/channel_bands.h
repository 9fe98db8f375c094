/* The lowest bands of a channel below the light line of its sides. */
#ifndef PK_STUDY_CHANNEL_BANDS_H
#define PK_STUDY_CHANNEL_BANDS_H

#include <picket/bands.h>

#include "study/channel_edges.h"

/* Fills an answer of zeros, whose arrays are the caller's to free, also after a failure.
 * PICKET_ERROR_UNSUPPORTED for a path that leaves the z direction. */
picket_status pk_channel_bands_of(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_bands_answer *answer,
                                  picket_result *result);

#endif
