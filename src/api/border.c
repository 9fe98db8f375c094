/* See border.h. */
#include "api/border.h"

#include "api/problem_private.h"
#include "base/options.h"

picket_status pk_border_enter(picket_context *context) {
  if (!pk_context_enter(context)) {
    return PICKET_ERROR_BUSY;
  }
  pk_message_clear(context);
  return PICKET_OK;
}

picket_status pk_border_leave(picket_context *context, picket_status status) {
  pk_context_leave(context);
  return status;
}

picket_status pk_border_prepare(picket_problem *problem, const picket_options *options,
                                picket_result **out, picket_options *chosen,
                                const pk_problem **understood) {
  picket_status status = PICKET_OK;
  picket_options_init(chosen);
  if (!out) {
    status = pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                     "out is null, must be the address of a result pointer");
  }
  if (status == PICKET_OK && options) {
    status = pk_options_check(problem->context, options);
  }
  if (status == PICKET_OK && options) {
    *chosen = *options;
  }
  return status == PICKET_OK ? pk_problem_understand(problem, understood) : status;
}

picket_status pk_border_study(picket_problem *problem, const picket_options *options,
                              picket_result **out, pk_study study) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_context *context = problem->context;
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  picket_options chosen;
  const pk_problem *understood = NULL;
  status = pk_border_prepare(problem, options, out, &chosen, &understood);
  if (status == PICKET_OK) {
    status = study(understood, &chosen, out);
  }
  return pk_border_leave(context, status);
}

int pk_border_count(const picket_result *result, pk_result_kind kind) {
  return result && result->kind == kind ? result->count : 0;
}
