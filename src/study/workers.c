/* See workers.h.
 *
 * Two pipes to each worker. Down: the number of a piece, one int at a time; the end of file, which
 * comes with the death of the caller in whatever way, ends an idle worker. Up: lines, of which the
 * first letter says what they are:
 *
 *   a <answer>             of the piece
 *   e <status> <message>   the piece failed in a way that ends the whole
 *   l <level> <text>       for the log
 *   p <fraction>           how much of the piece is done
 *
 * A worker owns nothing that must be tidied up, so it is ended by SIGKILL: the handlers for other
 * signals that it inherited belong to the caller's program and must not run twice. */
#include "study/workers.h"

#include <errno.h>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <stdio.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/memory.h"

enum {
  POLL_MS = 100, /* between two questions to the progress callback */
  READ_BYTES = 16384,
  IDLE = -1
};

typedef struct worker {
  pid_t pid; /* 0: there is none */
  int piece; /* or IDLE */
  /* Ends of the pipes. The caller keeps the reading end of `down` too, so that giving a piece to a
   * worker that just died is no SIGPIPE. */
  int down[2], up;
  double fraction;
  char *line; /* what came of a line so far */
  size_t used, capacity;
} worker;

typedef struct crew {
  const pk_work *work;
  int size;
  worker *worker; /* [size] */
  struct pollfd *poll;
  int given, taken; /* pieces */
  int forks;        /* so far: bounds what is tried again */
} crew;

int pk_workers_cores(void) {
  long cores = sysconf(_SC_NPROCESSORS_ONLN);
  return cores < 1 ? 1 : cores > 1024 ? 1024 : (int)cores;
}

/* --- In the calling process alone ----------------------------------------------------------------
 */

typedef struct part {
  pk_listeners caller;
  int done, all;
} part;

static picket_verdict progress_of_part(const picket_progress *progress, void *user) {
  const part *p = user;
  picket_progress whole = {progress->phase, (p->done + progress->fraction) / p->all};
  return p->caller.progress(&whole, p->caller.progress_user);
}

static picket_status run_alone(const pk_work *work, int first) {
  picket_context *context = work->context;
  part p = {.all = work->before + work->count};
  p.caller = pk_context_listen(context, (pk_listeners){0});
  pk_listeners inner = p.caller;
  inner.progress = p.caller.progress ? progress_of_part : NULL;
  inner.progress_user = &p;
  picket_status status = PICKET_OK;
  pk_context_listen(context, inner);
  for (int i = first; i < work->count && status == PICKET_OK; i++) {
    pk_record answer = {.context = context};
    p.done = work->before + i;
    status = pk_progress(context, work->phase, 0);
    if (status == PICKET_OK) {
      status = work->solve(work->user, work->piece[i], &answer);
    }
    if (status == PICKET_OK) {
      status = answer.failed ? PICKET_ERROR_MEMORY
                             : work->take(work->user, work->piece[i], answer.text, NULL);
    }
    pk_record_clear(&answer);
  }
  pk_context_listen(context, p.caller);
  return status;
}

/* --- Inside a worker -----------------------------------------------------------------------------
 */

typedef struct inside {
  pid_t caller;
  int up;
} inside;

static void send_bytes(int up, const char *bytes, size_t count) {
  while (count > 0) {
    ssize_t sent = write(up, bytes, count);
    if (sent < 0 && errno == EINTR) {
      continue;
    }
    if (sent <= 0) {
      _exit(1); /* nobody listens any more */
    }
    bytes += sent;
    count -= (size_t)sent;
  }
}

static void send_line(int up, const char *head, const char *text) {
  send_bytes(up, head, strlen(head));
  for (const char *s = text; *s;) {
    size_t length = strcspn(s, "\n");
    send_bytes(up, s, length);
    s += length;
    s += *s == '\n';
  }
  send_bytes(up, "\n", 1);
}

static void log_upwards(picket_log_level level, const char *line, void *user) {
  const inside *in = user;
  char head[32];
  snprintf(head, sizeof head, "l %d ", (int)level);
  send_line(in->up, head, line);
}

static picket_verdict progress_upwards(const picket_progress *progress, void *user) {
  const inside *in = user;
  char text[32];
  if (getppid() != in->caller) {
    _exit(1);
  }
  /* A whole number: a decimal point would depend on the locale. */
  snprintf(text, sizeof text, "%d", (int)(1000 * progress->fraction));
  send_line(in->up, "p ", text);
  return PICKET_CONTINUE;
}

