/* See picket/taper.h. */
#include <picket/taper.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "io/vary.h"
#include "study/taper.h"

/* Where the numbers that change stand in the document. */
typedef struct varied {
  picket_context *context;
  pk_document *document;
  int count;
  pk_node *node[PK_TAPER_CHANGES];
  const char *path[PK_TAPER_CHANGES];
} varied;

static picket_status make(void *user, const double *values, pk_problem **out) {
  varied *v = user;
  return pk_vary_read_all(v->context, v->document, v->count, v->node, values, out);
}

static picket_status run(picket_problem *problem, const picket_options *options,
                         const char *journal, picket_result **out) {
  picket_options chosen;
  const pk_problem *understood = NULL;
  varied v = {.context = problem->context, .document = problem->document};
  picket_status status = pk_border_prepare(problem, options, out, &chosen, &understood);
  if (status == PICKET_OK && !understood->taper.given) {
    status = pk_fail(problem->context, PICKET_ERROR_INPUT,
                     "the problem has no \"taper\", which says what changes along the row");
  }
  for (int i = 0; status == PICKET_OK && i < understood->taper.count; i++) {
    double start = 0;
    v.path[i] = understood->taper.change[i].vary;
    status = pk_vary_value(problem->document, v.path[i], &v.node[i], &start);
    v.count = i + 1;
  }
  if (status != PICKET_OK) {
    return status;
  }
  const pk_variants variants = {
      .context = problem->context, .count = v.count, .paths = v.path, .user = &v, .make = make};
  return pk_study_taper(understood, &variants, pk_document_hash(problem->document), &chosen,
                        journal, out);
}

picket_status picket_taper_find(picket_problem *problem, const picket_options *options,
                                picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context, run(problem, options, NULL, out))
                             : status;
}

picket_status picket_taper_find_resumable(picket_problem *problem, const picket_options *options,
                                          const char *journal_path, picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  status =
      journal_path && journal_path[0] != '\0'
          ? run(problem, options, journal_path, out)
          : pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                    "journal_path is %s, must be a file name", journal_path ? "empty" : "null");
  return pk_border_leave(problem->context, status);
}

int picket_taper_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_TAPER);
}

picket_status picket_taper_get(const picket_result *result, int i, picket_taper_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_TAPER, i, out);
  if (status == PICKET_OK) {
    *out = result->taper[i];
  }
  return status;
}

const char *picket_taper_law_name(picket_taper_law law) {
  switch (law) {
    case PICKET_TAPER_LINEAR: return "linear";
    case PICKET_TAPER_POWER: return "power";
    case PICKET_TAPER_COSINE: return "cosine";
  }
  return "unknown";
}

const char *picket_taper_warning_name(picket_taper_warning warning) {
  switch (warning) {
    case PICKET_TAPER_STOP_BAND: return "stop-band";
    case PICKET_TAPER_PAST_BAND: return "past-band";
    case PICKET_TAPER_RADIATING: return "radiating";
    case PICKET_TAPER_SMALL_FEATURE: return "small-feature";
    case PICKET_TAPER_ABRUPT: return "abrupt";
  }
  return "unknown";
}
