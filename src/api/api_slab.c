/* See picket/slab.h. */
#include "api/border.h"
#include "study/study.h"

picket_status picket_slab_find(picket_problem *problem, const picket_options *options,
                               picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_slab);
}

int picket_slab_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_SLAB);
}

picket_status picket_slab_get(const picket_result *result, int i, picket_slab_answer *out) {
  if (i < 0 || i >= picket_slab_count(result) || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  *out = result->slab[i];
  return PICKET_OK;
}
