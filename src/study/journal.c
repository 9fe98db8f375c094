/* See journal.h. Lines:
 *
 *   picket journal 2 <version> <key>
 *   <piece> <answer> #<checksum>
 *
 * The version is in it because another one may find other digits. A line counts when it is whole
 * and its checksum is right. */
#include "study/journal.h"

#include <errno.h>
#include <fcntl.h>
#include <inttypes.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/hash.h"
#include "base/memory.h"

enum { HEADER = 128, CHECKSUM = 18 /* " #" and 16 digits */, MOST_BYTES = 1 << 30 };

static const char SIGNATURE[] = "picket journal ";

struct pk_journal {
  picket_context *context;
  char *path;
  int file;
  off_t length;
  char header[HEADER]; /* as it must be */
};

static picket_status cannot(pk_journal *j, const char *what, int error) {
  char text[128];
  const char *why = strerror_r(error, text, sizeof text) == 0 ? text : "unknown reason";
  return pk_fail(j->context, PICKET_ERROR_OUTPUT, "the journal %.300s cannot be %s: %s", j->path,
                 what, why);
}

/* Writes at the end of the file; all or, as far as the system lets us, nothing. */
static picket_status append(pk_journal *j, const char *bytes, size_t count) {
  size_t done = 0;
  while (done < count) {
    ssize_t written = write(j->file, bytes + done, count - done);
    if (written < 0 && errno == EINTR) {
      continue;
    }
    if (written <= 0) {
      int error = written < 0 ? errno : ENOSPC;
      (void)!ftruncate(j->file, j->length);
      return cannot(j, "written", error);
    }
    done += (size_t)written;
  }
  j->length += (off_t)count;
  return PICKET_OK;
}

/* One run at a time; a file system without locks leaves that to the user. */
static picket_status lock(pk_journal *j) {
  struct flock whole = {.l_type = F_WRLCK, .l_whence = SEEK_SET};
  if (fcntl(j->file, F_SETLK, &whole) != 0 && (errno == EACCES || errno == EAGAIN)) {
    return pk_fail(j->context, PICKET_ERROR_OUTPUT,
                   "the journal %.300s is being written by another run", j->path);
  }
  return PICKET_OK;
}

static picket_status open_file(pk_journal *j) {
  struct stat about;
  /* Not blocked by the other end of a pipe that has the name. */
  j->file = open(j->path, O_RDWR | O_CREAT | O_APPEND | O_CLOEXEC | O_NONBLOCK, 0666);
  if (j->file < 0) {
    return cannot(j, "opened", errno);
  }
  if (fstat(j->file, &about) != 0) {
    return cannot(j, "read", errno);
  }
  if (!S_ISREG(about.st_mode) || about.st_size > MOST_BYTES) {
    return pk_fail(j->context, PICKET_ERROR_INPUT, "%.300s is no journal: it is %s", j->path,
                   S_ISREG(about.st_mode) ? "longer than any" : "not a plain file");
  }
  j->length = about.st_size;
  return lock(j);
}

static picket_status read_all(pk_journal *j, char **out) {
  char *text = PK_NEW(j->context, j->length + 1, char);
  off_t done = 0;
  if (!text) {
    return PICKET_ERROR_MEMORY;
  }
  while (done < j->length) {
    ssize_t got = pread(j->file, text + done, (size_t)(j->length - done), done);
    if (got < 0 && errno == EINTR) {
      continue;
    }
    if (got <= 0) {
      picket_status status = cannot(j, "read", got < 0 ? errno : EIO);
      pk_free(j->context, text);
      return status;
    }
    done += got;
  }
  *out = text;
  return PICKET_OK;
}

static picket_status check_header(pk_journal *j, const char *line) {
  size_t signature = sizeof SIGNATURE - 1;
  if (strcmp(line, j->header) == 0) {
    return PICKET_OK;
  }
  if (strncmp(line, SIGNATURE, signature) != 0) {
    return pk_fail(j->context, PICKET_ERROR_INPUT,
                   "%.300s is no journal; name one, or a file that is not there yet", j->path);
  }
  /* Up to the key, the header is the same for one version. */
  size_t common = (size_t)(strrchr(j->header, ' ') - j->header);
  if (strncmp(line, j->header, common) != 0) {
    return pk_fail(j->context, PICKET_ERROR_INPUT,
                   "the journal %.300s is of another version (%.40s, this is %s): its digits may "
                   "differ",
                   j->path, line + signature, picket_version());
  }
  return pk_fail(j->context, PICKET_ERROR_INPUT,
                 "the journal %.300s is of another problem or of other options; name it with the "
                 "problem it began with, or another file",
                 j->path);
}

