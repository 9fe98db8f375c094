/* The context: memory, messages, logging, progress. All shared state of the library lives in one.
 * One context serves one thread at a time; different contexts are independent. */
#ifndef PICKET_CONTEXT_H
#define PICKET_CONTEXT_H

#include <stddef.h>

#include <picket/export.h>
#include <picket/status.h>
#include <picket/version.h>

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

/* Is told a line without a newline. */
typedef void (*picket_log_callback)(picket_log_level level, const char *line, void *user);

/* Is asked between factorisations and solves whether to go on. */
typedef picket_verdict (*picket_progress_callback)(const picket_progress *progress, void *user);

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

/* The same for a struct of `size` bytes, that of the headers the program was compiled with: what
 * the macro calls, so that a program never has more written than it has room for. */
PICKET_EXPORT void picket_context_options_init_sized(picket_context_options *options, size_t size);
#define picket_context_options_init(options) \
  picket_context_options_init_sized((options), sizeof(picket_context_options))

/* A new context.
 *   options   null for the defaults
 *   out       receives the context, yours to free
 * PICKET_ERROR_ARGUMENT for a size that no version had, a null `out` or half a pair of memory
 * callbacks; PICKET_ERROR_MEMORY. `out` is untouched on failure. There is no context for a message
 * then: picket_status_text has a sentence for each status. */
PICKET_EXPORT picket_status picket_context_create(const picket_context_options *options,
                                                  picket_context **out);

/* Lets go of a context; null is accepted. Objects made with it keep it alive until they are
 * freed too, so the order of frees does not matter. */
PICKET_EXPORT void picket_context_free(picket_context *context);

/* Others in the place of the callbacks given at creation; null for none.
 * PICKET_ERROR_ARGUMENT for a null context; PICKET_ERROR_BUSY during a call, also from inside of a
 * callback. */
PICKET_EXPORT picket_status picket_context_set_log(picket_context *context, picket_log_callback log,
                                                   void *user, picket_log_level level);
PICKET_EXPORT picket_status picket_context_set_progress(picket_context *context,
                                                        picket_progress_callback progress,
                                                        void *user);

/* One sentence about the last failure in this context, with the offending value and the allowed
 * range; "" when nothing failed. Borrowed until the next call that uses the context. A call that
 * was answered with PICKET_ERROR_BUSY leaves the message alone, for it belongs to the call inside;
 * so do those of a null object. picket_status_text has a sentence for these. */
PICKET_EXPORT const char *picket_context_message(const picket_context *context);

#ifdef __cplusplus
}
#endif

#endif
