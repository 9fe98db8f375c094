/* Structs that callers fill and that may grow at their end: the first member, `size`, says how much
 * of one there is. A caller compiled when it was smaller hands over its beginning; the rest has its
 * defaults. */
#ifndef PK_BASE_STAMP_H
#define PK_BASE_STAMP_H

#include <stdbool.h>
#include <stddef.h>

#include <picket/context.h>

/* Whether a stamp can be that of a struct which has `own` bytes now: whole words, at least one
 * member behind the stamp, no more than there is. */
bool pk_stamp_fits(size_t stamp, size_t own);

/* Lays the caller's struct `given` over `own`, which holds `size` bytes of defaults, and stamps it
 * with `size`. PICKET_ERROR_ARGUMENT for a stamp that does not fit; `own` is then untouched. `what`
 * is the name of the struct in the message. */
picket_status pk_stamp_take(picket_context *context, const char *what, const void *given, void *own,
                            size_t size);

/* Writes the beginning of `defaults`, which has `own` bytes, into a caller's struct of `size` bytes
 * stamped so; what the caller has beyond it is zeroed. Nothing for null, no room for a stamp,
 * or more than any such struct has. */
void pk_stamp_give(const void *defaults, size_t own, void *out, size_t size);

#endif
