/* A run of the tool: the context with log, progress and Ctrl-C, and the problem with its --set. */
#include <errno.h>
#include <signal.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "cli/cli.h"

static const double PATIENCE_S = 1.0; /* shorter work shows no progress */
static const double REFRESH_S = 0.2;
enum {
  PROGRESS_WIDTH = 60,
  STDIN_BYTES = 4000001, /* one more than a problem may have, so that the library can refuse it */
  STDIN_BLOCK = 65536
};

/* The only state a signal handler can reach. */
static volatile sig_atomic_t interrupted;

static struct {
  double started, shown;
  bool on_screen;
} progress_line;

int pk_complain(int status, const char *format, ...) {
  va_list arguments;
  va_start(arguments, format);
  pk_session_quiet();
  fputs("picket: ", stderr);
  vfprintf(stderr, format, arguments);
  fputc('\n', stderr);
  va_end(arguments);
  return status;
}

int pk_exit_of(picket_status status) {
  switch (status) {
    case PICKET_OK: return PK_EXIT_DONE;
    case PICKET_ERROR_NUMERIC:
    case PICKET_ERROR_NO_MODE: return PK_EXIT_SHORT;
    case PICKET_ERROR_ARGUMENT:
    case PICKET_ERROR_INPUT:
    case PICKET_ERROR_FILE: /* the library only reads files: the name or the file is wrong */
    case PICKET_ERROR_RANGE:
    case PICKET_ERROR_UNSUPPORTED: return PK_EXIT_WRONG;
    case PICKET_ERROR_STOPPED: return PK_EXIT_INTERRUPTED;
    case PICKET_ERROR_MEMORY:
    case PICKET_ERROR_OUTPUT:
    case PICKET_ERROR_BUSY:
    case PICKET_ERROR_INTERNAL: break;
  }
  return PK_EXIT_MACHINE;
}

static double now(void) {
  struct timespec time;
  clock_gettime(CLOCK_MONOTONIC, &time);
  return (double)time.tv_sec + 1e-9 * (double)time.tv_nsec;
}

static void on_interrupt(int signal_number) {
  (void)signal_number;
  interrupted = 1;
}

void pk_session_quiet(void) {
  if (progress_line.on_screen) {
    fprintf(stderr, "\r%*s\r", PROGRESS_WIDTH, "");
    progress_line.on_screen = false;
  }
}

static void on_log(picket_log_level level, const char *line, void *user) {
  (void)user;
  pk_session_quiet();
  fprintf(stderr, "picket: %s%s\n", level == PICKET_LOG_WARNING ? "warning: " : "", line);
}

static picket_verdict on_progress(const picket_progress *progress, void *user) {
  const pk_arguments *a = user;
  double time = now();
  if (!a->quiet && isatty(STDERR_FILENO) && time - progress_line.started > PATIENCE_S &&
      time - progress_line.shown > REFRESH_S) {
    char line[PROGRESS_WIDTH + 1];
    snprintf(line, sizeof line, "%s: %.0f %%", progress->phase, 100 * progress->fraction);
    fprintf(stderr, "\r%-*s", PROGRESS_WIDTH, line);
    fflush(stderr);
    progress_line.shown = time;
    progress_line.on_screen = true;
  }
  return interrupted ? PICKET_STOP : PICKET_CONTINUE;
}

picket_status pk_session_open(const pk_arguments *arguments, picket_context **out) {
  /* The first Ctrl-C asks the library to stop, a second one ends the process at once. */
  struct sigaction action = {.sa_handler = on_interrupt, .sa_flags = (int)SA_RESETHAND};
  sigemptyset(&action.sa_mask);
  sigaction(SIGINT, &action, NULL);
  progress_line.started = now();
  picket_context_options options;
  picket_context_options_init(&options);
  options.log = arguments->quiet ? NULL : on_log;
  options.log_level = arguments->verbose ? PICKET_LOG_DETAIL : PICKET_LOG_WARNING;
  options.progress = on_progress;
  options.progress_user = (void *)arguments; /* read only */
  return picket_context_create(&options, out);
}

/* Everything on standard input, up to STDIN_BYTES; an exit status. */
static int read_stdin(char **out, size_t *length) {
  size_t used = 0;
  size_t capacity = 0;
  char *text = NULL;
  while (used == capacity && capacity < STDIN_BYTES) {
    size_t larger = capacity == 0 ? STDIN_BLOCK : 2 * capacity;
    larger = larger < STDIN_BYTES ? larger : STDIN_BYTES;
    char *moved = realloc(text, larger);
    if (!moved) {
      free(text);
      return pk_complain(PK_EXIT_MACHINE, "out of memory while reading standard input");
    }
    text = moved;
    capacity = larger;
    used += fread(text + used, 1, capacity - used, stdin);
  }
  if (interrupted) {
    free(text);
    return pk_complain(PK_EXIT_INTERRUPTED, "interrupted while reading standard input");
  }
  if (ferror(stdin)) {
    int error = errno;
    free(text);
    return pk_complain(PK_EXIT_MACHINE, "standard input cannot be read: %s", strerror(error));
  }
  *out = text;
  *length = used;
  return PK_EXIT_DONE;
}

static int read_problem(const pk_arguments *arguments, picket_context *context,
                        picket_problem **out) {
  picket_status status;
  if (strcmp(arguments->file, "-") == 0) {
    char *text = NULL;
    size_t length = 0;
    int failed = read_stdin(&text, &length);
    if (failed) {
      return failed;
    }
    status = picket_problem_read_text(context, text, length, "standard input", out);
    free(text);
  } else {
    status = picket_problem_read_file(context, arguments->file, out);
  }
  return status == PICKET_OK
             ? PK_EXIT_DONE
             : pk_complain(pk_exit_of(status), "%s", picket_context_message(context));
}

/* One KEY=VALUE: the key ends at the first equals sign. */
static int set_one(picket_context *context, picket_problem *problem, const char *text) {
  size_t length = strcspn(text, "=");
  char *key = malloc(length + 1);
  if (!key) {
    return pk_complain(PK_EXIT_MACHINE, "out of memory");
  }
  memcpy(key, text, length);
  key[length] = '\0';
  picket_status status = picket_problem_set(problem, key, text + length + 1);
  free(key);
  return status == PICKET_OK
             ? PK_EXIT_DONE
             : pk_complain(pk_exit_of(status), "%s", picket_context_message(context));
}

int pk_session_problem(const pk_arguments *arguments, picket_context *context,
                       picket_problem **out) {
  picket_problem *problem = NULL;
  int status = read_problem(arguments, context, &problem);
  for (int i = 0; status == PK_EXIT_DONE && i < arguments->set_count; i++) {
    status = set_one(context, problem, arguments->sets[i]);
  }
  if (status != PK_EXIT_DONE) {
    picket_problem_free(problem);
    return status;
  }
  *out = problem;
  return PK_EXIT_DONE;
}
