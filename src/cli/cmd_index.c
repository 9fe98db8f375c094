/* index: what the guide presents to light, wavelength by wavelength. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static const char *word_of(const picket_index_answer *answer) {
  return answer->polarization == PICKET_EY ? "ey" : "hy";
}

static bool several_modes(const picket_index_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    if (answer->points[p].mode_count > 1) {
      return true;
    }
  }
  return false;
}

/* One line: from which to which Bloch index of the lowest mode, and in which regimes. */
static void print_head(const picket_index_answer *answer) {
  double least = INFINITY, most = -INFINITY;
  bool seen[4] = {false};
  for (int p = 0; p < answer->point_count; p++) {
    const picket_index_point *point = &answer->points[p];
    if (point->mode_count > 0) {
      double n = point->modes[0].bloch_index.value;
      least = n < least ? n : least;
      most = n > most ? n : most;
      seen[point->modes[0].regime] = true;
    }
  }
  printf("%s: ", word_of(answer));
  if (least > most) {
    printf("no Bloch index found\n");
    return;
  }
  printf(least == most ? "Bloch index %.6g" : "Bloch index %.6g to %.6g", least, most);
  for (int regime = PICKET_REGIME_SUBWAVELENGTH; regime <= PICKET_REGIME_RADIATING; regime++) {
    if (seen[regime]) {
      printf(", %s", picket_regime_name((picket_regime)regime));
    }
  }
  printf("\n");
}

static void print_mode(pk_text_table *t, pk_notes *notes, const picket_index_point *point,
                       const picket_bloch_mode *mode, bool order) {
  bool known = mode->regime != PICKET_REGIME_UNKNOWN;
  pk_table_cell(t, "%.10g", NM_PER_UM * point->wavelength_um);
  if (order) {
    pk_table_cell(t, "%d", mode->order);
  }
  pk_table_quantity(t, notes, mode->bloch_index, 1);
  pk_table_quantity(t, notes, mode->group_index, 1);
  pk_table_quantity(t, notes, mode->dispersion_ps_per_nm_km, 1);
  pk_table_quantity(t, notes, mode->loss_db_per_cm, 1);
  pk_table_cell(t, "%s", known ? picket_regime_name(mode->regime) : "unknown");
  if (isnan(point->estimate)) {
    pk_table_cell(t, "none");
  } else {
    pk_table_cell(t, "%.6g", point->estimate);
  }
}

static void print_table(const picket_index_answer *answer, pk_notes *notes) {
  bool order = several_modes(answer);
  pk_text_table t = {.columns = order ? 8 : 7};
  pk_table_cell(&t, "wavelength, nm");
  if (order) {
    pk_table_cell(&t, "order");
  }
  pk_table_cell(&t, "Bloch index");
  pk_table_cell(&t, "group index");
  pk_table_cell(&t, "dispersion, ps/(nm km)");
  pk_table_cell(&t, "loss, dB/cm");
  pk_table_cell(&t, "regime");
  pk_table_cell(&t, "estimated index");
  for (int p = 0; p < answer->point_count; p++) {
    for (int m = 0; m < answer->points[p].mode_count; m++) {
      print_mode(&t, notes, &answer->points[p], &answer->points[p].modes[m], order);
    }
  }
  pk_table_print(&t);
  for (int p = 0; p < answer->point_count; p++) {
    if (answer->points[p].note) {
      printf("  %s at %.10g nm: %s\n", answer->points[p].failed ? "FAILED" : "nothing",
             NM_PER_UM * answer->points[p].wavelength_um, answer->points[p].note);
    }
  }
}

void pk_index_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int i = 0; i < picket_index_count(result); i++) {
    picket_index_answer answer;
    if (picket_index_get(result, i, &answer) == PICKET_OK) {
      print_head(&answer);
      print_table(&answer, &seen);
      printf("\n");
    }
  }
  pk_notes_print(&seen);
  pk_cautions_print(arguments);
}
