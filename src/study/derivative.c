/* See derivative.h.
 *
 * From lᵀ T(p, k0, ξ) r = 0 to first order (H. Hellmann 1937, R. P. Feynman, Phys. Rev. 56, 340
 * (1939)):
 *   at a fixed phase      dk0/dp = -lᵀ(∂T/∂p)r / lᵀ(∂T/∂k0)r,
 *   at a fixed frequency  d ln ξ/dp = -lᵀ(∂T/∂p)r / lᵀ(ξ ∂T/∂ξ)r,   k = (2πm - i ln ξ)/Λ. */
#include "study/derivative.h"

#include <math.h>

#include "base/memory.h"
#include "bloch/resonance.h"
#include "study/converge.h"
#include "study/edge_family.h"
#include "study/look.h"
#include "study/slope.h"

static const double PI = 3.141592653589793238;

static const char NOTE_NO_MODE[] = "the cell has no Bloch mode at this wavelength";
static const char NOTE_STOP_BAND[] = "inside a stop band the Bloch index is that of the zone edge";

/* --- Edges -------------------------------------------------------------------------------------
 */

typedef struct edge_slopes {
  const pk_variation *variation;
  pk_edge_family family;
} edge_slopes;

/* dλ/dp of an edge on a grid. */
static picket_status edge_slope(pk_level *level, pk_slope *slope, int order,
                                const pk_edge_found *edge, double *value) {
  picket_context *context = level->context;
  pk_phase phase = {cexp(I * PI * (order - edge->offset)), 1, 0};
  if (edge->offset == 0) {
    phase.xi = order % 2 ? -1 : 1;
  }
  pk_resonance resonance = {0};
  picket_status status =
      pk_resonance_near(level->solver, &level->media, phase, edge->k0, NULL, &resonance);
  int64_t n = pk_operator_size(level->op);
  double complex *left = PK_NEW(context, n, double complex), by_value = 0, by_frequency = 1;
  if (status == PICKET_OK && !left) {
    status = PICKET_ERROR_MEMORY;
  }
  for (int64_t p = 0; status == PICKET_OK && p < n; p++) {
    left[p] = conj(resonance.field[p]);
  }
  if (status == PICKET_OK) {
    status = pk_media_frequency_form(&level->media, level->op, phase, resonance.k0, left,
                                     resonance.field, &by_frequency);
  }
  double k0 = resonance.k0, held[PK_NEIGHBOURS] = {k0, k0, k0, k0};
  if (status == PICKET_OK) {
    status = pk_slope_form(slope, level, phase, k0, held, left, resonance.field, &by_value);
  }
  if (status == PICKET_OK) {
    double dk0 = -creal(by_value) / creal(by_frequency);
    *value = -2 * PI / (k0 * k0) * dk0;
  }
  pk_free(context, left);
  pk_resonance_clear(context, &resonance);
  return status;
}

static picket_status sample_edges(void *user, const pk_cell_grid *base, int m, double *values) {
  edge_slopes *s = user;
  pk_level level;
  pk_slope slope = {0};
  picket_status status = pk_level_open(s->family.problem, s->family.polarization, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_edge_family_solve(&s->family, &level);
  if (status == PICKET_OK) {
    status = pk_slope_open(s->variation, s->family.polarization, base, m, &slope);
  }
  for (int i = 0; status == PICKET_OK && i < 2 * s->family.request.last_order; i++) {
    const pk_stop_band *band = &s->family.last[i / 2];
    values[i] = NAN;
    if (band->edge[i % 2].state == PK_EDGE_FOUND) {
      status = edge_slope(&level, &slope, band->order, &band->edge[i % 2], &values[i]);
    }
  }
  pk_slope_close(&slope);
  pk_level_close(&level);
  return status;
}

/* A derivative is a difference and takes what the first grids give, unless a bar is wanted. */
static double allowed_bar(const pk_variation *variation) {
  return variation->bar_wanted > 0 ? variation->bar_wanted : INFINITY;
}

static double allowed_edge(const pk_converge_request *request, const picket_quantity *q, int i) {
  (void)q;
  /* A bar is wanted of the long edge of order 1. */
  return i == 0 ? allowed_bar(((const edge_slopes *)request->user)->variation) : INFINITY;
}

static picket_status fill_edges(const edge_slopes *s, const picket_quantity *q,
                                picket_edge_derivatives *answer) {
  int orders = s->family.request.last_order;
  picket_edge_derivative *bands =
      PK_NEW(s->family.problem->context, orders, picket_edge_derivative);
  if (!bands) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < orders; i++) {
    bands[i] = (picket_edge_derivative){i + 1, q[2 * i + 1], q[2 * i]};
    picket_quantity *missing[2] = {&bands[i].long_um, &bands[i].short_um};
    for (int e = 0; e < 2; e++) {
      if (isnan(missing[e]->value)) {
        *missing[e] = (picket_quantity){NAN, NAN, pk_edge_note(s->family.last[i].edge[e].state)};
      }
    }
  }
  answer->polarization = (picket_polarization)s->family.polarization;
  answer->bands = bands;
  answer->band_count = orders;
  return PICKET_OK;
}

