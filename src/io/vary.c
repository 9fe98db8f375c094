/* See vary.h. */
#include "io/vary.h"

#include <assert.h>
#include <math.h>

#include "io/number.h"
#include "io/read.h"

picket_status pk_vary_value(pk_document *document, const char *path, pk_node **node,
                            double *value) {
  pk_node *found = NULL;
  double number = NAN;
  picket_status status = pk_document_find(document, path, &found);
  if (status != PICKET_OK) {
    return status;
  }
  if (found->kind != PK_NODE_TEXT || found->quoted ||
      pk_number_parse(found->text, &number) != PK_NUMBER_GOOD || !isfinite(number)) {
    return pk_fail_at(pk_document_context(document), PICKET_ERROR_INPUT, found->place,
                      "%s must be a single finite number to be varied", pk_node_path(found).text);
  }
  *node = found;
  *value = number;
  return PICKET_OK;
}

picket_status pk_vary_read(picket_context *context, pk_document *document, pk_node *node,
                           double value, pk_problem **out) {
  return pk_vary_read_all(context, document, 1, &node, &value, out);
}

picket_status pk_vary_read_all(picket_context *context, pk_document *document, int count,
                               pk_node *const *nodes, const double *values, pk_problem **out) {
  char text[PK_VARIED][PK_NUMBER_TEXT], *kept[PK_VARIED];
  assert(count <= PK_VARIED);
  for (int i = 0; i < count; i++) { /* for the length of this call */
    kept[i] = nodes[i]->text;
    pk_number_write(values[i], text[i]);
    nodes[i]->text = text[i];
  }
  picket_status status = pk_problem_read(context, document, out);
  for (int i = count - 1; i >= 0; i--) { /* backwards: a node may be there twice */
    nodes[i]->text = kept[i];
  }
  return status;
}
