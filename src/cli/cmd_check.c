/* check: what was understood of a file. */
#include <stdio.h>

#include "cli/cli.h"

picket_status pk_check_find(picket_problem *problem, const picket_options *options,
                            picket_result **out) {
  (void)options; /* nothing is solved */
  return picket_summary_find(problem, out);
}

void pk_check_print(const pk_arguments *arguments, const picket_result *result) {
  const char *line;
  if (!arguments->quiet) {
    printf("%s is sound. What was understood:\n\n",
           arguments->file[0] == '-' && arguments->file[1] == '\0' ? "standard input"
                                                                   : arguments->file);
  }
  for (int i = 0; (line = picket_summary_line(result, i)) != NULL; i++) {
    printf("  %s\n", line);
  }
}
