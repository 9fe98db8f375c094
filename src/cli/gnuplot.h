/* The program that draws. */
#ifndef PICKET_CLI_GNUPLOT_H
#define PICKET_CLI_GNUPLOT_H

#include <stddef.h>

#include "cli/cli.h"

/* Runs a script that draws on standard output. *picture is the caller's, free(). An exit status;
 * complains. */
int pk_gnuplot_draw(const char *script, char **picture, size_t *length);

#endif
