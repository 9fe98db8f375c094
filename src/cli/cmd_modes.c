/* modes: full-vector modes of a section. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static bool loses(const picket_section_mode *mode) {
  return mode->loss_db_per_cm.value != 0;
}

/* A straight one says nothing of a quarter turn. */
static bool bent(const picket_section_mode *mode) {
  return !isnan(mode->bend_loss_db_per_90_deg.value) || mode->bend_loss_db_per_90_deg.note;
}

static bool any(const picket_result *result, bool (*is)(const picket_section_mode *)) {
  picket_modes_answer answer;
  for (int i = 0; picket_modes_get(result, i, &answer) == PICKET_OK; i++) {
    for (int p = 0; p < answer.point_count; p++) {
      for (int m = 0; m < answer.points[p].mode_count; m++) {
        if (is(&answer.points[p].modes[m])) {
          return true;
        }
      }
    }
  }
  return false;
}

static void print_mode(pk_text_table *t, pk_notes *notes, const picket_modes_point *point,
                       const picket_section_mode *mode, bool loss, bool turn) {
  pk_table_cell(t, "%.10g", NM_PER_UM * point->wavelength_um);
  pk_table_cell(t, "%d", mode->order);
  pk_table_cell(t, "%s, %d %d", mode->ex_share > 0.5 ? "te-like" : "tm-like", mode->nodes_x,
                mode->nodes_y);
  pk_table_quantity(t, notes, mode->index, 1);
  pk_table_quantity(t, notes, mode->group_index, 1);
  if (loss) {
    pk_table_quantity(t, notes, mode->loss_db_per_cm, 1);
  }
  if (turn) {
    pk_table_quantity(t, notes, mode->bend_loss_db_per_90_deg, 1);
  }
  pk_table_cell(t, "%.4f", mode->ex_share);
  pk_table_quantity(t, notes, mode->effective_area_um2, 1);
}

static void print_table(const picket_result *result, pk_notes *notes) {
  bool loss = any(result, loses), turn = any(result, bent);
  pk_text_table t = {.columns = 7 + loss + turn + pk_sweep_columns(result)};
  picket_modes_answer answer;
  pk_table_sweep(&t, result, -1);
  pk_table_cell(&t, "wavelength, nm");
  pk_table_cell(&t, "order");
  pk_table_cell(&t, "kind, nodes x y");
  pk_table_cell(&t, "index");
  pk_table_cell(&t, "group index");
  if (loss) {
    pk_table_cell(&t, "loss, dB/cm");
  }
  if (turn) {
    pk_table_cell(&t, "loss, dB per 90 deg");
  }
  pk_table_cell(&t, "Ex share");
  pk_table_cell(&t, "effective area, um2");
  for (int i = 0; picket_modes_get(result, i, &answer) == PICKET_OK; i++) {
    for (int p = 0; p < answer.point_count; p++) {
      for (int m = 0; m < answer.points[p].mode_count; m++) {
        pk_table_sweep(&t, result, i);
        print_mode(&t, notes, &answer.points[p], &answer.points[p].modes[m], loss, turn);
      }
    }
  }
  pk_table_print(&t);
}

static void print_without(const picket_result *result) {
  picket_modes_answer answer;
  for (int i = 0; picket_modes_get(result, i, &answer) == PICKET_OK; i++) {
    for (int p = 0; p < answer.point_count; p++) {
      if (answer.points[p].note) {
        printf("  %s at %.10g nm%s: %s\n", answer.points[p].failed ? "FAILED" : "nothing",
               NM_PER_UM * answer.points[p].wavelength_um, pk_sweep_where(result, i).text,
               answer.points[p].note);
      }
    }
  }
}

/* Where the energy of the modes of a point is. */
static void print_confinement(const picket_modes_point *point, const char *where) {
  for (int m = 0; m < point->mode_count; m++) {
    printf("  mode %d at %.10g nm%s: energy", point->modes[m].order,
           NM_PER_UM * point->wavelength_um, where);
    for (int i = 0; i < point->modes[m].material_count; i++) {
      const picket_confinement *part = &point->modes[m].confinement[i];
      printf("%s %.2f %% in %s", i == 0 ? "" : ",", 100 * part->share, part->material);
    }
    printf("\n");
  }
}

static void print_width(pk_text_table *t, pk_notes *notes, const picket_section_mode *mode,
                        const char *name, const picket_quantity *all) {
  pk_table_cell(t, "%d", mode->order);
  pk_table_cell(t, "%s", name);
  for (int i = 0; i < 4; i++) {
    if (isfinite(all[i].value) || all[i].note) {
      pk_table_quantity(t, notes, all[i], 1);
    } else {
      pk_table_cell(t, "%s", "");
    }
  }
}

/* Mode-field diameters at the first wavelength. */
static void print_diameters(const picket_modes_point *point, pk_notes *notes) {
  const picket_quantity none = {NAN, NAN, NULL};
  pk_text_table t = {.columns = 6};
  const char *const head[] = {"order", "mode-field diameter, um", "round", "x", "y", "overlap"};
  for (int i = 0; i < t.columns; i++) {
    pk_table_cell(&t, "%s", head[i]);
  }
  for (int m = 0; m < point->mode_count; m++) {
    const picket_section_mode *mode = &point->modes[m];
    const picket_mode_diameters *d = &mode->diameters;
    print_width(&t, notes, mode, "Petermann II",
                (picket_quantity[]){d->petermann_um, d->petermann_x_um, d->petermann_y_um, none});
    print_width(&t, notes, mode, "rms (4 sigma)",
                (picket_quantity[]){d->rms_um, d->rms_x_um, d->rms_y_um, none});
    print_width(&t, notes, mode, "1/e2 of power flow",
                (picket_quantity[]){none, d->e2_x_um, d->e2_y_um, none});
    print_width(&t, notes, mode, "best round Gaussian",
                (picket_quantity[]){d->gaussian_um, none, none, d->gaussian_overlap});
    print_width(
        &t, notes, mode, "best oval Gaussian",
        (picket_quantity[]){none, d->gaussian_x_um, d->gaussian_y_um, d->gaussian_xy_overlap});
  }
  pk_table_print(&t);
}

void pk_modes_print(const pk_arguments *arguments, const picket_result *result) {
  (void)arguments;
  pk_notes seen = {0};
  picket_modes_answer answer;
  print_table(result, &seen);
  print_without(result);
  if (picket_modes_get(result, 0, &answer) == PICKET_OK && answer.point_count > 0) {
    print_confinement(&answer.points[0], pk_sweep_where(result, 0).text);
    printf("\n");
    print_diameters(&answer.points[0], &seen);
  }
  printf("\n");
  pk_notes_print(&seen);
}
