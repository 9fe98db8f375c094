/* Sweeps with a journal, for the files of this room. */
#ifndef PK_API_SWEEPING_H
#define PK_API_SWEEPING_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#include "study/sweep.h"

/* The whole of picket_<study>_find_resumable. */
picket_status pk_sweeping_resumable(picket_problem *problem, const picket_options *options,
                                    const pk_sweep_kind *kind, const char *journal_path,
                                    picket_result **out);

#endif
