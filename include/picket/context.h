/* The context: memory, messages, logging, progress. All shared state of the library lives in one.
 * One context serves one thread at a time; different contexts are independent. */
#ifndef PICKET_CONTEXT_H
#define PICKET_CONTEXT_H

#include <stddef.h>

#include <picket/export.h>
#include <picket/status.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_context picket_context;

/* How much is said through the log callback. */
typedef enum picket_log_level {
  PICKET_LOG_WARNING = 0, /* something the user should know */
  PICKET_LOG_INFO = 1,    /* one line per phase */
  PICKET_LOG_DETAIL = 2   /* grids, values, solver settings */
} picket_log_level;

/* Answer of a progress callback. */
typedef enum picket_verdict { PICKET_CONTINUE = 0, PICKET_STOP = 1 } picket_verdict;

/* What a progress callback is told. Borrowed for the length of the call. */
typedef struct picket_progress {
  const char *phase; /* what is being done, e.g. "band edges, hy" */
  double fraction;   /* how much of it is done, 0 to 1 */
} picket_progress;

/* Fill with picket_context_options_init, then change what you need. */
typedef struct picket_context_options {
  size_t size; /* sizeof(picket_context_options), set by the init function */

  /* Memory of the library's own objects. Null: malloc and free. `allocate` returns null when
   * memory is out; `release` accepts null. Both must be given or neither. */
  void *(*allocate)(size_t bytes, void *user);
  void (*release)(void *pointer, void *user);
  void *memory_user;

  /* Lines of text without a newline, up to and including `log_level`. Null: silent. */
  void (*log)(picket_log_level level, const char *line, void *user);
  void *log_user;
  picket_log_level log_level;

  /* Called between factorisations and solves. Null: never asked. */
  picket_verdict (*progress)(const picket_progress *progress, void *user);
  void *progress_user;
} picket_context_options;

/* Default options: malloc, no log, no progress.
 *   options   filled completely; null is ignored */
PICKET_EXPORT void picket_context_options_init(picket_context_options *options);

/* A new context.
 *   options   null for the defaults
 *   out       receives the context, yours to free
 * PICKET_ERROR_ARGUMENT for an unknown size or half a pair of memory callbacks;
 * PICKET_ERROR_MEMORY. `out` is untouched on failure. */
PICKET_EXPORT picket_status picket_context_create(const picket_context_options *options,
                                                  picket_context **out);

/* Lets go of a context; null is accepted. Objects made with it keep it alive until they are
 * freed too, so the order of frees does not matter. */
PICKET_EXPORT void picket_context_free(picket_context *context);

/* One sentence about the last failure in this context, with the offending value and the allowed
 * range; "" when nothing failed. Borrowed until the next call that uses the context. */
PICKET_EXPORT const char *picket_context_message(const picket_context *context);

/* The version of the library in use, "MAJOR.MINOR.PATCH". Static text. */
PICKET_EXPORT const char *picket_version(void);

#ifdef __cplusplus
}
#endif

#endif
