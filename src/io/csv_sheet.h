/* A sheet of comma-separated values being written, for the files that describe one kind of result
 * each: RFC 4180 fields, one line feed after each row. */
#ifndef PK_IO_CSV_SHEET_H
#define PK_IO_CSV_SHEET_H

#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "base/memory.h"
#include "io/number.h"
#include "study/result.h"

enum { PK_SHEET_BYTES = 4096 }; /* of the first piece of memory */

/* A text being written. After a failure everything further is dropped. */
typedef struct sheet {
  picket_context *context;
  char *text;
  size_t used, capacity;
  picket_status status;
  bool fresh;                  /* at the start of a row */
  const picket_result *result; /* of a sweep; else null: rows then begin with the swept value */
  int answer;                  /* whose rows these are; -1 for the header */
} sheet;

static inline void append(sheet *s, const char *bytes, size_t count) {
  if (s->status == PICKET_OK && s->used + count + 1 > s->capacity) {
    size_t capacity = 2 * (s->used + count + 1) + PK_SHEET_BYTES;
    char *larger = pk_regrow(s->context, s->text, s->used, capacity, 1);
    if (larger) {
      s->text = larger;
      s->capacity = capacity;
    } else {
      s->status = PICKET_ERROR_MEMORY;
    }
  }
  if (s->status == PICKET_OK) {
    memcpy(s->text + s->used, bytes, count);
    s->used += count;
    s->text[s->used] = '\0';
  }
}

static inline void put_lead(sheet *s);

/* One field; null is an empty one. Quotes go around a text with a comma, a quote or a line break,
 * or with a space at an end, and are doubled inside. */
static inline void put_text(sheet *s, const char *text) {
  text = text ? text : "";
  size_t length = strlen(text);
  bool quoted = strpbrk(text, ",\"\r\n") != NULL || (length > 0 && text[0] == ' ') ||
                (length > 0 && text[length - 1] == ' ');
  put_lead(s);
  append(s, ",", s->fresh ? 0 : 1);
  s->fresh = false;
  append(s, "\"", quoted);
  for (size_t i = 0; i < length; i++) {
    append(s, "\"", text[i] == '"');
    append(s, text + i, 1);
  }
  append(s, "\"", quoted);
}

static inline void put_number(sheet *s, double value) {
  char digits[PK_NUMBER_TEXT] = "";
  if (isfinite(value)) {
    pk_number_write(value, digits);
  }
  put_text(s, digits);
}

/* The first column of a sweep. */
static inline void put_lead(sheet *s) {
  const picket_result *sweep = s->result;
  if (s->fresh && sweep) {
    s->result = NULL; /* the field itself has none */
    if (s->answer < 0) {
      put_text(s, sweep->sweep_path);
    } else {
      put_number(s, sweep->sweep_value[s->answer]);
    }
    s->result = sweep;
  }
}

static inline void put_quantity(sheet *s, picket_quantity q, double scale) {
  put_number(s, scale * q.value);
  put_number(s, scale * q.uncertainty);
}

static inline void put_flag(sheet *s, bool flag) {
  put_text(s, flag ? "true" : "false");
}

static inline void end_row(sheet *s) {
  append(s, "\n", 1);
  s->fresh = true;
}

static inline void put_header(sheet *s, const char *const *names) {
  for (int i = 0; names[i]; i++) {
    put_text(s, names[i]);
  }
}

/* Whether an answer of a sweep failed, and why; nothing outside a sweep. */
static inline void put_failure(sheet *s, bool failed, const char *note) {
  if (s->result) {
    put_flag(s, failed);
    put_text(s, note);
  }
}

static inline void put_failure_header(sheet *s) {
  if (s->result) {
    put_text(s, "failed");
    put_text(s, "note");
  }
}

/* The rest of the row of a failed answer: so many empty fields, and the reason. */
static inline void put_failed_row(sheet *s, int empty, const char *note) {
  for (int i = 0; i < empty; i++) {
    put_text(s, NULL);
  }
  put_failure(s, true, note);
  end_row(s);
}

/* ---- kinds of results ---- */

void pk_csv_aim(sheet *s, const picket_result *result);       /* csv_aim.c */
void pk_csv_taper(sheet *s, const picket_result *result);     /* csv_taper.c */
void pk_csv_tolerance(sheet *s, const picket_result *result); /* csv_tolerance.c */

#endif