static void do_piece(const pk_work *work, int up, int piece) {
  pk_record answer = {.context = work->context};
  picket_status status = work->solve(work->user, piece, &answer);
  if (status == PICKET_OK && answer.failed) {
    status = PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    send_line(up, "a ", answer.text ? answer.text : "");
  } else {
    char head[32];
    snprintf(head, sizeof head, "e %d ", (int)status);
    send_line(up, head, picket_context_message(work->context));
  }
  pk_record_clear(&answer);
}

static void be_worker(const pk_work *work, pid_t caller, int down, int up) {
  inside in = {caller, up};
  pk_listeners listeners =
      pk_context_listen(work->context, (pk_listeners){NULL, NULL, progress_upwards, &in});
  listeners.log = listeners.log ? log_upwards : NULL;
  pk_context_listen(work->context, (pk_listeners){listeners.log, &in, progress_upwards, &in});
  for (;;) {
    int piece = 0;
    ssize_t got = read(down, &piece, sizeof piece);
    if (got < 0 && errno == EINTR) {
      continue;
    }
    if (got != (ssize_t)sizeof piece) {
      _exit(0);
    }
    do_piece(work, up, piece);
  }
}

/* --- Workers come and go -------------------------------------------------------------------------
 */

static void shut(int *descriptor) {
  if (*descriptor >= 0) {
    close(*descriptor);
  }
  *descriptor = -1;
}

static void shut_pipes(worker *w) {
  shut(&w->down[0]);
  shut(&w->down[1]);
  shut(&w->up);
}

/* A program that the caller starts later must not hold our pipes open. */
static bool open_pipe(int ends[2]) {
  if (pipe(ends) != 0) {
    ends[0] = ends[1] = -1;
    return false;
  }
  fcntl(ends[0], F_SETFD, FD_CLOEXEC);
  fcntl(ends[1], F_SETFD, FD_CLOEXEC);
  return true;
}

/* False if the system refuses another process. */
static bool start(crew *c, worker *w) {
  int up[2] = {-1, -1};
  pid_t caller = getpid();
  pid_t pid = open_pipe(w->down) && open_pipe(up) ? fork() : -1;
  if (pid == 0) {
    for (int i = 0; i < c->size; i++) {
      if (&c->worker[i] != w) {
        shut_pipes(&c->worker[i]);
      }
    }
    shut(&w->down[1]);
    shut(&up[0]);
    be_worker(c->work, caller, w->down[0], up[1]);
  }
  shut(&up[1]);
  w->up = up[0];
  w->pid = pid > 0 ? pid : 0;
  w->piece = IDLE;
  w->used = 0;
  w->fraction = 0;
  if (pid < 0) {
    shut_pipes(w);
  }
  c->forks++;
  return pid > 0;
}

/* Ends a worker, if it has not ended by itself, and says how it did. Returns false if the system
 * does not know (a program that ignores SIGCHLD). */
static bool end(worker *w, bool by_force, int *how) {
  shut_pipes(w);
  if (w->pid == 0) {
    return false;
  }
  if (by_force) {
    kill(w->pid, SIGKILL);
  }
  pid_t ended;
  do {
    ended = waitpid(w->pid, how, 0);
  } while (ended < 0 && errno == EINTR);
  w->pid = 0;
  return ended > 0;
}

static void dismiss(crew *c) {
  for (int i = 0; c->worker && i < c->size; i++) {
    int how;
    (void)end(&c->worker[i], true, &how);
    pk_free(c->work->context, c->worker[i].line);
  }
  pk_free(c->work->context, c->worker);
  pk_free(c->work->context, c->poll);
}

/* --- What workers say ----------------------------------------------------------------------------
 */

static picket_status obey_line(crew *c, worker *w, char *line) {
  char *text = line + (line[0] ? 1 : 0);
  text += *text == ' ';
  int number = 0, length = 0;
  switch (line[0]) {
    case 'a': {
      int piece = w->piece;
      w->piece = IDLE;
      w->fraction = 0;
      c->taken++;
      return c->work->take(c->work->user, piece, text, NULL);
    }
    case 'p': w->fraction = sscanf(text, "%d", &number) == 1 ? 1e-3 * number : 0; return PICKET_OK;
    case 'l':
      (void)sscanf(text, "%d %n", &number, &length);
      pk_log(c->work->context, (picket_log_level)number, "%s", text + length);
      return PICKET_OK;
    default:
      (void)sscanf(text, "%d %n", &number, &length);
      return pk_fail(c->work->context, number < 0 ? (picket_status)number : PICKET_ERROR_INTERNAL,
                     "%s", text + length);
  }
}

static picket_status obey_lines(crew *c, worker *w) {
  char *start_of_line = w->line, *stop = w->line + w->used, *line_end;
  picket_status status = PICKET_OK;
  while (status == PICKET_OK &&
         (line_end = memchr(start_of_line, '\n', (size_t)(stop - start_of_line))) != NULL) {
    *line_end = '\0';
    status = obey_line(c, w, start_of_line);
    start_of_line = line_end + 1;
  }
  w->used = (size_t)(stop - start_of_line);
  memmove(w->line, start_of_line, w->used);
  return status;
}

