/* Single values of a problem file, checked against what is allowed. See read.h. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/words.h"
#include "io/number.h"
#include "io/read.h"
#include "io/text.h"

pk_word_list pk_words_joined(const char *const *words, int count) {
  pk_word_list list = {{0}};
  size_t used = 0;
  for (int i = 0; i < count; i++) {
    int added =
        snprintf(list.text + used, sizeof list.text - used, "%s%s", i > 0 ? ", " : "", words[i]);
    if (added < 0 || used + (size_t)added >= sizeof list.text) {
      snprintf(list.text + (used < sizeof list.text - 6 ? used : sizeof list.text - 6), 6, ", ...");
      break;
    }
    used += (size_t)added;
  }
  return list;
}

pk_word_list pk_words_advice(const char *word, const char *const *words, int count) {
  pk_word_list advice;
  const char *nearest = pk_nearest_word(word, words, count);
  if (nearest) {
    snprintf(advice.text, sizeof advice.text, "did you mean \"%s\"?", nearest);
  } else {
    snprintf(advice.text, sizeof advice.text, "allowed: %.280s",
             pk_words_joined(words, count).text);
  }
  return advice;
}

static const char *kind_name(const pk_node *node) {
  return node->kind == PK_NODE_LIST ? "a list" : node->kind == PK_NODE_MAP ? "a block" : "a value";
}

/* Fails for a node that is not a text with something in it. */
static picket_status need_text(picket_context *context, const pk_node *node, const char *wanted) {
  if (node->kind != PK_NODE_TEXT) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is %s, must be %s",
                      pk_node_path(node).text, kind_name(node), wanted);
  }
  if (node->text[0] == '\0') {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is empty, must be %s",
                      pk_node_path(node).text, wanted);
  }
  return PICKET_OK;
}

static picket_status need_block(picket_context *context, const pk_node *node,
                                const pk_word_list *keys) {
  if (node->kind == PK_NODE_MAP) {
    return PICKET_OK;
  }
  return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                    "%s is %s, must be a block of keys (%s)", pk_node_path(node).text,
                    pk_node_is_empty(node) ? "empty" : kind_name(node), keys->text);
}

/* "in cell" for a key of a block, "" for one of the file itself. */
static pk_path_text inside(const pk_node *block) {
  pk_path_text text = {{0}};
  if (block->parent) {
    snprintf(text.text, sizeof text.text, " in %.190s", pk_node_path(block).text);
  }
  return text;
}

static picket_status fail_unknown_key(picket_context *context, const pk_node *child,
                                      const char *const *names, int count) {
  return pk_fail_at(context, PICKET_ERROR_INPUT, child->key_place, "unknown key \"%s\"%s; %s",
                    pk_text_shown(child->key).text, inside(child->parent).text,
                    pk_words_advice(child->key, names, count).text);
}

picket_status pk_read_block(picket_context *context, const pk_node *node, const pk_key *keys,
                            int count, const pk_node **values) {
  const char *names[PK_BLOCK_KEYS] = {NULL};
  for (int i = 0; i < count; i++) {
    names[i] = keys[i].name;
    values[i] = NULL;
  }
  pk_word_list joined = pk_words_joined(names, count);
  picket_status status = need_block(context, node, &joined);
  for (const pk_node *child = node->first; status == PICKET_OK && child; child = child->next) {
    int i = 0;
    while (i < count && strcmp(child->key, names[i]) != 0) {
      i++;
    }
    if (i == count) {
      status = fail_unknown_key(context, child, names, count);
    } else {
      values[i] = child;
    }
  }
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    if (keys[i].required && !values[i]) {
      status = pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s has no \"%s\"",
                          pk_node_path(node).text, names[i]);
    }
  }
  return status;
}

picket_status pk_read_kind(picket_context *context, const pk_node *node, const char *const *kinds,
                           int count, int *kind, const pk_node **value) {
  pk_word_list joined = pk_words_joined(kinds, count);
  picket_status status = need_block(context, node, &joined);
  if (status != PICKET_OK) {
    return status;
  }
  for (const pk_node *child = node->first; child; child = child->next) {
    int i = 0;
    while (i < count && strcmp(child->key, kinds[i]) != 0) {
      i++;
    }
    if (i == count) {
      return fail_unknown_key(context, child, kinds, count);
    }
    *kind = i;
    *value = child;
  }
  if (node->count != 1) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s has %d kinds, must have exactly one of: %s", pk_node_path(node).text,
                      node->count, joined.text);
  }
  return PICKET_OK;
}

