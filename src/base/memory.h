/* The only malloc and free of the library: all memory of our own objects comes through the context,
 * so that an embedding tool can supply it and a test can make every allocation fail once. */
#ifndef PK_BASE_MEMORY_H
#define PK_BASE_MEMORY_H

#include <stddef.h>

#include <picket/context.h>

/* `count` zeroed elements of `size` bytes; null (message set) when memory is out or the product
 * overflows. A count of zero gives a valid pointer. */
void *pk_alloc(picket_context *context, size_t count, size_t size);

/* A block of `count` elements holding the first `used` elements of `old`, which is freed; the rest
 * is zeroed. Null (message set, `old` untouched) when memory is out. */
void *pk_regrow(picket_context *context, void *old, size_t used, size_t count, size_t size);

/* A copy of `count` elements; null (message set) when memory is out. */
void *pk_copy(picket_context *context, const void *source, size_t count, size_t size);

/* A copy of a text; null (message set) when memory is out. */
char *pk_text_copy(picket_context *context, const char *text);

/* Accepts null. */
void pk_free(picket_context *context, void *pointer);

/* PK_NEW(ctx, n, type): n zeroed elements of a type. */
#define PK_NEW(context, count, type) ((type *)pk_alloc((context), (size_t)(count), sizeof(type)))

#endif
