/* The part of picket/problem.h that gives back what a problem says. A text that was given out is
 * kept with the problem until the next one. */
#include "api/border.h"
#include "api/problem_private.h"
#include "base/memory.h"
#include "io/document_text.h"
#include "io/vary.h"

/* Puts a new text in the place of the one given out before. */
static void keep(picket_problem *problem, char *text, const char **out) {
  pk_free(problem->context, problem->text);
  problem->text = text;
  *out = text;
}

static picket_status missing(picket_problem *problem, const char *name) {
  return pk_fail(problem->context, PICKET_ERROR_ARGUMENT, "%s is null", name);
}

static picket_status number(picket_problem *problem, const char *path, double *out) {
  pk_node *node = NULL;
  return path && out ? pk_vary_value(problem->document, path, &node, out)
                     : missing(problem, path ? "out" : "path");
}

picket_status picket_problem_number(picket_problem *problem, const char *path, double *out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context, number(problem, path, out))
                             : status;
}

static picket_status text(picket_problem *problem, const char *path, const char **out) {
  pk_node *node = NULL;
  char *fresh = NULL;
  if (!out) {
    return missing(problem, "out");
  }
  picket_status status = path ? pk_document_find(problem->document, path, &node) : PICKET_OK;
  if (status == PICKET_OK) {
    const pk_node *whole = pk_document_root(problem->document);
    status = pk_document_text(problem->document, path ? node : whole, &fresh);
  }
  if (status == PICKET_OK) {
    keep(problem, fresh, out);
  }
  return status;
}

picket_status picket_problem_text(picket_problem *problem, const char *path, const char **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context, text(problem, path, out)) : status;
}

int picket_problem_number_count(picket_problem *problem) {
  if (!problem || pk_border_enter(problem->context) != PICKET_OK) {
    return -1;
  }
  int count = pk_document_number_count(problem->document);
  (void)pk_border_leave(problem->context, PICKET_OK);
  return count;
}

static picket_status number_at(picket_problem *problem, int i, const char **path, double *value) {
  double found = 0;
  char *fresh = NULL;
  if (!path) {
    return missing(problem, "path");
  }
  const pk_node *node = i < 0 ? NULL : pk_document_number(problem->document, i, &found);
  if (!node) {
    return pk_fail(problem->context, PICKET_ERROR_ARGUMENT, "i is %d, must be 0 to %d", i,
                   pk_document_number_count(problem->document) - 1);
  }
  picket_status status = pk_document_path(problem->document, node, &fresh);
  if (status == PICKET_OK) {
    keep(problem, fresh, path);
    if (value) {
      *value = found;
    }
  }
  return status;
}

picket_status picket_problem_number_at(picket_problem *problem, int i, const char **path,
                                       double *value) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context, number_at(problem, i, path, value))
                             : status;
}
