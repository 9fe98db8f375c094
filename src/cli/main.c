/* The tool: one question about one problem file. See cli.h. */
#include <errno.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "cli/cli.h"

const pk_command pk_commands[] = {
    {"check", "is the file sound? what was understood, with derived values", "anything",
     pk_check_find, pk_check_print},
    {"edges", "the stop bands, how clear of them the operating band is, the estimate's error",
     "a cell or a channel", picket_edges_find, pk_edges_print},
    {"bands", "bands over a path of wavenumbers, and the gaps between them", "a cell or a channel",
     picket_bands_find, pk_bands_print},
    {"index", "Bloch index, group index, dispersion, loss and regime at each wavelength",
     "light, and a cell or a channel", picket_index_find, pk_index_print},
    {"slab", "guided modes of a stack of films, analytic", "slab, light", picket_slab_find,
     pk_slab_print},
    {"modes", "full-vector modes of a section", "section, light", picket_modes_find,
     pk_modes_print},
    {"aim", "the dimension that meets a target, with its bar and what a mask makes of it",
     "aim, and a cell, a channel or a section", picket_aim_find, pk_aim_print},
    {"tolerance", "what the process does to a quantity: sensitivities, corners and yield",
     "tolerance, and a cell, a channel or a section", picket_tolerance_find, pk_tolerance_print},
    {"match", "what a mode of a section shares with a Gaussian beam, or a mode of a second section",
     "section, light; a second file needs section", pk_match_find, pk_match_print},
    {"taper",
     "a row that changes along its length: each tooth, its overlap with the next, warnings",
     "taper, and a cell or a channel", picket_taper_find, pk_taper_print},
    {"report", NULL, NULL, NULL, NULL},
    {"start", NULL, NULL, NULL, NULL},
    {NULL, NULL, NULL, NULL, NULL},
};

/* Standard output to the last byte; a full disk shows only here. */
static int finish_output(int status) {
  if (fflush(stdout) != 0 || ferror(stdout)) {
    return pk_complain(PK_EXIT_MACHINE, "standard output cannot be written: %s", strerror(errno));
  }
  return status;
}

static int write_csv(pk_csv_file *file, picket_context *context, picket_result *result) {
  const char *text = picket_result_csv(result);
  if (!text) {
    pk_csv_drop(file);
    return pk_complain(PK_EXIT_MACHINE, "%s", picket_context_message(context));
  }
  return pk_csv_finish(file, text);
}

/* The answer for people or for programs; a partial one is marked in either. */
static int print_answer(const pk_arguments *a, picket_context *context, picket_result *result) {
  bool whole = picket_result_complete(result);
  if (!a->json) {
    if (!whole) {
      printf("PARTIAL RESULT: %s\n\n", picket_result_shortfall(result));
    }
    a->command->print(a, result);
    return whole ? PK_EXIT_DONE : PK_EXIT_SHORT;
  }
  const char *text = picket_result_json(result);
  if (!text) {
    return pk_complain(PK_EXIT_MACHINE, "%s", picket_context_message(context));
  }
  printf("%s\n", text);
  return whole ? PK_EXIT_DONE
               : pk_complain(PK_EXIT_SHORT, "the result is partial: %s",
                             picket_result_shortfall(result));
}

/* Takes over the CSV file, which may be null. The answer is printed even if the file fails: it may
 * have taken long to get. */
static int deliver(const pk_arguments *a, picket_context *context, picket_result *result,
                   pk_csv_file *csv) {
  int file_status = csv ? write_csv(csv, context, result) : PK_EXIT_DONE;
  int status = finish_output(print_answer(a, context, result));
  return file_status != PK_EXIT_DONE ? file_status : status;
}

static picket_status ask(const pk_arguments *a, picket_context *context, picket_problem *problem,
                         picket_result **out) {
  if (pk_is_match(a->command)) {
    return pk_match_ask(a, context, problem, out);
  }
  if (a->sweep.path) {
    return pk_sweep_ask(a, problem, out);
  }
  if (a->compare && a->command->find == picket_edges_find) {
    return picket_edges_compare(problem, &a->options, out);
  }
  if (!a->resume) {
    return a->command->find(problem, &a->options, out);
  }
  if (a->command->find == picket_taper_find) {
    return picket_taper_find_resumable(problem, &a->options, a->resume, out);
  }
  if (a->command->find == picket_tolerance_find) {
    return picket_tolerance_find_resumable(problem, &a->options, a->resume, out);
  }
  return a->command->find == picket_modes_find
             ? picket_modes_find_resumable(problem, &a->options, a->resume, out)
             : picket_index_find_resumable(problem, &a->options, a->resume, out);
}

