/* See picket/modes.h. */
#include "api/border.h"
#include "api/sweeping.h"
#include "study/study.h"

picket_status picket_modes_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_modes);
}

picket_status picket_modes_find_resumable(picket_problem *problem, const picket_options *options,
                                          const char *journal_path, picket_result **out) {
  return pk_sweeping_resumable(problem, options, &pk_sweep_of_modes, journal_path, out);
}

int picket_modes_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_MODES);
}

picket_status picket_modes_get(const picket_result *result, int i, picket_modes_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_MODES, i, out);
  if (status == PICKET_OK) {
    *out = result->modes[i];
  }
  return status;
}
