/* aim: the value found, what it achieves, and what a mask makes of it. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;

static void print_what(const picket_aim_part *part) {
  printf("  %s%s%s = %.10g", part->quantity, part->unit[0] ? ", " : "", part->unit, part->target);
  if (isfinite(part->at_um)) {
    printf(" at %.10g nm", NM_PER_UM * part->at_um);
  }
  printf(", by %s between %.10g and %.10g\n", part->vary, part->from, part->to);
}

static void print_ends(const picket_aim_part *part, pk_notes *notes) {
  pk_notes_add(notes, part->at_from);
  pk_notes_add(notes, part->at_to);
  printf("  at the bounds: %s at %.10g, %s at %.10g\n", pk_quantity_show(part->at_from, 1).text,
         part->from, pk_quantity_show(part->at_to, 1).text, part->to);
}

static void print_part(const picket_aim_part *part, pk_notes *notes) {
  static const char *const ways[] = {
      [PICKET_DERIVATIVE_NONE] = "not known",
      [PICKET_DERIVATIVE_ANALYTIC] = "analytic",
      [PICKET_DERIVATIVE_DIFFERENCE] = "by differences",
      [PICKET_DERIVATIVE_SAMPLES] = "from the solves of the search",
  };
  pk_notes_add(notes, part->value);
  pk_notes_add(notes, part->achieved);
  pk_notes_add(notes, part->derivative);
  printf("  %s: %s\n", part->vary, pk_quantity_show(part->value, 1).text);
  printf("  %s: %s\n", part->quantity, pk_quantity_show(part->achieved, 1).text);
  printf("  derivative: %s per unit, %s\n", pk_quantity_show(part->derivative, 1).text,
         ways[part->derivative_way]);
}

static void print_feature(double um, int verdict) {
  if (isfinite(um)) {
    printf("smallest feature %.6g nm%s", NM_PER_UM * um,
           verdict < 0 ? ""
           : verdict   ? ", as the rules allow"
                       : ", BELOW WHAT THE RULES ALLOW");
  } else {
    printf("no smallest feature");
  }
}

static void print_mask(const picket_aim_answer *answer, pk_notes *notes) {
  printf("  ");
  print_feature(answer->smallest_feature_um, answer->respects_rules);
  printf("\n");
  if (!answer->snapped) {
    return;
  }
  printf("  on the mask grid:");
  for (int k = 0; k < answer->part_count; k++) {
    const picket_aim_part *part = &answer->parts[k];
    pk_notes_add(notes, part->snapped_achieved);
    if (isfinite(part->snapped)) {
      printf(" %s %.10g,", part->vary, part->snapped);
    }
    printf(" %s %s;", part->quantity, pk_quantity_show(part->snapped_achieved, 1).text);
  }
  printf(" ");
  print_feature(answer->snapped_smallest_feature_um, answer->snapped_respects_rules);
  printf("\n");
}

static void print_answer(const picket_aim_answer *answer, pk_notes *notes) {
  static const char *const unique[] = {"not shown", "more than one was seen", "yes"};
  printf("%s: %s\n", answer->polarization, answer->found ? "found" : "no solution");
  for (int k = 0; k < answer->part_count; k++) {
    print_what(&answer->parts[k]);
  }
  if (answer->part_count == 1) {
    print_ends(&answer->parts[0], notes);
  }
  if (answer->found) {
    for (int k = 0; k < answer->part_count; k++) {
      print_part(&answer->parts[k], notes);
    }
    printf("  unique: %s (%s)\n", unique[answer->unique + 1], answer->unique_basis);
    print_mask(answer, notes);
  } else {
    printf("  %s\n", answer->reason);
  }
  printf("  %d direct solve%s, %d pass%s for derivatives\n\n", answer->solves,
         answer->solves == 1 ? "" : "s", answer->derivative_passes,
         answer->derivative_passes == 1 ? "" : "es");
}

void pk_aim_print(const pk_arguments *arguments, const picket_result *result) {
  pk_notes seen = {0};
  for (int i = 0; i < picket_aim_count(result); i++) {
    picket_aim_answer answer;
    if (picket_aim_get(result, i, &answer) == PICKET_OK) {
      print_answer(&answer, &seen);
    }
  }
  pk_notes_print(&seen);
  pk_cautions_print(arguments);
}
