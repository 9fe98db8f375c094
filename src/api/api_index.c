/* See picket/index.h. */
#include "api/border.h"
#include "api/sweeping.h"
#include "study/study.h"

picket_status picket_index_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_index);
}

picket_status picket_index_find_resumable(picket_problem *problem, const picket_options *options,
                                          const char *journal_path, picket_result **out) {
  return pk_sweeping_resumable(problem, options, &pk_sweep_of_index, journal_path, out);
}

const char *picket_side_name(picket_side side) {
  switch (side) {
    case PICKET_SIDE_LOW: return "low";
    case PICKET_SIDE_HIGH: return "high";
  }
  return "unknown";
}

int picket_index_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_INDEX);
}

picket_status picket_index_get(const picket_result *result, int i, picket_index_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_INDEX, i, out);
  if (status == PICKET_OK) {
    *out = result->index[i];
  }
  return status;
}
