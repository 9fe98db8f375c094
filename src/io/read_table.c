/* A CSV table of an index: the line wavelength_nm,n,k and then one row per wavelength. See read.h.
 * Messages have the table's own file, line and column. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/number.h"
#include "io/read.h"
#include "io/text.h"

enum {
  TABLE_BYTES = 20000000,
  MOST_ROWS = 100000,
  FEWEST_ROWS = 4, /* a cubic spline needs them */
  COLUMNS = 3
};
static const double LARGEST_INDEX = 1000.0; /* metals in the far infrared reach a few hundred */
static const char header[] = "wavelength_nm,n,k";

typedef struct scanner {
  picket_context *context;
  pk_place place;
  char *rest; /* the text not read yet, null at its end */
} scanner;

/* The next line, without its end; null when there are no more. Modifies the text. */
static char *next_line(scanner *s) {
  char *line = s->rest;
  if (!line || line[0] == '\0') {
    return NULL;
  }
  char *end = strchr(line, '\n');
  s->rest = end ? end + 1 : NULL;
  if (end) {
    *end = '\0';
  }
  size_t length = strlen(line);
  if (length > 0 && line[length - 1] == '\r') {
    line[length - 1] = '\0';
  }
  s->place.line++;
  s->place.column = 1;
  return line;
}

static char *trim(char *field) {
  field += strspn(field, " \t");
  size_t length = strlen(field);
  while (length > 0 && (field[length - 1] == ' ' || field[length - 1] == '\t')) {
    field[--length] = '\0';
  }
  return field;
}

static picket_status check_value(const scanner *s, int column, double value) {
  static const char *const names[COLUMNS] = {"wavelength_nm", "n", "k"};
  const double low[COLUMNS] = {PK_WAVELENGTH_LOW_NM, 0, 0};
  const double high[COLUMNS] = {PK_WAVELENGTH_HIGH_NM, LARGEST_INDEX, LARGEST_INDEX};
  bool good = value >= low[column] && value <= high[column] && (column != 1 || value > 0);
  if (!good) {
    return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place, "%s is %.10g, must be %s %g to %g",
                      names[column], value, column == 1 ? "above" : "from", low[column],
                      high[column]);
  }
  return PICKET_OK;
}

static picket_status read_row(scanner *s, char *line, double row[COLUMNS]) {
  char *start = line;
  for (int i = 0; i < COLUMNS; i++) {
    char *comma = strchr(start, ',');
    s->place.column = (int)(start - line) + 1;
    if ((i < COLUMNS - 1) != (comma != NULL)) {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                        "the row must have three numbers: %s", header);
    }
    if (comma) {
      *comma = '\0';
    }
    char *field = trim(start);
    if (pk_number_parse(field, &row[i]) != PK_NUMBER_GOOD || !isfinite(row[i])) {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                        "\"%s\" must be a plain decimal number such as 1550, 3.48 or 2e-4",
                        pk_text_shown(field).text);
    }
    picket_status status = check_value(s, i, row[i]);
    if (status != PICKET_OK) {
      return status;
    }
    start = comma ? comma + 1 : start;
  }
  return PICKET_OK;
}

static picket_status read_header(scanner *s) {
  char *line = next_line(s);
  /* Spreadsheets like to begin a text file with a byte order mark. */
  if (line && strncmp(line, "\xef\xbb\xbf", 3) == 0) {
    line += 3;
  }
  if (!line || strcmp(trim(line), header) != 0) {
    s->place.line = 1;
    return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                      "the first line of the table must be: %s", header);
  }
  return PICKET_OK;
}

/* The number of lines, for the size of the arrays. */
static size_t count_lines(const char *text) {
  size_t lines = 1;
  for (const char *s = text; (s = strchr(s, '\n')) != NULL; s++) {
    lines++;
  }
  return lines;
}

static picket_status read_rows(scanner *s, pk_index_table *table) {
  picket_status status = PICKET_OK;
  char *line;
  while (status == PICKET_OK && (line = next_line(s)) != NULL) {
    double row[COLUMNS] = {0};
    int i = table->count;
    if (i == MOST_ROWS) {
      return pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place, "the table has more than %d rows",
                        MOST_ROWS);
    }
    status = read_row(s, line, row);
    double um = row[0] / PK_NM_PER_UM;
    if (status == PICKET_OK && i > 0 && um <= table->wavelength_um[i - 1]) {
      s->place.column = 1;
      status = pk_fail_at(s->context, PICKET_ERROR_INPUT, s->place,
                          "wavelength_nm is %.10g, must be above the %.10g of the row before",
                          row[0], table->wavelength_um[i - 1] * PK_NM_PER_UM);
    }
    table->wavelength_um[i] = um;
    table->n[i] = row[1];
    table->k[i] = row[2];
    table->count++;
  }
  if (status == PICKET_OK && table->count < FEWEST_ROWS) {
    pk_place whole = {s->place.file, 0, 0};
    status = pk_fail_at(s->context, PICKET_ERROR_INPUT, whole,
                        "the table has %d rows, must have %d to %d", table->count, FEWEST_ROWS,
                        MOST_ROWS);
  }
  return status;
}

void pk_index_table_clear(picket_context *context, pk_index_table *table) {
  pk_free(context, table->wavelength_um);
  pk_free(context, table->n);
  pk_free(context, table->k);
  memset(table, 0, sizeof *table);
}

picket_status pk_read_index_table(picket_context *context, pk_place named_at, const char *path,
                                  pk_index_table *out) {
  pk_index_table table = {0, NULL, NULL, NULL};
  char *text = NULL;
  size_t length = 0;
  picket_status status = pk_text_read_file(context, path, TABLE_BYTES, named_at, &text, &length);
  if (status == PICKET_OK) {
    status = pk_text_check(context, text, length, path, true);
  }
  scanner s = {context, {path, 0, 1}, text};
  size_t rows = status == PICKET_OK ? count_lines(text) : 0; /* before the lines are cut apart */
  if (status == PICKET_OK) {
    status = read_header(&s);
  }
  if (status == PICKET_OK) {
    rows = rows < MOST_ROWS ? rows : MOST_ROWS;
    table.wavelength_um = PK_NEW(context, rows, double);
    table.n = table.wavelength_um ? PK_NEW(context, rows, double) : NULL;
    table.k = table.n ? PK_NEW(context, rows, double) : NULL;
    status = table.k ? read_rows(&s, &table) : PICKET_ERROR_MEMORY;
  }
  pk_free(context, text);
  if (status != PICKET_OK) {
    pk_index_table_clear(context, &table);
    return status;
  }
  *out = table;
  return PICKET_OK;
}
