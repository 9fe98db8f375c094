/* The sheet of an aim: a row for each varied number. */
#include "io/csv_sheet.h"
#include "io/write.h"

static const char *verdict(int known) {
  return known < 0 ? NULL : known ? "true" : "false";
}

static void write_aim_part(sheet *s, const picket_aim_answer *answer, const picket_aim_part *part) {
  static const char *const ways[] = {NULL, "analytic", "difference", "samples"};
  put_text(s, answer->polarization);
  put_text(s, part->vary);
  put_quantity(s, part->value, 1);
  put_text(s, part->quantity);
  put_number(s, part->target);
  put_number(s, PK_NM_OF_UM * part->at_um);
  put_quantity(s, part->achieved, 1);
  put_quantity(s, part->derivative, 1);
  put_text(s, ways[part->derivative_way]);
  put_flag(s, answer->found);
  put_quantity(s, part->at_from, 1);
  put_quantity(s, part->at_to, 1);
  put_number(s, answer->solves);
  put_text(s, verdict(answer->unique));
  put_number(s, PK_NM_OF_UM * answer->smallest_feature_um);
  put_text(s, verdict(answer->respects_rules));
  put_number(s, part->snapped);
  put_quantity(s, part->snapped_achieved, 1);
  put_text(s, answer->snapped ? verdict(answer->snapped_respects_rules) : NULL);
  put_text(s, answer->reason);
  end_row(s);
}

void pk_csv_aim(sheet *s, const picket_result *result) {
  static const char *const header[] = {"polarization",
                                       "vary",
                                       "value",
                                       "value_uncertainty",
                                       "quantity",
                                       "target",
                                       "at_nm",
                                       "achieved",
                                       "achieved_uncertainty",
                                       "derivative",
                                       "derivative_uncertainty",
                                       "derivative_by",
                                       "found",
                                       "at_lower_bound",
                                       "at_lower_bound_uncertainty",
                                       "at_upper_bound",
                                       "at_upper_bound_uncertainty",
                                       "solves",
                                       "unique",
                                       "smallest_feature_nm",
                                       "respects_rules",
                                       "snapped",
                                       "snapped_achieved",
                                       "snapped_achieved_uncertainty",
                                       "snapped_respects_rules",
                                       "reason",
                                       NULL};
  put_header(s, header);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    for (int k = 0; k < result->aim[i].part_count; k++) {
      write_aim_part(s, &result->aim[i], &result->aim[i].parts[k]);
    }
  }
}
