/* taper: a row tooth by tooth, and what it passes on. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;
enum { FIXED_COLUMNS = 11, WARNING_BYTES = 120 };

static void print_change(const picket_taper_change *change) {
  printf("  %s from %.10g to %.10g, %s", change->vary, change->from, change->to,
         picket_taper_law_name(change->law));
  if (change->law == PICKET_TAPER_POWER) {
    printf(" %.6g", change->exponent);
  }
  printf("\n");
}

static void put_number(pk_text_table *t, double value) {
  if (isfinite(value)) {
    pk_table_cell(t, "%.3g", value);
  } else {
    pk_table_cell(t, "none");
  }
}

static void put_warnings(pk_text_table *t, const picket_taper_tooth *tooth) {
  char text[WARNING_BYTES] = "";
  size_t used = 0;
  for (int bit = 1; bit <= PICKET_TAPER_ABRUPT; bit *= 2) {
    if (tooth->warnings & bit) {
      used += (size_t)snprintf(text + used, sizeof text - used, "%s%s", used ? ", " : "",
                               picket_taper_warning_name((picket_taper_warning)bit));
    }
  }
  pk_table_cell(t, "%s", tooth->failed ? "FAILED" : text);
}

static void put_head(pk_text_table *t, const picket_taper_answer *answer) {
  pk_table_cell(t, "tooth");
  pk_table_cell(t, "at, um");
  for (int i = 0; i < answer->change_count; i++) {
    pk_table_cell(t, "%s", answer->changes[i].vary);
  }
  pk_table_cell(t, "Bloch index");
  pk_table_cell(t, "group index");
  pk_table_cell(t, "clearance, nm");
  pk_table_cell(t, "mode size, um");
  pk_table_cell(t, "overlap with next");
  pk_table_cell(t, "reflection");
  if (isfinite(answer->fibre_um)) {
    pk_table_cell(t, "share with fibre");
  }
  pk_table_cell(t, "adiabatic");
  pk_table_cell(t, "feature, nm");
  pk_table_cell(t, "warnings");
}

static void put_tooth(pk_text_table *t, pk_notes *notes, const picket_taper_answer *answer,
                      const picket_taper_tooth *tooth) {
  bool last = tooth->number == answer->tooth_count;
  pk_table_cell(t, "%d", tooth->number);
  pk_table_cell(t, "%.6g", tooth->at_um);
  for (int i = 0; i < tooth->value_count; i++) {
    pk_table_cell(t, "%.8g", tooth->values[i]);
  }
  pk_table_quantity(t, notes, tooth->bloch_index, 1);
  pk_table_quantity(t, notes, tooth->group_index, 1);
  pk_table_quantity(t, notes, tooth->clearance_um, NM_PER_UM);
  pk_table_quantity(t, notes, tooth->mode_size_um, 1);
  if (last) {
    pk_table_cell(t, "-");
    pk_table_cell(t, "-");
  } else {
    pk_table_quantity(t, notes, tooth->overlap_next, 1);
    put_number(t, tooth->reflection_next.value);
  }
  if (isfinite(answer->fibre_um)) {
    pk_table_quantity(t, notes, tooth->fibre_share, 1);
  }
  put_number(t, tooth->adiabatic);
  put_number(t, NM_PER_UM * tooth->smallest_feature_um);
  put_warnings(t, tooth);
}

static void print_failed(const picket_taper_answer *answer) {
  for (int i = 0; i < answer->tooth_count; i++) {
    if (answer->teeth[i].failed) {
      printf("  FAILED at tooth %d: %s\n", answer->teeth[i].number, answer->teeth[i].note);
    }
  }
}

/* 10 log10 of a share, for those who count in dB. */
static void print_share(const char *what, picket_quantity q, pk_notes *notes) {
  pk_notes_add(notes, q);
  printf("  %s: %s", what, pk_quantity_show(q, 1).text);
  if (q.value > 0) {
    printf(" (%.4g dB)", 10 * log10(q.value));
  }
  printf("\n");
}

static void print_answer(const picket_taper_answer *answer, pk_notes *notes) {
  bool fibre = isfinite(answer->fibre_um);
  int warned = 0;
  pk_text_table t = {.columns = FIXED_COLUMNS + (fibre ? 1 : 0) + answer->change_count};
  printf("%s: %d teeth over %.6g um at %.10g nm\n", picket_polarization_name(answer->polarization),
         answer->tooth_count, answer->length_um, NM_PER_UM * answer->wavelength_um);
  for (int i = 0; i < answer->change_count; i++) {
    print_change(&answer->changes[i]);
  }
  put_head(&t, answer);
  for (int i = 0; i < answer->tooth_count; i++) {
    put_tooth(&t, notes, answer, &answer->teeth[i]);
    warned += answer->teeth[i].warnings != 0;
  }
  pk_table_print(&t);
  print_failed(answer);
  print_share("product of all overlaps", answer->transmission, notes);
  if (fibre) {
    char what[80];
    snprintf(what, sizeof what, "share with a fibre of %.6g um at the end", answer->fibre_um);
    print_share(what, answer->fibre_share, notes);
  }
  printf("  %d of %d teeth with warnings\n\n", warned, answer->tooth_count);
}

static void print_meaning(void) {
  printf(
      "Overlaps: of the transverse H of neighbouring cells' modes, each as if its cell went on for "
      "ever, where\nthe cells meet. Their product is what passes if whatever a joint loses stays "
      "lost; what it reflects stands\nbeside it. Sizes (4 sigma of the power flow) and shares "
      "speak "
      "of the lateral direction alone. Adiabatic:\nhow fast the size changes, over what the "
      "length-scale criterion of Love et al., IEE Proc. J 138, 343\n(1991), allows; it holds below "
      "1.\n");
}

void pk_taper_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int i = 0; i < picket_taper_count(result); i++) {
    picket_taper_answer answer;
    if (picket_taper_get(result, i, &answer) == PICKET_OK) {
      print_answer(&answer, &seen);
    }
  }
  print_meaning();
  pk_notes_print(&seen);
  pk_cautions_print(arguments);
}
