/* tolerance: the yield and the worst corner first, then what they come from. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000, PERCENT = 100;
enum { MOST_CORNERS = 32 }; /* on a screen; the documents have all */

static void print_required(const picket_tolerance_answer *a) {
  printf("%s%s%s", a->quantity, a->unit[0] ? ", " : "", a->unit);
  if (isfinite(a->at_least) && isfinite(a->at_most)) {
    printf(", between %.10g and %.10g", a->at_least, a->at_most);
  } else {
    printf(", at %s %.10g", isfinite(a->at_least) ? "least" : "most",
           isfinite(a->at_least) ? a->at_least : a->at_most);
  }
  if (isfinite(a->at_um)) {
    printf(", at %.10g nm", NM_PER_UM * a->at_um);
  }
}

static const char *verdict(const picket_tolerance_answer *a, picket_quantity q) {
  double below = isfinite(a->at_least) ? q.value - a->at_least : INFINITY;
  double above = isfinite(a->at_most) ? a->at_most - q.value : INFINITY;
  double margin = fmin(below, above);
  if (!isfinite(q.value) || !(fabs(margin) > q.uncertainty)) {
    return "not decided within its bar";
  }
  return margin > 0 ? "met" : "NOT MET";
}

static void print_places(const picket_tolerance_corner *corner) {
  for (int i = 0; i < corner->place_count; i++) {
    printf("%s%s %.10g", i > 0 ? ", " : "", corner->places[i].vary, corner->places[i].value);
  }
}

static void print_head(const picket_tolerance_answer *a, pk_notes *notes) {
  pk_notes_add(notes, a->yield.value);
  pk_notes_add(notes, a->nominal);
  pk_notes_add(notes, a->worst_value);
  printf("%s: yield %s %%\n  required: ", a->polarization,
         pk_quantity_show(a->yield.value, PERCENT).text);
  print_required(a);
  printf("\n  in the file: %s, %s\n", pk_quantity_show(a->nominal, 1).text, verdict(a, a->nominal));
  printf("  worst corner: %s, %s", pk_quantity_show(a->worst_value, 1).text,
         verdict(a, a->worst_value));
  if (a->worst >= 0) {
    printf("; ");
    print_places(&a->corners[a->worst]);
  }
  printf("\n");
}

static void print_sensitivities(const picket_tolerance_answer *a, pk_notes *notes) {
  static const char *const ways[] = {"", "analytic", "difference", "samples"};
  pk_text_table table = {.columns = 6};
  pk_table_cell(&table, "sensitivity to");
  pk_table_cell(&table, "spread");
  pk_table_cell(&table, "group");
  pk_table_cell(&table, "per unit");
  pk_table_cell(&table, "second, per unit squared");
  pk_table_cell(&table, "by");
  for (int i = 0; i < a->sensitivity_count; i++) {
    const picket_tolerance_sensitivity *s = &a->sensitivities[i];
    pk_table_cell(&table, "%s%s%s", s->vary, s->unit[0] ? ", " : "", s->unit);
    if (isfinite(s->sigma)) {
      pk_table_cell(&table, "sigma %.6g", s->sigma);
    } else {
      pk_table_cell(&table, "%.6g to %.6g", s->from, s->to);
    }
    pk_table_cell(&table, "%s", s->group ? s->group : "");
    pk_table_quantity(&table, notes, s->per_unit, 1);
    pk_table_quantity(&table, notes, s->second_per_unit2, 1);
    pk_table_cell(&table, "%s", ways[s->per_unit_way]);
  }
  pk_table_print(&table);
}

static void print_deviates(const picket_tolerance_answer *a) {
  pk_text_table table = {.columns = 3};
  pk_table_cell(&table, "by itself");
  pk_table_cell(&table, "change for one sigma, or half a range");
  pk_table_cell(&table, "second");
  for (int j = 0; j < a->deviate_count; j++) {
    pk_table_cell(&table, "%s", a->deviates[j].name);
    pk_table_cell(&table, "%.4g", a->deviates[j].first);
    pk_table_cell(&table, "%.4g", a->deviates[j].second);
  }
  pk_table_print(&table);
}

static void print_corners(const picket_tolerance_answer *a, pk_notes *notes) {
  int shown = a->corner_count <= MOST_CORNERS ? a->corner_count : 0;
  printf("  corners (%s): %d%s\n", a->corner_convention, a->corner_count,
         shown ? "" : ", all of them in --json and --csv");
  for (int i = 0; i < shown; i++) {
    const picket_tolerance_corner *corner = &a->corners[i];
    pk_notes_add(notes, corner->value);
    printf("    %s%s at ", pk_quantity_show(corner->value, 1).text,
           corner->direct ? "" : " (surrogate)");
    print_places(corner);
    printf("\n");
  }
}

static void print_yield(const picket_tolerance_answer *a) {
  const picket_tolerance_yield *y = &a->yield;
  printf("  samples: %d from seed %d, 95 %% interval of the count %.6g to %.6g (Wilson)\n",
         y->samples, y->seed, y->low, y->high);
  if (isfinite(a->surrogate_error)) {
    printf(
        "  surrogate: quadratic, off by up to %.3g in %d direct solves at random and near the "
        "limit\n",
        a->surrogate_error, a->check_count);
  } else {
    printf("  surrogate: none: %s\n", a->surrogate_note ? a->surrogate_note : "not made");
  }
  printf("  judged: %d by the surrogate, %d by direct solves", y->by_surrogate, y->direct);
  if (y->estimated > 0) {
    printf(", %d as those that were solved (tolerance.direct_samples allows no more)",
           y->estimated);
  }
  printf("; %d cannot be decided within the bar of the quantity", y->undecided);
  if (y->without_value > 0) {
    printf("; %d without a value, counted as not met", y->without_value);
  }
  printf("\n  %d solves\n\n", a->solves);
}

void pk_tolerance_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int i = 0; i < picket_tolerance_count(result); i++) {
    picket_tolerance_answer answer;
    if (picket_tolerance_get(result, i, &answer) == PICKET_OK) {
      print_head(&answer, &seen);
      print_sensitivities(&answer, &seen);
      print_deviates(&answer);
      print_corners(&answer, &seen);
      print_yield(&answer);
    }
  }
  pk_notes_print(&seen);
  pk_cautions_print(arguments);
}
