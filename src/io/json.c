/* Results as JSON, through Jansson.
 *
 * Objects are built from the inside out. Every function that makes a value returns null when memory
 * is out, and putting a null somewhere marks the whole document as failed, so nothing in between
 * needs a check. Jansson's own memory comes from malloc: its allocator is one for the whole
 * process, so it is not ours to change. The finished text is copied into the context's memory. */
#include <jansson.h>
#include <math.h>
#include <stdbool.h>

#include "base/memory.h"
#include "io/json_private.h"
#include "io/write.h"

/* 17 digits: reading gives back the same double. */
enum { LAYOUT = JSON_INDENT(2) | JSON_REAL_PRECISION(17) };

const char *pk_word_polarization(picket_polarization polarization) {
  return picket_polarization_name(polarization);
}

const char *pk_word_slab_polarization(picket_slab_polarization polarization) {
  return polarization == PICKET_TE ? "te" : "tm";
}

/* Takes over `value`; false (and `object` to be thrown away) when something is null. */
static bool put(json_t *object, const char *key, json_t *value) {
  return json_object_set_new(object, key, value) == 0;
}

/* The object if all went well, else null. */
static json_t *finish(json_t *value, bool good) {
  if (!good) {
    json_decref(value);
    return NULL;
  }
  return value;
}

static json_t *number(double value) {
  return isfinite(value) ? json_real(value) : json_null();
}

static json_t *text(const char *value) {
  return value ? json_string(value) : json_null();
}

static json_t *quantity(picket_quantity q, double scale) {
  json_t *object = json_object();
  bool missing = !isfinite(q.value) || !isfinite(q.uncertainty);
  bool good = put(object, "value", number(scale * q.value)) &&
              put(object, "uncertainty", number(scale * q.uncertainty)) &&
              (!missing || put(object, "note", text(q.note)));
  return finish(object, good);
}

/* An array of `count` elements made by `make(user, i)`. */
static json_t *array(int count, json_t *(*make)(const void *user, int i), const void *user) {
  json_t *list = json_array();
  bool good = list != NULL;
  for (int i = 0; good && i < count; i++) {
    good = json_array_append_new(list, make(user, i)) == 0;
  }
  return finish(list, good);
}

/* What a piece of a sweep that failed has more. */
static bool failure(json_t *object, int failed, const char *note) {
  return !failed || (put(object, "note", text(note)) && put(object, "failed", json_true()));
}

/* ---- the same for the other files ---- */

json_t *pk_json_object(void) {
  return json_object();
}

json_t *pk_json_list(void) {
  return json_array();
}

bool pk_json_put(json_t *object, const char *key, json_t *value) {
  return put(object, key, value);
}

bool pk_json_append(json_t *list, json_t *value) {
  return json_array_append_new(list, value) == 0;
}

json_t *pk_json_finish(json_t *value, bool good) {
  return finish(value, good);
}

json_t *pk_json_number(double value) {
  return number(value);
}

json_t *pk_json_whole(int value) {
  return json_integer(value);
}

json_t *pk_json_text(const char *value) {
  return text(value);
}

json_t *pk_json_verdict(int known) {
  return known < 0 ? json_null() : json_boolean(known);
}

json_t *pk_json_quantity(picket_quantity q, double scale) {
  return quantity(q, scale);
}

/* ---- edges ---- */

static json_t *stop_band(const void *user, int i) {
  const picket_stop_band *band = (const picket_stop_band *)user + i;
  json_t *object = json_object();
  bool good =
      put(object, "order", json_integer(band->order)) &&
      put(object, "short_nm", quantity(band->short_um, PK_NM_OF_UM)) &&
      put(object, "long_nm", quantity(band->long_um, PK_NM_OF_UM)) &&
      put(object, "attenuation_db_per_pitch", quantity(band->attenuation_db_per_pitch, 1)) &&
      put(object, "confined", json_boolean(band->short_confined && band->long_confined)) &&
      put(object, "short_confined", json_boolean(band->short_confined)) &&
      put(object, "long_confined", json_boolean(band->long_confined));
  return finish(object, good);
}

