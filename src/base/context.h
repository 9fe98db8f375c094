/* The context every room works in: memory, the message of the last failure, log and progress.
 *
 * Failure is reported in one way everywhere: a function returns a picket_status, and the place that
 * finds the fault calls pk_fail (or pk_fail_at) once, with one sentence that holds the offending
 * value and the allowed range. */
#ifndef PK_BASE_CONTEXT_H
#define PK_BASE_CONTEXT_H

#include <stdbool.h>

#include <picket/context.h>

/* Where in a problem file a value stands; line 0 when it was not read from a file. `file` is
 * borrowed from the document that outlives the place. */
typedef struct pk_place {
  const char *file;
  int line;
  int column;
} pk_place;

/* Sets the message and returns `status`, so that a caller can write
 *   return pk_fail(ctx, PICKET_ERROR_INPUT, "pitch is %g nm, must be above 0", pitch); */
picket_status pk_fail(picket_context *context, picket_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* The same, with "FILE:LINE:COLUMN: " in front when the place has a file. */
picket_status pk_fail_at(picket_context *context, picket_status status, pk_place place,
                         const char *format, ...) __attribute__((format(printf, 4, 5)));

/* Forgets the message: called by the border at the start of each public call. */
void pk_message_clear(picket_context *context);

/* Says a line through the log callback if the level is wanted. */
void pk_log(picket_context *context, picket_log_level level, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* True if lines of this level are wanted: guards work done only for the log. */
bool pk_log_wanted(const picket_context *context, picket_log_level level);

/* Asks the progress callback. PICKET_OK to go on, PICKET_ERROR_STOPPED (message set) to stop. */
picket_status pk_progress(picket_context *context, const char *phase, double fraction);

/* Who listens to a context. */
typedef struct pk_listeners {
  void (*log)(picket_log_level level, const char *line, void *user);
  void *log_user;
  picket_verdict (*progress)(const picket_progress *progress, void *user);
  void *progress_user;
} pk_listeners;

/* Puts others in the place of the callbacks of the creator, and returns those that were there: for
 * work in parts, which says how far the whole is, and for worker processes. */
pk_listeners pk_context_listen(picket_context *context, pk_listeners listeners);

/* Objects hold their context: one hold per object, released with it. */
picket_context *pk_context_hold(picket_context *context);
void pk_context_release(picket_context *context);

/* Marks the context as in use for the length of one public call. False if another thread is
 * inside already. */
bool pk_context_enter(picket_context *context);
void pk_context_leave(picket_context *context);

#endif
