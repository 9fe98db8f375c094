/* --help: of the tool, or of one command. Numbers come from the library's table of options. */
#include <stdio.h>
#include <string.h>

#include "cli/cli.h"

static void print_options(void) {
  printf("Options:\n");
  const picket_option_description *d;
  for (int i = 0; (d = picket_option_at(i)) != NULL; i++) {
    printf("  --%-8s N     %s: %g to %g, usually %g\n", d->name, d->help, d->least, d->most,
           strcmp(d->name, "jobs") == 0 ? PK_USUAL_JOBS : d->usual);
  }
  printf(
      "  --set KEY=VALUE  override one value of the file, e.g. cell.pitch_nm=310; may be repeated\n"
      "  --json           one JSON document on standard output, nothing else\n"
      "  --csv FILE       the table of the result, comma-separated\n"
      "  --sweep PATH=FROM:TO:COUNT or PATH=A,B,...  edges, index, modes, slab: ask for each of "
      "these\n"
      "                   values of one number of the file, e.g. "
      "section.shapes.0.width_nm=300:600:13\n"
      "  --resume FILE    index, modes, taper, tolerance, --sweep: keep what is finished in FILE,\n"
      "                   take up what is in it\n"
      "  --fields FILE    index, modes: the fields of the modes, as an HDF5 file\n"
      "  --figure FILE    a picture of the answer, .svg, .png or .pdf, drawn by gnuplot\n"
      "  --keep-script    with --figure: the script with its data as FILE.gp\n"
      "  --compare        for edges of a channel: its two-dimensional models beside it\n"
      "  --quiet          the answer only\n"
      "  --verbose        grids and solver settings on standard error\n"
      "  --version        which version this is\n"
      "  --help           this text, or that of a command\n\n");
}

static void print_match(void) {
  printf(
      "Options of match (first file: mode A; second file or beam: B; --set changes the first):\n"
      "  --mode N         order of mode A by falling index, usually 0\n"
      "  --mode-b N       of mode B; usually the better of the two of highest index\n"
      "  --gaussian-um W  or WX,WY: no second file but a beam of this mode-field diameter (1/e2 "
      "of\n"
      "                   its intensity), its front flat where the two meet\n"
      "  --along x        or y: the beam's E; usually whichever couples more\n"
      "  --medium-index N of the medium the beam comes from, for its tilt; usually the cladding\n"
      "  --offset-nm X,Y  B against A; usually none, and the best offset is sought too\n"
      "  --tilt-deg X,Y   B leans towards +x, +y, -30 to 30\n\n");
}

static void print_status(void) {
  printf(
      "Exit status: 0 done; 1 the numbers could not be obtained to the accuracy asked (what there\n"
      "is, is printed and marked); 2 the command line or the file is wrong; 3 the machine failed\n"
      "(memory, or a file or pipe that cannot be written); 130 interrupted (what a sweep\nfinished "
      "is printed).\n");
}

static void print_tool(void) {
  printf("picket %s: modes and band edges of segmented optical waveguides\n\n", picket_version());
  printf("Usage: picket COMMAND [OPTIONS] FILE.yaml     (- reads standard input)\n\nCommands:\n");
  for (const pk_command *c = pk_commands; c->name; c++) {
    if (c->find) {
      printf("  %-9s %s\n", c->name, c->answers);
    }
  }
  printf("\n");
  print_options();
  print_status();
}

void pk_help_print(const pk_arguments *arguments) {
  const pk_command *c = arguments->command;
  if (!c) {
    print_tool();
    return;
  }
  printf("picket %s: %s\n\nUsage: picket %s [OPTIONS] FILE.yaml%s     (- reads standard input)\n",
         c->name, c->answers, c->name, pk_is_match(c) ? " [SECOND.yaml]" : "");
  printf("Needs in the file: %s\n\n", c->needs);
  if (pk_is_match(c)) {
    print_match();
  }
  print_options();
  print_status();
}