static json_t *operating(const picket_operating_band *band) {
  if (!band->given) {
    return json_null();
  }
  json_t *object = json_object();
  bool good = put(object, "from_nm", number(PK_NM_OF_UM * band->from_um)) &&
              put(object, "to_nm", number(PK_NM_OF_UM * band->to_um)) &&
              put(object, "regime", text(picket_regime_name(band->regime))) &&
              put(object, "clearance_nm", quantity(band->clearance_um, PK_NM_OF_UM));
  return finish(object, good);
}

static json_t *estimate(const picket_edge_estimate *e) {
  json_t *object = json_object();
  bool good = put(object, "method", text(e->method)) &&
              put(object, "centre_nm", number(PK_NM_OF_UM * e->centre_um)) &&
              put(object, "error_nm", quantity(e->error_um, PK_NM_OF_UM));
  return finish(object, good);
}

static json_t *edges_answer(const void *user, int i) {
  const picket_result *result = user;
  const picket_edges_answer *answer = result->edges + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_polarization(answer->polarization))) &&
              put(object, "stop_bands", array(answer->band_count, stop_band, answer->bands)) &&
              put(object, "operating", operating(&answer->operating)) &&
              put(object, "estimate", estimate(&answer->estimate)) &&
              (!result->comparison || put(object, "compare", pk_json_comparisons(result, i))) &&
              failure(object, answer->failed, answer->note);
  return finish(object, good);
}

/* ---- bands ---- */

static json_t *frequency(const void *user, int i) {
  return quantity(((const picket_quantity *)user)[i], 1);
}

static json_t *band_point(const void *user, int i) {
  const picket_bands_answer *answer = user;
  const picket_band_point *point = &answer->points[i];
  json_t *object = json_object();
  json_t *k = json_array();
  bool good = json_array_append_new(k, number(point->kz)) == 0 &&
              json_array_append_new(k, number(point->kx)) == 0;
  good = put(object, "k", k) && good && put(object, "label", text(point->label)) &&
         put(object, "frequency", array(answer->band_count, frequency, point->frequency));
  return finish(object, good);
}

static json_t *gap(const void *user, int i) {
  const picket_gap *g = (const picket_gap *)user + i;
  json_t *object = json_object();
  bool good = put(object, "below", json_integer(g->below)) &&
              put(object, "from", quantity(g->from, 1)) && put(object, "to", quantity(g->to, 1));
  return finish(object, good);
}

static json_t *bands_answer(const void *user, int i) {
  const picket_bands_answer *answer = ((const picket_result *)user)->bands + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_polarization(answer->polarization))) &&
              put(object, "points", array(answer->point_count, band_point, answer)) &&
              put(object, "gaps", array(answer->gap_count, gap, answer->gaps));
  return finish(object, good);
}

/* ---- slab ---- */

static json_t *slab_mode(const void *user, int i) {
  const picket_slab_mode *mode = (const picket_slab_mode *)user + i;
  json_t *object = json_object();
  bool good = put(object, "order", json_integer(mode->order)) &&
              put(object, "index", quantity(mode->index, 1)) &&
              put(object, "group_index", quantity(mode->group_index, 1));
  return finish(object, good);
}

static json_t *slab_point(const void *user, int i) {
  const picket_slab_point *point = (const picket_slab_point *)user + i;
  json_t *object = json_object();
  bool good = put(object, "wavelength_nm", number(PK_NM_OF_UM * point->wavelength_um)) &&
              put(object, "modes", array(point->mode_count, slab_mode, point->modes));
  return finish(object, good);
}

static json_t *slab_answer(const void *user, int i) {
  const picket_slab_answer *answer = ((const picket_result *)user)->slab + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_slab_polarization(answer->polarization))) &&
              put(object, "points", array(answer->point_count, slab_point, answer->points)) &&
              failure(object, answer->failed, answer->note);
  return finish(object, good);
}

/* ---- modes ---- */

static json_t *confinement(const picket_section_mode *mode) {
  json_t *object = json_object();
  bool good = object != NULL;
  for (int i = 0; good && i < mode->material_count; i++) {
    good = put(object, mode->confinement[i].material, number(mode->confinement[i].share));
  }
  return finish(object, good);
}

