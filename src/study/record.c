/* See record.h. Texts begin with '=' (a null text is a lone '-'); in them a space, a control
 * character and '%' are written as % and two hexadecimal digits. */
#include "study/record.h"

#include <inttypes.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

enum { FIRST_BYTES = 1024, TOKEN = 64, MANTISSA_BITS = 53 };

static const char HEX[] = "0123456789abcdef";

static void append(pk_record *r, const char *bytes, size_t count) {
  if (!r->failed && r->used + count + 1 > r->capacity) {
    size_t capacity = 2 * (r->used + count + 1) + FIRST_BYTES;
    char *larger = pk_regrow(r->context, r->text, r->used, capacity, 1);
    r->failed = !larger;
    r->text = larger ? larger : r->text;
    r->capacity = larger ? capacity : r->capacity;
  }
  if (!r->failed) {
    memcpy(r->text + r->used, bytes, count);
    r->used += count;
    r->text[r->used] = '\0';
  }
}

static void append_token(pk_record *r, const char *token) {
  append(r, " ", r->used > 0 ? 1 : 0);
  append(r, token, strlen(token));
}

void pk_record_whole(pk_record *record, int value) {
  char token[TOKEN];
  snprintf(token, sizeof token, "%d", value);
  append_token(record, token);
}

void pk_record_number(pk_record *record, double value) {
  char token[TOKEN];
  const char *sign = signbit(value) ? "-" : "";
  if (isnan(value)) {
    snprintf(token, sizeof token, "nan");
  } else if (isinf(value)) {
    snprintf(token, sizeof token, "%sinf", sign);
  } else {
    int exponent = 0;
    double part = frexp(fabs(value), &exponent);
    uint64_t mantissa = (uint64_t)ldexp(part, MANTISSA_BITS);
    snprintf(token, sizeof token, "%s0x%" PRIx64 "p%+d", sign, mantissa,
             mantissa ? exponent - MANTISSA_BITS : 0);
  }
  append_token(record, token);
}

void pk_record_text(pk_record *record, const char *text) {
  append_token(record, text ? "=" : "-");
  for (int i = 0; text && text[i] && i < PK_RECORD_TEXT - 1; i++) {
    unsigned char byte = (unsigned char)text[i];
    if (byte <= ' ' || byte == '%' || byte == 0x7f) {
      char escaped[3] = {'%', HEX[byte >> 4], HEX[byte & 15]};
      append(record, escaped, sizeof escaped);
    } else {
      append(record, text + i, 1);
    }
  }
}

void pk_record_clear(pk_record *record) {
  pk_free(record->context, record->text);
  *record = (pk_record){.context = record->context};
}

/* The length of the token at the reader, which must be followed by a space or the end; 0 if there
 * is none or all is lost already. */
static size_t token_length(pk_record_reader *r) {
  size_t length = r->good ? strcspn(r->at, " ") : 0;
  r->good = length > 0;
  return length;
}

static void step_over(pk_record_reader *r, size_t length) {
  r->at += length;
  r->at += *r->at == ' ' && r->at[1] != '\0';
}

/* A token of a number in `out`; false if it is too long or has a letter that is not in `letters`.
 */
static bool take_token(pk_record_reader *r, const char *letters, char out[TOKEN]) {
  size_t length = token_length(r);
  r->good = r->good && length < TOKEN && strspn(r->at, letters) >= length;
  if (r->good) {
    memcpy(out, r->at, length);
    out[length] = '\0';
    step_over(r, length);
  }
  return r->good;
}

int pk_record_read_whole(pk_record_reader *reader, int least, int most) {
  char token[TOKEN];
  if (!take_token(reader, "-0123456789", token)) {
    return least;
  }
  char *end = NULL;
  long value = strtol(token, &end, 10);
  reader->good = *end == '\0' && value >= least && value <= most;
  return reader->good ? (int)value : least;
}

double pk_record_read_number(pk_record_reader *reader) {
  char token[TOKEN];
  if (!take_token(reader, "-+0123456789abcdefxpin", token)) {
    return NAN;
  }
  char *end = NULL;
  double value = strtod(token, &end);
  reader->good = *end == '\0';
  return reader->good ? value : NAN;
}

static int digit_of(char c) {
  const char *found = c ? strchr(HEX, c) : NULL;
  return found ? (int)(found - HEX) : -1;
}

const char *pk_record_read_text(pk_record_reader *reader, char buffer[PK_RECORD_TEXT]) {
  size_t length = token_length(reader), used = 0;
  const char *s = reader->at;
  if (!reader->good || (length == 1 && s[0] == '-')) {
    step_over(reader, reader->good ? length : 0);
    return NULL;
  }
  reader->good = s[0] == '=';
  for (size_t i = 1; reader->good && i < length; i++) {
    char byte = s[i];
    if (byte == '%') {
      int high = digit_of(s[i + 1]), low = high < 0 ? -1 : digit_of(s[i + 2]);
      reader->good = low >= 0 && 16 * high + low > 0;
      byte = (char)(16 * high + low);
      i += 2;
    }
    reader->good = reader->good && used < PK_RECORD_TEXT - 1;
    if (reader->good) {
      buffer[used++] = byte;
    }
  }
  buffer[used] = '\0';
  if (!reader->good) {
    return NULL;
  }
  step_over(reader, length);
  return buffer;
}

bool pk_record_read_end(const pk_record_reader *reader) {
  return reader->good && *reader->at == '\0';
}
