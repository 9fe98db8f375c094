/* The options of picket match, and its question: two files, or one and a beam. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/cli.h"

static const double UM_PER_NM = 1e-3;
static const double RADIANS = 0.017453292519943295; /* of a degree */

void pk_match_words_init(pk_match_words *words) {
  memset(words, 0, sizeof *words);
  picket_match_request_init(&words->request);
}

/* One or two decimal numbers with a comma between; how many there were, 0 if it is something else.
 */
static int read_numbers(const char *text, double out[2]) {
  const char *at = text;
  int count = 0;
  while (count < 2) {
    /* strtod would take hexadecimal, infinities and NaN too. */
    size_t length = strspn(at, "0123456789.eE+-");
    char *end = NULL;
    out[count] = strtod(at, &end);
    if (length == 0 || end != at + length) {
      return 0;
    }
    count++;
    at = end;
    if (*at == '\0') {
      return count;
    }
    if (*at++ != ',') {
      return 0;
    }
  }
  return 0;
}

static int wrong(const char *name, const char *text, const char *allowed) {
  return pk_complain(PK_EXIT_WRONG, "--%s is \"%.40s\", must be %s", name, text, allowed);
}

static int set_order(const char *name, const char *text, int *out) {
  size_t digits = strspn(text, "0123456789");
  if (digits == 0 || digits > 3 || text[digits] != '\0' || atoi(text) > 199) {
    return wrong(name, text, "a whole number from 0 to 199");
  }
  *out = atoi(text);
  return PK_EXIT_DONE;
}

static int set_beam(pk_match_words *w, const char *name, const char *text) {
  double d[2];
  int count = read_numbers(text, d);
  d[1] = count == 1 ? d[0] : d[1];
  if (count == 0 || !(d[0] > 0 && d[1] > 0 && d[0] <= 1000 && d[1] <= 1000)) {
    return wrong(name, text,
                 "a mode-field diameter, or one along x and one along y with a comma between, "
                 "above 0 and at most 1000");
  }
  w->request.gaussian_x_um = d[0];
  w->request.gaussian_y_um = d[1];
  return PK_EXIT_DONE;
}

static int set_pair(const char *name, const char *text, double most, double scale, double *x,
                    double *y) {
  double d[2];
  if (read_numbers(text, d) != 2 ||
      !(d[0] >= -most && d[0] <= most && d[1] >= -most && d[1] <= most)) {
    char allowed[80];
    snprintf(allowed, sizeof allowed, "two numbers X,Y from %g to %g", -most, most);
    return wrong(name, text, allowed);
  }
  *x = scale * d[0];
  *y = scale * d[1];
  return PK_EXIT_DONE;
}

static int set_medium(pk_match_words *w, const char *name, const char *text) {
  double d[2];
  if (read_numbers(text, d) != 1 || !(d[0] >= 1 && d[0] <= 10)) {
    return wrong(name, text, "an index from 1 to 10");
  }
  w->request.medium_index = d[0];
  return PK_EXIT_DONE;
}

static int set_along(pk_match_words *w, const char *name, const char *text) {
  if (strcmp(text, "x") != 0 && strcmp(text, "y") != 0) {
    return wrong(name, text, "x or y");
  }
  w->request.along = text[0] == 'x' ? PICKET_MATCH_ALONG_X : PICKET_MATCH_ALONG_Y;
  return PK_EXIT_DONE;
}

int pk_match_option(pk_match_words *w, const char *name, const char *text) {
  picket_match_request *r = &w->request;
  w->given = name;
  if (strcmp(name, "mode") == 0) {
    return set_order(name, text, &r->mode);
  }
  if (strcmp(name, "mode-b") == 0) {
    return set_order(name, text, &r->mode_b);
  }
  if (strcmp(name, "gaussian-um") == 0) {
    return set_beam(w, name, text);
  }
  if (strcmp(name, "along") == 0) {
    return set_along(w, name, text);
  }
  if (strcmp(name, "medium-index") == 0) {
    return set_medium(w, name, text);
  }
  if (strcmp(name, "offset-nm") == 0) {
    r->offset_given = 1;
    return set_pair(name, text, 1e6, UM_PER_NM, &r->offset_x_um, &r->offset_y_um);
  }
  return set_pair(name, text, 30, RADIANS, &r->tilt_x_rad, &r->tilt_y_rad);
}

int pk_match_check(const pk_arguments *a) {
  const pk_match_words *w = &a->match;
  bool beam = w->request.gaussian_x_um > 0;
  if (!pk_is_match(a->command)) {
    return w->given ? pk_complain(PK_EXIT_WRONG, "--%s is for picket match; picket %s has none",
                                  w->given, a->command->name)
                    : PK_EXIT_DONE;
  }
  if (beam == (w->file != NULL)) {
    return pk_complain(PK_EXIT_WRONG,
                       beam ? "picket match takes two files, or one and --gaussian-um, not both"
                            : "picket match needs a second file, or --gaussian-um");
  }
  if (!beam && (w->request.along != PICKET_MATCH_ALONG_BEST || w->request.medium_index > 0)) {
    return pk_complain(PK_EXIT_WRONG, "--along and --medium-index are for --gaussian-um");
  }
  if (beam && w->request.mode_b >= 0) {
    return pk_complain(PK_EXIT_WRONG, "--mode-b is for a second file; a beam has one mode");
  }
  if (w->file && strcmp(w->file, "-") == 0) {
    return pk_complain(PK_EXIT_WRONG, "only the first file can be standard input");
  }
  return PK_EXIT_DONE;
}

bool pk_is_match(const pk_command *command) {
  return command->find == pk_match_find;
}

picket_status pk_match_find(picket_problem *problem, const picket_options *options,
                            picket_result **out) {
  return picket_match_find(problem, NULL, NULL, options, out);
}

picket_status pk_match_ask(const pk_arguments *a, picket_context *context, picket_problem *problem,
                           picket_result **out) {
  picket_problem *other = NULL;
  picket_status status = PICKET_OK;
  if (a->match.file) {
    status = picket_problem_read_file(context, a->match.file, &other);
  }
  if (status == PICKET_OK) {
    status = picket_match_find(problem, other, &a->match.request, &a->options, out);
  }
  picket_problem_free(other);
  return status;
}
