/* A result as a picture: a script for gnuplot (5.4 or later), which holds its data. The library
 * writes the script and starts nothing; the command-line tool hands it to gnuplot. */
#ifndef PICKET_FIGURE_H
#define PICKET_FIGURE_H

#include <stddef.h>

#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef enum picket_figure_format {
  PICKET_FIGURE_SVG = 0,
  PICKET_FIGURE_PNG = 1,
  PICKET_FIGURE_PDF = 2
} picket_figure_format;

/* Fill with picket_figure_options_init, then change what you need. */
typedef struct picket_figure_options {
  size_t size; /* sizeof(picket_figure_options), set by the init function */
  picket_figure_format format;
  const char *output; /* where the script puts the picture; null (default): on standard output.
                         Borrowed for the call */
} picket_figure_options;

/* Defaults: SVG, on standard output. Null is ignored. */
PICKET_EXPORT void picket_figure_options_init(picket_figure_options *options);

/* The same for a struct of `size` bytes, that of the headers the program was compiled with. */
PICKET_EXPORT void picket_figure_options_init_sized(picket_figure_options *options, size_t size);
#define picket_figure_options_init(options) \
  picket_figure_options_init_sized((options), sizeof(picket_figure_options))

/* The script of a result's picture. All numbers in it are those of the result, in nm where the
 * table (picket_result_csv) has nm, in blocks named after what they are; texts of the file (names,
 * labels) are in it as texts and cannot become commands. A text of more than 90 characters is cut.
 *   problem   the problem as it was when the question was asked: what the result itself does not
 *             hold (pitch, sides, light, shapes) is taken from it. It belongs to the same context
 *   options   null for the defaults
 *   out       receives the script, borrowed until the next call for this result or its end
 * PICKET_ERROR_ARGUMENT; PICKET_ERROR_UNSUPPORTED if there is nothing to draw in the result;
 * PICKET_ERROR_INPUT if the problem is wrong by now; PICKET_ERROR_MEMORY, PICKET_ERROR_BUSY. */
PICKET_EXPORT picket_status picket_result_figure_get(picket_result *result, picket_problem *problem,
                                                     const picket_figure_options *options,
                                                     const char **out);

#ifdef __cplusplus
}
#endif

#endif
