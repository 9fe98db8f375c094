/* A file that is whole or not there: written beside its name and renamed when done. What is not a
 * plain file (a terminal, a pipe, /dev/null) is written to directly, for a rename would replace it;
 * a link is followed, so that it stays a link. A file that cannot be written is the machine's
 * failure: PK_EXIT_MACHINE. */
#define _XOPEN_SOURCE 700 /* realpath */
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "cli/cli.h"

struct pk_csv_file {
  char *name;      /* as it will be called */
  char *temporary; /* where it is written; null if directly */
  FILE *stream;
};

static const char SUFFIX[] = ".XXXXXX";

static char *copy(const char *text, const char *suffix) {
  size_t size = strlen(text) + strlen(suffix) + 1;
  char *joined = malloc(size);
  if (joined) {
    snprintf(joined, size, "%s%s", text, suffix);
  }
  return joined;
}

static int unwritable(const char *path) {
  return pk_complain(PK_EXIT_MACHINE, "%s cannot be written: %s", path, strerror(errno));
}

/* A new file beside the name, with the permissions any new file of the user gets. */
static FILE *open_temporary(char *pattern) {
  int descriptor = mkstemp(pattern);
  if (descriptor < 0) {
    return NULL;
  }
  mode_t mask = umask(0);
  umask(mask);
  fchmod(descriptor, 0666 & ~mask);
  FILE *stream = fdopen(descriptor, "w");
  if (!stream) {
    close(descriptor);
    unlink(pattern);
  }
  return stream;
}

static int open_at(pk_csv_file *file, const char *path) {
  struct stat about;
  bool exists = stat(path, &about) == 0;
  file->name = exists ? realpath(path, NULL) : copy(path, "");
  if (!file->name) {
    return unwritable(path);
  }
  if (exists && !S_ISREG(about.st_mode)) {
    file->stream = fopen(path, "w");
  } else if (exists && access(path, W_OK) != 0) {
    return unwritable(path); /* a rename would get around the write protection */
  } else {
    file->temporary = copy(file->name, SUFFIX);
    file->stream = file->temporary ? open_temporary(file->temporary) : NULL;
  }
  if (!file->stream) {
    int failed = unwritable(path);
    free(file->temporary); /* there is no such file to remove */
    file->temporary = NULL;
    return failed;
  }
  return PK_EXIT_DONE;
}

int pk_csv_open(const char *path, pk_csv_file **out) {
  pk_csv_file *file = calloc(1, sizeof *file);
  if (!file) {
    return pk_complain(PK_EXIT_MACHINE, "out of memory");
  }
  int status = open_at(file, path);
  if (status != PK_EXIT_DONE) {
    pk_csv_drop(file);
    return status;
  }
  *out = file;
  return PK_EXIT_DONE;
}

void pk_csv_drop(pk_csv_file *file) {
  if (!file) {
    return;
  }
  if (file->stream) {
    fclose(file->stream);
  }
  if (file->temporary) {
    unlink(file->temporary);
  }
  free(file->temporary);
  free(file->name);
  free(file);
}

int pk_csv_finish(pk_csv_file *file, const char *text) {
  return pk_csv_finish_bytes(file, text, strlen(text));
}

int pk_csv_finish_bytes(pk_csv_file *file, const char *bytes, size_t length) {
  bool good = fwrite(bytes, 1, length, file->stream) == length && fflush(file->stream) == 0;
  good = (fclose(file->stream) == 0) && good;
  file->stream = NULL;
  if (good && file->temporary) {
    good = rename(file->temporary, file->name) == 0;
  }
  int status = good ? PK_EXIT_DONE : unwritable(file->name);
  if (good) {
    free(file->temporary);
    file->temporary = NULL;
  }
  pk_csv_drop(file);
  return status;
}