/* The question and its answer. A failure may leave a part of the answer, which is delivered too. */
static int ask_and_deliver(const pk_arguments *a, picket_context *context, picket_problem *problem,
                           pk_csv_file *csv, bool draw) {
  picket_result *result = NULL;
  picket_status found = ask(a, context, problem, &result);
  pk_session_quiet();
  int status = PK_EXIT_DONE;
  if (found != PICKET_OK) {
    status = pk_complain(pk_exit_of(found), "%s", picket_context_message(context));
  }
  if (result) {
    int delivered = deliver(a, context, result, csv);
    int drawn = draw ? pk_figure_deliver(a, context, problem, result) : PK_EXIT_DONE;
    delivered = delivered == PK_EXIT_DONE || drawn == PK_EXIT_MACHINE ? drawn : delivered;
    status = status != PK_EXIT_DONE && delivered != PK_EXIT_MACHINE ? status : delivered;
  } else {
    pk_csv_drop(csv);
  }
  picket_result_free(result);
  return status;
}

/* Mode fields, on a grid of their own; before the answer, for a file that cannot be written is to
 * show before the work. */
static int write_fields(const pk_arguments *a, picket_context *context, picket_problem *problem) {
  picket_status written = a->command->find == picket_modes_find
                              ? picket_section_fields_write(problem, &a->options, a->fields)
                              : picket_fields_write(problem, &a->options, a->fields);
  pk_session_quiet();
  return written == PICKET_OK
             ? PK_EXIT_DONE
             : pk_complain(pk_exit_of(written), "%s", picket_context_message(context));
}

static int answer(const pk_arguments *a, picket_context *context) {
  picket_problem *problem = NULL;
  pk_csv_file *csv = NULL;
  int status = pk_session_problem(a, context, &problem);
  if (status == PK_EXIT_DONE && a->csv) {
    status = pk_csv_open(a->csv, &csv);
  }
  if (status == PK_EXIT_DONE && a->fields) {
    status = write_fields(a, context, problem);
  }
  if (status == PK_EXIT_DONE || status == PK_EXIT_SHORT) { /* short: there may be indices still */
    /* A picture that could not be written is said at once, and does not stop the numbers. */
    int figure = a->figure ? pk_figure_probe(a) : PK_EXIT_DONE;
    int answered = ask_and_deliver(a, context, problem, csv, a->figure && figure == PK_EXIT_DONE);
    answered = figure == PK_EXIT_DONE || answered == PK_EXIT_INTERRUPTED ? answered : figure;
    status = status == PK_EXIT_DONE ? answered : status;
  } else {
    pk_csv_drop(csv);
  }
  picket_problem_free(problem);
  return status;
}

static int run(const pk_arguments *a) {
  if (a->version) {
    printf("picket %s\n", picket_version());
    return finish_output(PK_EXIT_DONE);
  }
  if (a->help) {
    pk_help_print(a);
    return finish_output(PK_EXIT_DONE);
  }
  picket_context *context = NULL;
  picket_status opened = pk_session_open(a, &context);
  if (opened != PICKET_OK) {
    return pk_complain(pk_exit_of(opened), "out of memory");
  }
  int status = answer(a, context);
  picket_context_free(context);
  return status;
}

/* A standard stream that the caller closed would give its number to the next file opened, and what
 * is printed would land in there. An unwritable one takes its place instead. */
static void hold_streams(void) {
  for (int descriptor = 0; descriptor <= STDERR_FILENO; descriptor++) {
    if (fcntl(descriptor, F_GETFD) < 0 && errno == EBADF) {
      (void)!open("/dev/null", descriptor == STDERR_FILENO ? O_WRONLY : O_RDONLY);
    }
  }
}

int main(int argc, char **argv) {
  hold_streams();
  signal(SIGPIPE, SIG_IGN); /* a closed pipe is a failed write like any other */
  pk_arguments a;
  int status = pk_arguments_parse(argc, argv, &a);
  if (status == PK_EXIT_DONE) {
    status = run(&a);
  }
  pk_arguments_free(&a);
  return status;
}
