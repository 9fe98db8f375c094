/* Text from outside, before anything is read into it: the bytes of a file, proven to be UTF-8 that
 * a terminal can show, and short forms of it that are safe to put into a message. */
#ifndef PK_IO_TEXT_H
#define PK_IO_TEXT_H

#include <stddef.h>

#include "base/context.h"

enum {
  PK_SHOWN = 64 /* bytes of a value repeated in a message: enough to recognise it */
};

/* The bytes of a file, with a zero byte behind them, in *out (the caller's, pk_free).
 * PICKET_ERROR_FILE at `place` if it can't be opened, is a folder or is longer than `limit`. */
picket_status pk_text_read_file(picket_context *context, const char *path, size_t limit,
                                pk_place place, char **out, size_t *length);

/* Fails at the line and column of the first byte that is not part of printable UTF-8 text. Lines
 * are reported only if `positions`. */
picket_status pk_text_check(picket_context *context, const char *text, size_t length,
                            const char *file, bool positions);

/* A value as a message repeats it: at most PK_SHOWN bytes, cut between characters, on one line. */
typedef struct pk_shown {
  char text[PK_SHOWN + 4];
} pk_shown;
pk_shown pk_text_shown(const char *text);

#endif
