/* Texts that must be refused, each with the words and the place of the refusal. */
#ifndef PICKET_TESTS_READING_H
#define PICKET_TESTS_READING_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
/* cmocka wants the four above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */
#include <stdio.h>
#include <string.h>

#include "base/context.h"
#include "io/read.h"

typedef struct bad_text {
  picket_status status;
  const char *place; /* line:column */
  const char *words; /* part of the message */
  const char *text;
  size_t length;
} bad_text;

/* A row of a table: the text is a literal, which may hold zero bytes. */
#define REFUSED(place, words, text) \
  { PICKET_ERROR_INPUT, place, words, text, sizeof(text) - 1 }
#define REFUSED_AS(status, place, words, text) \
  { status, place, words, text, sizeof(text) - 1 }

/* Beginnings of files: a whole line or two each. */
#define FORMAT "format: 1\n"
#define MATERIALS \
  FORMAT "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}}\n"

static inline picket_context *plain_context(void) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  return context;
}

/* Reads and understands a text; the document is kept only as long as the problem is made. */
static inline picket_status understand(picket_context *context, const char *text, size_t length) {
  pk_document *document = NULL;
  pk_problem *problem = NULL;
  picket_status status = pk_document_read_text(context, text, length, "bad.yaml", &document);
  if (status == PICKET_OK) {
    status = pk_problem_read(context, document, &problem);
  }
  pk_problem_free(problem);
  pk_document_free(document);
  return status;
}

static inline void check_refused(const bad_text *row) {
  picket_context *context = plain_context();
  picket_status status = understand(context, row->text, row->length);
  const char *message = picket_context_message(context);
  char start[64];
  snprintf(start, sizeof start, "bad.yaml:%s: ", row->place);
  if (status != row->status || strncmp(message, start, strlen(start)) != 0 ||
      !strstr(message, row->words)) {
    fail_msg("%s\ngave %s: %s\nnot at %s: %s", row->text, picket_status_name(status), message,
             row->place, row->words);
  }
  picket_context_free(context);
}

/* Reads a text that must be sound; the caller frees both. */
static inline pk_problem *sound(picket_context *context, const char *text, pk_document **document) {
  pk_problem *problem = NULL;
  picket_status status = pk_document_read_text(context, text, strlen(text), "good.yaml", document);
  if (status == PICKET_OK) {
    status = pk_problem_read(context, *document, &problem);
  }
  if (status != PICKET_OK) {
    fail_msg("%s\ngave: %s", text, picket_context_message(context));
  }
  return problem;
}

#define CHECK_ALL_REFUSED(rows)                                      \
  for (size_t row = 0; row < sizeof(rows) / sizeof *(rows); row++) { \
    check_refused(&(rows)[row]);                                     \
  }

#endif
