/* See document_text.h. Texts are written twice: the first time only to be counted. */
#include "io/document_text.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/number.h"

typedef struct writer {
  char *out; /* null: counting */
  size_t used;
} writer;

static void put(writer *w, const char *text, size_t length) {
  if (w->out) {
    memcpy(w->out + w->used, text, length);
  }
  w->used += length;
}

static void put_text(writer *w, const char *text) {
  put(w, text, strlen(text));
}

/* Characters that have no meaning of their own in YAML wherever they stand. */
static bool is_plain(const char *text) {
  static const char harmless[] =
      "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789"
      "_.+-/";
  bool mark_alone = text[0] == '-' && text[1] == '\0';
  return text[0] != '\0' && !mark_alone && text[strspn(text, harmless)] == '\0';
}

static void put_quoted(writer *w, const char *text) {
  put_text(w, "\"");
  for (; *text; text++) {
    switch (*text) {
      case '"': put_text(w, "\\\""); break;
      case '\\': put_text(w, "\\\\"); break;
      case '\n': put_text(w, "\\n"); break;
      case '\t': put_text(w, "\\t"); break;
      default: put(w, text, 1); break;
    }
  }
  put_text(w, "\"");
}

/* A value left out stays so in a block of keys; in a list there is no way to write it. */
static void put_scalar(writer *w, const pk_node *node) {
  if (pk_node_is_empty(node) && node->key) {
    return;
  }
  if (!node->quoted && is_plain(node->text)) {
    put_text(w, node->text);
  } else {
    put_quoted(w, node->text);
  }
}

static void put_key(writer *w, const char *key) {
  if (is_plain(key)) {
    put_text(w, key);
  } else {
    put_quoted(w, key);
  }
  put_text(w, ": ");
}

/* The depth is bounded, see document.h. */
static void put_node(writer *w, const pk_node *node) {
  if (node->kind == PK_NODE_TEXT) {
    put_scalar(w, node);
    return;
  }
  put_text(w, node->kind == PK_NODE_MAP ? "{" : "[");
  for (const pk_node *child = node->first; child; child = child->next) {
    if (child->key) {
      put_key(w, child->key);
    }
    put_node(w, child);
    put_text(w, child->next ? ", " : "");
  }
  put_text(w, node->kind == PK_NODE_MAP ? "}" : "]");
}

static void put_root(writer *w, const pk_node *root) {
  for (const pk_node *child = root->first; child; child = child->next) {
    put_key(w, child->key);
    put_node(w, child);
    put_text(w, "\n");
  }
}

static void put_all(writer *w, const pk_node *node) {
  if (node->parent) {
    put_node(w, node);
  } else {
    put_root(w, node);
  }
  put(w, "", 1);
}

picket_status pk_document_text(const pk_document *document, const pk_node *node, char **out) {
  writer w = {0};
  put_all(&w, node);
  char *text = PK_NEW(pk_document_context(document), w.used, char);
  if (!text) {
    return PICKET_ERROR_MEMORY;
  }
  w = (writer){.out = text};
  put_all(&w, node);
  *out = text;
  return PICKET_OK;
}

/* ---- numbers ---- */

/* The node after one, parents before their children; null after the last. */
static const pk_node *after(const pk_node *node) {
  if (node->first) {
    return node->first;
  }
  while (node && !node->next) {
    node = node->parent;
  }
  return node ? node->next : NULL;
}

/* A key with a dot in it cannot be part of a path. */
static bool is_reachable(const pk_node *node) {
  for (; node->parent; node = node->parent) {
    if (node->key && (node->key[0] == '\0' || strchr(node->key, '.'))) {
      return false;
    }
  }
  return true;
}

static bool is_number(const pk_node *node, double *value) {
  return node->kind == PK_NODE_TEXT && !node->quoted &&
         pk_number_parse(node->text, value) == PK_NUMBER_GOOD && isfinite(*value) &&
         is_reachable(node);
}

const pk_node *pk_document_number(const pk_document *document, int i, double *value) {
  double number = 0;
  for (const pk_node *node = pk_document_root(document); node; node = after(node)) {
    if (is_number(node, &number) && i-- == 0) {
      *value = number;
      return node;
    }
  }
  return NULL;
}

int pk_document_number_count(const pk_document *document) {
  double number = 0;
  int count = 0;
  for (const pk_node *node = pk_document_root(document); node; node = after(node)) {
    count += is_number(node, &number);
  }
  return count;
}

static void put_path(writer *w, const pk_node *node) {
  if (!node->parent) {
    return;
  }
  put_path(w, node->parent);
  put_text(w, node->parent->parent ? "." : "");
  if (node->key) {
    put_text(w, node->key);
    return;
  }
  char number[16];
  int index = 0;
  for (const pk_node *child = node->parent->first; child != node; child = child->next) {
    index++;
  }
  snprintf(number, sizeof number, "%d", index);
  put_text(w, number);
}

picket_status pk_document_path(const pk_document *document, const pk_node *node, char **out) {
  writer w = {0};
  put_path(&w, node);
  char *text = PK_NEW(pk_document_context(document), w.used + 1, char);
  if (!text) {
    return PICKET_ERROR_MEMORY;
  }
  w = (writer){.out = text};
  put_path(&w, node);
  *out = text;
  return PICKET_OK;
}
