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
  picket_status status = pk_border_answer(result, PK_RESULT_EDGES, i, out);
  if (status == PICKET_OK) {
    *out = result->edges[i];
  }
  return status;
}
