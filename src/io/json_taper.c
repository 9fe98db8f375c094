/* The JSON of a row. See json_private.h. */
#include <math.h>

#include "io/json_private.h"
#include "io/write.h"

static struct json_t *law_of(const picket_taper_change *change) {
  struct json_t *object = pk_json_object();
  bool power = change->law == PICKET_TAPER_POWER;
  bool good = pk_json_put(object, "vary", pk_json_text(change->vary)) &&
              pk_json_put(object, "from", pk_json_number(change->from)) &&
              pk_json_put(object, "to", pk_json_number(change->to)) &&
              pk_json_put(object, "law", pk_json_text(picket_taper_law_name(change->law))) &&
              pk_json_put(object, "exponent", pk_json_number(power ? change->exponent : NAN));
  return pk_json_finish(object, good);
}

static struct json_t *changes_of(const picket_taper_answer *answer) {
  struct json_t *list = pk_json_list();
  bool good = list != NULL;
  for (int i = 0; good && i < answer->change_count; i++) {
    good = pk_json_append(list, law_of(&answer->changes[i]));
  }
  return pk_json_finish(list, good);
}

static struct json_t *values_of(const picket_taper_tooth *tooth) {
  struct json_t *list = pk_json_list();
  bool good = list != NULL;
  for (int i = 0; good && i < tooth->value_count; i++) {
    good = pk_json_append(list, pk_json_number(tooth->values[i]));
  }
  return pk_json_finish(list, good);
}

static struct json_t *warnings_of(const picket_taper_tooth *tooth) {
  struct json_t *list = pk_json_list();
  bool good = list != NULL;
  for (int bit = 1; good && bit <= PICKET_TAPER_ABRUPT; bit *= 2) {
    if (tooth->warnings & bit) {
      good =
          pk_json_append(list, pk_json_text(picket_taper_warning_name((picket_taper_warning)bit)));
    }
  }
  return pk_json_finish(list, good);
}

static struct json_t *tooth_of(const picket_taper_tooth *t) {
  struct json_t *object = pk_json_object();
  bool known = t->regime != PICKET_REGIME_UNKNOWN;
  bool good =
      pk_json_put(object, "number", pk_json_whole(t->number)) &&
      pk_json_put(object, "at_um", pk_json_number(t->at_um)) &&
      pk_json_put(object, "pitch_nm", pk_json_number(PK_NM_OF_UM * t->pitch_um)) &&
      pk_json_put(object, "values", values_of(t)) &&
      pk_json_put(object, "bloch_index", pk_json_quantity(t->bloch_index, 1)) &&
      pk_json_put(object, "group_index", pk_json_quantity(t->group_index, 1)) &&
      pk_json_put(object, "loss_db_per_cm", pk_json_quantity(t->loss_db_per_cm, 1)) &&
      pk_json_put(object, "clearance_nm", pk_json_quantity(t->clearance_um, PK_NM_OF_UM)) &&
      pk_json_put(object, "regime", pk_json_text(known ? picket_regime_name(t->regime) : NULL)) &&
      pk_json_put(object, "mode_size_um", pk_json_quantity(t->mode_size_um, 1)) &&
      pk_json_put(object, "overlap_next", pk_json_quantity(t->overlap_next, 1)) &&
      pk_json_put(object, "reflection_next", pk_json_quantity(t->reflection_next, 1)) &&
      pk_json_put(object, "fibre_share", pk_json_quantity(t->fibre_share, 1)) &&
      pk_json_put(object, "next_index", pk_json_number(t->next_index)) &&
      pk_json_put(object, "adiabatic", pk_json_number(t->adiabatic)) &&
      pk_json_put(object, "smallest_feature_nm",
                  pk_json_number(PK_NM_OF_UM * t->smallest_feature_um)) &&
      pk_json_put(object, "warnings", warnings_of(t)) &&
      pk_json_put(object, "failed", pk_json_verdict(t->failed)) &&
      pk_json_put(object, "note", pk_json_text(t->note));
  return pk_json_finish(object, good);
}

static struct json_t *teeth_of(const picket_taper_answer *answer) {
  struct json_t *list = pk_json_list();
  bool good = list != NULL;
  for (int i = 0; good && i < answer->tooth_count; i++) {
    good = pk_json_append(list, tooth_of(&answer->teeth[i]));
  }
  return pk_json_finish(list, good);
}

struct json_t *pk_json_taper(const void *user, int i) {
  const picket_taper_answer *answer = ((const picket_result *)user)->taper + i;
  struct json_t *object = pk_json_object();
  bool good =
      pk_json_put(object, "polarization",
                  pk_json_text(pk_word_polarization(answer->polarization))) &&
      pk_json_put(object, "wavelength_nm", pk_json_number(PK_NM_OF_UM * answer->wavelength_um)) &&
      pk_json_put(object, "fibre_um", pk_json_number(answer->fibre_um)) &&
      pk_json_put(object, "length_um", pk_json_number(answer->length_um)) &&
      pk_json_put(object, "changes", changes_of(answer)) &&
      pk_json_put(object, "teeth", teeth_of(answer)) &&
      pk_json_put(object, "transmission", pk_json_quantity(answer->transmission, 1)) &&
      pk_json_put(object, "fibre_share", pk_json_quantity(answer->fibre_share, 1)) &&
      pk_json_put(object, "limits", pk_json_text(PK_TAPER_LIMITS));
  return pk_json_finish(object, good);
}
