/* See picket/sweep.h. */
#include <picket/sweep.h>

#include <math.h>
#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "api/sweeping.h"
#include "base/stamp.h"
#include "io/vary.h"

static const pk_sweep_kind *const KIND[] = {
    [PICKET_QUESTION_EDGES] = &pk_sweep_of_edges,
    [PICKET_QUESTION_INDEX] = &pk_sweep_of_index,
    [PICKET_QUESTION_MODES] = &pk_sweep_of_modes,
    [PICKET_QUESTION_SLAB] = &pk_sweep_of_slab,
};
enum { QUESTIONS = sizeof KIND / sizeof KIND[0] };

/* --- With a journal ------------------------------------------------------------------------------
 */

static picket_status check_journal(picket_context *context, const char *path) {
  return path && path[0] != '\0'
             ? PICKET_OK
             : pk_fail(context, PICKET_ERROR_ARGUMENT, "journal_path is %s, must be a file name",
                       path ? "empty" : "null");
}

static picket_status resumable(picket_problem *problem, const picket_options *options,
                               const pk_sweep_kind *kind, const char *journal_path,
                               picket_result **out) {
  picket_options chosen;
  pk_sweep_source source = {0};
  picket_status status = check_journal(problem->context, journal_path);
  if (status == PICKET_OK) {
    status = pk_border_prepare(problem, options, out, &chosen, &source.problem);
  }
  if (status != PICKET_OK) {
    return status;
  }
  source.document = pk_document_hash(problem->document);
  return pk_sweep_run(kind, &source, &chosen, journal_path, out);
}

picket_status pk_sweeping_resumable(picket_problem *problem, const picket_options *options,
                                    const pk_sweep_kind *kind, const char *journal_path,
                                    picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context,
                                               resumable(problem, options, kind, journal_path, out))
                             : status;
}

/* --- Over a value of the file --------------------------------------------------------------------
 */

void picket_sweep_request_init_sized(picket_sweep_request *request, size_t size) {
  const picket_sweep_request usual = {0};
  pk_stamp_give(&usual, sizeof usual, request, size);
}

/* In parentheses because the header has a macro of the same name. */
void(picket_sweep_request_init)(picket_sweep_request *request) {
  picket_sweep_request_init_sized(request, sizeof *request);
}

const char *picket_question_name(picket_question question) {
  switch (question) {
    case PICKET_QUESTION_EDGES: return "edges";
    case PICKET_QUESTION_INDEX: return "index";
    case PICKET_QUESTION_MODES: return "modes";
    case PICKET_QUESTION_SLAB: return "slab";
  }
  return "unknown";
}

picket_status picket_sweep_spread(double from, double to, int count, double *out) {
  bool good = out && count >= 2 && count <= PICKET_SWEEP_VALUES && isfinite(from) && isfinite(to) &&
              from != to && isfinite(to - from);
  for (int i = 0; good && i < count; i++) {
    /* Both ends exactly. */
    out[i] = i == count - 1 ? to : from + (to - from) * i / (count - 1);
  }
  return good ? PICKET_OK : PICKET_ERROR_ARGUMENT;
}

static picket_status check_values(picket_context *context, const picket_sweep_request *request) {
  if (!request->values) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "values is null, must be an array of numbers");
  }
  if (request->count < 1 || request->count > PICKET_SWEEP_VALUES) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "count is %d, must be 1 to %d values",
                   request->count, PICKET_SWEEP_VALUES);
  }
  for (int i = 0; i < request->count; i++) {
    if (!isfinite(request->values[i])) {
      return pk_fail(context, PICKET_ERROR_ARGUMENT, "values[%d] is %g, must be finite", i,
                     request->values[i]);
    }
  }
  return PICKET_OK;
}

static picket_status check_request(picket_context *context, const picket_sweep_request *request) {
  if ((int)request->question < 0 || (int)request->question >= QUESTIONS) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "question is %d, must be 0 to %d",
                   (int)request->question, QUESTIONS - 1);
  }
  if (!request->path || request->path[0] == '\0') {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "path is %s, must name a number of the problem, e.g. cell.pitch_nm",
                   request->path ? "empty" : "null");
  }
  if (request->journal_path) {
    picket_status status = check_journal(context, request->journal_path);
    if (status != PICKET_OK) {
      return status;
    }
  }
  return check_values(context, request);
}

typedef struct varied {
  picket_problem *problem;
  pk_node *node;
} varied;

static picket_status open_value(void *user, double value, pk_problem **out) {
  const varied *v = user;
  return pk_vary_read(v->problem->context, v->problem->document, v->node, value, out);
}

static picket_status take_request(picket_context *context, const picket_sweep_request *given,
                                  picket_sweep_request *request) {
  picket_sweep_request_init(request);
  if (!given) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "request is null, must say what to sweep");
  }
  picket_status status =
      pk_stamp_take(context, "picket_sweep_request", given, request, sizeof *request);
  return status == PICKET_OK ? check_request(context, request) : status;
}

static picket_status find(picket_problem *problem, const picket_sweep_request *given,
                          const picket_options *options, picket_result **out) {
  picket_sweep_request request;
  picket_options chosen;
  varied v = {.problem = problem};
  double now = 0;
  pk_sweep_source source = {.open = open_value, .user = &v};
  picket_status status = take_request(problem->context, given, &request);
  if (status == PICKET_OK) {
    status = pk_border_prepare(problem, options, out, &chosen, &source.problem);
  }
  if (status == PICKET_OK) {
    status = pk_vary_value(problem->document, request.path, &v.node, &now);
  }
  if (status != PICKET_OK) {
    return status;
  }
  source.document = pk_document_hash(problem->document);
  source.path = request.path;
  source.count = request.count;
  source.value = request.values;
  return pk_sweep_run(KIND[request.question], &source, &chosen, request.journal_path, out);
}

picket_status picket_sweep_find(picket_problem *problem, const picket_sweep_request *request,
                                const picket_options *options, picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK
             ? pk_border_leave(problem->context, find(problem, request, options, out))
             : status;
}

const char *picket_sweep_path(const picket_result *result) {
  return result ? result->sweep_path : NULL;
}

picket_status picket_sweep_value(const picket_result *result, int i, double *out) {
  if (!result) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!result->sweep_value || !out) {
    return pk_border_refuse(
        result->context, "%s",
        out ? "the result is of no sweep" : "out is null, must be the address of a number");
  }
  if (i < 0 || i >= result->count) {
    return pk_border_refuse(result->context, "i is %d, must be 0 to %d", i, result->count - 1);
  }
  *out = result->sweep_value[i];
  return PICKET_OK;
}