static picket_status edges_of(const pk_variation *variation, pk_polarization polarization,
                              const picket_options *options, picket_edge_derivatives *answer,
                              picket_result *result) {
  edge_slopes s = {.variation = variation};
  /* Whole cells: moving a value may break a mirror symmetry. */
  picket_status status =
      pk_edge_family_open(variation->problem, polarization, options, false, &s.family);
  if (status != PICKET_OK) {
    return status;
  }
  int count = 2 * s.family.request.last_order;
  picket_quantity *q = PK_NEW(variation->problem->context, count, picket_quantity);
  status = q ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_converge_request request = {.survey = &s.family.survey,
                                   .count = count,
                                   .sample = sample_edges,
                                   .user = &s,
                                   .options = options,
                                   .phase = "derivatives of edges",
                                   .allowed = allowed_edge};
    status = pk_converge(&request, q, result);
  }
  if (status == PICKET_OK) {
    status = fill_edges(&s, q, answer);
  }
  pk_free(variation->problem->context, q);
  pk_edge_family_close(&s.family);
  return status;
}

picket_status pk_study_edge_derivatives(const pk_variation *variation,
                                        const picket_options *options, picket_result **out) {
  const pk_problem *problem = variation->problem;
  picket_result *result = NULL;
  picket_status status = pk_result_create(problem->context, PK_RESULT_EDGE_DERIVATIVES,
                                          problem->name, options->accuracy, &result);
  if (status == PICKET_OK) {
    result->edge_derivatives = PK_NEW(problem->context, 2, picket_edge_derivatives);
    status = result->edge_derivatives ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  for (int p = 0; p < 2 && status == PICKET_OK; p++) {
    if (problem->light.wanted[p]) {
      picket_edge_derivatives *answer = &result->edge_derivatives[result->count++];
      status = edges_of(variation, (pk_polarization)p, options, answer, result);
    }
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}

/* --- Bloch index -------------------------------------------------------------------------------
 */

typedef struct index_slopes {
  const pk_variation *variation;
  pk_look look;
  double k0[PK_NEIGHBOURS]; /* the wavelength itself may be the value */
} index_slopes;

/* dn_B/dp of the wave of a mode on a grid. */
static picket_status index_slope(index_slopes *s, pk_level *level, pk_slope *slope,
                                 const pk_wave *wave, double complex k, double *value) {
  pk_phase phase = {wave->xi, 1, 0};
  double complex by_value;
  picket_status status =
      pk_slope_form(slope, level, phase, s->look.k0, s->k0, wave->left, wave->right, &by_value);
  if (status != PICKET_OK) {
    return status;
  }
  const pk_variation *v = s->variation;
  double pitch = v->problem->cell.pitch_um;
  double pitches[PK_NEIGHBOURS];
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    pitches[i] = v->neighbour[i]->cell.pitch_um;
  }
  double pitch_slope = pk_variation_slope(v, pitches), k0_slope = pk_variation_slope(v, s->k0);
  double complex turn = pk_operator_phase_form(level->op, phase, 1, 0, wave->left, wave->right);
  double complex k_slope = I * by_value / turn / pitch - k * pitch_slope / pitch;
  *value = creal(k_slope) / s->look.k0 - creal(k) * k0_slope / (s->look.k0 * s->look.k0);
  return PICKET_OK;
}

static picket_status sample_index(void *user, const pk_cell_grid *base, int m, double *values) {
  index_slopes *s = user;
  picket_context *context = s->look.problem->context;
  pk_level level;
  pk_slope slope = {0};
  pk_wave wave = {0};
  pk_character character;
  bool same = false;
  values[0] = NAN;
  picket_status status = pk_look_open(&s->look, base, m, &level);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_look_follow(&s->look, &level, &s->look.mode[0], &wave, &character, &same);
  if (status == PICKET_OK && same) {
    s->look.mode[0].character = character;
    status = pk_follow_remember(context, level.op, &wave, &s->look.mode[0]);
    if (status == PICKET_OK) {
      status = pk_slope_open(s->variation, s->look.polarization, base, m, &slope);
    }
    if (status == PICKET_OK) {
      status = index_slope(s, &level, &slope, &wave, character.k, &values[0]);
    }
  } else if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(context);
    status = PICKET_OK;
  }
  pk_slope_close(&slope);
  pk_wave_clear(context, &wave);
  pk_level_close(&level);
  return status;
}

