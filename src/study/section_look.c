/* See section_look.h. */
#include "study/section_look.h"

static void list_families(const pk_section_survey *survey, pk_section_families *out) {
  static const pk_end planes[2] = {PK_END_ZERO, PK_END_FREE};
  int along_x = survey->mirror[0] ? 2 : 1, along_y = survey->mirror[1] ? 2 : 1;
  out->count = 0;
  for (int i = 0; i < along_x; i++) {
    for (int j = 0; j < along_y; j++) {
      out->family[out->count++] =
          (pk_section_family){.survey = survey, .plane = {planes[i], planes[j]}};
    }
  }
}

static picket_status look(const pk_section_survey *survey, int most, pk_section_families *out) {
  picket_status status = PICKET_OK;
  out->total = 0;
  list_families(survey, out);
  for (int f = 0; status == PICKET_OK && f < out->count; f++) {
    status = pk_section_family_look(&out->family[f], most);
    out->total += out->family[f].count;
  }
  return status;
}

picket_status pk_section_look_at(pk_section_survey *survey, int most, pk_section_families *out) {
  bool leaky = false;
  picket_status status = look(survey, most, out);
  if (status == PICKET_OK && out->total == 0) {
    status = pk_section_survey_set_apart(survey, &leaky);
    if (status == PICKET_OK && leaky) {
      status = look(survey, most, out);
    }
  }
  return status;
}

/* Indices closer than this are those of one level: the family listed first goes first. */
static const double TIE = 1e-9;

pk_section_family *pk_section_look_up(pk_section_families *families, int order, int *place) {
  int taken[PK_FAMILIES] = {0};
  pk_section_family *best = NULL;
  for (int i = 0; i <= order; i++) {
    best = NULL;
    for (int f = 0; f < families->count; f++) {
      pk_section_family *family = &families->family[f];
      int next = taken[f];
      if (next < family->count &&
          (!best ||
           family->lowest[next] > (1 + TIE) * best->lowest[taken[best - families->family]])) {
        best = family;
      }
    }
    if (!best) {
      return NULL;
    }
    *place = taken[best - families->family]++;
  }
  return best;
}
