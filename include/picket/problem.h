/* A problem: light, materials and a structure, read from a file or built in code.
 *
 * A problem is a document of keys and values (the problem file, format 1). Values are reached by
 * dotted paths, list elements by number: "cell.pitch_nm", "cell.shapes.0.rect.length_nm" or, with
 * the shape's kind left out, "cell.shapes.0.length_nm". Reading takes any well-formed document;
 * what it says is checked as a whole at the first use after reading or a change, or by
 * picket_problem_check. So a value can be set before the whole makes sense. */
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

/* Reads a problem file. Paths inside the file (tables) are relative to the file's folder; a table
 * is read when the problem is checked. path  file name; "-" is not special here PICKET_ERROR_FILE
 * if it can't be read or is longer than 4 MB; PICKET_ERROR_INPUT if it is not a block of keys in
 * YAML: the message starts with FILE:LINE:COLUMN. Anchors, tags, keys given twice and nesting
 * deeper than 32 are refused. Keys and values are checked later, see above. */
PICKET_EXPORT picket_status picket_problem_read_file(picket_context *context, const char *path,
                                                     picket_problem **out);

/* Reads a problem from `length` bytes of text, at most 4 MB.
 *   label  stands for the file name in messages, e.g. "standard input"; null for "text". Tables are
 *          relative to the working directory. */
PICKET_EXPORT picket_status picket_problem_read_text(picket_context *context, const char *text,
                                                     size_t length, const char *label,
                                                     picket_problem **out);

/* Sets the value at a path to a piece of YAML: a number, a word, a list or a block in flow style,
 * e.g. picket_problem_set(p, "materials.oxide", "{catalogue: silica}"). Missing blocks on the way
 * are made; a list takes the element one past its end, and one that is missing is made when its
 * element 0 is set. The whole is checked at the next use; messages about the value then begin with
 * "set PATH:" in the place of a line.
 * PICKET_ERROR_INPUT if the path or the text is malformed or the path leads into a single value;
 * the problem is then unchanged. */
PICKET_EXPORT picket_status picket_problem_set(picket_problem *problem, const char *path,
                                               const char *value);

/* The same for one number, with all its digits; infinities are allowed where the file takes .inf.
 * PICKET_ERROR_ARGUMENT for NaN. */
PICKET_EXPORT picket_status picket_problem_set_number(picket_problem *problem, const char *path,
                                                      double value);

/* The number at a path, as it stands in the document: in the unit of the file, defaults of the
 * problem file not filled in.
 * PICKET_ERROR_INPUT if the path leads to nothing or to no number. */
PICKET_EXPORT picket_status picket_problem_number(picket_problem *problem, const char *path,
                                                  double *out);

/* What stands at a path, as a piece of YAML on one line that picket_problem_set takes again. With a
 * null path the whole problem, a line for each block, that picket_problem_read_text takes again.
 * Comments and layout of a file are not kept.
 *   out   receives the text, borrowed until the next call with the problem
 * PICKET_ERROR_INPUT if the path leads to nothing; PICKET_ERROR_MEMORY. */
PICKET_EXPORT picket_status picket_problem_text(picket_problem *problem, const char *path,
                                                const char **out);

/* The numbers of a problem: everything that a sweep, a derivative or an aim can vary. -1 for a null
 * problem or while a call is inside the context. */
PICKET_EXPORT int picket_problem_number_count(picket_problem *problem);

/* Number i, in the order of the document.
 *   path   receives its path, borrowed until the next call with the problem
 *   value  receives the number; null: not wanted
 * PICKET_ERROR_ARGUMENT if i is wrong; PICKET_ERROR_MEMORY. Cost: a walk over the document. */
PICKET_EXPORT picket_status picket_problem_number_at(picket_problem *problem, int i,
                                                     const char **path, double *value);

/* Checks the whole problem now; the message of the first fault is in the context.
 * PICKET_ERROR_INPUT for an unknown key or a value that is wrong, PICKET_ERROR_FILE for a table
 * that can't be read, PICKET_ERROR_UNSUPPORTED for a block that this version does not do. Whether
 * the materials are known at the wavelengths of `light` shows only when they are used. */
PICKET_EXPORT picket_status picket_problem_check(picket_problem *problem);

/* Lets go of a problem; null is accepted. */
PICKET_EXPORT void picket_problem_free(picket_problem *problem);

#ifdef __cplusplus
}
#endif

#endif