/* The range as words: "above 0 and at most 1e+06 nm". */
static pk_path_text range_text(const pk_limits *limits) {
  pk_path_text text = {{0}};
  char low[60] = "";
  char high[60] = "";
  if (isfinite(limits->low)) {
    snprintf(low, sizeof low, "%s %.10g", limits->low_open ? "above" : "at least", limits->low);
  }
  if (isfinite(limits->high)) {
    snprintf(high, sizeof high, "%s %.10g", limits->high_open ? "below" : "at most", limits->high);
  }
  if (!low[0] && !high[0]) {
    snprintf(text.text, sizeof text.text, "a finite number");
  } else {
    snprintf(text.text, sizeof text.text, "%s%s%s%s%s", low, low[0] && high[0] ? " and " : "", high,
             limits->unit[0] ? " " : "", limits->unit);
  }
  return text;
}

static bool in_range(const pk_limits *limits, double value) {
  if (isinf(value)) {
    return limits->infinite;
  }
  bool low_good = limits->low_open ? value > limits->low : value >= limits->low;
  bool high_good = limits->high_open ? value < limits->high : value <= limits->high;
  return low_good && high_good;
}

picket_status pk_read_number(picket_context *context, const pk_node *node, const pk_limits *limits,
                             double *out) {
  picket_status status = need_text(context, node, "a number");
  if (status != PICKET_OK) {
    return status;
  }
  pk_path_text path = pk_node_path(node);
  pk_shown shown = pk_text_shown(node->text);
  if (node->quoted) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is the text \"%s\", must be a number without quotes", path.text,
                      shown.text);
  }
  double value = 0;
  pk_number_verdict verdict = pk_number_parse(node->text, &value);
  if (verdict == PK_NUMBER_NONE) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is \"%s\", must be a plain decimal number such as 300, -1.5 or 2e-4",
                      path.text, shown.text);
  }
  if (verdict == PK_NUMBER_TOO_LARGE || !in_range(limits, value)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is %s, must be %s", path.text,
                      shown.text, range_text(limits).text);
  }
  *out = value;
  return PICKET_OK;
}

picket_status pk_read_numbers(picket_context *context, const pk_node *node, const pk_limits *limits,
                              int count, double *out) {
  picket_status status = pk_read_list(context, node, count, count, "numbers");
  const pk_node *child = status == PICKET_OK ? node->first : NULL;
  for (int i = 0; status == PICKET_OK && child; i++, child = child->next) {
    status = pk_read_number(context, child, limits, &out[i]);
  }
  return status;
}

picket_status pk_read_whole(picket_context *context, const pk_node *node, int low, int high,
                            int *out) {
  picket_status status = need_text(context, node, "a whole number");
  if (status != PICKET_OK) {
    return status;
  }
  long value = 0;
  if (node->quoted || !pk_whole_parse(node->text, &value) || value < low || value > high) {
    const char *quote = node->quoted ? "\"" : "";
    pk_path_text path = pk_node_path(node);
    pk_shown shown = pk_text_shown(node->text);
    if (low == high) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is %s%s%s, must be %d",
                        path.text, quote, shown.text, quote, low);
    }
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is %s%s%s, must be a whole number, %d to %d", path.text, quote,
                      shown.text, quote, low, high);
  }
  *out = (int)value;
  return PICKET_OK;
}

picket_status pk_read_list(picket_context *context, const pk_node *node, int low, int high,
                           const char *what) {
  char wanted[80];
  if (low == high) {
    snprintf(wanted, sizeof wanted, "a list of %d %s", low, what);
  } else {
    snprintf(wanted, sizeof wanted, "a list of %d to %d %s", low, high, what);
  }
  pk_path_text path = pk_node_path(node);
  if (node->kind != PK_NODE_LIST) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is %s, must be %s", path.text,
                      pk_node_is_empty(node) ? "empty" : kind_name(node), wanted);
  }
  if (node->count < low || node->count > high) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s has %d element%s, must be %s",
                      path.text, node->count, node->count == 1 ? "" : "s", wanted);
  }
  return PICKET_OK;
}

picket_status pk_read_choice(picket_context *context, const pk_node *node, const char *const *words,
                             int count, int *out) {
  char wanted[330];
  snprintf(wanted, sizeof wanted, "one of: %s", pk_words_joined(words, count).text);
  picket_status status = need_text(context, node, wanted);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; i < count; i++) {
    if (strcmp(node->text, words[i]) == 0) {
      *out = i;
      return PICKET_OK;
    }
  }
  return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is \"%s\", must be %s",
                    pk_node_path(node).text, pk_text_shown(node->text).text, wanted);
}

picket_status pk_read_text(picket_context *context, const pk_node *node, size_t longest,
                           const char **out) {
  picket_status status = need_text(context, node, "a text");
  if (status == PICKET_OK && strlen(node->text) > longest) {
    status = pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                        "%s has %zu bytes, must be at most %zu", pk_node_path(node).text,
                        strlen(node->text), longest);
  }
  if (status == PICKET_OK) {
    *out = node->text;
  }
  return status;
}
