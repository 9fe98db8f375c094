/* See picket/bands.h. */
#include "api/border.h"
#include "study/study.h"

picket_status picket_bands_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_bands);
}

int picket_bands_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_BANDS);
}

picket_status picket_bands_get(const picket_result *result, int i, picket_bands_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_BANDS, i, out);
  if (status == PICKET_OK) {
    *out = result->bands[i];
  }
  return status;
}
