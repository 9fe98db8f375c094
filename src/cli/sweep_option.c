/* --sweep PATH=FROM:TO:COUNT, or PATH=A,B,C: which number of the file takes which values. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/cli.h"

static int refuse(const char *text) {
  return pk_complain(PK_EXIT_WRONG,
                     "--sweep is \"%.100s\", must be PATH=FROM:TO:COUNT with 2 to %d values, or "
                     "PATH=A,B,...; e.g. section.shapes.0.width_nm=300:600:13",
                     text, PICKET_SWEEP_VALUES);
}

/* One number up to a letter of `ends` or the end; false if it is none. Decimal only, as elsewhere
 * on the command line. */
static bool read_number(const char **at, const char *ends, double *out) {
  char *end = NULL;
  size_t length = strcspn(*at, ends);
  if (length == 0 || strspn(*at, "0123456789.eE+-") < length) {
    return false;
  }
  *out = strtod(*at, &end);
  bool whole = end == *at + length && isfinite(*out);
  *at += length;
  return whole;
}

static bool read_spread(pk_sweep_words *sweep, const char *at) {
  double from, to, count;
  bool good = read_number(&at, ":", &from) && *at++ == ':' && read_number(&at, ":", &to) &&
              *at++ == ':' && read_number(&at, ":", &count) && *at == '\0';
  if (!good || count != floor(count) || count < 2 || count > PICKET_SWEEP_VALUES) {
    return false;
  }
  sweep->count = (int)count;
  return picket_sweep_spread(from, to, sweep->count, sweep->values) == PICKET_OK;
}

static bool read_list(pk_sweep_words *sweep, const char *at) {
  for (;;) {
    if (sweep->count == PICKET_SWEEP_VALUES ||
        !read_number(&at, ",", &sweep->values[sweep->count])) {
      return false;
    }
    sweep->count++;
    if (*at == '\0') {
      return true;
    }
    at++;
  }
}

int pk_sweep_parse(pk_sweep_words *sweep, const char *text) {
  if (sweep->path) {
    return pk_complain(PK_EXIT_WRONG, "--sweep can be given once; this is the second: \"%.100s\"",
                       text);
  }
  size_t length = strcspn(text, "=");
  if (length == 0 || text[length] == '\0') {
    return refuse(text);
  }
  sweep->path = malloc(length + 1);
  sweep->values = malloc(PICKET_SWEEP_VALUES * sizeof *sweep->values);
  if (!sweep->path || !sweep->values) {
    return pk_complain(PK_EXIT_MACHINE, "out of memory");
  }
  memcpy(sweep->path, text, length);
  sweep->path[length] = '\0';
  const char *values = text + length + 1;
  bool good = strchr(values, ':') ? read_spread(sweep, values) : read_list(sweep, values);
  return good ? PK_EXIT_DONE : refuse(text);
}

void pk_sweep_free(pk_sweep_words *sweep) {
  free(sweep->path);
  free(sweep->values);
  *sweep = (pk_sweep_words){0};
}

bool pk_sweep_question(const pk_command *command, picket_question *out) {
  static const struct {
    picket_status (*find)(picket_problem *, const picket_options *, picket_result **);
    picket_question question;
  } known[] = {
      {picket_edges_find, PICKET_QUESTION_EDGES},
      {picket_index_find, PICKET_QUESTION_INDEX},
      {picket_modes_find, PICKET_QUESTION_MODES},
      {picket_slab_find, PICKET_QUESTION_SLAB},
  };
  for (size_t i = 0; i < sizeof known / sizeof known[0]; i++) {
    if (known[i].find == command->find) {
      *out = known[i].question;
      return true;
    }
  }
  return false;
}

picket_status pk_sweep_ask(const pk_arguments *a, picket_problem *problem, picket_result **out) {
  picket_sweep_request request;
  picket_sweep_request_init(&request);
  (void)pk_sweep_question(a->command, &request.question); /* checked with the arguments */
  request.path = a->sweep.path;
  request.values = a->sweep.values;
  request.count = a->sweep.count;
  request.journal_path = a->resume;
  return picket_sweep_find(problem, &request, &a->options, out);
}
