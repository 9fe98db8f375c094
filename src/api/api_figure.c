/* See picket/figure.h. */
#include <picket/figure.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "base/memory.h"
#include "base/stamp.h"
#include "io/figure.h"

void picket_figure_options_init_sized(picket_figure_options *options, size_t size) {
  const picket_figure_options usual = {.format = PICKET_FIGURE_SVG};
  pk_stamp_give(&usual, sizeof usual, options, size);
}

/* In parentheses because the header has a macro of the same name. */
void(picket_figure_options_init)(picket_figure_options *options) {
  picket_figure_options_init_sized(options, sizeof *options);
}

static picket_status check(const picket_result *result, const picket_problem *problem,
                           const picket_figure_options *options, const char **out) {
  picket_context *context = result->context;
  if (!problem || !out) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "figure: %s",
                   problem ? "out is null, must be the address of a text"
                           : "problem is null, must be the one the question was asked of");
  }
  if (problem->context != context) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "figure: the problem is of another context than the result");
  }
  if ((int)options->format < PICKET_FIGURE_SVG || options->format > PICKET_FIGURE_PDF) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "figure: format is %d, must be %d to %d",
                   (int)options->format, PICKET_FIGURE_SVG, PICKET_FIGURE_PDF);
  }
  return PICKET_OK;
}

static picket_status make(picket_result *result, picket_problem *problem,
                          const picket_figure_options *options, const char **out) {
  picket_figure_options chosen;
  picket_figure_options_init(&chosen);
  picket_status status = options ? pk_stamp_take(result->context, "picket_figure_options", options,
                                                 &chosen, sizeof chosen)
                                 : PICKET_OK;
  if (status == PICKET_OK) {
    status = check(result, problem, &chosen, out);
  }
  const pk_problem *understood = NULL;
  char *script = NULL;
  if (status == PICKET_OK) {
    status = pk_problem_understand(problem, &understood);
  }
  if (status == PICKET_OK) {
    status = pk_figure_write(result, understood, &chosen, &script);
  }
  if (status == PICKET_OK) {
    pk_free(result->context, result->figure);
    result->figure = script;
    *out = script;
  }
  return status;
}

picket_status picket_result_figure_get(picket_result *result, picket_problem *problem,
                                       const picket_figure_options *options, const char **out) {
  if (!result) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(result->context);
  return status == PICKET_OK ? pk_border_leave(result->context, make(result, problem, options, out))
                             : status;
}
