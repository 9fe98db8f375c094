/* A problem file as a tree of nodes, each knowing where it stands: the only thing the readers see.
 *
 * Nodes of a list or a map are chained in the order of the file. The tree is bounded (length,
 * depth, number of nodes), so walking it by recursion is safe. */
#ifndef PK_IO_DOCUMENT_H
#define PK_IO_DOCUMENT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "base/context.h"

enum {
  PK_DOCUMENT_BYTES = 4000000, /* a file of ours has a few kB; tables of numbers are CSV files */
  PK_DOCUMENT_DEPTH = 32,      /* the deepest block of format 1 has depth 7 */
  PK_DOCUMENT_NODES = 200000,  /* bounds the memory of a hostile file to some 30 MB */
  PK_DOCUMENT_KEYS = 1000,     /* of one block: keeps the search for duplicates short */
  PK_NODE_PATH = 200           /* bytes of a path in a message */
};

typedef enum pk_node_kind { PK_NODE_TEXT, PK_NODE_LIST, PK_NODE_MAP } pk_node_kind;

typedef struct pk_node pk_node;
struct pk_node {
  pk_node_kind kind;
  pk_place place;     /* of the value */
  pk_place key_place; /* of the key, in a map */
  char *key;          /* in a map, else null */
  char *text;         /* of a text, else null */
  bool quoted;        /* a text in quotes or in a | or > block */
  int count;          /* elements of a list or map */
  pk_node *parent, *first, *last, *next;
};

typedef struct pk_document pk_document;

/* Reads a file; its folder is remembered. PICKET_ERROR_FILE, PICKET_ERROR_INPUT. */
picket_status pk_document_read_file(picket_context *context, const char *path, pk_document **out);

/* Reads a text. `label` stands for the file name in messages; null: messages have no place. */
picket_status pk_document_read_text(picket_context *context, const char *text, size_t length,
                                    const char *label, pk_document **out);

/* Puts the value written in `value` (YAML, usually in flow style) at a dotted path. Blocks missing
 * on the way are made; a list takes the element one past its end, and a missing list is made when
 * its element 0 is set. Below a list element that holds a single kind ({rect: {...}}) the kind can
 * be left out. New nodes have the place `label`, without a line. Unchanged on failure. */
picket_status pk_document_set(pk_document *document, const char *label, const char *path,
                              const char *value);

/* The node at a dotted path, as pk_document_set walks it.
 * PICKET_ERROR_INPUT if the path is malformed or leads to nothing. */
picket_status pk_document_find(pk_document *document, const char *path, pk_node **out);

void pk_document_free(pk_document *document); /* accepts null */

/* A fingerprint of what a document says: keys and values in their order, with what was set; not
 * comments, layout or the names of files it came from. */
uint64_t pk_document_hash(const pk_document *document);

picket_context *pk_document_context(const pk_document *document);
const pk_node *pk_document_root(const pk_document *document);
/* Where files named in the document are looked for: ends with '/', or "". */
const char *pk_document_folder(const pk_document *document);

/* The value of a key of a map, null if there is none. */
pk_node *pk_node_get(const pk_node *map, const char *key);
/* Element `index` of a list, null past its end. */
pk_node *pk_node_element(const pk_node *list, int index);
/* True for a value left out, as in "cell:" with nothing behind it. */
bool pk_node_is_empty(const pk_node *node);

/* The dotted path of a node, as pk_document_set takes it; "the file" for the root. */
typedef struct pk_path_text {
  char text[PK_NODE_PATH];
} pk_path_text;
pk_path_text pk_node_path(const pk_node *node);

#endif
