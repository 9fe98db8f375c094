/* See picket/aim.h. */
#include <picket/aim.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "io/vary.h"
#include "study/aim.h"

/* Where the numbers that are varied stand in the document. */
typedef struct varied {
  picket_context *context;
  pk_document *document;
  int count;
  pk_node *node[PK_AIM_PARTS];
  const char *path[PK_AIM_PARTS];
  double start[PK_AIM_PARTS];
} varied;

static picket_status make(void *user, const double *values, pk_problem **out) {
  varied *v = user;
  return pk_vary_read_all(v->context, v->document, v->count, v->node, values, out);
}

static picket_status run(picket_problem *problem, const pk_problem *understood,
                         const picket_options *options, picket_result **out) {
  const pk_aim_block *aim = &understood->aim;
  varied v = {.context = problem->context, .document = problem->document, .count = aim->count};
  if (!aim->given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"aim\", which says what to vary and what to meet");
  }
  for (int i = 0; i < aim->count; i++) {
    v.path[i] = aim->part[i].vary;
    picket_status status =
        pk_vary_value(problem->document, aim->part[i].vary, &v.node[i], &v.start[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  const pk_variants variants = {
      .context = problem->context, .count = aim->count, .paths = v.path, .user = &v, .make = make};
  return pk_study_aim(understood, &variants, v.start, options, out);
}

picket_status picket_aim_find(picket_problem *problem, const picket_options *options,
                              picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  picket_options chosen;
  const pk_problem *understood = NULL;
  status = pk_border_prepare(problem, options, out, &chosen, &understood);
  if (status == PICKET_OK) {
    status = run(problem, understood, &chosen, out);
  }
  return pk_border_leave(problem->context, status);
}

const char *picket_derivative_way_name(picket_derivative_way way) {
  switch (way) {
    case PICKET_DERIVATIVE_NONE: return "none";
    case PICKET_DERIVATIVE_ANALYTIC: return "analytic";
    case PICKET_DERIVATIVE_DIFFERENCE: return "difference";
    case PICKET_DERIVATIVE_SAMPLES: return "samples";
  }
  return "unknown";
}

int picket_aim_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_AIM);
}

picket_status picket_aim_get(const picket_result *result, int i, picket_aim_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_AIM, i, out);
  if (status == PICKET_OK) {
    *out = result->aim[i];
  }
  return status;
}
