/* gnuplot as a child process: a script goes in at its standard input, a picture comes out at its
 * standard output. No shell, no files; its own settings files are not read. All three pipes are
 * served at once, for each end can be waiting for the other. */
#include <errno.h>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "cli/gnuplot.h"

extern char **environ;

enum {
  READ = 0,
  WRITE = 1,
  BLOCK = 65536,
  COMPLAINT = 4000, /* bytes of what it says that are kept */
  LINE = 200
};

typedef struct child {
  pid_t id;
  int in, out, error; /* our ends; -1 when closed */
  const char *script;
  size_t left; /* of the script */
  char *picture;
  size_t used, capacity;
  char said[COMPLAINT + 1];
  size_t said_length;
} child;

static void shut(int *descriptor) {
  if (*descriptor >= 0) {
    close(*descriptor);
    *descriptor = -1;
  }
}

static int open_pipes(int pipes[3][2]) {
  for (int i = 0; i < 3; i++) {
    if (pipe(pipes[i]) != 0) {
      return errno;
    }
    fcntl(pipes[i][READ], F_SETFD, FD_CLOEXEC);
    fcntl(pipes[i][WRITE], F_SETFD, FD_CLOEXEC);
  }
  return 0;
}

/* The child with its standard streams; 0 or an errno. */
static int spawn(int pipes[3][2], pid_t *id) {
  static char name[] = "gnuplot", own_settings_only[] = "-d", from_stdin[] = "-";
  char *words[] = {name, own_settings_only, from_stdin, NULL};
  posix_spawn_file_actions_t actions;
  posix_spawnattr_t attributes;
  sigset_t usual; /* the tool ignores SIGPIPE, its child should not */
  sigemptyset(&usual);
  sigaddset(&usual, SIGPIPE);
  posix_spawn_file_actions_init(&actions);
  posix_spawnattr_init(&attributes);
  posix_spawnattr_setsigdefault(&attributes, &usual);
  posix_spawnattr_setflags(&attributes, POSIX_SPAWN_SETSIGDEF);
  posix_spawn_file_actions_adddup2(&actions, pipes[0][READ], STDIN_FILENO);
  posix_spawn_file_actions_adddup2(&actions, pipes[1][WRITE], STDOUT_FILENO);
  posix_spawn_file_actions_adddup2(&actions, pipes[2][WRITE], STDERR_FILENO);
  int failed = posix_spawnp(id, name, &actions, &attributes, words, environ);
  posix_spawn_file_actions_destroy(&actions);
  posix_spawnattr_destroy(&attributes);
  return failed;
}

static int start(child *c) {
  int pipes[3][2] = {{-1, -1}, {-1, -1}, {-1, -1}};
  int failed = open_pipes(pipes);
  if (!failed) {
    failed = spawn(pipes, &c->id);
  }
  shut(&pipes[0][READ]);
  shut(&pipes[1][WRITE]);
  shut(&pipes[2][WRITE]);
  c->in = pipes[0][WRITE];
  c->out = pipes[1][READ];
  c->error = pipes[2][READ];
  if (c->in >= 0) {
    fcntl(c->in, F_SETFL, O_NONBLOCK);
  }
  return failed;
}

static void feed(child *c) {
  ssize_t written = write(c->in, c->script, c->left);
  if (written > 0) {
    c->script += written;
    c->left -= (size_t)written;
  }
  bool wait = written < 0 && (errno == EAGAIN || errno == EINTR);
  if (c->left == 0 || (written < 0 && !wait)) {
    shut(&c->in); /* a child that ended before its script says why by itself */
  }
}

/* False if memory is out. */
static bool take_picture(child *c) {
  if (c->capacity - c->used < BLOCK) {
    size_t capacity = 2 * c->capacity + BLOCK;
    char *larger = realloc(c->picture, capacity);
    if (!larger) {
      return false;
    }
    c->picture = larger;
    c->capacity = capacity;
  }
  ssize_t got = read(c->out, c->picture + c->used, BLOCK);
  if (got > 0) {
    c->used += (size_t)got;
  } else if (got == 0 || errno != EINTR) {
    shut(&c->out);
  }
  return true;
}

static void take_complaint(child *c) {
  char beyond[256];
  bool room = c->said_length < COMPLAINT;
  ssize_t got = room ? read(c->error, c->said + c->said_length, COMPLAINT - c->said_length)
                     : read(c->error, beyond, sizeof beyond);
  if (got > 0 && room) {
    c->said_length += (size_t)got;
  } else if (got == 0 || (got < 0 && errno != EINTR)) {
    shut(&c->error);
  }
}

/* Until both outputs are closed; false if memory is out. */
static bool serve(child *c) {
  bool good = true;
  while (good && (c->out >= 0 || c->error >= 0)) {
    struct pollfd wanted[] = {{c->in, POLLOUT, 0}, {c->out, POLLIN, 0}, {c->error, POLLIN, 0}};
    if (poll(wanted, 3, -1) < 0 && errno != EINTR) {
      return false;
    }
    if (c->in >= 0 && wanted[0].revents) {
      feed(c);
    }
    if (c->out >= 0 && wanted[1].revents) {
      good = take_picture(c);
    }
    if (c->error >= 0 && wanted[2].revents) {
      take_complaint(c);
    }
  }
  return good;
}

/* Closes everything and waits; the status of waitpid. */
static int finish(child *c) {
  int status = 0;
  shut(&c->in);
  shut(&c->out);
  shut(&c->error);
  while (waitpid(c->id, &status, 0) < 0 && errno == EINTR) {
  }
  return status;
}

/* Its own words: the last line that is not blank, where it puts what was wrong. */
static int complain_of(child *c, int status) {
  char *line = c->said, *last = NULL;
  for (char *next = c->said; next; line = next) {
    next = strchr(line, '\n');
    if (next) {
      *next++ = '\0';
    }
    if (line[strspn(line, " \t\r^")] != '\0') {
      last = line + strspn(line, " \t\r");
    }
  }
  if (WIFSIGNALED(status)) {
    return pk_complain(PK_EXIT_MACHINE, "gnuplot was ended by signal %d; there is no figure",
                       WTERMSIG(status));
  }
  return pk_complain(PK_EXIT_MACHINE,
                     "gnuplot drew no figure (5.4 or later is needed); it says: %.*s", LINE,
                     last ? last : "nothing");
}

int pk_gnuplot_draw(const char *script, char **picture, size_t *length) {
  child c = {.in = -1, .out = -1, .error = -1, .script = script, .left = strlen(script)};
  int failed = start(&c);
  if (failed) {
    shut(&c.in);
    shut(&c.out);
    shut(&c.error);
    return failed == ENOENT
               ? pk_complain(PK_EXIT_MACHINE,
                             "gnuplot is not installed, so there is no figure; the Debian package "
                             "is gnuplot-nox")
               : pk_complain(PK_EXIT_MACHINE,
                             "gnuplot cannot be started, so there is no figure: %s",
                             strerror(failed));
  }
  bool good = serve(&c);
  int status = finish(&c);
  if (!good) {
    free(c.picture);
    return pk_complain(PK_EXIT_MACHINE, "out of memory while gnuplot drew the figure");
  }
  if (status != 0 || c.used == 0) {
    free(c.picture);
    return complain_of(&c, status);
  }
  *picture = c.picture;
  *length = c.used;
  return PK_EXIT_DONE;
}
