/* What a document says, given back: its text, and the numbers in it. */
#ifndef PK_IO_DOCUMENT_TEXT_H
#define PK_IO_DOCUMENT_TEXT_H

#include "io/document.h"

/* A node as a piece of YAML in flow style on one line, which pk_document_set takes again; the root
 * with a line for each key, which pk_document_read_text takes again. Both give a document of the
 * same hash. *out is the caller's, pk_free. */
picket_status pk_document_text(const pk_document *document, const pk_node *node, char **out);

/* How many numbers there are that pk_vary_value takes by a path. */
int pk_document_number_count(const pk_document *document);

/* Number i of them, in the order of the document; null past the last. */
const pk_node *pk_document_number(const pk_document *document, int i, double *value);

/* The whole dotted path of a node below the root; *out is the caller's, pk_free. */
picket_status pk_document_path(const pk_document *document, const pk_node *node, char **out);

#endif
