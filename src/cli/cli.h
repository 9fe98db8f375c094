/* The command-line tool: public headers of the library only.
 *
 * main.c parses (arguments.c), opens the problem (session.c), asks the command's question, and
 * writes the answer: as CSV (csv_file.c), as JSON or as text (cmd_<name>.c with text.c). */
#ifndef PICKET_CLI_H
#define PICKET_CLI_H

#include <picket.h>
#include <stdbool.h>

/* What --jobs is without being said: as many as there are cores. (In the library it is 1, because a
 * program may not expect to be forked.) */
#define PK_USUAL_JOBS 0.0

/* The contract of the command line. */
enum {
  PK_EXIT_DONE = 0,
  PK_EXIT_SHORT = 1,   /* the numbers could not be obtained to the accuracy asked */
  PK_EXIT_WRONG = 2,   /* the command line or the file */
  PK_EXIT_MACHINE = 3, /* memory, disk, a defect */
  PK_EXIT_INTERRUPTED = 130
};

typedef struct pk_command pk_command;

/* What --sweep says. */
typedef struct pk_sweep_words {
  char *path; /* null: it was not given; owned */
  int count;
  double *values; /* [count], owned */
} pk_sweep_words;

/* What picket match is asked besides its first file. */
typedef struct pk_match_words {
  const char *given; /* the last of its options, or null */
  const char *file;  /* the second file, or null */
  picket_match_request request;
} pk_match_words;

typedef struct pk_arguments {
  const pk_command *command; /* null with --version and --help alone */
  const char *file;          /* null until given; "-" is standard input */
  bool json, quiet, verbose, help, version;
  bool compare;       /* a channel with its two-dimensional models */
  const char *csv;    /* or null */
  const char *resume; /* a journal, or null */
  const char *fields; /* an HDF5 file of mode fields, or null */
  const char *figure; /* a picture, or null */
  bool keep_script;   /* of the picture, beside it */
  pk_sweep_words sweep;
  pk_match_words match;
  picket_options options;
  int set_count;
  const char **sets; /* [set_count] KEY=VALUE, borrowed from argv; the array is owned */
} pk_arguments;

/* One row of the table of commands in main.c. */
struct pk_command {
  const char *name;
  const char *answers; /* what the command is for, one line */
  const char *needs;   /* in the file */
  /* The question and its answer for people; null for what this version does not have. */
  picket_status (*find)(picket_problem *problem, const picket_options *options,
                        picket_result **out);
  void (*print)(const pk_arguments *arguments, const picket_result *result);
};

extern const pk_command pk_commands[]; /* ends with an empty row */

void pk_aim_print(const pk_arguments *arguments, const picket_result *result);
void pk_edges_print(const pk_arguments *arguments, const picket_result *result);
void pk_bands_print(const pk_arguments *arguments, const picket_result *result);
void pk_index_print(const pk_arguments *arguments, const picket_result *result);
void pk_modes_print(const pk_arguments *arguments, const picket_result *result);
void pk_match_print(const pk_arguments *arguments, const picket_result *result);
void pk_taper_print(const pk_arguments *arguments, const picket_result *result);
void pk_tolerance_print(const pk_arguments *arguments, const picket_result *result);
void pk_slab_print(const pk_arguments *arguments, const picket_result *result);
picket_status pk_check_find(picket_problem *problem, const picket_options *options,
                            picket_result **out);
void pk_check_print(const pk_arguments *arguments, const picket_result *result);

/* ---- arguments.c ---- */

/* PK_EXIT_DONE, or the exit status after saying what is wrong. */
int pk_arguments_parse(int argc, char **argv, pk_arguments *out);
void pk_arguments_free(pk_arguments *arguments);

/* ---- sweep_option.c ---- */

/* The value of --sweep; an exit status, complains. */
int pk_sweep_parse(pk_sweep_words *sweep, const char *text);
void pk_sweep_free(pk_sweep_words *sweep);
/* The question of a command; false if it has no sweep. */
bool pk_sweep_question(const pk_command *command, picket_question *out);
/* The sweep of the arguments, with their journal. */
picket_status pk_sweep_ask(const pk_arguments *arguments, picket_problem *problem,
                           picket_result **out);

/* ---- match_option.c ---- */

void pk_match_words_init(pk_match_words *words);
/* One option of picket match; an exit status, complains. */
int pk_match_option(pk_match_words *words, const char *name, const char *text);
/* Whether what was given fits together, for any command. */
int pk_match_check(const pk_arguments *arguments);
bool pk_is_match(const pk_command *command);
/* Stands in the table of commands; the question is asked by pk_match_ask. */
picket_status pk_match_find(picket_problem *problem, const picket_options *options,
                            picket_result **out);
picket_status pk_match_ask(const pk_arguments *arguments, picket_context *context,
                           picket_problem *problem, picket_result **out);

/* ---- help.c ---- */

void pk_help_print(const pk_arguments *arguments);

/* ---- words.c ---- */

/* The word nearest to `word`, null if none is near. */
typedef struct pk_nearest {
  const char *best;
  int distance;
} pk_nearest;
/* Takes one more candidate into account; start with {NULL, 0}. */
void pk_nearest_try(pk_nearest *nearest, const char *word, const char *candidate);

/* ---- session.c ---- */

/* "picket: " and a sentence on standard error; returns `status`. */
int pk_complain(int status, const char *format, ...) __attribute__((format(printf, 2, 3)));

/* The exit status that a status of the library leads to. */
int pk_exit_of(picket_status status);

/* A context that logs, shows progress and stops at SIGINT, as the arguments say. */
picket_status pk_session_open(const pk_arguments *arguments, picket_context **out);
/* The problem of the arguments with every --set. An exit status; complains. */
int pk_session_problem(const pk_arguments *arguments, picket_context *context,
                       picket_problem **out);
/* Takes the line of progress off the terminal. */
void pk_session_quiet(void);

/* ---- figure_file.c ---- */

/* By the end of the file's name; false if it is none of .svg, .png, .pdf. */
bool pk_figure_format(const char *path, picket_figure_format *out);
/* The name of the script kept beside a picture; the caller's, free(). Null: memory is out. */
char *pk_figure_script_name(const char *path);
/* Whether the files of --figure can be written, found out before the work; complains. */
int pk_figure_probe(const pk_arguments *arguments);
/* The picture of a result, through gnuplot; complains. */
int pk_figure_deliver(const pk_arguments *arguments, picket_context *context,
                      picket_problem *problem, picket_result *result);

/* ---- csv_file.c ---- */

/* A file that appears under its name only when it is whole. */
typedef struct pk_csv_file pk_csv_file;
/* Opens it before the work, so that a path that cannot be written is known at once. */
int pk_csv_open(const char *path, pk_csv_file **out);
int pk_csv_finish(pk_csv_file *file, const char *text); /* writes, renames and frees */
int pk_csv_finish_bytes(pk_csv_file *file, const char *bytes, size_t length);
void pk_csv_drop(pk_csv_file *file); /* leaves nothing behind; accepts null */

#endif
