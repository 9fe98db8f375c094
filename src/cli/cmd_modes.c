/* modes: full-vector modes of a section. */
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static bool lossy(const picket_modes_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    for (int m = 0; m < answer->points[p].mode_count; m++) {
      if (answer->points[p].modes[m].loss_db_per_cm.value != 0) {
        return true;
      }
    }
  }
  return false;
}

static void print_mode(pk_text_table *t, pk_notes *notes, const picket_modes_point *point,
                       const picket_section_mode *mode, bool loss) {
  pk_table_cell(t, "%.10g", NM_PER_UM * point->wavelength_um);
  pk_table_cell(t, "%d", mode->order);
  pk_table_cell(t, "%s, %d %d", mode->ex_share > 0.5 ? "te-like" : "tm-like", mode->nodes_x,
                mode->nodes_y);
  pk_table_quantity(t, notes, mode->index, 1);
  pk_table_quantity(t, notes, mode->group_index, 1);
  if (loss) {
    pk_table_quantity(t, notes, mode->loss_db_per_cm, 1);
  }
  pk_table_cell(t, "%.4f", mode->ex_share);
  pk_table_quantity(t, notes, mode->effective_area_um2, 1);
}

static void print_table(const picket_modes_answer *answer, pk_notes *notes) {
  bool loss = lossy(answer);
  pk_text_table t = {.columns = loss ? 8 : 7};
  pk_table_cell(&t, "wavelength, nm");
  pk_table_cell(&t, "order");
  pk_table_cell(&t, "kind, nodes x y");
  pk_table_cell(&t, "index");
  pk_table_cell(&t, "group index");
  if (loss) {
    pk_table_cell(&t, "loss, dB/cm");
  }
  pk_table_cell(&t, "Ex share");
  pk_table_cell(&t, "effective area, um2");
  for (int p = 0; p < answer->point_count; p++) {
    for (int m = 0; m < answer->points[p].mode_count; m++) {
      print_mode(&t, notes, &answer->points[p], &answer->points[p].modes[m], loss);
    }
  }
  pk_table_print(&t);
}

/* Where the energy of the modes at the first wavelength is. */
static void print_confinement(const picket_modes_point *point) {
  for (int m = 0; m < point->mode_count; m++) {
    printf("  mode %d at %.10g nm: energy", point->modes[m].order,
           NM_PER_UM * point->wavelength_um);
    for (int i = 0; i < point->modes[m].material_count; i++) {
      const picket_confinement *part = &point->modes[m].confinement[i];
      printf("%s %.2f %% in %s", i == 0 ? "" : ",", 100 * part->share, part->material);
    }
    printf("\n");
  }
}

void pk_modes_print(const pk_arguments *arguments, const picket_result *result) {
  (void)arguments;
  pk_notes seen = {0};
  picket_modes_answer answer;
  if (picket_modes_get(result, 0, &answer) != PICKET_OK) {
    return;
  }
  print_table(&answer, &seen);
  for (int p = 0; p < answer.point_count; p++) {
    if (answer.points[p].note) {
      printf("  nothing at %.10g nm: %s\n", NM_PER_UM * answer.points[p].wavelength_um,
             answer.points[p].note);
    }
  }
  if (answer.point_count > 0) {
    print_confinement(&answer.points[0]);
  }
  printf("\n");
  pk_notes_print(&seen);
}
