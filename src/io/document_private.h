/* The inside of a document, for the files of this room that build and change one. */
#ifndef PK_IO_DOCUMENT_PRIVATE_H
#define PK_IO_DOCUMENT_PRIVATE_H

#include "io/document.h"

/* A name that places of nodes borrow; kept as long as the document. */
typedef struct pk_label pk_label;
struct pk_label {
  pk_label *next;
  char *text;
};

struct pk_document {
  picket_context *context;
  pk_label *labels;
  char *folder;
  pk_node *root;
};

/* The document's own copy of a label, made at its first use; null when memory is out. */
const char *pk_document_label(pk_document *document, const char *label);

/* A new unattached node; null when memory is out. */
pk_node *pk_node_new(picket_context *context, pk_node_kind kind, pk_place place);
/* Frees a node and all below it; accepts null. */
void pk_node_free(picket_context *context, pk_node *node);
/* Hangs `child` behind the last element of `parent`; its key is set by the caller. */
void pk_node_append(pk_node *parent, pk_node *child);

/* Parses one YAML document. Places borrow `file`; without `positions` their line is 0. */
picket_status pk_yaml_parse(picket_context *context, const char *text, size_t length,
                            const char *file, bool positions, pk_node **out);

#endif