static json_t *diameters(const picket_mode_diameters *d) {
  json_t *object = json_object();
  bool good = put(object, "petermann_um", quantity(d->petermann_um, 1)) &&
              put(object, "petermann_x_um", quantity(d->petermann_x_um, 1)) &&
              put(object, "petermann_y_um", quantity(d->petermann_y_um, 1)) &&
              put(object, "rms_um", quantity(d->rms_um, 1)) &&
              put(object, "rms_x_um", quantity(d->rms_x_um, 1)) &&
              put(object, "rms_y_um", quantity(d->rms_y_um, 1)) &&
              put(object, "e2_x_um", quantity(d->e2_x_um, 1)) &&
              put(object, "e2_y_um", quantity(d->e2_y_um, 1)) &&
              put(object, "gaussian_um", quantity(d->gaussian_um, 1)) &&
              put(object, "gaussian_overlap", quantity(d->gaussian_overlap, 1)) &&
              put(object, "gaussian_x_um", quantity(d->gaussian_x_um, 1)) &&
              put(object, "gaussian_y_um", quantity(d->gaussian_y_um, 1)) &&
              put(object, "gaussian_xy_overlap", quantity(d->gaussian_xy_overlap, 1));
  return finish(object, good);
}

static json_t *section_mode(const void *user, int i) {
  const picket_section_mode *mode = (const picket_section_mode *)user + i;
  json_t *object = json_object();
  bool good = put(object, "order", json_integer(mode->order)) &&
              put(object, "index", quantity(mode->index, 1)) &&
              put(object, "group_index", quantity(mode->group_index, 1)) &&
              put(object, "loss_db_per_cm", quantity(mode->loss_db_per_cm, 1)) &&
              put(object, "bend_loss_db_per_90_deg", quantity(mode->bend_loss_db_per_90_deg, 1)) &&
              put(object, "ex_share", number(mode->ex_share)) &&
              put(object, "polarization", text(mode->ex_share > 0.5 ? "te-like" : "tm-like")) &&
              put(object, "effective_area_um2", quantity(mode->effective_area_um2, 1)) &&
              put(object, "diameters", diameters(&mode->diameters)) &&
              put(object, "nodes_x", json_integer(mode->nodes_x)) &&
              put(object, "nodes_y", json_integer(mode->nodes_y)) &&
              put(object, "confinement", confinement(mode));
  return finish(object, good);
}

static json_t *modes_point(const void *user, int i) {
  const picket_modes_point *point = (const picket_modes_point *)user + i;
  json_t *object = json_object();
  bool good = put(object, "wavelength_nm", number(PK_NM_OF_UM * point->wavelength_um)) &&
              put(object, "modes", array(point->mode_count, section_mode, point->modes)) &&
              (!point->note || put(object, "note", text(point->note))) &&
              (!point->failed || put(object, "failed", json_true()));
  return finish(object, good);
}

static json_t *modes_answer(const void *user, int i) {
  const picket_modes_answer *answer = ((const picket_result *)user)->modes + i;
  json_t *object = json_object();
  bool good = put(object, "points", array(answer->point_count, modes_point, answer->points));
  return finish(object, good);
}

/* ---- match ---- */

static json_t *coupling(const picket_coupling *c) {
  json_t *object = json_object();
  bool good = put(object, "share", quantity(c->share, 1)) &&
              put(object, "share_db", quantity(c->share_db, 1)) &&
              put(object, "offset_x_nm", quantity(c->offset_x_um, PK_NM_OF_UM)) &&
              put(object, "offset_y_nm", quantity(c->offset_y_um, PK_NM_OF_UM));
  return finish(object, good);
}

static json_t *match_point(const void *user, int i) {
  const picket_match_point *point = (const picket_match_point *)user + i;
  static const char *const along[] = {NULL, "x", "y"};
  json_t *object = json_object();
  bool good =
      put(object, "wavelength_nm", number(PK_NM_OF_UM * point->wavelength_um)) &&
      put(object, "coupling", coupling(&point->coupling)) &&
      put(object, "best", coupling(&point->best)) &&
      put(object, "index", quantity(point->index, 1)) &&
      put(object, "index_b", quantity(point->index_b, 1)) &&
      put(object, "mode_b", point->mode_b < 0 ? json_null() : json_integer(point->mode_b)) &&
      put(object, "along", text(along[point->along])) &&
      (!point->note || put(object, "note", text(point->note)));
  return finish(object, good);
}

