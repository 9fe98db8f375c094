/* Setting a value by its dotted path.
 *
 * Everything that can fail comes first: the value is parsed, the path is walked as far as nodes
 * exist, and the blocks missing on the way are built from the leaf upwards. Only then is the new
 * branch hung in, which cannot fail, so a failed set changes nothing. */
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/document_private.h"
#include "io/number.h"
#include "io/text.h"

typedef struct setter {
  picket_context *context;
  pk_document *document;
  pk_place place;   /* what the new nodes are called in messages */
  const char *path; /* as given, for messages */
  char *pieces;     /* a copy of the path cut into pieces */
  const char *piece[PK_DOCUMENT_DEPTH];
  int count;
  pk_node *at; /* the deepest node of the path that exists */
  int used;    /* pieces that led to it */
} setter;

/* Cuts the path at its dots. */
static picket_status split(setter *s) {
  char *rest = s->pieces;
  for (;;) {
    char *dot = strchr(rest, '.');
    if (dot) {
      *dot = '\0';
    }
    if (rest[0] == '\0') {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                        "path \"%s\" has an empty piece; write it like cell.pitch_nm",
                        pk_text_shown(s->path).text);
    }
    if (s->count == PK_DOCUMENT_DEPTH) {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                        "path \"%s\" has more than %d pieces", pk_text_shown(s->path).text,
                        PK_DOCUMENT_DEPTH);
    }
    s->piece[s->count++] = rest;
    if (!dot) {
      return PICKET_OK;
    }
    rest = dot + 1;
  }
}

/* The element a piece names; null in *next if it is one past the end. */
static picket_status step_list(const setter *s, const pk_node *list, const char *piece,
                               pk_node **next) {
  long index = 0;
  if (!pk_whole_parse(piece, &index) || index < 0 || piece[0] == '-' || piece[0] == '+') {
    return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                      "path \"%s\": \"%s\" must be the number of a list element, 0 to %d",
                      pk_text_shown(s->path).text, pk_text_shown(piece).text, list->count);
  }
  if (index > list->count) {
    return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                      "path \"%s\": element %ld is past the end of the list, must be 0 to %d",
                      pk_text_shown(s->path).text, index, list->count);
  }
  *next = pk_node_element(list, (int)index);
  return PICKET_OK;
}

/* The block inside {kind: {...}} as an element of a list, null for anything else. */
static pk_node *single_kind(const pk_node *node) {
  bool is_element = node->parent && node->parent->kind == PK_NODE_LIST;
  bool has_one = node->kind == PK_NODE_MAP && node->count == 1;
  return is_element && has_one && node->first->kind == PK_NODE_MAP ? node->first : NULL;
}

/* Goes down the path as far as there are nodes. */
static picket_status walk(setter *s) {
  s->at = s->document->root;
  while (s->used < s->count) {
    const char *piece = s->piece[s->used];
    pk_node *next = NULL;
    if (s->at->kind == PK_NODE_MAP) {
      next = pk_node_get(s->at, piece);
      pk_node *inner = next ? NULL : single_kind(s->at);
      if (inner) {
        s->at = inner;
        next = pk_node_get(inner, piece);
      }
    } else if (s->at->kind == PK_NODE_LIST) {
      picket_status status = step_list(s, s->at, piece, &next);
      if (status != PICKET_OK) {
        return status;
      }
    } else if (!pk_node_is_empty(s->at)) {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                        "path \"%s\" goes into %s, which is the single value %s",
                        pk_text_shown(s->path).text, pk_node_path(s->at).text,
                        pk_text_shown(s->at->text).text);
    }
    if (!next) {
      return PICKET_OK;
    }
    s->at = next;
    s->used++;
  }
  return PICKET_OK;
}

/* Gives a node the name it goes by below its parent: a key, or none in a list. */
static bool name(const setter *s, pk_node *node, const char *key) {
  node->key = key ? pk_text_copy(s->context, key) : NULL;
  node->key_place = s->place;
  return !key || node->key;
}

/* Wraps *value into the blocks of the pieces from `first` on; *value is the new branch, or still
 * owned by the caller on failure. */
static picket_status wrap(const setter *s, int first, pk_node **value) {
  for (int i = s->count - 1; i >= first; i--) {
    bool is_list = strcmp(s->piece[i], "0") == 0;
    pk_node *outer = pk_node_new(s->context, is_list ? PK_NODE_LIST : PK_NODE_MAP, s->place);
    if (!outer || !name(s, *value, is_list ? NULL : s->piece[i])) {
      pk_node_free(s->context, outer);
      return PICKET_ERROR_MEMORY;
    }
    pk_node_append(outer, *value);
    *value = outer;
  }
  return PICKET_OK;
}

/* Puts `fresh` in the place of `old`, which is freed. */
static void replace(pk_document *document, pk_node *old, pk_node *fresh) {
  pk_node *parent = old->parent;
  fresh->parent = parent;
  fresh->next = old->next;
  if (!parent) {
    document->root = fresh;
  } else if (parent->first == old) {
    parent->first = fresh;
  } else {
    pk_node *before = parent->first;
    while (before->next != old) {
      before = before->next;
    }
    before->next = fresh;
  }
  if (parent && parent->last == old) {
    parent->last = fresh;
  }
  pk_node_free(document->context, old);
}

/* Hangs *value in; it is the document's afterwards, and still the caller's on failure. */
static picket_status hang(setter *s, pk_node **value) {
  bool grows = s->used < s->count && s->at->kind != PK_NODE_TEXT;
  picket_status status = wrap(s, grows ? s->used + 1 : s->used, value);
  if (status != PICKET_OK) {
    return status;
  }
  const char *key = grows ? (s->at->kind == PK_NODE_MAP ? s->piece[s->used] : NULL) : s->at->key;
  if (!name(s, *value, key)) {
    return PICKET_ERROR_MEMORY;
  }
  if (grows) {
    pk_node_append(s->at, *value);
  } else {
    replace(s->document, s->at, *value);
  }
  *value = NULL;
  return PICKET_OK;
}

picket_status pk_document_set(pk_document *document, const char *label, const char *path,
                              const char *value) {
  picket_context *context = document->context;
  setter s = {.context = context, .document = document, .path = path};
  pk_node *fresh = NULL;
  picket_status status = PICKET_ERROR_MEMORY;
  s.place.file = pk_document_label(document, label);
  s.pieces = s.place.file ? pk_text_copy(context, path) : NULL;
  if (!s.pieces) {
    goto done;
  }
  if ((status = pk_text_check(context, path, strlen(path), s.place.file, false)) != PICKET_OK ||
      (status = split(&s)) != PICKET_OK || (status = walk(&s)) != PICKET_OK ||
      (status = pk_yaml_parse(context, value, strlen(value), s.place.file, false, &fresh)) !=
          PICKET_OK) {
    goto done;
  }
  status = hang(&s, &fresh);
done:
  pk_node_free(context, fresh);
  pk_free(context, s.pieces);
  return status;
}

picket_status pk_document_find(pk_document *document, const char *path, pk_node **out) {
  setter s = {.context = document->context, .document = document, .path = path};
  s.pieces = pk_text_copy(s.context, path);
  if (!s.pieces) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = split(&s);
  if (status == PICKET_OK) {
    status = walk(&s);
  }
  if (status == PICKET_OK && s.used < s.count) {
    status = pk_fail(s.context, PICKET_ERROR_INPUT, "path \"%s\" leads to no value of the problem",
                     pk_text_shown(path).text);
  }
  if (status == PICKET_OK) {
    *out = s.at;
  }
  pk_free(s.context, s.pieces);
  return status;
}
