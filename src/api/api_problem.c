/* See picket/problem.h. Reading parses a document; what it says is checked at the first use, so
 * that a caller can set values first. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "base/memory.h"
#include "io/number.h"
#include "io/read.h"

enum { LABEL_BYTES = 200 };

/* Wraps a document, which it takes over in any case. */
static picket_status wrap(picket_context *context, pk_document *document, picket_problem **out) {
  picket_problem *problem = PK_NEW(context, 1, picket_problem);
  if (!problem) {
    pk_document_free(document);
    return PICKET_ERROR_MEMORY;
  }
  problem->context = pk_context_hold(context);
  problem->document = document;
  *out = problem;
  return PICKET_OK;
}

static picket_status read_text(picket_context *context, const char *text, size_t length,
                               const char *label, picket_problem **out) {
  pk_document *document = NULL;
  picket_status status = pk_document_read_text(context, text, length, label, &document);
  return status == PICKET_OK ? wrap(context, document, out) : status;
}

picket_status picket_problem_create(picket_context *context, picket_problem **out) {
  static const char start[] = "format: 1";
  if (!context || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  return pk_border_leave(context, read_text(context, start, sizeof start - 1, NULL, out));
}

picket_status picket_problem_read_file(picket_context *context, const char *path,
                                       picket_problem **out) {
  if (!context || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  pk_document *document = NULL;
  if (!path || path[0] == '\0') {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT, "path is %s, must be a file name",
                     path ? "empty" : "null");
  } else {
    status = pk_document_read_file(context, path, &document);
  }
  if (status == PICKET_OK) {
    status = wrap(context, document, out);
  }
  return pk_border_leave(context, status);
}

picket_status picket_problem_read_text(picket_context *context, const char *text, size_t length,
                                       const char *label, picket_problem **out) {
  if (!context || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  if (!text) {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT, "text is null, must be %zu bytes", length);
  } else {
    status = read_text(context, text, length, label ? label : "text", out);
  }
  return pk_border_leave(context, status);
}

/* Sets and forgets what was understood before. */
static picket_status set(picket_problem *problem, const char *path, const char *value) {
  char label[LABEL_BYTES];
  snprintf(label, sizeof label, "set %s", path);
  picket_status status = pk_document_set(problem->document, label, path, value);
  if (status == PICKET_OK) {
    pk_problem_free(problem->understood);
    problem->understood = NULL;
  }
  return status;
}

picket_status picket_problem_set(picket_problem *problem, const char *path, const char *value) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  if (!path || !value) {
    status = pk_fail(problem->context, PICKET_ERROR_ARGUMENT, "%s is null, must be a text",
                     path ? "value" : "path");
  } else {
    status = set(problem, path, value);
  }
  return pk_border_leave(problem->context, status);
}

picket_status picket_problem_set_number(picket_problem *problem, const char *path, double value) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  if (!path) {
    status = pk_fail(problem->context, PICKET_ERROR_ARGUMENT, "path is null, must be a text");
  } else if (isnan(value)) {
    status = pk_fail(problem->context, PICKET_ERROR_ARGUMENT,
                     "the value for %.100s is not a number, must be one", path);
  } else {
    char text[PK_NUMBER_TEXT];
    pk_number_write(value, text);
    status = set(problem, path, text);
  }
  return pk_border_leave(problem->context, status);
}

picket_status pk_problem_understand(picket_problem *problem, const pk_problem **out) {
  picket_status status = PICKET_OK;
  if (!problem->understood) {
    status = pk_problem_read(problem->context, problem->document, &problem->understood);
  }
  if (status == PICKET_OK) {
    *out = problem->understood;
  }
  return status;
}

picket_status picket_problem_check(picket_problem *problem) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  const pk_problem *understood = NULL;
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  return pk_border_leave(problem->context, pk_problem_understand(problem, &understood));
}

void picket_problem_free(picket_problem *problem) {
  if (!problem) {
    return;
  }
  picket_context *context = problem->context;
  pk_problem_free(problem->understood);
  pk_document_free(problem->document);
  pk_free(context, problem->text);
  pk_free(context, problem);
  pk_context_release(context);
}