static json_t *match_answer(const void *user, int i) {
  const picket_match_answer *answer = ((const picket_result *)user)->match + i;
  const picket_match_request *r = &answer->request;
  double beam = r->gaussian_x_um > 0 ? 1 : NAN; /* null without one */
  json_t *object = json_object();
  bool good = put(object, "with", text(answer->with ? answer->with : "gaussian")) &&
              put(object, "mode", json_integer(r->mode)) &&
              put(object, "gaussian_x_um", number(beam * r->gaussian_x_um)) &&
              put(object, "gaussian_y_um", number(beam * r->gaussian_y_um)) &&
              put(object, "tilt_x_deg", number(PK_DEGREES * r->tilt_x_rad)) &&
              put(object, "tilt_y_deg", number(PK_DEGREES * r->tilt_y_rad)) &&
              put(object, "limits", text(PK_MATCH_LIMITS)) &&
              put(object, "points", array(answer->point_count, match_point, answer->points));
  return finish(object, good);
}

/* ---- index ---- */

static json_t *radiated_order(const void *user, int i) {
  const picket_radiated_order *wave = (const picket_radiated_order *)user + i;
  json_t *object = json_object();
  bool good = put(object, "order", json_integer(wave->order)) &&
              put(object, "side", text(wave->side == PICKET_SIDE_LOW ? "low" : "high")) &&
              put(object, "angle_deg", number(PK_DEGREES * wave->angle_rad)) &&
              put(object, "share", number(wave->share));
  return finish(object, good);
}

static json_t *bloch_mode(const void *user, int i) {
  const picket_bloch_mode *mode = (const picket_bloch_mode *)user + i;
  bool known = mode->regime != PICKET_REGIME_UNKNOWN;
  json_t *object = json_object();
  bool good = put(object, "order", json_integer(mode->order)) &&
              put(object, "bloch_index", quantity(mode->bloch_index, 1)) &&
              put(object, "group_index", quantity(mode->group_index, 1)) &&
              put(object, "dispersion_ps_per_nm_km", quantity(mode->dispersion_ps_per_nm_km, 1)) &&
              put(object, "loss_db_per_cm", quantity(mode->loss_db_per_cm, 1)) &&
              put(object, "loss_db_per_pitch", quantity(mode->loss_db_per_pitch, 1)) &&
              put(object, "absorption_db_per_cm", quantity(mode->absorption_db_per_cm, 1)) &&
              put(object, "radiation_db_per_cm", quantity(mode->radiation_db_per_cm, 1)) &&
              put(object, "radiation_per_mm", quantity(mode->radiation_per_mm, 1)) &&
              put(object, "upward_share", quantity(mode->upward_share, 1)) &&
              put(object, "regime", text(known ? picket_regime_name(mode->regime) : NULL)) &&
              put(object, "radiated", array(mode->radiated_count, radiated_order, mode->radiated));
  return finish(object, good);
}

static json_t *index_point(const void *user, int i) {
  const picket_index_point *point = (const picket_index_point *)user + i;
  json_t *object = json_object();
  bool good = put(object, "wavelength_nm", number(PK_NM_OF_UM * point->wavelength_um)) &&
              put(object, "modes", array(point->mode_count, bloch_mode, point->modes)) &&
              put(object, "estimate", number(point->estimate)) &&
              (!point->note || put(object, "note", text(point->note))) &&
              (!point->failed || put(object, "failed", json_true()));
  return finish(object, good);
}

static json_t *index_answer(const void *user, int i) {
  const picket_index_answer *answer = ((const picket_result *)user)->index + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_polarization(answer->polarization))) &&
              put(object, "points", array(answer->point_count, index_point, answer->points));
  return finish(object, good);
}

/* ---- summary ---- */

static json_t *summary_item(const void *user, int i) {
  const pk_summary_item *item = ((const picket_result *)user)->summary + i;
  json_t *object = json_object();
  bool good = put(object, "name", text(item->name)) &&
              put(object, "value", item->text ? json_null() : number(item->value)) &&
              put(object, "unit", text(item->text ? NULL : item->unit)) &&
              put(object, "text", text(item->text));
  return finish(object, good);
}

/* ---- the document ---- */

typedef struct writer {
  const char *command;
  json_t *(*element)(const void *user, int i);
} writer;

