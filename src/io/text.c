/* See text.h. A file is read to its end rather than by its size, so that pipes work; the limit
 * stops endless ones. */
#include "io/text.h"

#include <errno.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>

#include "base/memory.h"

enum { FIRST_BLOCK = 16384 }; /* most problem files fit */

static picket_status fail_open(picket_context *context, pk_place place, const char *path,
                               int error) {
  const char *why = NULL;
  char buffer[128] = "unknown reason";
  switch (error) {
    case ENOENT: why = "there is no such file"; break;
    case EACCES: why = "reading it is not permitted"; break;
    case EISDIR: why = "it is a folder"; break;
    case ENOTDIR: why = "a part of its path is not a folder"; break;
    default: why = strerror_r(error, buffer, sizeof buffer) == 0 ? buffer : "unknown reason";
  }
  /* A file that is named inside another one is not the place of the fault. */
  if (!place.file || strcmp(place.file, path) != 0) {
    return pk_fail_at(context, PICKET_ERROR_FILE, place, "\"%s\" cannot be read: %s",
                      pk_text_shown(path).text, why);
  }
  return pk_fail_at(context, PICKET_ERROR_FILE, place, "the file cannot be read: %s", why);
}

static picket_status read_all(picket_context *context, FILE *file, const char *path, size_t limit,
                              pk_place place, char **out, size_t *length) {
  size_t used = 0;
  size_t capacity = FIRST_BLOCK;
  char *text = PK_NEW(context, capacity + 1, char);
  picket_status status = text ? PICKET_OK : PICKET_ERROR_MEMORY;
  while (status == PICKET_OK) {
    size_t got = fread(text + used, 1, capacity - used, file);
    used += got;
    if (ferror(file)) {
      status = fail_open(context, place, path, errno);
    } else if (used > limit) {
      status = pk_fail_at(context, PICKET_ERROR_FILE, place,
                          "the file is longer than %zu bytes, the most that is read", limit);
    } else if (used < capacity) {
      break;
    } else {
      char *larger = pk_regrow(context, text, used, 2 * capacity + 1, 1);
      status = larger ? PICKET_OK : PICKET_ERROR_MEMORY;
      text = larger ? larger : text;
      capacity *= 2;
    }
  }
  if (status != PICKET_OK) {
    pk_free(context, text);
    return status;
  }
  text[used] = '\0';
  *out = text;
  *length = used;
  return PICKET_OK;
}

picket_status pk_text_read_file(picket_context *context, const char *path, size_t limit,
                                pk_place place, char **out, size_t *length) {
  FILE *file = fopen(path, "rb");
  if (!file) {
    return fail_open(context, place, path, errno);
  }
  struct stat about;
  picket_status status = PICKET_OK;
  if (fstat(fileno(file), &about) == 0 && S_ISDIR(about.st_mode)) {
    status = fail_open(context, place, path, EISDIR);
  } else {
    status = read_all(context, file, path, limit, place, out, length);
  }
  fclose(file);
  return status;
}

/* The length of the UTF-8 character at `s`, 0 if the bytes are not one; `code` receives its number.
 * Overlong forms, surrogates and numbers above U+10FFFF are not characters (RFC 3629). */
static size_t utf8_length(const unsigned char *s, size_t left, uint32_t *code) {
  static const uint32_t smallest[] = {0, 0, 0x80, 0x800, 0x10000};
  size_t length = s[0] < 0x80                    ? 1
                  : s[0] >= 0xc2 && s[0] <= 0xdf ? 2
                  : s[0] >= 0xe0 && s[0] <= 0xef ? 3
                  : s[0] >= 0xf0 && s[0] <= 0xf4 ? 4
                                                 : 0;
  if (length == 0 || length > left) {
    return 0;
  }
  uint32_t value = length == 1 ? s[0] : s[0] & (0xffu >> (length + 1));
  for (size_t i = 1; i < length; i++) {
    if ((s[i] & 0xc0) != 0x80) {
      return 0;
    }
    value = value << 6 | (s[i] & 0x3fu);
  }
  if (value < smallest[length] || value > 0x10ffff || (value >= 0xd800 && value <= 0xdfff)) {
    return 0;
  }
  *code = value;
  return length;
}

static bool is_printable(uint32_t code) {
  if (code < 0x20) {
    return code == '\t' || code == '\n' || code == '\r';
  }
  return !(code >= 0x7f && code <= 0x9f && code != 0x85) && code != 0xfffe && code != 0xffff;
}

picket_status pk_text_check(picket_context *context, const char *text, size_t length,
                            const char *file, bool positions) {
  const unsigned char *bytes = (const unsigned char *)text;
  pk_place place = {file, positions ? 1 : 0, 1};
  for (size_t i = 0; i < length;) {
    uint32_t code = 0;
    size_t step = utf8_length(bytes + i, length - i, &code);
    if (step == 0) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "byte 0x%02x is not UTF-8 text; is this a binary file?", bytes[i]);
    }
    if (!is_printable(code)) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "the control character 0x%02x has no place in a text file", (unsigned)code);
    }
    i += step;
    place.column++;
    if (code == '\n') {
      place.line += positions ? 1 : 0;
      place.column = 1;
    }
  }
  return PICKET_OK;
}

pk_shown pk_text_shown(const char *text) {
  pk_shown shown = {{0}};
  size_t length = strlen(text);
  size_t kept = length <= PK_SHOWN ? length : PK_SHOWN;
  while (kept < length && kept > 0 && ((unsigned char)text[kept] & 0xc0) == 0x80) {
    kept--;
  }
  for (size_t i = 0; i < kept; i++) {
    unsigned char byte = (unsigned char)text[i];
    shown.text[i] = byte < 0x20 || byte == 0x7f ? ' ' : text[i];
  }
  memcpy(shown.text + kept, "...", kept < length ? 4 : 0);
  return shown;
}
