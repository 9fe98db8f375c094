/* See picket/derivative.h. */
#include "api/border.h"
#include "api/problem_private.h"
#include "io/vary.h"
#include "study/derivative.h"
#include "study/variants.h"

typedef picket_status (*derivative_study)(const pk_variation *variation,
                                          const picket_options *options, picket_result **out);

static picket_status run(picket_problem *problem, const char *path, const picket_options *options,
                         const pk_problem *understood, derivative_study study,
                         picket_result **out) {
  picket_context *context = problem->context;
  pk_node *node = NULL;
  double value = 0;
  picket_status status = pk_vary_value(problem->document, path, &node, &value);
  if (status != PICKET_OK) {
    return status;
  }
  static const int AT[PK_NEIGHBOURS] = {-2, -1, 1, 2};
  pk_variation variation = {.problem = understood, .step = pk_vary_step(path, value)};
  pk_problem *neighbour[PK_NEIGHBOURS] = {0};
  for (int i = 0; status == PICKET_OK && i < PK_NEIGHBOURS; i++) {
    double moved = value + AT[i] * variation.step;
    status = pk_vary_read(context, problem->document, node, moved, &neighbour[i]);
    variation.neighbour[i] = neighbour[i];
  }
  if (status == PICKET_OK) {
    status = study(&variation, options, out);
  }
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    pk_problem_free(neighbour[i]);
  }
  return status;
}

static picket_status find(picket_problem *problem, const char *path, const picket_options *options,
                          derivative_study study, picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  picket_options chosen;
  const pk_problem *understood = NULL;
  status = path ? pk_border_prepare(problem, options, out, &chosen, &understood)
                : pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                          "path is null, must name a number of the problem, e.g. cell.pitch_nm");
  if (status == PICKET_OK) {
    status = run(problem, path, &chosen, understood, study, out);
  }
  return pk_border_leave(problem->context, status);
}

picket_status picket_edge_derivatives_find(picket_problem *problem, const char *path,
                                           const picket_options *options, picket_result **out) {
  return find(problem, path, options, pk_study_edge_derivatives, out);
}

int picket_edge_derivatives_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_EDGE_DERIVATIVES);
}

picket_status picket_edge_derivatives_get(const picket_result *result, int i,
                                          picket_edge_derivatives *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_EDGE_DERIVATIVES, i, out);
  if (status == PICKET_OK) {
    *out = result->edge_derivatives[i];
  }
  return status;
}

picket_status picket_index_derivatives_find(picket_problem *problem, const char *path,
                                            const picket_options *options, picket_result **out) {
  return find(problem, path, options, pk_study_index_derivatives, out);
}

int picket_index_derivatives_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_INDEX_DERIVATIVES);
}

picket_status picket_index_derivatives_get(const picket_result *result, int i,
                                           picket_index_derivatives *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_INDEX_DERIVATIVES, i, out);
  if (status == PICKET_OK) {
    *out = result->index_derivatives[i];
  }
  return status;
}
