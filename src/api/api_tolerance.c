/* See picket/tolerance.h. */
#include <picket/tolerance.h>

#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "io/number.h"
#include "io/vary.h"
#include "study/tolerance.h"

/* Where the numbers that spread stand in the document. */
typedef struct spread_numbers {
  picket_context *context;
  pk_document *document;
  int count;
  pk_node *node[PK_SPREADS];
  const char *path[PK_SPREADS];
  double start[PK_SPREADS];
} spread_numbers;

static picket_status make(void *user, const double *values, pk_problem **out) {
  spread_numbers *v = user;
  return pk_vary_read_all(v->context, v->document, v->count, v->node, values, out);
}

/* A file may leave the temperature out. To be varied it needs a place in the document, with the
 * value that it has anyway: nothing else is told from it. */
static picket_status say_temperature(pk_document *document, const pk_problem *understood) {
  static const char path[] = "temperature_c";
  if (pk_node_get(pk_document_root(document), path)) {
    return PICKET_OK;
  }
  char text[PK_NUMBER_TEXT];
  pk_number_write(understood->temperature_c, text);
  return pk_document_set(document, "the default", path, text);
}

static picket_status find_numbers(const pk_problem *understood, spread_numbers *v) {
  const pk_tolerance_block *block = &understood->tolerance;
  picket_status status = PICKET_OK;
  for (int i = 0; i < block->count && status == PICKET_OK; i++) {
    v->path[i] = block->spread[i].vary;
    if (strcmp(v->path[i], "temperature_c") == 0) {
      status = say_temperature(v->document, understood);
    }
    if (status == PICKET_OK) {
      status = pk_vary_value(v->document, v->path[i], &v->node[i], &v->start[i]);
    }
  }
  return status;
}

static picket_status run(picket_problem *problem, const pk_problem *understood,
                         const picket_options *options, const char *journal, picket_result **out) {
  const pk_tolerance_block *block = &understood->tolerance;
  spread_numbers v = {
      .context = problem->context, .document = problem->document, .count = block->count};
  if (!block->given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"tolerance\", which says what spreads and what must hold");
  }
  picket_status status = find_numbers(understood, &v);
  if (status != PICKET_OK) {
    return status;
  }
  const pk_variants variants = {
      .context = problem->context, .count = v.count, .paths = v.path, .user = &v, .make = make};
  return pk_study_tolerance(understood, &variants, v.start, options,
                            pk_document_hash(problem->document), journal, out);
}

static picket_status find(picket_problem *problem, const picket_options *options,
                          const char *journal, picket_result **out) {
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  picket_options chosen;
  const pk_problem *understood = NULL;
  status = journal && journal[0] == '\0'
               ? pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                         "journal_path is null or empty, must be a file name")
               : pk_border_prepare(problem, options, out, &chosen, &understood);
  if (status == PICKET_OK) {
    status = run(problem, understood, &chosen, journal, out);
  }
  return pk_border_leave(problem->context, status);
}

picket_status picket_tolerance_find(picket_problem *problem, const picket_options *options,
                                    picket_result **out) {
  return problem ? find(problem, options, NULL, out) : PICKET_ERROR_ARGUMENT;
}

picket_status picket_tolerance_find_resumable(picket_problem *problem,
                                              const picket_options *options,
                                              const char *journal_path, picket_result **out) {
  /* Null is refused like an empty name: without a journal there is the other function. */
  return problem ? find(problem, options, journal_path ? journal_path : "", out)
                 : PICKET_ERROR_ARGUMENT;
}

int picket_tolerance_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_TOLERANCE);
}

picket_status picket_tolerance_get(const picket_result *result, int i,
                                   picket_tolerance_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_TOLERANCE, i, out);
  if (status == PICKET_OK) {
    *out = result->tolerance[i];
  }
  return status;
}
