/* index: what the guide presents to light, wavelength by wavelength. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

/* The next answer of a polarization from *i on, which moves on to it; false if there is none. A
 * sweep has one for each value. */
static bool next_of(const picket_result *result, picket_polarization polarization, int *i,
                    picket_index_answer *out) {
  for (; *i < picket_index_count(result); (*i)++) {
    if (picket_index_get(result, *i, out) == PICKET_OK && out->polarization == polarization) {
      return true;
    }
  }
  return false;
}

static bool several_modes(const picket_result *result, picket_polarization polarization) {
  picket_index_answer answer;
  for (int i = 0; next_of(result, polarization, &i, &answer); i++) {
    for (int p = 0; p < answer.point_count; p++) {
      if (answer.points[p].mode_count > 1) {
        return true;
      }
    }
  }
  return false;
}

/* From which to which Bloch index of the lowest mode, and in which regimes. */
typedef struct range {
  double least, most;
  bool seen[4];
} range;

static void widen(range *r, const picket_index_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    const picket_index_point *point = &answer->points[p];
    if (point->mode_count > 0) {
      double n = point->modes[0].bloch_index.value;
      r->least = n < r->least ? n : r->least;
      r->most = n > r->most ? n : r->most;
      r->seen[point->modes[0].regime] = true;
    }
  }
}

static void print_head(const picket_result *result, picket_polarization polarization) {
  range r = {.least = INFINITY, .most = -INFINITY};
  picket_index_answer answer;
  for (int i = 0; next_of(result, polarization, &i, &answer); i++) {
    widen(&r, &answer);
  }
  printf("%s: ", picket_polarization_name(polarization));
  if (r.least > r.most) {
    printf("no Bloch index found\n");
    return;
  }
  printf(r.least == r.most ? "Bloch index %.6g" : "Bloch index %.6g to %.6g", r.least, r.most);
  for (int regime = PICKET_REGIME_SUBWAVELENGTH; regime <= PICKET_REGIME_RADIATING; regime++) {
    if (r.seen[regime]) {
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

static void print_rows(pk_text_table *t, pk_notes *notes, const picket_result *result, int i,
                       const picket_index_answer *answer, bool order) {
  for (int p = 0; p < answer->point_count; p++) {
    for (int m = 0; m < answer->points[p].mode_count; m++) {
      pk_table_sweep(t, result, i);
      print_mode(t, notes, &answer->points[p], &answer->points[p].modes[m], order);
    }
  }
}

static void print_without(const picket_result *result, int i, const picket_index_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    if (answer->points[p].note) {
      printf("  %s at %.10g nm%s: %s\n", answer->points[p].failed ? "FAILED" : "nothing",
             NM_PER_UM * answer->points[p].wavelength_um, pk_sweep_where(result, i).text,
             answer->points[p].note);
    }
  }
}

static void print_table(const picket_result *result, picket_polarization polarization,
                        pk_notes *notes) {
  bool order = several_modes(result, polarization);
  pk_text_table t = {.columns = (order ? 8 : 7) + pk_sweep_columns(result)};
  picket_index_answer answer;
  pk_table_sweep(&t, result, -1);
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
  for (int i = 0; next_of(result, polarization, &i, &answer); i++) {
    print_rows(&t, notes, result, i, &answer, order);
  }
  pk_table_print(&t);
  for (int i = 0; next_of(result, polarization, &i, &answer); i++) {
    print_without(result, i, &answer);
  }
}

void pk_index_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int p = PICKET_EY; p <= PICKET_TE_LIKE; p++) {
    picket_index_answer answer;
    int first = 0;
    if (next_of(result, (picket_polarization)p, &first, &answer)) {
      print_head(result, (picket_polarization)p);
      print_table(result, (picket_polarization)p, &seen);
      printf("\n");
    }
  }
  picket_index_answer first = {.polarization = PICKET_EY};
  (void)picket_index_get(result, 0, &first);
  pk_notes_print(&seen);
  pk_cautions_print_of(arguments, first.polarization);
}
