/* YAML text to nodes: the only file that calls libyaml.
 *
 * libyaml reports a stream of events with positions. They are gathered into a tree without
 * recursion: `open` is the list or map being filled, and its parents are the stack. What a problem
 * file has no use for (anchors, aliases, tags, several documents) is refused, and size, depth and
 * number of nodes are bounded, so a hostile text costs little. libyaml's own allocations do not go
 * through the context: it offers no hook for them. */
#include <string.h>
#include <yaml.h>

#include "base/memory.h"
#include "io/document_private.h"
#include "io/text.h"

typedef struct builder {
  picket_context *context;
  const char *file;
  bool positions;
  pk_node *root;
  pk_node *open; /* the list or map being filled, null outside all of them */
  char *key;     /* of the value that comes next in a map, else null */
  pk_place key_place;
  int depth;
  int nodes;
  int documents;
  bool done; /* the end of the stream was seen */
} builder;

static pk_place place_of(const builder *b, yaml_mark_t mark) {
  pk_place place = {b->file, 0, 0};
  if (b->positions) {
    place.line = (int)mark.line + 1;
    place.column = (int)mark.column + 1;
  }
  return place;
}

/* The parser's own words, and what they mean to somebody who edits a problem file. Where the parser
 * notices a fault is sometimes far behind the fault: `at_start` points to where the key or the
 * quotes began instead. */
static const struct {
  const char *theirs, *ours;
  bool at_start;
} sentences[] = {
    {"could not find expected ':'", "this line has no ':' behind its key", true},
    {"mapping values are not allowed in this context",
     "a ':' is not possible here; check the indentation, or put the text in quotes", false},
    {"did not find expected key",
     "a key must stand here; check the indentation and the brackets before it", false},
    {"did not find expected '-' indicator",
     "the next '-' of the list must stand here; check the indentation", false},
    {"block sequence entries are not allowed in this context",
     "a list cannot begin with '-' here; start it on a new line or write [ ... ]", false},
    {"mapping keys are not allowed in this context", "a key cannot stand here", false},
    {"did not find expected ',' or '}'", "a ',' or '}' is missing here", false},
    {"did not find expected ',' or ']'", "a ',' or ']' is missing here", false},
    {"did not find expected node content", "a value is missing here", false},
    {"found unexpected end of stream", "the quotes that begin here are never closed", true},
    {"found unexpected document indicator", "the quotes that begin here are never closed", true},
    {"found unexpected ':'", "a ':' inside { } or [ ] needs a space behind it or quotes", false},
    {"found character that cannot start any token",
     "a value cannot begin with this character; indent with spaces, not tabs, and quote texts that "
     "begin with '@', '`' or '%'",
     false},
    {"found a tab character that violates indentation", "indent with spaces, not with a tab",
     false},
    {"found a tab character where an indentation space is expected",
     "indent with spaces, not with a tab", false},
    {"found unknown escape character",
     "unknown escape behind '\\'; use single quotes for a text with backslashes", false},
    {"did not find expected <document start>",
     "the text goes on after its end; check the indentation and the brackets before this line",
     false},
    {"found undefined tag handle", "tags (!...) are not used in problem files", false},
    {"did not find expected alphabetic or numeric character",
     "'&' and '*' are not used in problem files; put the text in quotes", false},
};

static picket_status fail_parser(const builder *b, const yaml_parser_t *parser) {
  if (parser->error == YAML_MEMORY_ERROR) {
    return pk_fail(b->context, PICKET_ERROR_MEMORY, "memory is out while parsing YAML");
  }
  const char *problem = parser->problem ? parser->problem : "unknown problem";
  for (size_t i = 0; i < sizeof sentences / sizeof *sentences; i++) {
    if (strcmp(problem, sentences[i].theirs) == 0) {
      pk_place place =
          place_of(b, sentences[i].at_start ? parser->context_mark : parser->problem_mark);
      return pk_fail_at(b->context, PICKET_ERROR_INPUT, place, "%s", sentences[i].ours);
    }
  }
  return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, parser->problem_mark),
                    "this is not valid YAML: %s", problem);
}

static picket_status refuse(const builder *b, yaml_mark_t mark, const char *what) {
  return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, mark),
                    "%s not used in problem files", what);
}

/* True if the value that comes next is the key of a map. */
static bool wants_key(const builder *b) {
  return b->open && b->open->kind == PK_NODE_MAP && !b->key;
}

/* Puts a new node where the parser stands. */
static picket_status attach(builder *b, pk_node_kind kind, yaml_mark_t mark, pk_node **out) {
  if (wants_key(b)) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, mark),
                      "a key must be one word, not a list or a block");
  }
  if (++b->nodes > PK_DOCUMENT_NODES) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, mark),
                      "the file has more than %d values", PK_DOCUMENT_NODES);
  }
  pk_node *node = pk_node_new(b->context, kind, place_of(b, mark));
  if (!node) {
    return PICKET_ERROR_MEMORY;
  }
  if (!b->open) {
    b->root = node;
  } else {
    node->key = b->key;
    node->key_place = b->key_place;
    b->key = NULL;
    pk_node_append(b->open, node);
  }
  *out = node;
  return PICKET_OK;
}

