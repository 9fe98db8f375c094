/* The stop bands of a cell: grids are chosen from the problem, each is solved, values are
 * extrapolated and given bars, and the operating band is held against them. */
#include <math.h>

#include "base/memory.h"
#include "study/channel_edges.h"
#include "study/converge.h"
#include "study/edge_family.h"
#include "study/edges.h"
#include "study/estimate.h"
#include "study/study.h"

static const double PI = 3.141592653589793238;
static const double DECIBEL_PER_NEPER = 8.685889638065036553; /* 20/ln 10 */

static const char NOTE_NO_ATTENUATION[] =
    "needs both edges and a wave of the fundamental family between them";

/* Quantities of one order, in the order they are sampled. */
enum { LONG_UM, SHORT_UM, ATTENUATION_DB, PER_ORDER };

static picket_status sample(void *user, const pk_cell_grid *base, int m, double *values) {
  pk_edge_family *f = user;
  pk_level level;
  picket_status status = pk_level_open(f->problem, f->polarization, base, m, &level);
  if (status == PICKET_OK) {
    status = pk_edge_family_solve(f, &level);
    pk_level_close(&level);
  }
  for (int i = 0; status == PICKET_OK && i < f->request.last_order; i++) {
    const pk_stop_band *band = &f->last[i];
    double *v = values + i * PER_ORDER;
    v[LONG_UM] = band->edge[0].state == PK_EDGE_FOUND ? 2 * PI / band->edge[0].k0 : NAN;
    v[SHORT_UM] = band->edge[1].state == PK_EDGE_FOUND ? 2 * PI / band->edge[1].k0 : NAN;
    v[ATTENUATION_DB] =
        band->has_attenuation ? DECIBEL_PER_NEPER * band->attenuation * f->request.pitch_um : NAN;
  }
  return status;
}

static picket_quantity missing(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

/* The decay inside a band comes from how far apart its edges are, so rounding of the edges (2e-11,
 * extrapolate.c) weighs the more the narrower it is. */
static void add_rounding(const picket_quantity *q, picket_quantity *attenuation) {
  double width = fabs(q[LONG_UM].value - q[SHORT_UM].value);
  double rounding = 2e-11 * q[LONG_UM].value / width * attenuation->value;
  if (isfinite(rounding) && isfinite(attenuation->uncertainty)) {
    attenuation->uncertainty = fmax(attenuation->uncertainty, rounding);
  }
}

static void fill_band(const pk_stop_band *found, const picket_quantity *q, picket_stop_band *band) {
  band->order = found->order;
  band->long_um =
      isnan(q[LONG_UM].value) ? missing(pk_edge_note(found->edge[0].state)) : q[LONG_UM];
  band->short_um =
      isnan(q[SHORT_UM].value) ? missing(pk_edge_note(found->edge[1].state)) : q[SHORT_UM];
  band->attenuation_db_per_pitch =
      isnan(q[ATTENUATION_DB].value) ? missing(NOTE_NO_ATTENUATION) : q[ATTENUATION_DB];
  add_rounding(q, &band->attenuation_db_per_pitch);
  band->long_confined = found->edge[0].state == PK_EDGE_FOUND;
  band->short_confined = found->edge[1].state == PK_EDGE_FOUND;
}

/* Where the operating band stands. An edge that is missing because it radiates gives way to the
 * light line 2Λ n of the sides, below which the guide radiates. */
static picket_regime regime_of(const pk_edge_family *s, const picket_stop_band *first, double from,
                               double to) {
  double light_line = pk_survey_light_line(&s->survey);
  if (isnan(first->long_um.value)) {
    return PICKET_REGIME_UNKNOWN;
  }
  double bottom = isnan(first->short_um.value) ? light_line : first->short_um.value;
  if (from <= first->long_um.value && to >= bottom) {
    return PICKET_REGIME_STOP_BAND;
  }
  if (from > first->long_um.value) {
    return PICKET_REGIME_SUBWAVELENGTH;
  }
  return from < light_line ? PICKET_REGIME_RADIATING : PICKET_REGIME_UNKNOWN;
}

static void fill_operating(const pk_edge_family *s, const picket_stop_band *first,
                           picket_operating_band *operating) {
  const pk_light *light = &s->problem->light;
  operating->given = light->count > 0; /* light may name a polarization only */
  operating->clearance_um = missing("no operating band: the problem gives no wavelengths");
  operating->from_um = operating->to_um = NAN;
  if (light->count == 0) {
    return;
  }
  operating->from_um = light->wavelength_um[0];
  operating->to_um = light->wavelength_um[light->count - 1];
  operating->regime = regime_of(s, first, operating->from_um, operating->to_um);
  operating->clearance_um = first->long_um;
  operating->clearance_um.value = operating->from_um - first->long_um.value;
}

static picket_status fill_estimate(const pk_edge_family *s, const picket_stop_band *first,
                                   picket_edge_estimate *estimate) {
  picket_status status = pk_estimate(s->problem, s->polarization, estimate);
  if (status != PICKET_OK) {
    return status;
  }
  estimate->error_um = missing("needs the estimate and both edges of the first stop band");
  double centre = 0.5 * (first->short_um.value + first->long_um.value);
  if (!isnan(centre) && !isnan(estimate->centre_um)) {
    double bar = 0.5 * (first->short_um.uncertainty + first->long_um.uncertainty);
    const char *note = first->long_um.note ? first->long_um.note : first->short_um.note;
    estimate->error_um =
        (picket_quantity){estimate->centre_um - centre, bar, isnan(bar) ? note : NULL};
  }
  return PICKET_OK;
}

static picket_status edges_answer(pk_edge_family *s, const picket_options *options,
                                  picket_edges_answer *answer, picket_result *result) {
  picket_context *context = s->problem->context;
  int orders = s->request.last_order;
  picket_quantity *q = PK_NEW(context, orders * PER_ORDER, picket_quantity);
  picket_stop_band *bands = PK_NEW(context, orders, picket_stop_band);
  answer->polarization = (picket_polarization)s->polarization;
  answer->bands = bands;
  picket_status status = q && bands ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_converge_request request = {
        .survey = &s->survey,
        .count = orders * PER_ORDER,
        .sample = sample,
        .user = s,
        .options = options,
        .phase = s->polarization == PK_EY ? "stop bands, ey" : "stop bands, hy",
        .mirror = s->mirror};
    status = pk_converge(&request, q, result);
  }
  for (int i = 0; status == PICKET_OK && i < orders; i++) {
    fill_band(&s->last[i], q + i * PER_ORDER, &bands[i]);
    answer->band_count = i + 1;
  }
  if (status == PICKET_OK) {
    fill_operating(s, &bands[0], &answer->operating);
    status = fill_estimate(s, &bands[0], &answer->estimate);
  }
  pk_free(context, q);
  return status;
}

