/* The inside of a public problem, for the files of this room. */
#ifndef PK_API_PROBLEM_PRIVATE_H
#define PK_API_PROBLEM_PRIVATE_H

#include <picket/problem.h>

#include "io/document.h"
#include "study/problem.h"

struct picket_problem {
  picket_context *context; /* held */
  pk_document *document;
  char *text;             /* given out last, or null */
  pk_problem *understood; /* what the document says; null until asked for and after a change */
};

/* The problem as understood, made from the document at the first call after a change. Borrowed
 * until the next set or free. The caller has entered the context. */
picket_status pk_problem_understand(picket_problem *problem, const pk_problem **out);

#endif
