/* The JSON of an aim. See json_private.h. */
#include <math.h>

#include "io/json_private.h"
#include "io/write.h"

static struct json_t *aim_end(double at, picket_quantity achieved) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "at", pk_json_number(at)) &&
              pk_json_put(object, "achieved", pk_json_quantity(achieved, 1));
  return pk_json_finish(object, good);
}

static struct json_t *aim_ends(const picket_aim_part *part) {
  struct json_t *list = pk_json_list();
  bool good = list && pk_json_append(list, aim_end(part->from, part->at_from)) &&
              pk_json_append(list, aim_end(part->to, part->at_to));
  return pk_json_finish(list, good);
}

static struct json_t *derivative_word(picket_derivative_way way) {
  static const char *const words[] = {NULL, "analytic", "difference", "samples"};
  return pk_json_text(words[way]);
}

/* What both targets have. */
static bool put_aim_part(struct json_t *object, const picket_aim_part *part) {
  struct json_t *between = pk_json_list();
  bool good = pk_json_append(between, pk_json_number(part->from)) &&
              pk_json_append(between, pk_json_number(part->to));
  return pk_json_put(object, "between", between) && good &&
         pk_json_put(object, "vary", pk_json_text(part->vary)) &&
         pk_json_put(object, "value", pk_json_quantity(part->value, 1)) &&
         pk_json_put(object, "quantity", pk_json_text(part->quantity)) &&
         pk_json_put(object, "target", pk_json_number(part->target)) &&
         pk_json_put(object, "at_nm", pk_json_number(PK_NM_OF_UM * part->at_um)) &&
         pk_json_put(object, "achieved", pk_json_quantity(part->achieved, 1)) &&
         pk_json_put(object, "derivative", pk_json_quantity(part->derivative, 1)) &&
         pk_json_put(object, "derivative_by", derivative_word(part->derivative_way));
}

static struct json_t *aim_snapped(const picket_aim_answer *answer, const picket_aim_part *part,
                                  bool first) {
  if (!answer->snapped) {
    return pk_json_text(NULL);
  }
  struct json_t *object = pk_json_object();
  bool good =
      pk_json_put(object, "value",
                  pk_json_number(isnan(part->snapped) ? part->value.value : part->snapped)) &&
      pk_json_put(object, "achieved", pk_json_quantity(part->snapped_achieved, 1));
  if (first) {
    good = good &&
           pk_json_put(object, "smallest_feature_nm",
                       pk_json_number(PK_NM_OF_UM * answer->snapped_smallest_feature_um)) &&
           pk_json_put(object, "respects_rules", pk_json_verdict(answer->snapped_respects_rules));
  }
  return pk_json_finish(object, good);
}

static struct json_t *aim_also(const picket_aim_answer *answer) {
  if (answer->part_count < 2) {
    return pk_json_text(NULL);
  }
  struct json_t *object = pk_json_object();
  bool good = put_aim_part(object, &answer->parts[1]) &&
              pk_json_put(object, "snapped", aim_snapped(answer, &answer->parts[1], false));
  return pk_json_finish(object, good);
}

struct json_t *pk_json_aim(const void *user, int i) {
  const picket_aim_answer *answer = ((const picket_result *)user)->aim + i;
  bool ends = answer->part_count == 1;
  struct json_t *object = pk_json_object();
  bool good =
      pk_json_put(object, "polarization", pk_json_text(answer->polarization)) &&
      put_aim_part(object, &answer->parts[0]) &&
      pk_json_put(object, "found", pk_json_verdict(answer->found)) &&
      pk_json_put(object, "reason", pk_json_text(answer->reason)) &&
      pk_json_put(object, "ends", ends ? aim_ends(&answer->parts[0]) : pk_json_text(NULL)) &&
      pk_json_put(object, "solves", pk_json_whole(answer->solves)) &&
      pk_json_put(object, "derivative_passes", pk_json_whole(answer->derivative_passes)) &&
      pk_json_put(object, "unique", pk_json_verdict(answer->unique)) &&
      pk_json_put(object, "unique_basis", pk_json_text(answer->unique_basis)) &&
      pk_json_put(object, "smallest_feature_nm",
                  pk_json_number(PK_NM_OF_UM * answer->smallest_feature_um)) &&
      pk_json_put(object, "respects_rules", pk_json_verdict(answer->respects_rules)) &&
      pk_json_put(object, "snapped", aim_snapped(answer, &answer->parts[0], true)) &&
      pk_json_put(object, "also", aim_also(answer));
  return pk_json_finish(object, good);
}
