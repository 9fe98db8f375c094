/* See memory.h. A block from the context's allocator is zeroed here, so callers start from a known
 * state and a free function can run over a half-built object. */
#include "base/memory.h"

#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/context.h"
#include "base/context_private.h"

static void *raw_allocate(picket_context *context, size_t bytes) {
  if (context->options.allocate) {
    return context->options.allocate(bytes, context->options.memory_user);
  }
  return malloc(bytes);
}

void *pk_alloc(picket_context *context, size_t count, size_t size) {
  if (size != 0 && count > SIZE_MAX / 2 / size) {
    pk_fail(context, PICKET_ERROR_MEMORY, "memory is out: %zu elements of %zu bytes were asked for",
            count, size);
    return NULL;
  }
  size_t bytes = count * size > 0 ? count * size : 1;
  void *block = raw_allocate(context, bytes);
  if (!block) {
    pk_fail(context, PICKET_ERROR_MEMORY, "memory is out: %zu bytes were asked for", bytes);
    return NULL;
  }
  memset(block, 0, bytes);
  return block;
}

void *pk_regrow(picket_context *context, void *old, size_t used, size_t count, size_t size) {
  void *block = pk_alloc(context, count, size);
  if (!block) {
    return NULL;
  }
  if (old && used > 0) {
    memcpy(block, old, used * size);
  }
  pk_free(context, old);
  return block;
}

void *pk_copy(picket_context *context, const void *source, size_t count, size_t size) {
  void *block = pk_alloc(context, count, size);
  if (block && count > 0 && size > 0) {
    memcpy(block, source, count * size);
  }
  return block;
}

char *pk_text_copy(picket_context *context, const char *text) {
  return pk_copy(context, text, strlen(text) + 1, 1);
}

void pk_free(picket_context *context, void *pointer) {
  if (!pointer) {
    return;
  }
  if (context->options.release) {
    context->options.release(pointer, context->options.memory_user);
  } else {
    free(pointer);
  }
}
