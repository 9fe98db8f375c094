/* See document.h. */
#include "io/document.h"

#include <stdio.h>
#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "io/document_private.h"
#include "io/text.h"

pk_node *pk_node_new(picket_context *context, pk_node_kind kind, pk_place place) {
  pk_node *node = PK_NEW(context, 1, pk_node);
  if (node) {
    node->kind = kind;
    node->place = place;
  }
  return node;
}

void pk_node_free(picket_context *context, pk_node *node) {
  if (!node) {
    return;
  }
  for (pk_node *child = node->first; child;) {
    pk_node *next = child->next;
    pk_node_free(context, child);
    child = next;
  }
  pk_free(context, node->key);
  pk_free(context, node->text);
  pk_free(context, node);
}

void pk_node_append(pk_node *parent, pk_node *child) {
  child->parent = parent;
  if (parent->last) {
    parent->last->next = child;
  } else {
    parent->first = child;
  }
  parent->last = child;
  parent->count++;
}

pk_node *pk_node_get(const pk_node *map, const char *key) {
  if (!map || map->kind != PK_NODE_MAP) {
    return NULL;
  }
  for (pk_node *child = map->first; child; child = child->next) {
    if (strcmp(child->key, key) == 0) {
      return child;
    }
  }
  return NULL;
}

pk_node *pk_node_element(const pk_node *list, int index) {
  pk_node *child = list->first;
  for (int i = 0; child && i < index; i++) {
    child = child->next;
  }
  return child;
}

bool pk_node_is_empty(const pk_node *node) {
  return node->kind == PK_NODE_TEXT && !node->quoted && node->text[0] == '\0';
}

static int index_in_parent(const pk_node *node) {
  int index = 0;
  for (const pk_node *child = node->parent->first; child != node; child = child->next) {
    index++;
  }
  return index;
}

pk_path_text pk_node_path(const pk_node *node) {
  pk_path_text path = {{0}};
  if (!node->parent) {
    memcpy(path.text, "the file", sizeof "the file");
    return path;
  }
  /* Written from the end of the buffer to its front, because a node knows only its parent; what
   * does not fit is cut at the front. */
  char buffer[PK_NODE_PATH];
  size_t start = sizeof buffer - 1;
  buffer[start] = '\0';
  for (; node->parent; node = node->parent) {
    char number[16];
    pk_shown key;
    const char *piece = number;
    if (node->key) {
      key = pk_text_shown(node->key);
      piece = key.text;
    } else {
      snprintf(number, sizeof number, "%d", index_in_parent(node));
    }
    size_t length = strlen(piece);
    if (length + 1 > start) {
      break;
    }
    if (buffer[start] != '\0') {
      buffer[--start] = '.';
    }
    start -= length;
    memcpy(buffer + start, piece, length);
  }
  memcpy(path.text, buffer + start, sizeof buffer - start);
  return path;
}

picket_context *pk_document_context(const pk_document *document) {
  return document->context;
}

const pk_node *pk_document_root(const pk_document *document) {
  return document->root;
}

const char *pk_document_folder(const pk_document *document) {
  return document->folder;
}

const char *pk_document_label(pk_document *document, const char *label) {
  for (pk_label *known = document->labels; known; known = known->next) {
    if (strcmp(known->text, label) == 0) {
      return known->text;
    }
  }
  pk_label *fresh = PK_NEW(document->context, 1, pk_label);
  char *text = fresh ? pk_text_copy(document->context, label) : NULL;
  if (!text) {
    pk_free(document->context, fresh);
    return NULL;
  }
  fresh->text = text;
  fresh->next = document->labels;
  document->labels = fresh;
  return text;
}

void pk_document_free(pk_document *document) {
  if (!document) {
    return;
  }
  picket_context *context = document->context;
  pk_node_free(context, document->root);
  while (document->labels) {
    pk_label *next = document->labels->next;
    pk_free(context, document->labels->text);
    pk_free(context, document->labels);
    document->labels = next;
  }
  pk_free(context, document->folder);
  pk_free(context, document);
  pk_context_release(context);
}

/* An empty document that holds its context. */
static picket_status document_new(picket_context *context, pk_document **out) {
  pk_document *document = PK_NEW(context, 1, pk_document);
  if (!document) {
    return PICKET_ERROR_MEMORY;
  }
  document->context = pk_context_hold(context);
  *out = document;
  return PICKET_OK;
}

/* The path up to and with its last '/'. */
static char *folder_of(picket_context *context, const char *path) {
  const char *slash = strrchr(path, '/');
  size_t length = slash ? (size_t)(slash - path) + 1 : 0;
  char *folder = PK_NEW(context, length + 1, char);
  if (folder) {
    memcpy(folder, path, length);
  }
  return folder;
}

/* Reads `text` into a new document whose places are called `label` and whose files lie in the
 * folder of `path`. */
static picket_status read_into(picket_context *context, const char *text, size_t length,
                               const char *label, const char *path, pk_document **out) {
  pk_document *document = NULL;
  const char *file = NULL;
  picket_status status = document_new(context, &document);
  if (status == PICKET_OK && label) {
    file = pk_document_label(document, label);
    status = file ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    document->folder = folder_of(context, path);
    status = document->folder ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    status = pk_yaml_parse(context, text, length, file, file != NULL, &document->root);
  }
  if (status == PICKET_OK && document->root->kind != PK_NODE_MAP) {
    /* The place dies with the document, so the message is made before that. */
    status = pk_fail_at(context, PICKET_ERROR_INPUT, document->root->place,
                        "a problem file is a block of keys and begins with \"format: 1\"");
  }
  if (status != PICKET_OK) {
    pk_document_free(document);
    return status;
  }
  *out = document;
  return PICKET_OK;
}

picket_status pk_document_read_text(picket_context *context, const char *text, size_t length,
                                    const char *label, pk_document **out) {
  if (length > PK_DOCUMENT_BYTES) {
    pk_place place = {label, 0, 0};
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "the text has %zu bytes, must be at most %d", length, PK_DOCUMENT_BYTES);
  }
  return read_into(context, text, length, label, "", out);
}

picket_status pk_document_read_file(picket_context *context, const char *path, pk_document **out) {
  pk_place place = {path, 0, 0};
  char *text = NULL;
  size_t length = 0;
  picket_status status = pk_text_read_file(context, path, PK_DOCUMENT_BYTES, place, &text, &length);
  if (status == PICKET_OK) {
    status = read_into(context, text, length, path, path, out);
  }
  pk_free(context, text);
  return status;
}

static uint64_t hash_node(uint64_t hash, const pk_node *node) {
  /* An empty text differs from none, a list from a map, and the end of a block from its start. */
  const char marks[2] = {(char)node->kind, (char)node->quoted};
  hash = pk_hash_bytes(hash, marks, sizeof marks);
  hash = pk_hash_text(hash, node->key ? node->key : "");
  hash = pk_hash_text(hash, node->text ? node->text : "");
  hash = pk_hash_bytes(hash, &node->count, sizeof node->count);
  for (const pk_node *child = node->first; child; child = child->next) {
    hash = hash_node(hash, child);
  }
  return hash;
}

uint64_t pk_document_hash(const pk_document *document) {
  return hash_node(PK_HASH_START, document->root);
}
