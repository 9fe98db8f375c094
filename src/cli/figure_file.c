/* --figure: the picture of an answer, and with --keep-script the script beside it. Both appear
 * whole or not at all. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "cli/gnuplot.h"

static const char SCRIPT_SUFFIX[] = ".gp";

bool pk_figure_format(const char *path, picket_figure_format *out) {
  static const char *const suffix[] = {
      [PICKET_FIGURE_SVG] = ".svg", [PICKET_FIGURE_PNG] = ".png", [PICKET_FIGURE_PDF] = ".pdf"};
  size_t length = strlen(path);
  for (int i = 0; i < (int)(sizeof suffix / sizeof suffix[0]); i++) {
    size_t tail = strlen(suffix[i]);
    if (length > tail && path[length - tail - 1] != '/' &&
        strcasecmp(path + length - tail, suffix[i]) == 0) {
      *out = (picket_figure_format)i;
      return true;
    }
  }
  return false;
}

char *pk_figure_script_name(const char *path) {
  size_t size = strlen(path) + sizeof SCRIPT_SUFFIX;
  char *name = malloc(size);
  if (name) {
    snprintf(name, size, "%s%s", path, SCRIPT_SUFFIX);
  }
  return name;
}

/* Whether a file can appear there. */
static int probe(const char *path) {
  pk_csv_file *file = NULL;
  int status = pk_csv_open(path, &file);
  pk_csv_drop(file);
  return status;
}

int pk_figure_probe(const pk_arguments *a) {
  int status = probe(a->figure);
  if (status != PK_EXIT_DONE || !a->keep_script) {
    return status;
  }
  char *name = pk_figure_script_name(a->figure);
  status = name ? probe(name) : pk_complain(PK_EXIT_MACHINE, "out of memory");
  free(name);
  return status;
}

static int write_whole(const char *path, const char *bytes, size_t length) {
  pk_csv_file *file = NULL;
  int status = pk_csv_open(path, &file);
  return status == PK_EXIT_DONE ? pk_csv_finish_bytes(file, bytes, length) : status;
}

/* The script as it stays: it names the picture, as a neighbour. */
static int keep_script(const pk_arguments *a, picket_context *context, picket_problem *problem,
                       picket_result *result, picket_figure_options options) {
  const char *slash = strrchr(a->figure, '/');
  const char *script = NULL;
  options.output = slash ? slash + 1 : a->figure;
  if (picket_result_figure_get(result, problem, &options, &script) != PICKET_OK) {
    return pk_complain(PK_EXIT_MACHINE, "%s", picket_context_message(context));
  }
  char *name = pk_figure_script_name(a->figure);
  int status = name ? write_whole(name, script, strlen(script))
                    : pk_complain(PK_EXIT_MACHINE, "out of memory");
  free(name);
  return status;
}

int pk_figure_deliver(const pk_arguments *a, picket_context *context, picket_problem *problem,
                      picket_result *result) {
  picket_figure_options options;
  const char *script = NULL;
  picket_figure_options_init(&options);
  pk_figure_format(a->figure, &options.format); /* arguments.c saw that there is one */
  picket_status made = picket_result_figure_get(result, problem, &options, &script);
  if (made != PICKET_OK) {
    return pk_complain(pk_exit_of(made), "%s", picket_context_message(context));
  }
  char *picture = NULL;
  size_t length = 0;
  int status = pk_gnuplot_draw(script, &picture, &length);
  if (status == PK_EXIT_DONE) {
    status = write_whole(a->figure, picture, length);
  }
  free(picture);
  /* Without gnuplot the script is all there is: the picture can be drawn elsewhere. */
  int kept = a->keep_script ? keep_script(a, context, problem, result, options) : PK_EXIT_DONE;
  return status != PK_EXIT_DONE ? status : kept;
}
