/* See picket/slab.h. */
#include "api/border.h"
#include "study/study.h"

picket_status picket_slab_find(picket_problem *problem, const picket_options *options,
                               picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_slab);
}

const char *picket_slab_polarization_name(picket_slab_polarization polarization) {
  switch (polarization) {
    case PICKET_TE: return "te";
    case PICKET_TM: return "tm";
  }
  return "unknown";
}

int picket_slab_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_SLAB);
}

picket_status picket_slab_get(const picket_result *result, int i, picket_slab_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_SLAB, i, out);
  if (status == PICKET_OK) {
    *out = result->slab[i];
  }
  return status;
}