/* The worker is gone: its piece, if it had one, is answered with the reason. Another one takes its
 * place, unless workers die faster than there are pieces. */
static picket_status bury(crew *c, worker *w) {
  char why[128];
  int how = 0, piece = w->piece;
  if (!end(w, false, &how)) {
    snprintf(why, sizeof why, "the worker process ended before it was done");
  } else if (WIFSIGNALED(how)) {
    snprintf(why, sizeof why, "the worker process was ended by signal %d", WTERMSIG(how));
  } else {
    snprintf(why, sizeof why, "the worker process ended with status %d before it was done",
             WEXITSTATUS(how));
  }
  pk_log(c->work->context, PICKET_LOG_WARNING, "%s", why);
  picket_status status = PICKET_OK;
  if (piece != IDLE) {
    w->piece = IDLE;
    c->taken++;
    status = c->work->take(c->work->user, piece, NULL, why);
  }
  if (status == PICKET_OK && c->given < c->work->count && c->forks < c->size + c->work->count) {
    (void)start(c, w);
  }
  return status;
}

static picket_status hear(crew *c, worker *w) {
  if (w->capacity - w->used < READ_BYTES) {
    size_t capacity = 2 * w->capacity + READ_BYTES;
    char *larger = pk_regrow(c->work->context, w->line, w->used, capacity, 1);
    if (!larger) {
      return PICKET_ERROR_MEMORY;
    }
    w->line = larger;
    w->capacity = capacity;
  }
  ssize_t got = read(w->up, w->line + w->used, READ_BYTES);
  if (got < 0 && (errno == EINTR || errno == EAGAIN)) {
    return PICKET_OK;
  }
  if (got <= 0) {
    return bury(c, w);
  }
  w->used += (size_t)got;
  return obey_lines(c, w);
}

/* --- The work ------------------------------------------------------------------------------------
 */

static int feed(crew *c) {
  int living = 0;
  for (int i = 0; i < c->size; i++) {
    worker *w = &c->worker[i];
    living += w->pid > 0;
    if (w->pid > 0 && w->piece == IDLE && c->given < c->work->count) {
      w->piece = c->work->piece[c->given++];
      /* An empty pipe takes an int at once. */
      (void)!write(w->down[1], &w->piece, sizeof w->piece);
    }
  }
  return living;
}

static picket_status ask_progress(const crew *c) {
  double done = c->work->before + c->taken;
  for (int i = 0; i < c->size; i++) {
    done += c->worker[i].fraction;
  }
  return pk_progress(c->work->context, c->work->phase, done / (c->work->before + c->work->count));
}

static picket_status listen_once(crew *c) {
  for (int i = 0; i < c->size; i++) {
    c->poll[i] = (struct pollfd){.fd = c->worker[i].up, .events = POLLIN}; /* -1 is left out */
  }
  if (poll(c->poll, (nfds_t)c->size, POLL_MS) <= 0) {
    return PICKET_OK;
  }
  picket_status status = PICKET_OK;
  for (int i = 0; i < c->size && status == PICKET_OK; i++) {
    if (c->poll[i].revents != 0) {
      status = hear(c, &c->worker[i]);
    }
  }
  return status;
}

static picket_status run_crew(crew *c) {
  picket_status status = PICKET_OK;
  while (c->taken < c->work->count && status == PICKET_OK) {
    int living = feed(c);
    if (living == 0) {
      /* No process to be had: every piece given out was taken or buried. */
      return run_alone(c->work, c->given);
    }
    status = ask_progress(c);
    if (status == PICKET_OK) {
      status = listen_once(c);
    }
  }
  return status;
}

picket_status pk_workers_run(const pk_work *work) {
  crew c = {.work = work, .size = work->jobs < work->count ? work->jobs : work->count};
  if (c.size <= 1) {
    return run_alone(work, 0);
  }
  c.worker = PK_NEW(work->context, c.size, worker);
  c.poll = PK_NEW(work->context, c.size, struct pollfd);
  for (int i = 0; c.worker && i < c.size; i++) {
    c.worker[i] = (worker){.piece = IDLE, .down = {-1, -1}, .up = -1};
  }
  picket_status status = c.worker && c.poll ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; i < c.size && status == PICKET_OK; i++) {
    if (!start(&c, &c.worker[i])) {
      break; /* with as many as there are */
    }
  }
  if (status == PICKET_OK) {
    status = run_crew(&c);
  }
  dismiss(&c);
  return status;
}
