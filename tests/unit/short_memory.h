/* A context whose n-th allocation fails, and which counts what is not given back. */
#ifndef PICKET_TESTS_SHORT_MEMORY_H
#define PICKET_TESTS_SHORT_MEMORY_H

#include <picket/context.h>
#include <stdlib.h>

typedef struct short_memory {
  long asked;   /* allocations so far */
  long fail_at; /* this one (from 1) fails; 0 for none */
  long living;  /* not yet released */
} short_memory;

static inline void *short_memory_allocate(size_t bytes, void *user) {
  short_memory *memory = user;
  if (++memory->asked == memory->fail_at) {
    return NULL;
  }
  memory->living++;
  return malloc(bytes);
}

static inline void short_memory_release(void *pointer, void *user) {
  short_memory *memory = user;
  memory->living -= pointer != NULL;
  free(pointer);
}

/* A context on this memory; null only if its own allocation failed. */
static inline picket_context *short_memory_context(short_memory *memory) {
  picket_context_options options;
  picket_context_options_init(&options);
  options.allocate = short_memory_allocate;
  options.release = short_memory_release;
  options.memory_user = memory;
  picket_context *context = NULL;
  (void)picket_context_create(&options, &context);
  return context;
}

#endif
