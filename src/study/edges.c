/* The stop bands of a cell: grids are chosen from the problem, each is solved, values are
 * extrapolated and given bars, and the operating band is held against them. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/stop_band.h"
#include "study/converge.h"
#include "study/estimate.h"
#include "study/level.h"
#include "study/study.h"
#include "study/survey.h"

static const double PI = 3.141592653589793238;
static const double DECIBEL_PER_NEPER = 8.685889638065036553; /* 20/ln 10 */

static const char NOTE_RADIATES[] =
    "not confined: this edge lies above the light line of an open side, where the mode radiates";
static const char NOTE_LOST[] = "no standing wave of the fundamental family was recognised there";
static const char NOTE_MATERIAL[] = "a material is not known at this wavelength";
static const char NOTE_NO_ATTENUATION[] =
    "needs both edges and a wave of the fundamental family between them";

/* Quantities of one order, in the order they are sampled. */
enum { LONG_UM, SHORT_UM, ATTENUATION_DB, PER_ORDER };

typedef struct edge_study {
  const pk_problem *problem;
  pk_polarization polarization;
  pk_stop_band_request request;
  pk_survey survey;
  pk_stop_band *last; /* [orders] of the last grid */
  bool *inside;       /* [orders][2] edges whose band has its extreme inside the zone */
} edge_study;

