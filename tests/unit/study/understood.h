/* A problem understood from a text, for tests of the studies. */
#ifndef PICKET_TESTS_UNDERSTOOD_H
#define PICKET_TESTS_UNDERSTOOD_H

#include <picket/problem.h>
#include <string.h>

#include "api/problem_private.h"
#include "unit/near.h"

typedef struct understood {
  picket_problem *owner;
  const pk_problem *problem;
} understood;

static inline picket_status understand(picket_context *context, const char *text, understood *out) {
  *out = (understood){0};
  picket_status status = picket_problem_read_text(context, text, strlen(text), "test", &out->owner);
  if (status == PICKET_OK) {
    status = pk_problem_understand(out->owner, &out->problem);
  }
  return status;
}

/* A text that is known to be good. */
static inline understood understand_good(picket_context *context, const char *text) {
  understood u;
  if (understand(context, text, &u) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  return u;
}

#endif
