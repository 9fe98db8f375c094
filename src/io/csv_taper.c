/* The sheet of a row: one line for each tooth, with a column for each number that changes. */
#include <stdio.h>

#include "io/csv_sheet.h"
#include "io/write.h"

enum { WARNING_BYTES = 120 };

/* "stop-band; small-feature" */
static void put_warnings(sheet *s, int warnings) {
  char text[WARNING_BYTES] = "";
  size_t used = 0;
  for (int bit = 1; bit <= PICKET_TAPER_ABRUPT; bit *= 2) {
    if (warnings & bit) {
      used += (size_t)snprintf(text + used, sizeof text - used, "%s%s", used ? "; " : "",
                               picket_taper_warning_name((picket_taper_warning)bit));
    }
  }
  put_text(s, text);
}

static void write_tooth(sheet *s, const picket_taper_answer *answer, const picket_taper_tooth *t) {
  bool known = t->regime != PICKET_REGIME_UNKNOWN;
  put_text(s, pk_word_polarization(answer->polarization));
  put_number(s, t->number);
  put_number(s, t->at_um);
  for (int i = 0; i < t->value_count; i++) {
    put_number(s, t->values[i]);
  }
  put_number(s, PK_NM_OF_UM * t->pitch_um);
  put_quantity(s, t->bloch_index, 1);
  put_quantity(s, t->group_index, 1);
  put_quantity(s, t->loss_db_per_cm, 1);
  put_quantity(s, t->clearance_um, PK_NM_OF_UM);
  put_text(s, known ? picket_regime_name(t->regime) : NULL);
  put_quantity(s, t->mode_size_um, 1);
  put_quantity(s, t->overlap_next, 1);
  put_quantity(s, t->reflection_next, 1);
  put_quantity(s, t->fibre_share, 1);
  put_number(s, t->next_index);
  put_number(s, t->adiabatic);
  put_number(s, PK_NM_OF_UM * t->smallest_feature_um);
  put_warnings(s, t->warnings);
  put_flag(s, t->failed);
  put_text(s, t->note);
  end_row(s);
}

void pk_csv_taper(sheet *s, const picket_result *result) {
  static const char *const first[] = {"polarization", "tooth", "at_um", NULL};
  static const char *const rest[] = {"pitch_nm",
                                     "bloch_index",
                                     "bloch_index_uncertainty",
                                     "group_index",
                                     "group_index_uncertainty",
                                     "loss_db_per_cm",
                                     "loss_uncertainty_db_per_cm",
                                     "clearance_nm",
                                     "clearance_uncertainty_nm",
                                     "regime",
                                     "mode_size_um",
                                     "mode_size_uncertainty_um",
                                     "overlap_next",
                                     "overlap_next_uncertainty",
                                     "reflection_next",
                                     "reflection_next_uncertainty",
                                     "fibre_share",
                                     "fibre_share_uncertainty",
                                     "next_index",
                                     "adiabatic",
                                     "smallest_feature_nm",
                                     "warnings",
                                     "failed",
                                     "note",
                                     NULL};
  put_header(s, first);
  for (int i = 0; i < result->taper[0].change_count; i++) {
    put_text(s, result->taper[0].changes[i].vary);
  }
  put_header(s, rest);
  end_row(s);
  for (int a = 0; a < result->count; a++) {
    for (int i = 0; i < result->taper[a].tooth_count; i++) {
      write_tooth(s, &result->taper[a], &result->taper[a].teeth[i]);
    }
  }
}
