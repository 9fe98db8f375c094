/* See picket/summary.h. */
#include <picket/summary.h>

#include "api/border.h"
#include "study/study.h"

static picket_status study_summary(const pk_problem *problem, const picket_options *options,
                                   picket_result **out) {
  (void)options; /* nothing is solved */
  return pk_study_summary(problem, out);
}

picket_status picket_summary_find(picket_problem *problem, picket_result **out) {
  return pk_border_study(problem, NULL, out, study_summary);
}

const char *picket_summary_line(const picket_result *result, int i) {
  return i >= 0 && i < pk_border_count(result, PK_RESULT_SUMMARY) ? result->lines[i] : NULL;
}
