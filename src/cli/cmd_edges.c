/* edges: how clear the operating band is, then the stop bands, then how good the estimate was. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static void print_where(const picket_operating_band *band) {
  if (band->from_um == band->to_um) {
    printf("at %.10g nm", NM_PER_UM * band->from_um);
  } else {
    printf("from %.10g to %.10g nm", NM_PER_UM * band->from_um, NM_PER_UM * band->to_um);
  }
}

static void print_operating(const picket_operating_band *band, const char *word, pk_notes *notes) {
  static const char *const what[] = {
      [PICKET_REGIME_UNKNOWN] = "regime unknown",
      [PICKET_REGIME_SUBWAVELENGTH] = "subwavelength",
      [PICKET_REGIME_STOP_BAND] = "meets a stop band",
      [PICKET_REGIME_RADIATING] = "radiating",
  };
  if (!band->given) {
    printf("%s: no operating band given (light.wavelength_nm)\n", word);
    return;
  }
  printf("%s: %s ", word, what[band->regime]);
  print_where(band);
  pk_notes_add(notes, band->clearance_um);
  printf("; clearance %s nm%s\n", pk_quantity_show(band->clearance_um, NM_PER_UM).text,
         band->clearance_um.value < 0 ? " (negative: it reaches into or past the stop band)" : "");
}

static const char *confined_word(const picket_stop_band *band) {
  return band->short_confined && band->long_confined ? "both"
         : band->long_confined                       ? "long only"
         : band->short_confined                      ? "short only"
                                                     : "neither";
}

static void print_stop_bands(const picket_edges_answer *answer, pk_notes *notes) {
  pk_text_table t = {.columns = 5};
  pk_table_cell(&t, "order");
  pk_table_cell(&t, "short edge, nm");
  pk_table_cell(&t, "long edge, nm");
  pk_table_cell(&t, "attenuation, dB/pitch");
  pk_table_cell(&t, "edges confined");
  for (int i = 0; i < answer->band_count; i++) {
    const picket_stop_band *band = &answer->bands[i];
    pk_table_cell(&t, "%d", band->order);
    pk_table_quantity(&t, notes, band->short_um, NM_PER_UM);
    pk_table_quantity(&t, notes, band->long_um, NM_PER_UM);
    pk_table_quantity(&t, notes, band->attenuation_db_per_pitch, 1);
    pk_table_cell(&t, "%s", confined_word(band));
  }
  pk_table_print(&t);
}

static void print_estimate(const picket_edge_estimate *estimate, pk_notes *notes) {
  if (!estimate->method) {
    return;
  }
  printf("  estimate (%s): ", estimate->method);
  if (isnan(estimate->centre_um)) {
    printf("no centre where the materials are known\n");
    return;
  }
  printf("centre %.6g nm", NM_PER_UM * estimate->centre_um);
  if (!isnan(estimate->error_um.value)) {
    printf(", off by %s nm", pk_quantity_show(estimate->error_um, NM_PER_UM).text);
  }
  pk_notes_add(notes, estimate->error_um);
  printf("\n");
}

/* --- A sweep: one table for each polarization ----------------------------------------------------
 */

static void print_sweep_row(pk_text_table *t, pk_notes *notes, const picket_edges_answer *answer,
                            const picket_stop_band *band) {
  pk_table_cell(t, "%d", band->order);
  pk_table_quantity(t, notes, band->short_um, NM_PER_UM);
  pk_table_quantity(t, notes, band->long_um, NM_PER_UM);
  pk_table_quantity(t, notes, band->attenuation_db_per_pitch, 1);
  if (answer->operating.given) {
    pk_table_quantity(t, notes, answer->operating.clearance_um, NM_PER_UM);
  } else {
    pk_table_cell(t, "none");
  }
  pk_table_cell(t, "%s", confined_word(band));
}

static void print_sweep_table(const picket_result *result, picket_polarization polarization,
                              pk_notes *notes) {
  pk_text_table t = {.columns = 6 + pk_sweep_columns(result)};
  picket_edges_answer answer;
  pk_table_sweep(&t, result, -1);
  pk_table_cell(&t, "order");
  pk_table_cell(&t, "short edge, nm");
  pk_table_cell(&t, "long edge, nm");
  pk_table_cell(&t, "attenuation, dB/pitch");
  pk_table_cell(&t, "clearance, nm");
  pk_table_cell(&t, "edges confined");
  for (int i = 0; picket_edges_get(result, i, &answer) == PICKET_OK; i++) {
    for (int b = 0; answer.polarization == polarization && b < answer.band_count; b++) {
      pk_table_sweep(&t, result, i);
      print_sweep_row(&t, notes, &answer, &answer.bands[b]);
    }
  }
  pk_table_print(&t);
}

static void print_sweep(const picket_result *result, pk_notes *notes) {
  picket_edges_answer answer;
  for (int p = PICKET_EY; p <= PICKET_TE_LIKE; p++) {
    int count = 0;
    for (int i = 0; picket_edges_get(result, i, &answer) == PICKET_OK; i++) {
      count += (int)answer.polarization == p;
    }
    if (count == 0) {
      continue;
    }
    printf("%s: stop bands\n", picket_polarization_name((picket_polarization)p));
    print_sweep_table(result, (picket_polarization)p, notes);
    for (int i = 0; picket_edges_get(result, i, &answer) == PICKET_OK; i++) {
      if ((int)answer.polarization == p && answer.failed) {
        printf("  FAILED%s: %s\n", pk_sweep_where(result, i).text, answer.note);
      }
    }
    printf("\n");
  }
}

/* What the two-dimensional models of a channel say, beside the answer. */
static void print_comparisons(const picket_result *result, int answer, pk_notes *notes) {
  pk_text_table t = {.columns = 3};
  picket_edge_comparison c;
  pk_table_cell(&t, "model");
  pk_table_cell(&t, "long edge, nm");
  pk_table_cell(&t, "off by, nm");
  for (int i = 0; picket_edges_comparison_get(result, i, &c) == PICKET_OK; i++) {
    if (c.answer == answer) {
      pk_table_cell(&t, "%s", c.method);
      pk_table_quantity(&t, notes, c.long_um, NM_PER_UM);
      pk_table_quantity(&t, notes, c.error_um, NM_PER_UM);
    }
  }
  pk_table_print(&t);
}

static void print_answers(const picket_result *result, pk_notes *notes) {
  picket_edges_answer answer;
  for (int i = 0; picket_edges_get(result, i, &answer) == PICKET_OK; i++) {
    print_operating(&answer.operating, picket_polarization_name(answer.polarization), notes);
    print_stop_bands(&answer, notes);
    print_estimate(&answer.estimate, notes);
    print_comparisons(result, i, notes);
    printf("\n");
  }
}

void pk_edges_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  if (picket_sweep_path(result)) {
    print_sweep(result, &seen);
  } else {
    print_answers(result, &seen);
  }
  picket_edges_answer first = {.polarization = PICKET_EY};
  (void)picket_edges_get(result, 0, &first);
  pk_notes_print(&seen);
  pk_cautions_print_of(arguments, first.polarization);
}
