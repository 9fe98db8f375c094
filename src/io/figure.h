/* A finished result as a picture: the text of a gnuplot script that holds its data. Pure functions
 * of result and problem; nothing is started here. */
#ifndef PK_IO_FIGURE_H
#define PK_IO_FIGURE_H

#include <picket/figure.h>

#include "study/problem.h"
#include "study/result.h"

/* The script of a result of `problem`. *out is the caller's, pk_free. PICKET_ERROR_UNSUPPORTED if
 * the result is of a kind without a picture or holds nothing that could be drawn,
 * PICKET_ERROR_MEMORY. */
picket_status pk_figure_write(const picket_result *result, const pk_problem *problem,
                              const picket_figure_options *options, char **out);

#endif
