/* Derivatives of edges and of the Bloch index with respect to a value of the problem. */
#ifndef PK_STUDY_DERIVATIVE_H
#define PK_STUDY_DERIVATIVE_H

#include <picket/options.h>

#include "study/problem.h"
#include "study/result.h"

/* A problem and its neighbours: the same but for one value, moved by -2, -1, 1 and 2 steps. */
enum { PK_NEIGHBOURS = 4 };
typedef struct pk_variation {
  const pk_problem *problem;
  const pk_problem *neighbour[PK_NEIGHBOURS];
  double step;
  double bar_wanted; /* of the derivative, µm or 1 per unit: finer grids until it is met; 0: what
                        the first grids give */
} pk_variation;

picket_status pk_study_edge_derivatives(const pk_variation *variation,
                                        const picket_options *options, picket_result **out);
picket_status pk_study_index_derivatives(const pk_variation *variation,
                                         const picket_options *options, picket_result **out);

#endif