static picket_status take_key(builder *b, const char *text, yaml_mark_t mark) {
  pk_place place = place_of(b, mark);
  if (text[0] == '\0') {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place, "a key is missing before the ':'");
  }
  const pk_node *twin = pk_node_get(b->open, text);
  if (twin && b->positions) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place,
                      "key \"%s\" was already given on line %d; give it once",
                      pk_text_shown(text).text, twin->key_place.line);
  }
  if (twin) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place, "key \"%s\" is given twice",
                      pk_text_shown(text).text);
  }
  if (b->open->count >= PK_DOCUMENT_KEYS) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place, "the block has more than %d keys",
                      PK_DOCUMENT_KEYS);
  }
  b->key = pk_text_copy(b->context, text);
  b->key_place = place;
  return b->key ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status take_scalar(builder *b, const yaml_event_t *event) {
  const char *text = (const char *)event->data.scalar.value;
  size_t length = event->data.scalar.length;
  if (event->data.scalar.anchor) {
    return refuse(b, event->start_mark, "anchors (&...) are");
  }
  if (event->data.scalar.tag) {
    return refuse(b, event->start_mark, "tags (!...) are");
  }
  for (size_t i = 0; i < length; i++) {
    /* Escapes in double quotes can make what the check of the raw text has kept out. */
    unsigned char byte = (unsigned char)text[i];
    if ((byte < 0x20 && byte != '\n' && byte != '\t') || byte == 0x7f) {
      return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, event->start_mark),
                        "the text holds the control character 0x%02x", byte);
    }
  }
  if (wants_key(b)) {
    return take_key(b, text, event->start_mark);
  }
  char *copy = pk_text_copy(b->context, text);
  pk_node *node = NULL;
  picket_status status =
      copy ? attach(b, PK_NODE_TEXT, event->start_mark, &node) : PICKET_ERROR_MEMORY;
  if (status != PICKET_OK) {
    pk_free(b->context, copy);
    return status;
  }
  node->text = copy;
  node->quoted = event->data.scalar.style != YAML_PLAIN_SCALAR_STYLE;
  return PICKET_OK;
}

static picket_status take_start(builder *b, pk_node_kind kind, yaml_mark_t mark,
                                const yaml_char_t *anchor, const yaml_char_t *tag) {
  if (anchor) {
    return refuse(b, mark, "anchors (&...) are");
  }
  if (tag) {
    return refuse(b, mark, "tags (!...) are");
  }
  if (++b->depth > PK_DOCUMENT_DEPTH) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, mark),
                      "lists and blocks are nested deeper than %d", PK_DOCUMENT_DEPTH);
  }
  pk_node *node = NULL;
  picket_status status = attach(b, kind, mark, &node);
  if (status == PICKET_OK) {
    b->open = node;
  }
  return status;
}

static picket_status take_document(builder *b, const yaml_event_t *event) {
  if (event->data.document_start.tag_directives.start !=
      event->data.document_start.tag_directives.end) {
    return refuse(b, event->start_mark, "%TAG lines are");
  }
  if (++b->documents > 1) {
    return pk_fail_at(b->context, PICKET_ERROR_INPUT, place_of(b, event->start_mark),
                      "a second document begins here; a file holds one problem");
  }
  return PICKET_OK;
}

static picket_status take(builder *b, const yaml_event_t *event) {
  switch (event->type) {
    case YAML_DOCUMENT_START_EVENT: return take_document(b, event);
    case YAML_SCALAR_EVENT: return take_scalar(b, event);
    case YAML_ALIAS_EVENT: return refuse(b, event->start_mark, "aliases (*...) are");
    case YAML_SEQUENCE_START_EVENT:
      return take_start(b, PK_NODE_LIST, event->start_mark, event->data.sequence_start.anchor,
                        event->data.sequence_start.tag);
    case YAML_MAPPING_START_EVENT:
      return take_start(b, PK_NODE_MAP, event->start_mark, event->data.mapping_start.anchor,
                        event->data.mapping_start.tag);
    case YAML_SEQUENCE_END_EVENT:
    case YAML_MAPPING_END_EVENT:
      b->open = b->open->parent;
      b->depth--;
      return PICKET_OK;
    case YAML_STREAM_END_EVENT: b->done = true; return PICKET_OK;
    default: return PICKET_OK;
  }
}

static picket_status take_all(builder *b, yaml_parser_t *parser) {
  picket_status status = PICKET_OK;
  while (status == PICKET_OK && !b->done) {
    yaml_event_t event;
    if (!yaml_parser_parse(parser, &event)) {
      status = fail_parser(b, parser);
    } else {
      status = take(b, &event);
      yaml_event_delete(&event);
    }
  }
  return status;
}

picket_status pk_yaml_parse(picket_context *context, const char *text, size_t length,
                            const char *file, bool positions, pk_node **out) {
  static const char byte_order_mark[] = "\xef\xbb\xbf";
  if (length >= 3 && memcmp(text, byte_order_mark, 3) == 0) {
    text += 3;
    length -= 3;
  }
  picket_status status = pk_text_check(context, text, length, file, positions);
  if (status != PICKET_OK) {
    return status;
  }
  yaml_parser_t parser;
  if (!yaml_parser_initialize(&parser)) {
    return pk_fail(context, PICKET_ERROR_MEMORY, "memory is out while parsing YAML");
  }
  yaml_parser_set_encoding(&parser, YAML_UTF8_ENCODING);
  yaml_parser_set_input_string(&parser, (const unsigned char *)text, length);
  builder b = {.context = context, .file = file, .positions = positions};
  status = take_all(&b, &parser);
  if (status == PICKET_OK && (!b.root || pk_node_is_empty(b.root))) {
    pk_place place = {file, positions ? 1 : 0, 1};
    status = pk_fail_at(context, PICKET_ERROR_INPUT, place, "there is nothing in it%s",
                        positions ? "; a problem file begins with \"format: 1\"" : "");
  }
  yaml_parser_delete(&parser);
  pk_free(context, b.key);
  if (status != PICKET_OK) {
    pk_node_free(context, b.root);
    return status;
  }
  *out = b.root;
  return PICKET_OK;
}
