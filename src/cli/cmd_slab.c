/* slab: modes of a film stack. */
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static void print_count(const picket_slab_answer *answer, const char *word, const char *where) {
  int least = answer->point_count > 0 ? answer->points[0].mode_count : 0;
  int most = least;
  for (int p = 0; p < answer->point_count; p++) {
    int count = answer->points[p].mode_count;
    least = count < least ? count : least;
    most = count > most ? count : most;
  }
  if (most == 0) {
    printf("%s%s: no guided mode\n", word, where);
  } else if (least == most) {
    printf("%s%s: %d guided mode%s\n", word, where, most, most == 1 ? "" : "s");
  } else {
    printf("%s%s: %d to %d guided modes\n", word, where, least, most);
  }
}

static void print_modes(const picket_slab_answer *answer, pk_notes *notes) {
  pk_text_table t = {.columns = 4};
  pk_table_cell(&t, "wavelength, nm");
  pk_table_cell(&t, "order");
  pk_table_cell(&t, "index");
  pk_table_cell(&t, "group index");
  for (int p = 0; p < answer->point_count; p++) {
    const picket_slab_point *point = &answer->points[p];
    for (int m = 0; m < point->mode_count; m++) {
      pk_table_cell(&t, "%.10g", NM_PER_UM * point->wavelength_um);
      pk_table_cell(&t, "%d", point->modes[m].order);
      pk_table_quantity(&t, notes, point->modes[m].index, 1);
      pk_table_quantity(&t, notes, point->modes[m].group_index, 1);
    }
  }
  pk_table_print(&t);
}

void pk_slab_print(const pk_arguments *arguments, const picket_result *result) {
  (void)arguments;
  pk_notes seen = {0};
  for (int i = 0; i < picket_slab_count(result); i++) {
    picket_slab_answer answer;
    if (picket_slab_get(result, i, &answer) == PICKET_OK) {
      const char *word = answer.polarization == PICKET_TE ? "te" : "tm";
      pk_sweep_text where = pk_sweep_where(result, i);
      if (answer.failed) {
        printf("%s FAILED%s: %s\n", word, where.text, answer.note);
      } else {
        print_count(&answer, word, where.text);
        print_modes(&answer, &seen);
      }
      printf("\n");
    }
  }
  pk_notes_print(&seen);
}