static picket_status solve_level(edge_study *s, const pk_cell_grid *base, int m) {
  pk_level level;
  picket_status status = pk_level_open(s->problem, s->polarization, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_stop_bands(level.solver, &level.media, &s->request, s->last);
  pk_level_close(&level);
  return status;
}

static picket_status sample(void *user, const pk_cell_grid *base, int m, double *values) {
  edge_study *s = user;
  picket_status status = solve_level(s, base, m);
  for (int i = 0; status == PICKET_OK && i < s->request.last_order; i++) {
    const pk_stop_band *band = &s->last[i];
    double *v = values + i * PER_ORDER;
    v[LONG_UM] = band->edge[0].state == PK_EDGE_FOUND ? 2 * PI / band->edge[0].k0 : NAN;
    v[SHORT_UM] = band->edge[1].state == PK_EDGE_FOUND ? 2 * PI / band->edge[1].k0 : NAN;
    v[ATTENUATION_DB] =
        band->has_attenuation ? DECIBEL_PER_NEPER * band->attenuation * s->request.pitch_um : NAN;
  }
  return status;
}

/* The slowest decay into each open side among the edges found on a first grid. */
static void take_decay(edge_study *s) {
  double decay[2] = {0, 0};
  for (int i = 0; i < s->request.last_order; i++) {
    for (int e = 0; e < 2; e++) {
      const pk_edge_found *edge = &s->last[i].edge[e];
      if (edge->state == PK_EDGE_FOUND) {
        double k = PI / s->request.pitch_um;
        for (int side = 0; side < 2; side++) {
          decay[side] = fmax(decay[side], pk_survey_decay(&s->survey, side, k, edge->k0));
        }
      }
    }
  }
  for (int side = 0; side < 2; side++) {
    s->survey.decay_um[side] = decay[side] > 0 ? decay[side] : s->survey.decay_um[side];
  }
}

/* A coarse look with roomy sides tells where the edges are and so how far the sides must reach. */
static picket_status scout(edge_study *s) {
  pk_cell_grid base;
  pk_lay_plan plan = {.reach = PK_REACH_ROOMY, .mirror = true, .zero_walls = true};
  picket_status status = pk_survey_lay(&s->survey, &plan, &base);
  if (status != PICKET_OK) {
    return status;
  }
  s->request.look_inside = true;
  status = solve_level(s, &base, 2);
  s->request.look_inside = false;
  pk_cell_grid_clear(s->problem->context, &base);
  for (int i = 0; status == PICKET_OK && i < 2 * s->request.last_order; i++) {
    s->inside[i] = s->last[i / 2].edge[i % 2].offset > 0;
  }
  if (status == PICKET_OK) {
    take_decay(s);
    s->request.k0_start = s->last[0].edge[0].k0;
  }
  return status;
}

static const char *note_of(pk_edge_state state) {
  switch (state) {
    case PK_EDGE_RADIATES: return NOTE_RADIATES;
    case PK_EDGE_UNKNOWN_MATERIAL: return NOTE_MATERIAL;
    default: return NOTE_LOST;
  }
}

static picket_quantity missing(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

static void fill_band(const pk_stop_band *found, const picket_quantity *q, picket_stop_band *band) {
  band->order = found->order;
  band->long_um = isnan(q[LONG_UM].value) ? missing(note_of(found->edge[0].state)) : q[LONG_UM];
  band->short_um = isnan(q[SHORT_UM].value) ? missing(note_of(found->edge[1].state)) : q[SHORT_UM];
  band->attenuation_db_per_pitch =
      isnan(q[ATTENUATION_DB].value) ? missing(NOTE_NO_ATTENUATION) : q[ATTENUATION_DB];
  band->long_confined = found->edge[0].state != PK_EDGE_RADIATES;
  band->short_confined = found->edge[1].state != PK_EDGE_RADIATES;
}

/* Where the operating band stands. An edge that is missing because it radiates gives way to the
 * light line 2Λ n of the sides, below which the guide radiates. */
static picket_regime regime_of(const edge_study *s, const picket_stop_band *first, double from,
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

static void fill_operating(const edge_study *s, const picket_stop_band *first,
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

static picket_status fill_estimate(const edge_study *s, const picket_stop_band *first,
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

static picket_status edges_answer(edge_study *s, const picket_options *options,
                                  picket_edges_answer *answer, picket_result *result) {
  picket_context *context = s->problem->context;
  int orders = s->request.last_order;
  picket_quantity *q = PK_NEW(context, orders * PER_ORDER, picket_quantity);
  picket_stop_band *bands = PK_NEW(context, orders, picket_stop_band);
  s->last = PK_NEW(context, orders, pk_stop_band);
  s->inside = PK_NEW(context, 2 * orders, bool);
  s->request.inside = s->inside;
  answer->polarization = (picket_polarization)s->polarization;
  answer->band_count = orders;
  answer->bands = bands;
  picket_status status = q && bands && s->last && s->inside ? scout(s) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_converge_request request = {
        .survey = &s->survey,
        .count = orders * PER_ORDER,
        .sample = sample,
        .user = s,
        .options = options,
        .phase = s->polarization == PK_EY ? "stop bands, ey" : "stop bands, hy",
        .mirror = true};
    status = pk_converge(&request, q, result);
  }
  for (int i = 0; status == PICKET_OK && i < orders; i++) {
    fill_band(&s->last[i], q + i * PER_ORDER, &bands[i]);
  }
  if (status == PICKET_OK) {
    fill_operating(s, &bands[0], &answer->operating);
    status = fill_estimate(s, &bands[0], &answer->estimate);
  }
  pk_free(context, q);
  pk_free(context, s->last);
  pk_free(context, s->inside);
  return status;
}

static picket_status one_polarization(const pk_problem *problem, pk_polarization polarization,
                                      const picket_options *options, picket_edges_answer *answer,
                                      picket_result *result) {
  edge_study s = {.problem = problem, .polarization = polarization};
  picket_status status = pk_survey_take(problem, polarization, &s.survey);
  if (status != PICKET_OK) {
    return status;
  }
  const pk_cell *cell = &problem->cell;
  s.request = (pk_stop_band_request){cell->pitch_um,
                                     cell->shift,
                                     options->count > 0 ? (int)options->count : 1,
                                     s.survey.k0_start,
                                     cell->lateral == PK_LATERAL_OPEN,
                                     {s.survey.side_medium[0], s.survey.side_medium[1]},
                                     false,
                                     NULL};
  return edges_answer(&s, options, answer, result);
}

picket_status pk_study_edges(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  if (!problem->has_cell) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no cell: band edges need one");
  }
  if (problem->cell.shift != 0) {
    return pk_fail(
        problem->context, PICKET_ERROR_UNSUPPORTED,
        "cell.lateral_shift is %g, must be 0 for band edges: describe the straight cell of "
        "several rows, or ask for bands",
        problem->cell.shift);
  }
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
      status = one_polarization(problem, (pk_polarization)p, options, answer, result);
    }
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
