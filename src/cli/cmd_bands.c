/* bands: gaps first, then the bands along the path. */
#include <stdio.h>

#include "cli/text.h"

static void print_gaps(const picket_bands_answer *answer, const char *word, pk_notes *notes) {
  if (answer->gap_count == 0) {
    printf("%s: no gap among %d band%s\n", word, answer->band_count,
           answer->band_count == 1 ? "" : "s");
  }
  for (int i = 0; i < answer->gap_count; i++) {
    const picket_gap *gap = &answer->gaps[i];
    double width = gap->to.value - gap->from.value;
    double middle = (gap->to.value + gap->from.value) / 2;
    pk_notes_add(notes, gap->from);
    pk_notes_add(notes, gap->to);
    printf("%s: gap above band %d, pitch/wavelength %s to %s (%.4g %% of its middle)\n", word,
           gap->below, pk_quantity_show(gap->from, 1).text, pk_quantity_show(gap->to, 1).text,
           100 * width / middle);
  }
}

static void print_table(const picket_bands_answer *answer, pk_notes *notes) {
  pk_text_table t = {.columns = answer->band_count + 3};
  pk_table_cell(&t, "point");
  pk_table_cell(&t, "k_z, pi/pitch");
  pk_table_cell(&t, "k_x, pi/span");
  for (int b = 1; b <= answer->band_count; b++) {
    pk_table_cell(&t, "band %d", b);
  }
  for (int p = 0; p < answer->point_count; p++) {
    const picket_band_point *point = &answer->points[p];
    pk_table_cell(&t, "%.40s", point->label ? point->label : "");
    pk_table_cell(&t, "%.6g", point->kz);
    pk_table_cell(&t, "%.6g", point->kx);
    for (int b = 0; b < answer->band_count; b++) {
      pk_table_quantity(&t, notes, point->frequency[b], 1);
    }
  }
  pk_table_print(&t);
}

void pk_bands_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int i = 0; i < picket_bands_count(result); i++) {
    picket_bands_answer answer;
    if (picket_bands_get(result, i, &answer) == PICKET_OK) {
      print_gaps(&answer, picket_polarization_name(answer.polarization), &seen);
      print_table(&answer, &seen);
      printf("\n");
    }
  }
  picket_bands_answer first = {.polarization = PICKET_EY};
  (void)picket_bands_get(result, 0, &first);
  pk_notes_print(&seen);
  pk_cautions_print_of(arguments, first.polarization);
}