/* Derivatives are per unit of the varied value, in nm for wavelengths like everything else here. */
static json_t *edge_derivative(const void *user, int i) {
  const picket_edge_derivative *band = (const picket_edge_derivative *)user + i;
  json_t *object = json_object();
  bool good = put(object, "order", json_integer(band->order)) &&
              put(object, "short_nm_per_unit", quantity(band->short_um, PK_NM_OF_UM)) &&
              put(object, "long_nm_per_unit", quantity(band->long_um, PK_NM_OF_UM));
  return finish(object, good);
}

static json_t *edge_derivatives(const void *user, int i) {
  const picket_edge_derivatives *answer = ((const picket_result *)user)->edge_derivatives + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_polarization(answer->polarization))) &&
              put(object, "stop_bands", array(answer->band_count, edge_derivative, answer->bands));
  return finish(object, good);
}

static json_t *index_derivative(const void *user, int i) {
  const picket_index_derivative *point = (const picket_index_derivative *)user + i;
  json_t *object = json_object();
  bool good = put(object, "wavelength_nm", number(PK_NM_OF_UM * point->wavelength_um)) &&
              put(object, "bloch_index_per_unit", quantity(point->bloch_index, 1));
  return finish(object, good);
}

static json_t *index_derivatives(const void *user, int i) {
  const picket_index_derivatives *answer = ((const picket_result *)user)->index_derivatives + i;
  json_t *object = json_object();
  bool good = put(object, "polarization", text(pk_word_polarization(answer->polarization))) &&
              put(object, "points", array(answer->point_count, index_derivative, answer->points));
  return finish(object, good);
}

static const writer WRITER[] = {
    [PK_RESULT_EDGES] = {"edges", edges_answer},
    [PK_RESULT_BANDS] = {"bands", bands_answer},
    [PK_RESULT_SLAB] = {"slab", slab_answer},
    [PK_RESULT_INDEX] = {"index", index_answer},
    [PK_RESULT_MODES] = {"modes", modes_answer},
    [PK_RESULT_MATCH] = {"match", match_answer},
    [PK_RESULT_SUMMARY] = {"check", summary_item},
    [PK_RESULT_AIM] = {"aim", pk_json_aim},
    [PK_RESULT_TAPER] = {"taper", pk_json_taper},
    [PK_RESULT_TOLERANCE] = {"tolerance", pk_json_tolerance},
    [PK_RESULT_EDGE_DERIVATIVES] = {"edge derivatives", edge_derivatives},
    [PK_RESULT_INDEX_DERIVATIVES] = {"index derivatives", index_derivatives},
};

/* An answer, and in a sweep the value it belongs to. */
static json_t *answer_of(const void *user, int i) {
  const picket_result *result = user;
  json_t *object = WRITER[result->kind].element(result, i);
  if (!object || !result->sweep_path) {
    return object;
  }
  json_t *sweep = json_object();
  bool good = put(sweep, "path", text(result->sweep_path)) &&
              put(sweep, "value", number(result->sweep_value[i]));
  sweep = finish(sweep, good);
  return finish(object, put(object, "sweep", sweep));
}

static json_t *document(const picket_result *result) {
  const writer *w = &WRITER[result->kind];
  json_t *object = json_object();
  bool good = put(object, "picket", text(picket_version())) &&
              put(object, "command", text(w->command)) && put(object, "name", text(result->name)) &&
              put(object, "accuracy", number(result->accuracy)) &&
              put(object, "complete", json_boolean(result->complete)) &&
              put(object, "shortfall", text(result->shortfall)) &&
              put(object, "results", array(result->count, answer_of, result));
  return finish(object, good);
}

picket_status pk_json_write(const picket_result *result, char **out) {
  json_t *object = document(result);
  size_t length = object ? json_dumpb(object, NULL, 0, LAYOUT) : 0;
  char *copy = length > 0 ? PK_NEW(result->context, length + 1, char) : NULL;
  if (copy) {
    (void)json_dumpb(object, copy, length, LAYOUT);
  }
  json_decref(object);
  if (!copy) {
    return length > 0 ? PICKET_ERROR_MEMORY
                      : pk_fail(result->context, PICKET_ERROR_MEMORY,
                                "out of memory for the JSON document");
  }
  *out = copy;
  return PICKET_OK;
}
