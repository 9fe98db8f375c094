/* See context.h and picket/context.h. */
#include "base/context.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/context_private.h"
#include "base/memory.h"
#include "base/stamp.h"

/* In parentheses where the header has a macro of the same name. */
void picket_context_options_init_sized(picket_context_options *options, size_t size) {
  const picket_context_options usual = {.log_level = PICKET_LOG_INFO};
  pk_stamp_give(&usual, sizeof usual, options, size);
}

void(picket_context_options_init)(picket_context_options *options) {
  picket_context_options_init_sized(options, sizeof *options);
}

static void *allocate_first(const picket_context_options *options, size_t bytes) {
  return options->allocate ? options->allocate(bytes, options->memory_user) : malloc(bytes);
}

picket_status picket_context_create(const picket_context_options *options, picket_context **out) {
  picket_context_options chosen;
  picket_context_options_init(&chosen);
  if (!out || (options && !pk_stamp_fits(options->size, sizeof chosen))) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (options) {
    memcpy(&chosen, options, options->size);
    chosen.size = sizeof chosen;
  }
  if (!chosen.allocate != !chosen.release) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_context *context = allocate_first(&chosen, sizeof *context);
  if (!context) {
    return PICKET_ERROR_MEMORY;
  }
  memset(context, 0, sizeof *context);
  context->options = chosen;
  atomic_init(&context->holds, 1);
  atomic_flag_clear(&context->busy);
  *out = context;
  return PICKET_OK;
}

picket_context *pk_context_hold(picket_context *context) {
  atomic_fetch_add(&context->holds, 1);
  return context;
}

void pk_context_release(picket_context *context) {
  if (context && atomic_fetch_sub(&context->holds, 1) == 1) {
    pk_free(context, context);
  }
}

void picket_context_free(picket_context *context) {
  pk_context_release(context);
}

picket_status picket_context_set_log(picket_context *context, picket_log_callback log, void *user,
                                     picket_log_level level) {
  if (!context) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!pk_context_enter(context)) {
    return PICKET_ERROR_BUSY;
  }
  context->options.log = log;
  context->options.log_user = user;
  context->options.log_level = level;
  pk_context_leave(context);
  return PICKET_OK;
}

picket_status picket_context_set_progress(picket_context *context,
                                          picket_progress_callback progress, void *user) {
  if (!context) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!pk_context_enter(context)) {
    return PICKET_ERROR_BUSY;
  }
  context->options.progress = progress;
  context->options.progress_user = user;
  pk_context_leave(context);
  return PICKET_OK;
}

const char *picket_context_message(const picket_context *context) {
  return context ? context->message : "";
}

bool pk_context_enter(picket_context *context) {
  return !atomic_flag_test_and_set(&context->busy);
}

void pk_context_leave(picket_context *context) {
  atomic_flag_clear(&context->busy);
}

void pk_message_clear(picket_context *context) {
  context->message[0] = '\0';
}

picket_status pk_fail(picket_context *context, picket_status status, const char *format, ...) {
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(context->message, sizeof context->message, format, arguments);
  va_end(arguments);
  return status;
}

picket_status pk_fail_at(picket_context *context, picket_status status, pk_place place,
                         const char *format, ...) {
  int used = 0;
  if (place.file && place.line > 0) {
    used = snprintf(context->message, sizeof context->message, "%s:%d:%d: ", place.file, place.line,
                    place.column);
  } else if (place.file) {
    used = snprintf(context->message, sizeof context->message, "%s: ", place.file);
  }
  if (used < 0 || (size_t)used >= sizeof context->message) {
    used = 0;
  }
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(context->message + used, sizeof context->message - (size_t)used, format, arguments);
  va_end(arguments);
  return status;
}

bool pk_log_wanted(const picket_context *context, picket_log_level level) {
  return context->options.log && level <= context->options.log_level;
}

void pk_log(picket_context *context, picket_log_level level, const char *format, ...) {
  if (!pk_log_wanted(context, level)) {
    return;
  }
  char line[PK_MESSAGE_CAPACITY];
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(line, sizeof line, format, arguments);
  va_end(arguments);
  context->options.log(level, line, context->options.log_user);
}

picket_status pk_progress(picket_context *context, const char *phase, double fraction) {
  if (!context->options.progress) {
    return PICKET_OK;
  }
  picket_progress progress = {phase, fraction};
  if (context->options.progress(&progress, context->options.progress_user) == PICKET_CONTINUE) {
    return PICKET_OK;
  }
  return pk_fail(context, PICKET_ERROR_STOPPED, "stopped on request during: %s", phase);
}

pk_listeners pk_context_listen(picket_context *context, pk_listeners listeners) {
  picket_context_options *o = &context->options;
  pk_listeners before = {o->log, o->log_user, o->progress, o->progress_user};
  o->log = listeners.log;
  o->log_user = listeners.log_user;
  o->progress = listeners.progress;
  o->progress_user = listeners.progress_user;
  return before;
}
