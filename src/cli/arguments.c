/* The command line: options anywhere, the first other word is the command, the second the file.
 * Values stand behind their option or after "=". Options with numbers come from the library's own
 * table. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "cli/cli.h"

typedef enum option_kind {
  OPTION_JSON,
  OPTION_CSV,
  OPTION_RESUME,
  OPTION_FIELDS,
  OPTION_FIGURE,
  OPTION_KEEP_SCRIPT,
  OPTION_SET,
  OPTION_SWEEP,
  OPTION_MATCH, /* of match_option.c */
  OPTION_COMPARE,
  OPTION_QUIET,
  OPTION_VERBOSE,
  OPTION_HELP,
  OPTION_VERSION,
  OPTION_NUMBER /* of picket_option_at */
} option_kind;

typedef struct option {
  const char *name;
  option_kind kind;
  const char *value; /* what its value is, null for none */
} option;

static const option OPTIONS[] = {
    {"json", OPTION_JSON, NULL},
    {"csv", OPTION_CSV, "a file name"},
    {"set", OPTION_SET, "KEY=VALUE"},
    {"resume", OPTION_RESUME, "a file name"},
    {"compare", OPTION_COMPARE, NULL},
    {"quiet", OPTION_QUIET, NULL},
    {"verbose", OPTION_VERBOSE, NULL},
    {"help", OPTION_HELP, NULL},
    {"version", OPTION_VERSION, NULL},
    {"figure", OPTION_FIGURE, "a file name"},
    {"keep-script", OPTION_KEEP_SCRIPT, NULL},
    {"fields", OPTION_FIELDS, "a file name"},
    {"sweep", OPTION_SWEEP, "PATH=FROM:TO:COUNT"},
    {"mode", OPTION_MATCH, "a number"},
    {"mode-b", OPTION_MATCH, "a number"},
    {"gaussian-um", OPTION_MATCH, "a diameter"},
    {"along", OPTION_MATCH, "x or y"},
    {"medium-index", OPTION_MATCH, "a number"},
    {"offset-nm", OPTION_MATCH, "X,Y"},
    {"tilt-deg", OPTION_MATCH, "X,Y"},
};
enum { OPTION_COUNT = sizeof OPTIONS / sizeof OPTIONS[0], NAME_LENGTH = 40 };

/* The option of a name of `length` letters. */
static bool find_option(const char *name, size_t length, option *out) {
  for (int i = 0; i < OPTION_COUNT; i++) {
    if (strlen(OPTIONS[i].name) == length && strncmp(OPTIONS[i].name, name, length) == 0) {
      *out = OPTIONS[i];
      return true;
    }
  }
  const picket_option_description *number;
  for (int i = 0; (number = picket_option_at(i)) != NULL; i++) {
    if (strlen(number->name) == length && strncmp(number->name, name, length) == 0) {
      *out = (option){number->name, OPTION_NUMBER, "a number"};
      return true;
    }
  }
  return false;
}

static int unknown_option(const char *name, size_t length) {
  char word[NAME_LENGTH];
  pk_nearest near = {NULL, 0};
  const picket_option_description *number;
  snprintf(word, sizeof word, "%.*s", (int)(length < sizeof word ? length : sizeof word - 1), name);
  for (int i = 0; i < OPTION_COUNT; i++) {
    pk_nearest_try(&near, word, OPTIONS[i].name);
  }
  for (int i = 0; (number = picket_option_at(i)) != NULL; i++) {
    pk_nearest_try(&near, word, number->name);
  }
  if (near.best) {
    return pk_complain(PK_EXIT_WRONG, "there is no option --%s; did you mean --%s?", word,
                       near.best);
  }
  return pk_complain(PK_EXIT_WRONG, "there is no option --%s; picket --help lists them", word);
}

static int set_number(pk_arguments *a, const char *name, const char *text) {
  const picket_option_description *d = NULL;
  for (int i = 0; (d = picket_option_at(i)) != NULL && strcmp(d->name, name) != 0; i++) {
  }
  char *end = NULL;
  /* Decimal only: strtod would take hexadecimal, infinities and NaN too. */
  bool decimal = text[0] != '\0' && text[strspn(text, "0123456789.eE+-")] == '\0';
  double value = decimal ? strtod(text, &end) : 0;
  if (!decimal || *end != '\0' || picket_options_set(&a->options, name, value) != PICKET_OK) {
    return pk_complain(PK_EXIT_WRONG, "--%s is \"%.40s\", must be %s from %g to %g", name, text,
                       d->whole ? "a whole number" : "a number", d->least, d->most);
  }
  return PK_EXIT_DONE;
}

