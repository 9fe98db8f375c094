/* Options of a solve: what accuracy is wanted and how much may be spent on it.
 * Every option is one line in src/base/options.def: default, range and help come from there. */
#ifndef PICKET_OPTIONS_H
#define PICKET_OPTIONS_H

#include <stddef.h>

#include <picket/context.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Fill with picket_options_init, then change what you need. */
typedef struct picket_options {
  size_t size;     /* sizeof(picket_options), set by the init function */
  double accuracy; /* wanted relative uncertainty, 1e-8 to 1e-2; default 1e-4 */
  double count;    /* how many bands, modes or stop bands, 1 to 200; 0: the command's own choice */
  double unknowns; /* most unknowns of one grid, 1000 to 1e8; default 2e6 */
  double points;   /* wavenumbers between two neighbours of a path, 1 to 1000; default 12 */
  double jobs;     /* worker processes of a sweep, 0 to 1024; default 1: the calling process alone.
                      0: as many as there are cores. Numbers do not depend on it */
} picket_options;

/* Defaults. Null is ignored. */
PICKET_EXPORT void picket_options_init(picket_options *options);

/* The same for a struct of `size` bytes, that of the headers the program was compiled with: what
 * the macro calls, so that a program never has more written than it has room for. */
PICKET_EXPORT void picket_options_init_sized(picket_options *options, size_t size);
#define picket_options_init(options) picket_options_init_sized((options), sizeof(picket_options))

/* One option, for command lines and documents. Static, borrowed. */
typedef struct picket_option_description {
  const char *name; /* of the member, and with "--" in front of the flag */
  double usual;     /* default */
  double least, most;
  int whole;        /* 1 if only whole numbers are allowed */
  const char *help; /* one line */
} picket_option_description;

/* Option i, null past the last one. */
PICKET_EXPORT const picket_option_description *picket_option_at(int i);

/* Sets the option of a name. PICKET_ERROR_ARGUMENT for an unknown name or a value outside its
 * range; the options are then unchanged. */
PICKET_EXPORT picket_status picket_options_set(picket_options *options, const char *name,
                                               double value);

/* The same with a message in a context. PICKET_ERROR_ARGUMENT also for a null context or a size
 * that no version had; PICKET_ERROR_BUSY. */
PICKET_EXPORT picket_status picket_options_choose(picket_context *context, picket_options *options,
                                                  const char *name, double value);

#ifdef __cplusplus
}
#endif

#endif
