/* The studies: questions about a problem, answered with values and bars. Each fills a result that
 * the caller owns (pk_result_free). */
#ifndef PK_STUDY_STUDY_H
#define PK_STUDY_STUDY_H

#include <picket/options.h>

#include "study/problem.h"
#include "study/result.h"

picket_status pk_study_edges(const pk_problem *problem, const picket_options *options,
                             picket_result **out);
picket_status pk_study_bands(const pk_problem *problem, const picket_options *options,
                             picket_result **out);
picket_status pk_study_slab(const pk_problem *problem, const picket_options *options,
                            picket_result **out);
picket_status pk_study_modes(const pk_problem *problem, const picket_options *options,
                             picket_result **out);
/* `other` null: a beam. The request has been checked. */
picket_status pk_study_match(const pk_problem *problem, const pk_problem *other,
                             const picket_match_request *request, const picket_options *options,
                             picket_result **out);
picket_status pk_study_index(const pk_problem *problem, const picket_options *options,
                             picket_result **out);
picket_status pk_study_summary(const pk_problem *problem, picket_result **out);

#endif