static int add_set(pk_arguments *a, const char *text) {
  const char *equals = strchr(text, '=');
  if (!equals || equals == text) {
    return pk_complain(PK_EXIT_WRONG,
                       "--set is \"%.100s\", must be KEY=VALUE, e.g. cell.pitch_nm=310", text);
  }
  a->sets[a->set_count++] = text;
  return PK_EXIT_DONE;
}

static int set_file(const char **out, const char *name, const char *value) {
  if (value[0] == '\0' || strcmp(value, "-") == 0) {
    return pk_complain(PK_EXIT_WRONG, "--%s is \"%s\", must be the name of a file", name, value);
  }
  *out = value;
  return PK_EXIT_DONE;
}

static int apply(pk_arguments *a, const option *o, const char *value) {
  switch (o->kind) {
    case OPTION_JSON: a->json = true; break;
    case OPTION_COMPARE: a->compare = true; break;
    case OPTION_QUIET: a->quiet = true; break;
    case OPTION_VERBOSE: a->verbose = true; break;
    case OPTION_HELP: a->help = true; break;
    case OPTION_VERSION: a->version = true; break;
    case OPTION_SET: return add_set(a, value);
    case OPTION_SWEEP: return pk_sweep_parse(&a->sweep, value);
    case OPTION_MATCH: return pk_match_option(&a->match, o->name, value);
    case OPTION_NUMBER: return set_number(a, o->name, value);
    case OPTION_CSV: return set_file(&a->csv, o->name, value);
    case OPTION_RESUME: return set_file(&a->resume, o->name, value);
    case OPTION_FIELDS: return set_file(&a->fields, o->name, value);
    case OPTION_FIGURE: return set_file(&a->figure, o->name, value);
    case OPTION_KEEP_SCRIPT: a->keep_script = true; break;
  }
  return PK_EXIT_DONE;
}

/* One option at argv[*i], which moves on to its last word. */
static int parse_option(pk_arguments *a, int argc, char **argv, int *i) {
  const char *name = argv[*i] + 2;
  const char *equals = strchr(name, '=');
  size_t length = equals ? (size_t)(equals - name) : strlen(name);
  option o;
  if (!find_option(name, length, &o)) {
    return unknown_option(name, length);
  }
  const char *value = equals ? equals + 1 : NULL;
  if (!o.value && value) {
    return pk_complain(PK_EXIT_WRONG, "--%s takes no value", o.name);
  }
  if (o.value && !value) {
    if (*i + 1 >= argc || strncmp(argv[*i + 1], "--", 2) == 0) {
      return pk_complain(PK_EXIT_WRONG, "--%s needs %s behind it", o.name, o.value);
    }
    value = argv[++*i];
  }
  return apply(a, &o, value);
}

static int set_command(pk_arguments *a, const char *word) {
  pk_nearest near = {NULL, 0};
  for (const pk_command *c = pk_commands; c->name; c++) {
    if (strcmp(c->name, word) == 0) {
      a->command = c;
      return c->find ? PK_EXIT_DONE
                     : pk_complain(PK_EXIT_WRONG, "the command %s is not in this version (%s)",
                                   word, picket_version());
    }
    pk_nearest_try(&near, word, c->name);
  }
  if (near.best) {
    return pk_complain(PK_EXIT_WRONG, "there is no command \"%.40s\"; did you mean \"%s\"?", word,
                       near.best);
  }
  return pk_complain(PK_EXIT_WRONG, "there is no command \"%.40s\"; picket --help lists them",
                     word);
}

static int parse_word(pk_arguments *a, const char *word) {
  if (!a->command) {
    return set_command(a, word);
  }
  if (a->file && pk_is_match(a->command) && !a->match.file) {
    a->match.file = word;
    return PK_EXIT_DONE;
  }
  if (a->file) {
    return pk_complain(PK_EXIT_WRONG, "\"%.100s\" is one file too many: picket %s takes %s", word,
                       a->command->name, pk_is_match(a->command) ? "two" : "one");
  }
  a->file = word;
  return PK_EXIT_DONE;
}

/* The problem file must not be overwritten by an answer. */
static bool is_same_file(const char *a, const char *b) {
  struct stat first, second;
  return a && b && stat(a, &first) == 0 && stat(b, &second) == 0 && first.st_dev == second.st_dev &&
         first.st_ino == second.st_ino;
}

