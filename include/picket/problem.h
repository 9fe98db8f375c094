/* A problem: light, materials and a structure, read from a file or built in code.
 *
 * A problem is a document of keys and values (the problem file, format 1). Values are reached by
 * dotted paths, list elements by number: "cell.pitch_nm", "cell.shapes.0.rect.length_nm" or, with
 * the shape's kind left out, "cell.shapes.0.length_nm". The document is checked as a whole when it is
 * read and again when it is first used after a change. */
#ifndef PICKET_PROBLEM_H
#define PICKET_PROBLEM_H

#include <stddef.h>

#include <picket/context.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_problem picket_problem;

/* A problem that holds nothing but `format: 1`.
 *   out   receives the problem, yours to free; it keeps the context alive
 * PICKET_ERROR_MEMORY. */
PICKET_EXPORT picket_status picket_problem_create(picket_context *context, picket_problem **out);

/* Reads a problem file. Paths inside the file (tables) are relative to the file's folder.
 *   path  file name; "-" is not special here
 * PICKET_ERROR_FILE if it can't be read or is longer than 4 MB; PICKET_ERROR_INPUT if it is not
 * YAML, or a key or value is wrong: the message starts with FILE:LINE:COLUMN. */
PICKET_EXPORT picket_status picket_problem_read_file(picket_context *context, const char *path,
                                                     picket_problem **out);

/* Reads a problem from `length` bytes of text.
 *   label  stands for the file name in messages, e.g. "standard input"; null for "text". Tables are
 *          relative to the working directory. */
PICKET_EXPORT picket_status picket_problem_read_text(picket_context *context, const char *text,
                                                     size_t length, const char *label,
                                                     picket_problem **out);

/* Sets the value at a path to a piece of YAML: a number, a word, a list or a block in flow style,
 * e.g. picket_problem_set(p, "materials.oxide", "{catalogue: silica}"). Missing blocks on the way
 * are made; a list takes the element one past its end. The whole is checked at the next use.
 * PICKET_ERROR_INPUT if the path or the text is malformed; the problem is then unchanged. */
PICKET_EXPORT picket_status picket_problem_set(picket_problem *problem, const char *path,
                                               const char *value);

/* The same for one number, with all its digits. PICKET_ERROR_ARGUMENT for NaN. */
PICKET_EXPORT picket_status picket_problem_set_number(picket_problem *problem, const char *path,
                                                      double value);

/* Checks the whole problem now; the message of the first fault is in the context. */
PICKET_EXPORT picket_status picket_problem_check(picket_problem *problem);

/* Lets go of a problem; null is accepted. */
PICKET_EXPORT void picket_problem_free(picket_problem *problem);

#ifdef __cplusplus
}
#endif

#endif