static double allowed_index(const pk_converge_request *request, const picket_quantity *q, int i) {
  (void)q;
  (void)i;
  return allowed_bar(((const index_slopes *)request->user)->variation);
}

static picket_status index_of(const pk_variation *variation, pk_polarization polarization, int i,
                              const picket_options *options, picket_index_derivative *point,
                              picket_result *result) {
  const pk_problem *problem = variation->problem;
  index_slopes s = {.variation = variation};
  point->wavelength_um = problem->light.wavelength_um[i];
  for (int n = 0; n < PK_NEIGHBOURS; n++) {
    s.k0[n] = 2 * PI / variation->neighbour[n]->light.wavelength_um[i];
  }
  picket_status status =
      pk_look_take(problem, polarization, point->wavelength_um, 1, options->accuracy, &s.look);
  if (status != PICKET_OK) {
    return status;
  }
  if (s.look.count == 0) {
    point->bloch_index = (picket_quantity){NAN, NAN, NOTE_NO_MODE};
  } else if (s.look.mode[0].character.at_boundary) {
    point->bloch_index = (picket_quantity){NAN, NAN, NOTE_STOP_BAND};
  } else {
    pk_converge_request request = {.survey = &s.look.survey,
                                   .count = 1,
                                   .sample = sample_index,
                                   .user = &s,
                                   .options = options,
                                   .phase = "derivatives of the Bloch index",
                                   .allowed = allowed_index};
    status = pk_converge(&request, &point->bloch_index, result);
  }
  pk_look_clear(&s.look);
  return status;
}

static picket_status all_points(const pk_variation *variation, pk_polarization polarization,
                                const picket_options *options, picket_index_derivatives *answer,
                                picket_result *result) {
  const pk_light *light = &variation->problem->light;
  picket_index_derivative *points =
      PK_NEW(variation->problem->context, light->count, picket_index_derivative);
  answer->polarization = (picket_polarization)polarization;
  answer->points = points;
  picket_status status = points ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < light->count; i++) {
    status = index_of(variation, polarization, i, options, &points[i], result);
    answer->point_count = i + 1;
  }
  return status;
}

static bool same_wavelength_count(const pk_variation *variation) {
  bool same = true;
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    same = same && variation->neighbour[i]->light.count == variation->problem->light.count;
  }
  return same;
}

picket_status pk_study_index_derivatives(const pk_variation *variation,
                                         const picket_options *options, picket_result **out) {
  const pk_problem *problem = variation->problem;
  if (!problem->has_cell || problem->light.count == 0 || !same_wavelength_count(variation)) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no cell or no wavelengths: a Bloch index needs both");
  }
  picket_result *result = NULL;
  picket_status status = pk_result_create(problem->context, PK_RESULT_INDEX_DERIVATIVES,
                                          problem->name, options->accuracy, &result);
  if (status == PICKET_OK) {
    result->index_derivatives = PK_NEW(problem->context, 2, picket_index_derivatives);
    status = result->index_derivatives ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  for (int p = 0; p < 2 && status == PICKET_OK; p++) {
    if (problem->light.wanted[p]) {
      picket_index_derivatives *answer = &result->index_derivatives[result->count++];
      status = all_points(variation, (pk_polarization)p, options, answer, result);
    }
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