/* What --figure needs. */
static int check_figure(const pk_arguments *a) {
  picket_figure_format format;
  if (a->keep_script && !a->figure) {
    return pk_complain(PK_EXIT_WRONG, "--keep-script keeps the script of a --figure; name one");
  }
  if (a->figure &&
      (a->sweep.path || a->command->find == picket_aim_find || pk_is_match(a->command))) {
    return pk_complain(
        PK_EXIT_WRONG, "--figure has no picture of %s%s",
        a->sweep.path ? "a sweep; set one value with --set, or take --csv" : "picket ",
        a->sweep.path ? "" : a->command->name);
  }
  if (a->figure && !pk_figure_format(a->figure, &format)) {
    return pk_complain(PK_EXIT_WRONG,
                       "--figure is \"%.200s\", must be the name of a file that ends in .svg, .png "
                       "or .pdf",
                       a->figure);
  }
  return PK_EXIT_DONE;
}

/* Options that not every command has. */
static int check_extras(const pk_arguments *a) {
  const char *name = a->command->name;
  picket_question question;
  bool index = a->command->find == picket_index_find, modes = a->command->find == picket_modes_find;
  if (a->sweep.path && !pk_sweep_question(a->command, &question)) {
    return pk_complain(PK_EXIT_WRONG,
                       "--sweep is for picket edges, index, modes and slab; picket %s has none",
                       name);
  }
  bool tolerance = a->command->find == picket_tolerance_find;
  bool taper = a->command->find == picket_taper_find;
  if (a->compare && (a->command->find != picket_edges_find || a->sweep.path)) {
    return pk_complain(PK_EXIT_WRONG,
                       "--compare is for picket edges of a channel, without --sweep");
  }
  if (a->resume && !index && !modes && !tolerance && !taper && !a->sweep.path) {
    return pk_complain(PK_EXIT_WRONG,
                       "--resume is for picket index, modes, taper and tolerance, and for --sweep; "
                       "picket %s keeps no "
                       "journal",
                       name);
  }
  if (a->fields && !index && !modes) {
    return pk_complain(
        PK_EXIT_WRONG,
        "--fields is for picket index and picket modes; picket %s has no mode fields", name);
  }
  if (a->fields && a->sweep.path) {
    return pk_complain(PK_EXIT_WRONG,
                       "--fields and --sweep cannot be given together; set one value with --set");
  }
  return PK_EXIT_DONE;
}

static int check_whole(const pk_arguments *a) {
  if (a->help || a->version) {
    return PK_EXIT_DONE;
  }
  if (!a->command) {
    return pk_complain(PK_EXIT_WRONG, "no command given; picket --help lists them");
  }
  if (!a->file) {
    return pk_complain(PK_EXIT_WRONG, "picket %s needs a problem file, or - for standard input",
                       a->command->name);
  }
  int status = check_extras(a);
  status = status == PK_EXIT_DONE ? check_figure(a) : status;
  if (status != PK_EXIT_DONE) {
    return status;
  }
  int match = pk_match_check(a);
  if (match != PK_EXIT_DONE) {
    return match;
  }
  if (is_same_file(a->match.file, a->csv)) {
    return pk_complain(PK_EXIT_WRONG, "%s is a problem file; name another file for the answer",
                       a->csv);
  }
  if (is_same_file(a->file, a->csv) || is_same_file(a->file, a->fields) ||
      is_same_file(a->file, a->figure)) {
    return pk_complain(PK_EXIT_WRONG, "%s is the problem file; name another file for the answer",
                       a->file);
  }
  if (a->quiet && a->verbose) {
    return pk_complain(PK_EXIT_WRONG, "--quiet and --verbose cannot both be meant");
  }
  return PK_EXIT_DONE;
}

int pk_arguments_parse(int argc, char **argv, pk_arguments *out) {
  *out = (pk_arguments){0};
  picket_options_init(&out->options);
  pk_match_words_init(&out->match);
  out->options.jobs = PK_USUAL_JOBS;
  out->sets = calloc((size_t)argc + 1, sizeof *out->sets);
  if (!out->sets) {
    return pk_complain(PK_EXIT_MACHINE, "out of memory");
  }
  bool words_only = false; /* after "--" */
  int status = PK_EXIT_DONE;
  for (int i = 1; i < argc && status == PK_EXIT_DONE; i++) {
    if (words_only || argv[i][0] != '-' || argv[i][1] == '\0') {
      status = parse_word(out, argv[i]);
    } else if (strcmp(argv[i], "--") == 0) {
      words_only = true;
    } else if (argv[i][1] == '-') {
      status = parse_option(out, argc, argv, &i);
    } else {
      status =
          pk_complain(PK_EXIT_WRONG, "there is no option %.40s; options have two dashes", argv[i]);
    }
  }
  return status == PK_EXIT_DONE ? check_whole(out) : status;
}

void pk_arguments_free(pk_arguments *arguments) {
  pk_sweep_free(&arguments->sweep);
  free(arguments->sets);
  arguments->sets = NULL;
}
