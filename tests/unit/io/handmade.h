/* Results made by hand, with numbers that are exact in binary, for tests of the documents. */
#ifndef PICKET_TESTS_HANDMADE_H
#define PICKET_TESTS_HANDMADE_H

#include "base/memory.h"
#include "study/result.h"
#include "unit/near.h"

static inline picket_quantity with_bar(double value, double bar) {
  picket_quantity q = {value, bar, NULL};
  return q;
}

static inline picket_quantity without(double value, const char *note) {
  picket_quantity q = {value, NAN, note};
  return q;
}

/* Null if memory ran out; nothing is then left behind. */
static inline picket_result *handmade(picket_context *context, pk_result_kind kind,
                                      const char *name, double accuracy) {
  picket_result *result = NULL;
  return pk_result_create(context, kind, name, accuracy, &result) == PICKET_OK ? result : NULL;
}

/* Two polarizations: a whole answer, and one with everything missing. */
static inline picket_result *handmade_edges(picket_context *context, const char *name) {
  picket_result *result = handmade(context, PK_RESULT_EDGES, name, 0.25);
  picket_edges_answer *answers = result ? PK_NEW(context, 2, picket_edges_answer) : NULL;
  picket_stop_band *bands = answers ? PK_NEW(context, 1, picket_stop_band) : NULL;
  if (!bands) {
    pk_free(context, answers);
    pk_result_free(result);
    return NULL;
  }
  bands[0] = (picket_stop_band){.order = 1,
                                .short_um = with_bar(1.25, 0.125),
                                .long_um = with_bar(1.5, 0.25),
                                .short_confined = true,
                                .long_confined = false,
                                .attenuation_db_per_pitch = without(3.5, "not converged")};
  answers[0] = (picket_edges_answer){
      .polarization = PICKET_HY,
      .band_count = 1,
      .bands = bands,
      .operating = {true, 1.75, 2, PICKET_REGIME_SUBWAVELENGTH, with_bar(0.25, 0.25)},
      .estimate = {"by hand", 1.375, with_bar(0, 0.125)}};
  answers[1] = (picket_edges_answer){.polarization = PICKET_EY,
                                     .estimate = {NULL, NAN, {NAN, NAN, "none applies"}}};
  result->edges = answers;
  result->count = 2;
  return result;
}

/* One polarization, two points, two bands, one gap. Labels and frequencies are owned. */
static inline picket_result *handmade_bands(picket_context *context, const char *label) {
  picket_result *result = handmade(context, PK_RESULT_BANDS, "", 0.25);
  picket_bands_answer *answers = PK_NEW(context, 1, picket_bands_answer);
  picket_band_point *points = PK_NEW(context, 2, picket_band_point);
  picket_gap *gaps = PK_NEW(context, 1, picket_gap);
  picket_quantity *first = PK_NEW(context, 2, picket_quantity);
  picket_quantity *second = PK_NEW(context, 2, picket_quantity);
  first[0] = with_bar(0, 0);
  first[1] = with_bar(0.5, 0.0625);
  second[0] = with_bar(0.25, 0.0625);
  second[1] = (picket_quantity){NAN, NAN, "above the light line"};
  points[0] = (picket_band_point){0, 0, pk_text_copy(context, label), first};
  points[1] = (picket_band_point){1, 0.5, NULL, second};
  gaps[0] = (picket_gap){1, with_bar(0.25, 0.0625), with_bar(0.5, 0.0625)};
  answers[0] = (picket_bands_answer){PICKET_EY, 2, 2, points, 1, gaps};
  result->bands = answers;
  result->count = 1;
  return result;
}

/* te with one mode at the first wavelength and none at the second. */
static inline picket_result *handmade_slab(picket_context *context) {
  picket_result *result = handmade(context, PK_RESULT_SLAB, "film", 0.25);
  picket_slab_answer *answers = PK_NEW(context, 1, picket_slab_answer);
  picket_slab_point *points = PK_NEW(context, 2, picket_slab_point);
  picket_slab_mode *modes = PK_NEW(context, 1, picket_slab_mode);
  modes[0] = (picket_slab_mode){0, with_bar(2.5, 0.5), with_bar(3.5, 0.5)};
  points[0] = (picket_slab_point){1.5, 1, modes};
  points[1] = (picket_slab_point){2, 0, NULL};
  answers[0] = (picket_slab_answer){PICKET_TE, 2, points, NULL, 0};
  result->slab = answers;
  result->count = 1;
  return result;
}

/* hy: a mode that radiates one order, a point without modes, a point that failed. */
static inline picket_result *handmade_index(picket_context *context) {
  picket_result *result = handmade(context, PK_RESULT_INDEX, "row", 0.25);
  picket_index_answer *answers = PK_NEW(context, 2, picket_index_answer);
  picket_index_point *points = PK_NEW(context, 3, picket_index_point);
  picket_bloch_mode *modes = PK_NEW(context, 1, picket_bloch_mode);
  picket_radiated_order *radiated = PK_NEW(context, 1, picket_radiated_order);
  radiated[0] = (picket_radiated_order){-1, PICKET_SIDE_HIGH, 0, 1};
  modes[0] = (picket_bloch_mode){.order = 0,
                                 .bloch_index = with_bar(2.5, 0.5),
                                 .group_index = without(3.5, "no bar"),
                                 .dispersion_ps_per_nm_km = with_bar(-64, 8),
                                 .loss_db_per_cm = with_bar(4, 1),
                                 .loss_db_per_pitch = with_bar(0.25, 0.125),
                                 .absorption_db_per_cm = with_bar(0, 0),
                                 .radiation_db_per_cm = with_bar(4, 2),
                                 .radiation_per_mm = with_bar(8, 4),
                                 .upward_share = with_bar(0.5, 0.25),
                                 .regime = PICKET_REGIME_RADIATING,
                                 .radiated_count = 1,
                                 .radiated = radiated};
  points[0] = (picket_index_point){1.5, 1, modes, 2.75, NULL, 0};
  points[1] = (picket_index_point){2, 0, NULL, NAN, "no mode", 0};
  points[2] = (picket_index_point){4, 0, NULL, NAN, "out of range, here", 1};
  answers[0] = (picket_index_answer){PICKET_HY, 3, points};
  result->index = answers;
  result->count = 1;
  return result;
}

static inline picket_result *handmade_summary(picket_context *context) {
  picket_result *result = handmade(context, PK_RESULT_SUMMARY, "n", NAN);
  result->summary = PK_NEW(context, 2, pk_summary_item);
  result->summary[0] = (pk_summary_item){pk_text_copy(context, "cell.pitch"), NULL, 300,
                                         pk_text_copy(context, "nm")};
  result->summary[1] =
      (pk_summary_item){pk_text_copy(context, "cell.lateral"), pk_text_copy(context, "open"), 0,
                        pk_text_copy(context, "")};
  result->count = 2;
  return result;
}

#endif