/* The material whose known range ends nearest to where an edge was looked for. */
static int limiting_material(const pk_problem *problem, double wavelength) {
  int limiting = 0;
  double worst = 0;
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    pk_material_range range = pk_materials_range(problem->materials, m);
    double beyond = fmax(range.shortest_um - wavelength, wavelength - range.longest_um);
    if (m == 0 || beyond > worst) {
      limiting = m;
      worst = beyond;
    }
  }
  return limiting;
}

/* The clearance hangs on long edges: one that lies where a material is not known is a number that
 * was not obtained. A short edge beyond the range of a material has a note and no more. */
static picket_status check_found(const pk_edge_family *s, picket_result *result) {
  const pk_problem *problem = s->problem;
  const char *name = s->polarization == PK_EY ? "ey" : "hy";
  for (int i = 0; i < 2 * s->request.last_order; i++) {
    const pk_edge_found *edge = &s->last[i / 2].edge[i % 2];
    double wavelength = edge->k0 > 0 ? 2 * PI / edge->k0 : NAN;
    if (edge->state == PK_EDGE_UNKNOWN_MATERIAL && i % 2 == 0) {
      int m = limiting_material(problem, wavelength);
      pk_material_range range = pk_materials_range(problem->materials, m);
      return pk_result_fall_short(result,
                                  "stop bands, %s: the long edge of order %d lies near %.0f nm, "
                                  "but material \"%s\" is known "
                                  "from %.0f to %.0f nm only",
                                  name, i / 2 + 1, 1e3 * wavelength,
                                  pk_materials_name(problem->materials, m), 1e3 * range.shortest_um,
                                  1e3 * range.longest_um);
    }
    if (edge->state == PK_EDGE_LOST) {
      return pk_result_fall_short(result,
                                  "stop bands, %s: the %s edge of order %d was not recognised",
                                  name, i % 2 ? "short" : "long", i / 2 + 1);
    }
  }
  return PICKET_OK;
}

picket_status pk_edges_of(const pk_problem *problem, pk_polarization polarization,
                          const picket_options *options, picket_edges_answer *answer,
                          picket_result *result) {
  if (pk_asks_channel(problem)) {
    return pk_channel_edges_of(problem, polarization, options, answer, result);
  }
  pk_edge_family family;
  picket_status status = pk_edge_family_open(problem, polarization, options, true, &family);
  if (status == PICKET_OK) {
    status = edges_answer(&family, options, answer, result);
    if (status == PICKET_OK) {
      status = check_found(&family, result);
    }
    pk_edge_family_close(&family);
  }
  return status;
}

picket_status pk_study_edges(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  picket_result *result = NULL;
  picket_status status = pk_result_create(problem->context, PK_RESULT_EDGES, problem->name,
                                          options->accuracy, &result);
  if (status == PICKET_OK) {
    result->edges = PK_NEW(problem->context, 2, picket_edges_answer);
    status = result->edges ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  for (int p = 0; p < 2 && status == PICKET_OK; p++) {
    if (problem->light.wanted[p]) {
      picket_edges_answer *answer = &result->edges[result->count++];
      status = pk_edges_of(problem, (pk_polarization)p, options, answer, result);
    }
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
