/* A question asked again and again while one number of the problem takes other values. */
#ifndef PICKET_SWEEP_H
#define PICKET_SWEEP_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Most values of one sweep. */
#define PICKET_SWEEP_VALUES 10001

/* What is asked at each value: the question of the find function of the same name. */
typedef enum picket_question {
  PICKET_QUESTION_EDGES = 0, /* picket_edges_find */
  PICKET_QUESTION_INDEX = 1, /* picket_index_find */
  PICKET_QUESTION_MODES = 2, /* picket_modes_find */
  PICKET_QUESTION_SLAB = 3   /* picket_slab_find */
} picket_question;

/* The word of a question: "edges", "index", "modes", "slab"; "unknown" for any other number. Static
 * text. */
PICKET_EXPORT const char *picket_question_name(picket_question question);

/* Fill with picket_sweep_request_init, then set the rest. Everything is borrowed for the call. */
typedef struct picket_sweep_request {
  size_t size; /* sizeof(picket_sweep_request), set by the init function */
  picket_question question;
  const char *path;         /* dotted, e.g. "section.shapes.0.width_nm"; must name a single finite
                               number that the document states */
  int count;                /* 1 to PICKET_SWEEP_VALUES */
  const double *values;     /* [count] finite, in the order of the answers */
  const char *journal_path; /* a file that keeps finished pieces, as in picket_index_find_resumable;
                               null: none */
} picket_sweep_request;

/* No path, no values, no journal. Null is ignored. */
PICKET_EXPORT void picket_sweep_request_init(picket_sweep_request *request);

/* The same for a struct of `size` bytes, that of the headers the program was compiled with: what
 * the macro calls, so that a program never has more written than it has room for. */
PICKET_EXPORT void picket_sweep_request_init_sized(picket_sweep_request *request, size_t size);
#define picket_sweep_request_init(request) \
  picket_sweep_request_init_sized((request), sizeof(picket_sweep_request))

/* `count` values from one to another, both among them, evenly spread.
 *   out  caller's buffer, [count]
 * PICKET_ERROR_ARGUMENT unless 2 <= count <= PICKET_SWEEP_VALUES and the ends are finite and
 * differ; `out` is then untouched. */
PICKET_EXPORT picket_status picket_sweep_spread(double from, double to, int count, double *out);

/* Asks the question of the problem with the number changed, at each value. The problem itself stays
 * as it is; as it stands it must be right too.
 *
 * The result is one of the question's own kind (ask it through edges.h, index.h, modes.h or
 * slab.h): the answers at the first value, then those at the second and so on. They are what the
 * question alone would give for a document with that number, to the last digit. What cannot be
 * computed (a shape that does not fit, no mode, a material that is not known there) is marked with
 * the reason and does not stop the rest; if everything fails in one way, that is the failure of the
 * call. Modes of a cell keep their orders through the wavelengths at one value, not from value to
 * value.
 *
 * With `options->jobs` other than 1 in worker processes, as picket_index_find; what is said there
 * on threads, callbacks and PICKET_ERROR_STOPPED holds here too, and what
 * picket_index_find_resumable says on journals.
 *
 * PICKET_ERROR_INPUT if the path leads to no number; PICKET_ERROR_ARGUMENT; else as the question.
 */
PICKET_EXPORT picket_status picket_sweep_find(picket_problem *problem,
                                              const picket_sweep_request *request,
                                              const picket_options *options, picket_result **out);

/* The path that was swept, borrowed from the result; null if nothing was. */
PICKET_EXPORT const char *picket_sweep_path(const picket_result *result);

/* The value that answer number i of a sweep belongs to. PICKET_ERROR_ARGUMENT if i is wrong or the
 * result is of no sweep; `out` is then untouched. */
PICKET_EXPORT picket_status picket_sweep_value(const picket_result *result, int i, double *out);

#ifdef __cplusplus
}
#endif

#endif
