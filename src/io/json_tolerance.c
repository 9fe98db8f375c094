/* The JSON of tolerances. See json_private.h. */
#include <math.h>

#include "io/json_private.h"
#include "io/write.h"

static struct json_t *sensitivity(const picket_tolerance_sensitivity *from) {
  static const char *const ways[] = {NULL, "analytic", "difference", "samples"};
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "vary", pk_json_text(from->vary)) &&
              pk_json_put(object, "group", pk_json_text(from->group)) &&
              pk_json_put(object, "unit", pk_json_text(from->unit)) &&
              pk_json_put(object, "nominal", pk_json_number(from->nominal)) &&
              pk_json_put(object, "sigma", pk_json_number(from->sigma)) &&
              pk_json_put(object, "from", pk_json_number(from->from)) &&
              pk_json_put(object, "to", pk_json_number(from->to)) &&
              pk_json_put(object, "per_unit", pk_json_quantity(from->per_unit, 1)) &&
              pk_json_put(object, "per_unit_by", pk_json_text(ways[from->per_unit_way])) &&
              pk_json_put(object, "second_per_unit2", pk_json_quantity(from->second_per_unit2, 1));
  return pk_json_finish(object, good);
}

static struct json_t *deviate(const picket_tolerance_deviate *from) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "name", pk_json_text(from->name)) &&
              pk_json_put(object, "kind", pk_json_text(from->normal ? "normal" : "uniform")) &&
              pk_json_put(object, "first", pk_json_number(from->first)) &&
              pk_json_put(object, "second", pk_json_number(from->second));
  return pk_json_finish(object, good);
}

static struct json_t *places(const picket_tolerance_corner *corner) {
  struct json_t *object = pk_json_object();
  bool good = true;
  for (int i = 0; i < corner->place_count && good; i++) {
    good = pk_json_put(object, corner->places[i].vary, pk_json_number(corner->places[i].value));
  }
  return pk_json_finish(object, good);
}

static struct json_t *corner(const picket_tolerance_corner *from) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "at", places(from)) &&
              pk_json_put(object, "value", pk_json_quantity(from->value, 1)) &&
              pk_json_put(object, "direct", pk_json_verdict(from->direct));
  return pk_json_finish(object, good);
}

static struct json_t *check(const picket_tolerance_check *from) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "direct", pk_json_quantity(from->direct, 1)) &&
              pk_json_put(object, "surrogate", pk_json_number(from->surrogate)) &&
              pk_json_put(object, "near_limit", pk_json_verdict(from->near_limit));
  return pk_json_finish(object, good);
}

static bool put_sensitivities(struct json_t *object, const picket_tolerance_answer *answer) {
  struct json_t *list = pk_json_list(), *deviates = pk_json_list();
  bool good = list && deviates;
  for (int i = 0; i < answer->sensitivity_count && good; i++) {
    good = pk_json_append(list, sensitivity(&answer->sensitivities[i]));
  }
  for (int i = 0; i < answer->deviate_count && good; i++) {
    good = pk_json_append(deviates, deviate(&answer->deviates[i]));
  }
  bool put = pk_json_put(object, "sensitivities", list);
  return pk_json_put(object, "deviates", deviates) && put && good;
}

static bool put_corners(struct json_t *object, const picket_tolerance_answer *answer) {
  struct json_t *list = pk_json_list();
  bool good = list != NULL, known = answer->worst >= 0;
  for (int i = 0; i < answer->corner_count && good; i++) {
    good = pk_json_append(list, corner(&answer->corners[i]));
  }
  return pk_json_put(object, "corners", list) && good &&
         pk_json_put(object, "corner_convention", pk_json_text(answer->corner_convention)) &&
         pk_json_put(object, "worst", pk_json_quantity(answer->worst_value, 1)) &&
         pk_json_put(object, "worst_at",
                     known ? places(&answer->corners[answer->worst]) : pk_json_text(NULL));
}

static struct json_t *surrogate(const picket_tolerance_answer *answer) {
  struct json_t *object = pk_json_object(), *list = pk_json_list();
  bool good = list != NULL;
  for (int i = 0; i < answer->check_count && good; i++) {
    good = pk_json_append(list, check(&answer->checks[i]));
  }
  good = pk_json_put(object, "checks", list) && good &&
         pk_json_put(object, "kind", pk_json_text("quadratic with cross terms")) &&
         pk_json_put(object, "largest_error", pk_json_number(answer->surrogate_error)) &&
         pk_json_put(object, "note", pk_json_text(answer->surrogate_note));
  return pk_json_finish(object, good);
}

static struct json_t *interval(const picket_tolerance_yield *yield) {
  struct json_t *list = pk_json_list();
  bool good = pk_json_append(list, pk_json_number(yield->low)) &&
              pk_json_append(list, pk_json_number(yield->high));
  return pk_json_finish(list, good);
}

static struct json_t *judged(const picket_tolerance_yield *yield) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "by_surrogate", pk_json_whole(yield->by_surrogate)) &&
              pk_json_put(object, "direct", pk_json_whole(yield->direct)) &&
              pk_json_put(object, "estimated", pk_json_whole(yield->estimated)) &&
              pk_json_put(object, "undecided", pk_json_whole(yield->undecided)) &&
              pk_json_put(object, "without_value", pk_json_whole(yield->without_value));
  return pk_json_finish(object, good);
}

static bool put_yield(struct json_t *object, const picket_tolerance_yield *yield) {
  return pk_json_put(object, "yield", pk_json_quantity(yield->value, 1)) &&
         pk_json_put(object, "yield_interval", interval(yield)) &&
         pk_json_put(object, "interval", pk_json_text("Wilson, 95 %")) &&
         pk_json_put(object, "samples", pk_json_whole(yield->samples)) &&
         pk_json_put(object, "seed", pk_json_whole(yield->seed)) &&
         pk_json_put(object, "judged", judged(yield));
}

struct json_t *pk_json_tolerance(const void *user, int i) {
  const picket_tolerance_answer *answer = ((const picket_result *)user)->tolerance + i;
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "polarization", pk_json_text(answer->polarization)) &&
              pk_json_put(object, "quantity", pk_json_text(answer->quantity)) &&
              pk_json_put(object, "unit", pk_json_text(answer->unit)) &&
              pk_json_put(object, "at_nm", pk_json_number(PK_NM_OF_UM * answer->at_um)) &&
              pk_json_put(object, "at_least", pk_json_number(answer->at_least)) &&
              pk_json_put(object, "at_most", pk_json_number(answer->at_most)) &&
              pk_json_put(object, "nominal", pk_json_quantity(answer->nominal, 1)) &&
              pk_json_put(object, "nominal_meets", pk_json_verdict(answer->nominal_meets)) &&
              put_sensitivities(object, answer) && put_corners(object, answer) &&
              put_yield(object, &answer->yield) &&
              pk_json_put(object, "surrogate", surrogate(answer)) &&
              pk_json_put(object, "solves", pk_json_whole(answer->solves));
  return pk_json_finish(object, good);
}
