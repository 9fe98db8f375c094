/* See picket/edges.h. */
#include "api/border.h"
#include "study/study.h"

picket_status picket_edges_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_edges);
}

int picket_edges_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_EDGES);
}

picket_status picket_edges_get(const picket_result *result, int i, picket_edges_answer *out) {
  if (i < 0 || i >= picket_edges_count(result) || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  *out = result->edges[i];
  return PICKET_OK;
}
