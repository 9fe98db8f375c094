/* See stamp.h. A struct of an older header ends where a later one has its next member, or before
 * the padding in front of it; public headers never put a member into such padding. So any number of
 * whole words is taken, and what lies between two members is harmless: it is padding. */
#include "base/stamp.h"

#include <string.h>

#include "base/context.h"

enum {
  WORD = sizeof(size_t),
  MOST = 4096 /* no struct with a stamp will ever be as large: a size above is nonsense */
};

bool pk_stamp_fits(size_t stamp, size_t own) {
  return stamp % WORD == 0 && stamp > WORD && stamp <= own;
}

picket_status pk_stamp_take(picket_context *context, const char *what, const void *given, void *own,
                            size_t size) {
  size_t stamp = 0;
  memcpy(&stamp, given, sizeof stamp);
  if (!pk_stamp_fits(stamp, size)) {
    return pk_fail(
        context, PICKET_ERROR_ARGUMENT, "%s: size is %zu, must be %zu as %s_init sets it%s", what,
        stamp, size, what,
        stamp > size && stamp % WORD == 0 ? ", or the program is newer than the library" : "");
  }
  memcpy(own, given, stamp);
  memcpy(own, &size, sizeof size);
  return PICKET_OK;
}

void pk_stamp_give(const void *defaults, size_t own, void *out, size_t size) {
  if (!out || size < WORD || size > MOST) {
    return;
  }
  memset(out, 0, size);
  memcpy(out, defaults, size < own ? size : own);
  memcpy(out, &size, sizeof size);
}
