/* The sheet of tolerances: the nominal value, a row for each sensitivity and each corner, and the
 * yield. The last columns are the numbers that spread, by their paths. */
#include "io/csv_sheet.h"
#include "io/write.h"

/* The first columns. */
static void put_start(sheet *s, const picket_tolerance_answer *answer, const char *row,
                      const char *vary, picket_quantity value) {
  put_text(s, answer->polarization);
  put_text(s, row);
  put_text(s, vary);
  put_quantity(s, value, 1);
}

/* The middle ones: second derivative, way, interval. */
static void put_middle(sheet *s, picket_quantity second, const char *by, double low, double high) {
  put_quantity(s, second, 1);
  put_text(s, by);
  put_number(s, low);
  put_number(s, high);
}

/* `corner` null: where the file has them, if `nominal`, else nothing. */
static void put_places(sheet *s, const picket_tolerance_answer *answer,
                       const picket_tolerance_corner *corner, bool nominal) {
  for (int i = 0; i < answer->sensitivity_count; i++) {
    put_number(s, corner    ? corner->places[i].value
                  : nominal ? answer->sensitivities[i].nominal
                            : NAN);
  }
  end_row(s);
}

static void write_answer(sheet *s, const picket_tolerance_answer *answer) {
  static const char *const ways[] = {NULL, "analytic", "difference", "samples"};
  const picket_quantity none = {NAN, NAN, NULL};
  put_start(s, answer, "nominal", NULL, answer->nominal);
  put_middle(s, none, "direct", answer->at_least, answer->at_most);
  put_places(s, answer, NULL, true);
  for (int i = 0; i < answer->sensitivity_count; i++) {
    const picket_tolerance_sensitivity *one = &answer->sensitivities[i];
    put_start(s, answer, "sensitivity", one->vary, one->per_unit);
    put_middle(s, one->second_per_unit2, ways[one->per_unit_way], NAN, NAN);
    put_places(s, answer, NULL, false);
  }
  for (int i = 0; i < answer->corner_count; i++) {
    const picket_tolerance_corner *corner = &answer->corners[i];
    put_start(s, answer, i == answer->worst ? "worst corner" : "corner", NULL, corner->value);
    put_middle(s, none, corner->direct ? "direct" : "surrogate", NAN, NAN);
    put_places(s, answer, corner, false);
  }
  put_start(s, answer, "yield", NULL, answer->yield.value);
  put_middle(s, none, NULL, answer->yield.low, answer->yield.high);
  put_places(s, answer, NULL, false);
}

void pk_csv_tolerance(sheet *s, const picket_result *result) {
  static const char *const header[] = {
      "polarization",       "row", "vary", "value", "uncertainty", "second_per_unit2",
      "second_uncertainty", "by",  "low",  "high",  NULL};
  put_header(s, header);
  for (int i = 0; result->count > 0 && i < result->tolerance[0].sensitivity_count; i++) {
    put_text(s, result->tolerance[0].sensitivities[i].vary);
  }
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    write_answer(s, &result->tolerance[i]);
  }
}
