/* See border.h. */
#include "api/border.h"

#include <stdarg.h>
#include <stdio.h>

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
  if (!out) {
    status = pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                     "out is null, must be the address of a result pointer");
  }
  if (status == PICKET_OK) {
    status = pk_options_take(problem->context, options, chosen);
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

picket_status pk_border_refuse(picket_context *context, const char *format, ...) {
  char line[256];
  if (pk_border_enter(context) != PICKET_OK) {
    return PICKET_ERROR_ARGUMENT;
  }
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(line, sizeof line, format, arguments);
  va_end(arguments);
  return pk_border_leave(context, pk_fail(context, PICKET_ERROR_ARGUMENT, "%s", line));
}

picket_status pk_border_answer(const picket_result *result, pk_result_kind kind, int i,
                               const void *out) {
  if (!result) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!out) {
    return pk_border_refuse(result->context, "out is null, must be the address of an answer");
  }
  if (result->kind != kind) {
    return pk_border_refuse(result->context, "the result is of another question");
  }
  if (i < 0 || i >= result->count) {
    return pk_border_refuse(result->context, "i is %d, must be 0 to %d", i, result->count - 1);
  }
  return PICKET_OK;
}

int pk_border_count(const picket_result *result, pk_result_kind kind) {
  return result && result->kind == kind ? result->count : 0;
}
