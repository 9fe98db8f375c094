/* See picket/index.h. */
#include "api/border.h"
#include "api/problem_private.h"
#include "study/study.h"

picket_status picket_index_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  return pk_border_study(problem, options, out, pk_study_index);
}

static picket_status find_resumable(picket_problem *problem, const picket_options *options,
                                    const char *journal_path, picket_result **out) {
  picket_options chosen;
  const pk_problem *understood = NULL;
  if (!journal_path || journal_path[0] == '\0') {
    return pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                   "journal_path is %s, must be a file name", journal_path ? "empty" : "null");
  }
  picket_status status = pk_border_prepare(problem, options, out, &chosen, &understood);
  return status == PICKET_OK ? pk_study_index_resumable(understood, &chosen, journal_path,
                                                        pk_document_hash(problem->document), out)
                             : status;
}

picket_status picket_index_find_resumable(picket_problem *problem, const picket_options *options,
                                          const char *journal_path, picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_context *context = problem->context;
  picket_status status = pk_border_enter(context);
  return status == PICKET_OK
             ? pk_border_leave(context, find_resumable(problem, options, journal_path, out))
             : status;
}

int picket_index_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_INDEX);
}

picket_status picket_index_get(const picket_result *result, int i, picket_index_answer *out) {
  if (i < 0 || i >= picket_index_count(result) || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  *out = result->index[i];
  return PICKET_OK;
}
