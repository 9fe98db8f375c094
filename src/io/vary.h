/* A problem with one number of its document changed: for derivatives, aiming and tolerance. */
#ifndef PK_IO_VARY_H
#define PK_IO_VARY_H

#include "io/document.h"
#include "study/problem.h"

/* The number at a dotted path. PICKET_ERROR_INPUT if there is no single finite number. */
picket_status pk_vary_value(pk_document *document, const char *path, pk_node **node, double *value);

/* The problem that the document describes when the number of a node is `value` instead; the
 * document stays as it is. The new problem is the caller's (pk_problem_free). */
picket_status pk_vary_read(picket_context *context, pk_document *document, pk_node *node,
                           double value, pk_problem **out);

/* The same for `count` numbers at once, at most PK_VARIED. */
enum { PK_VARIED = 64 };
picket_status pk_vary_read_all(picket_context *context, pk_document *document, int count,
                               pk_node *const *nodes, const double *values, pk_problem **out);

#endif
