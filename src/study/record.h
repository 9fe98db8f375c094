/* Lines of text that hold numbers to the last bit: what worker processes send and journals keep.
 * Tokens stand between single spaces. A number is a whole mantissa times a power of two in
 * hexadecimal, 0x1921fb54442d18p-51, which has no decimal point and so no locale. */
#ifndef PK_STUDY_RECORD_H
#define PK_STUDY_RECORD_H

#include <stdbool.h>

#include "base/context.h"

enum { PK_RECORD_TEXT = 1200 }; /* bytes of a text with its end; messages are shorter */

/* A line being written; starts as {context}. After a failure everything further is dropped. */
typedef struct pk_record {
  picket_context *context;
  char *text; /* null until something is written */
  size_t used, capacity;
  bool failed; /* memory ran out */
} pk_record;

void pk_record_whole(pk_record *record, int value);
void pk_record_number(pk_record *record, double value); /* infinities and NaN too */
/* Any text, null too; longer ones are cut to PK_RECORD_TEXT - 1 bytes. */
void pk_record_text(pk_record *record, const char *text);
void pk_record_clear(pk_record *record);

/* A line being read. After a token that is not what was expected `good` is false, and every further
 * value is a harmless one. */
typedef struct pk_record_reader {
  const char *at;
  bool good;
} pk_record_reader;

int pk_record_read_whole(pk_record_reader *reader, int least, int most);
double pk_record_read_number(pk_record_reader *reader);
/* `buffer`, or null for a null text. */
const char *pk_record_read_text(pk_record_reader *reader, char buffer[PK_RECORD_TEXT]);
/* True if all went well and nothing is left. */
bool pk_record_read_end(const pk_record_reader *reader);

#endif
