/* What the process does to a quantity. See picket/tolerance.h for what is promised. */
#ifndef PK_STUDY_TOLERANCE_H
#define PK_STUDY_TOLERANCE_H

#include <picket/options.h>

#include "study/result.h"
#include "study/variants.h"

/* The numbers of `variants` are those of problem->tolerance.spread, in their order; `start` holds
 * their values in the file.
 *   document  fingerprint of its text, for the journal
 *   journal   file of finished solves, or null */
picket_status pk_study_tolerance(const pk_problem *problem, const pk_variants *variants,
                                 const double *start, const picket_options *options,
                                 uint64_t document, const char *journal, picket_result **out);

/* Frees what an answer holds. */
void pk_tolerance_answer_clear(picket_context *context, picket_tolerance_answer *answer);

#endif
