/* The stop bands of a cell in one polarization. */
#ifndef PK_STUDY_EDGES_H
#define PK_STUDY_EDGES_H

#include <picket/edges.h>

#include "study/problem.h"
#include "study/result.h"

/* Fills an answer of zeros, whose bands are the caller's to free, also after a failure. `result` is
 * marked partial where a number was not obtained. Errors as picket_edges_find. */
picket_status pk_edges_of(const pk_problem *problem, pk_polarization polarization,
                          const picket_options *options, picket_edges_answer *answer,
                          picket_result *result);

#endif
