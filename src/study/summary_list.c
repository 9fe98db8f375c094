/* See summary_list.h. A line is "name   value unit", names padded to the longest; widths count
 * characters of UTF-8, not bytes. */
#include "study/summary_list.h"

#include <stdio.h>
#include <string.h>

#include "base/memory.h"

enum {
  FIRST_ITEMS = 32,
  GAP = 2,          /* spaces between the columns */
  NUMBER_BYTES = 32 /* of a double written with %.10g */
};

static char *join(picket_context *context, const char *block, const char *entry, const char *what) {
  size_t size = strlen(block) + (entry ? strlen(entry) + 1 : 0) + strlen(what) + 2;
  char *name = PK_NEW(context, size, char);
  if (name) {
    snprintf(name, size, "%s.%s%s%s", block, entry ? entry : "", entry ? "." : "", what);
  }
  return name;
}

/* A new item with its name and unit; null after a failure. */
static pk_summary_item *add(pk_summary_list *list, const char *block, const char *entry,
                            const char *what, const char *unit) {
  picket_result *result = list->result;
  picket_context *context = result->context;
  if (list->status != PICKET_OK) {
    return NULL;
  }
  if (result->count == list->capacity) {
    int capacity = list->capacity > 0 ? 2 * list->capacity : FIRST_ITEMS;
    pk_summary_item *larger = pk_regrow(context, result->summary, (size_t)result->count,
                                        (size_t)capacity, sizeof *larger);
    if (!larger) {
      list->status = PICKET_ERROR_MEMORY;
      return NULL;
    }
    result->summary = larger;
    list->capacity = capacity;
  }
  pk_summary_item *item = &result->summary[result->count++];
  item->name = join(context, block, entry, what);
  item->unit = item->name ? pk_text_copy(context, unit) : NULL;
  if (!item->unit) {
    list->status = PICKET_ERROR_MEMORY;
    return NULL;
  }
  return item;
}

void pk_summary_number(pk_summary_list *list, const char *block, const char *entry,
                       const char *what, double value, const char *unit) {
  pk_summary_item *item = add(list, block, entry, what, unit);
  if (item) {
    item->value = value;
  }
}

void pk_summary_text(pk_summary_list *list, const char *block, const char *entry, const char *what,
                     const char *text) {
  pk_summary_item *item = add(list, block, entry, what, "");
  if (item) {
    item->text = pk_text_copy(list->result->context, text);
    list->status = item->text ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
}

static size_t characters(const char *text) {
  size_t count = 0;
  for (; *text; text++) {
    count += ((unsigned char)*text & 0xc0) != 0x80;
  }
  return count;
}

static char *write_line(picket_context *context, const pk_summary_item *item, size_t width) {
  char number[NUMBER_BYTES];
  snprintf(number, sizeof number, "%.10g", item->value);
  const char *value = item->text ? item->text : number;
  size_t pad = width - characters(item->name) + GAP;
  size_t size = strlen(item->name) + pad + strlen(value) + 1 + strlen(item->unit) + 1;
  char *line = PK_NEW(context, size, char);
  if (line) {
    snprintf(line, size, "%s%*s%s%s%s", item->name, (int)pad, "", value, item->unit[0] ? " " : "",
             item->unit);
  }
  return line;
}

picket_status pk_summary_write_lines(picket_result *result) {
  size_t width = 0;
  for (int i = 0; i < result->count; i++) {
    size_t length = characters(result->summary[i].name);
    width = length > width ? length : width;
  }
  result->lines = PK_NEW(result->context, result->count, char *);
  if (!result->lines) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < result->count; i++) {
    result->lines[i] = write_line(result->context, &result->summary[i], width);
    if (!result->lines[i]) {
      return PICKET_ERROR_MEMORY;
    }
  }
  return PICKET_OK;
}
