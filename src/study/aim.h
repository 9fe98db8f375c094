/* The number that meets a target. See picket/aim.h for what is promised. */
#ifndef PK_STUDY_AIM_H
#define PK_STUDY_AIM_H

#include <picket/options.h>

#include "study/result.h"
#include "study/variants.h"

/* The numbers of `variants` are those of the parts of problem->aim, in their order; `start` holds
 * their values in the file. */
picket_status pk_study_aim(const pk_problem *problem, const pk_variants *variants,
                           const double *start, const picket_options *options, picket_result **out);

#endif