/* A whole line, which is changed. */
static picket_status take_line(pk_journal *j, char *line, pk_journal_take take, void *user) {
  size_t length = strlen(line);
  char *end = NULL, *sum = length > CHECKSUM ? line + length - CHECKSUM : NULL;
  if (sum && strncmp(sum, " #", 2) == 0) {
    uint64_t kept = strtoull(sum + 2, &end, 16);
    *sum = '\0';
    long piece = strtol(line, &end, 10);
    if (kept == pk_hash_text(PK_HASH_START, line) && *end == ' ' && piece >= 0 && piece < INT_MAX) {
      picket_status status = take(user, (int)piece, end + 1);
      if (status != PICKET_ERROR_INTERNAL) {
        return status;
      }
      pk_message_clear(j->context);
    }
  }
  pk_log(j->context, PICKET_LOG_WARNING, "a damaged line of the journal %.300s is left out",
         j->path);
  return PICKET_OK;
}

/* Cuts the file after its last whole line; what was behind it in `text` is lost. */
static picket_status cut(pk_journal *j, off_t length) {
  if (ftruncate(j->file, length) != 0) {
    return cannot(j, "written", errno);
  }
  j->length = length;
  return PICKET_OK;
}

static picket_status take_up(pk_journal *j, char *text, pk_journal_take take, void *user) {
  char *line = text, *stop = text + j->length, *end;
  picket_status status = PICKET_OK;
  while (status == PICKET_OK && (end = memchr(line, '\n', (size_t)(stop - line))) != NULL) {
    *end = '\0';
    status = line == text ? check_header(j, line) : take_line(j, line, take, user);
    line = end + 1;
  }
  if (status != PICKET_OK) {
    return status;
  }
  /* A first line without an end is a beginning cut off, or no journal at all. */
  if (line == text && strncmp(text, j->header, (size_t)j->length) != 0) {
    return check_header(j, text);
  }
  if (line < stop) {
    status = cut(j, line - text);
  }
  if (status == PICKET_OK && line == text) {
    char header[HEADER + 1];
    int length = snprintf(header, sizeof header, "%s\n", j->header);
    status = append(j, header, (size_t)length);
  }
  return status;
}

picket_status pk_journal_open(picket_context *context, const char *path, uint64_t key,
                              pk_journal_take take, void *user, pk_journal **out) {
  char *text = NULL;
  pk_journal *j = PK_NEW(context, 1, pk_journal);
  if (!j) {
    return PICKET_ERROR_MEMORY;
  }
  j->context = context;
  j->file = -1;
  snprintf(j->header, sizeof j->header, "%s2 %s %016" PRIx64, SIGNATURE, picket_version(), key);
  j->path = pk_text_copy(context, path);
  picket_status status = j->path ? open_file(j) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = read_all(j, &text);
  }
  if (status == PICKET_OK) {
    status = take_up(j, text, take, user);
  }
  pk_free(context, text);
  if (status != PICKET_OK) {
    pk_journal_close(j);
    return status;
  }
  *out = j;
  return PICKET_OK;
}

picket_status pk_journal_add(pk_journal *journal, int piece, const char *answer) {
  size_t room = strlen(answer) + 64; /* number, checksum, spaces */
  char *line = PK_NEW(journal->context, room, char);
  if (!line) {
    return PICKET_ERROR_MEMORY;
  }
  int length = snprintf(line, room, "%d %s", piece, answer);
  uint64_t sum = pk_hash_text(PK_HASH_START, line);
  length += snprintf(line + length, room - (size_t)length, " #%016" PRIx64 "\n", sum);
  picket_status status = append(journal, line, (size_t)length);
  pk_free(journal->context, line);
  return status;
}

void pk_journal_close(pk_journal *journal) {
  if (!journal) {
    return;
  }
  if (journal->file >= 0) {
    close(journal->file);
  }
  pk_free(journal->context, journal->path);
  pk_free(journal->context, journal);
}
