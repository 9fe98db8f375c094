/* See text.h. A bar is shown with two digits and rounded up, so that what is printed never promises
 * more than was found; the value gets the same number of decimals. */
#include "cli/text.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum {
  SIGNIFICANT = 16, /* digits of a double worth printing */
  MOST_ZEROS = 7,   /* a bar with more decimals is easier to read with an exponent */
  GAP = 3           /* spaces between columns */
};

static int decimals_of(double value, double bar) {
  int decimals = 1 - (int)floor(log10(bar));
  int most = SIGNIFICANT - 1 - (value == 0 ? 0 : (int)floor(log10(fabs(value))));
  decimals = decimals < most ? decimals : most;
  return decimals < 0 ? 0 : decimals;
}

pk_quantity_text pk_quantity_show(picket_quantity quantity, double scale) {
  pk_quantity_text shown = {"none"};
  double value = scale * quantity.value;
  double bar = fabs(scale * quantity.uncertainty);
  if (!isfinite(value)) {
    return shown;
  }
  if (!isfinite(bar)) {
    snprintf(shown.text, sizeof shown.text, "%.8g ± ?", value);
  } else if (bar == 0) {
    snprintf(shown.text, sizeof shown.text, "%.10g ± 0", value);
  } else {
    int decimals = decimals_of(value, bar);
    double unit = pow(10, -decimals);
    /* A bar that is a whole number of units up to rounding is not pushed up by one. */
    bar = ceil(bar / unit * (1 - 1e-12)) * unit;
    if (decimals > MOST_ZEROS) {
      snprintf(shown.text, sizeof shown.text, "%.*f ± %.2g", decimals, value, bar);
    } else {
      snprintf(shown.text, sizeof shown.text, "%.*f ± %.*f", decimals, value, decimals, bar);
    }
  }
  return shown;
}

void pk_notes_add(pk_notes *notes, picket_quantity quantity) {
  if (!quantity.note || (isfinite(quantity.value) && isfinite(quantity.uncertainty))) {
    return;
  }
  for (int i = 0; i < notes->count; i++) {
    if (strcmp(notes->text[i], quantity.note) == 0) {
      return;
    }
  }
  if (notes->count < PK_NOTES) {
    notes->text[notes->count++] = quantity.note;
  }
}

void pk_notes_print(const pk_notes *notes) {
  if (notes->count > 0) {
    printf("Why a number is missing, or its bar (\"?\"):\n");
  }
  for (int i = 0; i < notes->count; i++) {
    printf("- %s\n", notes->text[i]);
  }
}

void pk_table_cell(pk_text_table *table, const char *format, ...) {
  char text[PK_QUANTITY_TEXT];
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(text, sizeof text, format, arguments);
  va_end(arguments);
  if (table->count == table->capacity && !table->failed) {
    int capacity = table->capacity > 0 ? 2 * table->capacity : 64;
    char **larger = realloc(table->cells, (size_t)capacity * sizeof *larger);
    table->failed = !larger;
    table->cells = larger ? larger : table->cells;
    table->capacity = larger ? capacity : table->capacity;
  }
  char *copy = table->failed ? NULL : malloc(strlen(text) + 1);
  if (!copy) {
    table->failed = true;
    return;
  }
  memcpy(copy, text, strlen(text) + 1);
  table->cells[table->count++] = copy;
}

void pk_table_quantity(pk_text_table *table, pk_notes *notes, picket_quantity quantity,
                       double scale) {
  pk_notes_add(notes, quantity);
  pk_table_cell(table, "%s", pk_quantity_show(quantity, scale).text);
}

int pk_sweep_columns(const picket_result *result) {
  return picket_sweep_path(result) != NULL;
}

void pk_table_sweep(pk_text_table *table, const picket_result *result, int answer) {
  const char *path = picket_sweep_path(result);
  double value = 0;
  if (path && answer < 0) {
    pk_table_cell(table, "%s", path);
  } else if (path && picket_sweep_value(result, answer, &value) == PICKET_OK) {
    pk_table_cell(table, "%.10g", value);
  }
}

pk_sweep_text pk_sweep_where(const picket_result *result, int answer) {
  pk_sweep_text where = {""};
  double value = 0;
  if (picket_sweep_value(result, answer, &value) == PICKET_OK) {
    snprintf(where.text, sizeof where.text, " with %.70s = %.10g", picket_sweep_path(result),
             value);
  }
  return where;
}

static int characters(const char *text) {
  int count = 0;
  for (; *text; text++) {
    count += ((unsigned char)*text & 0xc0) != 0x80;
  }
  return count;
}

static int width_of(const pk_text_table *table, int column) {
  int width = 0;
  for (int i = column; i < table->count; i += table->columns) {
    int length = characters(table->cells[i]);
    width = length > width ? length : width;
  }
  return width;
}

void pk_table_print(pk_text_table *table) {
  bool empty = table->count <= table->columns;
  for (int i = 0; i < table->count && !empty && !table->failed; i++) {
    int column = i % table->columns;
    bool last = column == table->columns - 1;
    int pad = last ? 0 : width_of(table, column) - characters(table->cells[i]) + GAP;
    printf("%s%s%*s%s", column == 0 ? "  " : "", table->cells[i], pad, "", last ? "\n" : "");
  }
  if (table->failed) {
    printf("  (no memory for the table)\n");
  }
  for (int i = 0; i < table->count; i++) {
    free(table->cells[i]);
  }
  free(table->cells);
  *table = (struct pk_text_table){0};
}

void pk_cautions_print(const pk_arguments *arguments) {
  if (!arguments->quiet) {
    printf(
        "Two-dimensional model with ideal walls: roughness and side-wall slope are not in it, "
        "rounded corners only as drawn.\nThe foundry's design rules and measured data come "
        "first.\n");
  }
}

void pk_cautions_print_of(const pk_arguments *arguments, picket_polarization polarization) {
  if (polarization < PICKET_TM_LIKE) {
    pk_cautions_print(arguments);
  } else if (!arguments->quiet) {
    printf(
        "Three-dimensional model with ideal walls: roughness is not in it, side-wall slope and "
        "rounded corners only as drawn.\nThe foundry's design rules and measured data come "
        "first.\n");
  }
}
