/* Which library this is: the one compiled against (macros) and the one in use (functions).
 *
 * What is promised: a program goes on working, without being compiled again, with every library of
 * the same ABI number, which is also the number in the name libpicket.so.N. Within it no function,
 * enumerator, member or status code is taken away, moved or given another meaning. Structs that
 * begin with `size` (options and requests) may grow at their end; the others, which the library
 * fills, stay as they are. New functions may come. Numbers themselves may move within their bars.
 * Before 1.0 the second number of the version rises when the ABI number does. */
#ifndef PICKET_VERSION_H
#define PICKET_VERSION_H

#include <stddef.h>

#include <picket/export.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Of these headers. */
#define PICKET_VERSION "0.1.0"
#define PICKET_VERSION_MAJOR 0
#define PICKET_VERSION_MINOR 1
#define PICKET_VERSION_PATCH 0
#define PICKET_ABI 0

/* The version of the library in use, "MAJOR.MINOR.PATCH". Static text. */
PICKET_EXPORT const char *picket_version(void);

/* The ABI number of the library in use; PICKET_ABI is that of the headers. */
PICKET_EXPORT int picket_abi(void);

/* How the library in use was built: compiler, asserts, for bug reports. Static text. */
PICKET_EXPORT const char *picket_build(void);

/* The size in bytes that the library in use has for a public struct, e.g. "picket_edges_answer":
 * what a binding compares with its own. 0 for a null or unknown name and for opaque objects. */
PICKET_EXPORT size_t picket_struct_size(const char *name);

/* The name of public struct i, null past the last one. Static text. */
PICKET_EXPORT const char *picket_struct_name(int i);

#ifdef __cplusplus
}
#endif

#endif
