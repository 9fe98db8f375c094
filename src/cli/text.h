/* Answers for people: quantities with as many digits as their bar allows, and tables. */
#ifndef PICKET_CLI_TEXT_H
#define PICKET_CLI_TEXT_H

#include "cli/cli.h"

enum { PK_QUANTITY_TEXT = 96 };

typedef struct pk_quantity_text {
  char text[PK_QUANTITY_TEXT];
} pk_quantity_text;

/* "1117.870 ± 0.034"; "?" stands for a bar that is missing, "none" for a value. */
pk_quantity_text pk_quantity_show(picket_quantity quantity, double scale);

/* Notes of quantities that lack something, each said once. */
enum { PK_NOTES = 16 };
typedef struct pk_notes {
  int count;
  const char *text[PK_NOTES];
} pk_notes;
void pk_notes_add(pk_notes *notes, picket_quantity quantity);
void pk_notes_print(const pk_notes *notes);

/* A table whose columns are as wide as their widest cell, measured in characters. */
typedef struct pk_text_table {
  int columns;
  int count, capacity; /* cells */
  char **cells;
  bool failed; /* memory ran out */
} pk_text_table;
void pk_table_cell(pk_text_table *table, const char *format, ...)
    __attribute__((format(printf, 2, 3)));
void pk_table_quantity(pk_text_table *table, pk_notes *notes, picket_quantity quantity,
                       double scale);
/* In a sweep the first cell of a row: the path in the head (answer < 0), the value of an answer
 * below; nothing else. The column counts among the table's: pk_sweep_columns. */
void pk_table_sweep(pk_text_table *table, const picket_result *result, int answer);
int pk_sweep_columns(const picket_result *result); /* 1 in a sweep, else 0 */
/* " with cell.pitch_nm = 310" for lines outside tables; "" outside a sweep. */
typedef struct pk_sweep_text {
  char text[PK_QUANTITY_TEXT];
} pk_sweep_text;
pk_sweep_text pk_sweep_where(const picket_result *result, int answer);
/* Prints it, nothing if there is only a head, and frees it. */
void pk_table_print(pk_text_table *table);

/* What a reader must know before using the numbers of a cell. */
void pk_cautions_print(const pk_arguments *arguments);
/* The same of a cell or a channel, which the polarization of its answers tells. */
void pk_cautions_print_of(const pk_arguments *arguments, picket_polarization polarization);

#endif
