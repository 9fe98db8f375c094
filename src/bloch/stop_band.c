/* See stop_band.h. */
#include "bloch/stop_band.h"

#include <math.h>

#include "base/memory.h"
#include "bloch/extremum.h"
#include "bloch/family.h"
#include "bloch/wavenumber.h"

enum {
  STATES = 10, /* standing waves looked at for each order */
  ATTENUATION_STEPS = 25
};

/* The place of the largest attenuation, as a part of the stop band: κ is stationary there, so it is
 * then right to about the square of this. */
static const double STATIONARY = 1e-4;

/* Edges closer than this in λ are one: a guide that does not vary along z, or a glide symmetry. */
static const double CLOSED = 1e-7;

static const double PI = 3.141592653589793238;

/* A standing wave with less than this likeness to the fundamental family is not taken for an edge.
 * Edges of high-contrast rows measured 0.3 to 1.0, other families below 0.05. */
static const double LEAST_LIKENESS = 0.12;

typedef struct finder {
  picket_context *context;
  pk_solver *solver;
  pk_operator *op;
  pk_media *media;
  const pk_stop_band_request *request;
  double complex *shape, *work; /* [nv] */
  bool closed; /* the two edges of this order coincide: bands cross there, neither has an extreme */
} finder;

static pk_phase phase_of(int order) {
  return (pk_phase){order % 2 ? -1 : 1, 1, 0};
}

/* The highest index of the open sides at the loaded frequency; 0 for closed cells. */
static double side_index(const finder *f) {
  double index = 0;
  for (int s = 0; f->request->open && s < 2; s++) {
    index = fmax(index, creal(csqrt(f->media->permittivity[f->request->side_medium[s]])));
  }
  return index;
}

/* The wavenumber π/Λ as this grid sees it: with h as the length of an interval along the guide
 *   κ² = Σ 4 sin²(πh/2Λ)/h / Λ,
 * the Rayleigh quotient of exp(iπz/Λ). Light in a side follows the grid's own dispersion, so a
 * state must be compared with this: the exact π/Λ would take radiation on coarse grids for a guided
 * mode. */
static double zone_edge_on_grid(const finder *f) {
  double pitch = f->request->pitch_um, first = 0, at = 0, next, width, sum = 0;
  int nu = pk_operator_lines(f->op, PK_U);
  pk_operator_line(f->op, PK_U, 0, &first, &width);
  at = first;
  for (int i = 0; i < nu; i++, at = next) {
    next = first + pitch;
    if (i + 1 < nu) {
      pk_operator_line(f->op, PK_U, i + 1, &next, &width);
    }
    double s = sin(0.5 * PI * (next - at) / pitch);
    sum += 4 * s * s / (next - at);
  }
  return sqrt(sum / pitch);
}

/* Confined: the folded wavenumber of the edge exceeds that of free light in every open side. */
static bool is_confined(const finder *f, int order, double k0) {
  double folded = order % 2 ? zone_edge_on_grid(f) : 0;
  return !f->request->open || k0 * side_index(f) < folded;
}

/* Standing waves for the media as they are at k0: for order 1 the lowest ones, above that the
 * nearest to the wavenumber mπ/Λ in a medium like that of the fundamental mode. */
static picket_status standing_waves(finder *f, int order, double k0, pk_mode *modes, int *found) {
  picket_status status = pk_media_set(f->media, k0, f->op);
  if (status != PICKET_OK) {
    return status;
  }
  double shift = order == 1 ? 0 : k0 * k0;
  return pk_solver_modes(f->solver, phase_of(order), shift, STATES, NULL, modes, found);
}

/* Indices of the two states most like the family, by rising λ; -1 where there is none. For order 1
 * the first is the lowest state. */
static void pick_pair(finder *f, int order, int found, const pk_mode *modes, int pair[2]) {
  double best[2] = {LEAST_LIKENESS, LEAST_LIKENESS};
  pair[0] = pair[1] = -1;
  for (int i = 0; i < found; i++) {
    double likeness =
        pk_family_likeness(f->op, f->request->pitch_um, order, f->shape, modes[i].field, f->work);
    pk_log(f->context, PICKET_LOG_DETAIL, "order %d: state %d at %.6g um, likeness %.3f", order, i,
           2 * PI / sqrt(creal(modes[i].lambda)), likeness);
    if (likeness > best[0]) {
      best[1] = best[0];
      pair[1] = pair[0];
      best[0] = likeness;
      pair[0] = i;
    } else if (likeness > best[1]) {
      best[1] = likeness;
      pair[1] = i;
    }
  }
  if (order == 1 && pair[0] != 0) {
    pair[1] = pair[0]; /* the lowest state is the fundamental one whatever else looks like it */
    pair[0] = 0;
  }
  if (pair[1] >= 0 && pair[0] > pair[1]) {
    int swap = pair[0];
    pair[0] = pair[1];
    pair[1] = swap;
  }
}

/* Moves an edge off the boundary if its band has the extreme inside the zone. A band that is lost
 * on the way leaves the edge at the boundary, where it is stationary too. */
static picket_status move_inside(finder *f, int order, pk_edge_found *edge, bool maximum,
                                 pk_resonance *resonance) {
  const pk_stop_band_request *request = f->request;
  bool wanted = request->look_inside ||
                (request->inside && request->inside[2 * (order - 1) + (maximum ? 0 : 1)]);
  if (!wanted || f->closed) {
    return PICKET_OK;
  }
  pk_extremum_request find = {request->pitch_um, request->lateral_shift, order, maximum};
  picket_status status = pk_extremum_find(f->solver, f->media, &find, resonance, &edge->offset);
  if (status == PICKET_ERROR_NUMERIC) {
    pk_log(f->context, PICKET_LOG_DETAIL, "order %d: %s", order,
           picket_context_message(f->context));
    pk_message_clear(f->context);
    status = PICKET_OK;
  }
  return status;
}

/* The edge at the zone boundary that grows out of a standing wave, media at its own frequency. */
static picket_status settle_edge(finder *f, int order, const pk_mode *mode, bool maximum,
                                 pk_edge_found *edge, double complex **field) {
  double k0 = sqrt(creal(mode->lambda));
  edge->k0 = k0;
  if (!is_confined(f, order, k0)) {
    edge->state = PK_EDGE_RADIATES;
    return PICKET_OK;
  }
  pk_resonance resonance;
  picket_status status =
      pk_resonance_near(f->solver, f->media, phase_of(order), k0, mode->field, &resonance);
  if (status == PICKET_ERROR_NUMERIC || status == PICKET_ERROR_NO_MODE) {
    edge->state = status == PICKET_ERROR_NO_MODE ? PK_EDGE_UNKNOWN_MATERIAL : PK_EDGE_LOST;
    return PICKET_OK;
  }
  if (status != PICKET_OK) {
    return status;
  }
  status = move_inside(f, order, edge, maximum, &resonance);
  if (status != PICKET_OK) {
    pk_resonance_clear(f->context, &resonance);
    return status;
  }
  edge->k0 = resonance.k0;
  edge->state = !is_confined(f, order, resonance.k0) ? PK_EDGE_RADIATES
                : resonance.known                    ? PK_EDGE_FOUND
                                                     : PK_EDGE_UNKNOWN_MATERIAL;
  if (field) {
    *field = resonance.field;
  } else {
    pk_resonance_clear(f->context, &resonance);
  }
  return PICKET_OK;
}

/* --- The largest attenuation inside a stop band --------------------------------------------------
 */

/* Half the matrix element of ∂T/∂k between the two edges couples them: two-band perturbation theory
 * gives the decay in the middle, κ = (λ₂ - λ₁)/(2 |P₁₂|). */
static double guess_attenuation(const finder *f, int order, const pk_edge_found edge[2],
                                double complex *const fields[2]) {
  double complex p = f->request->pitch_um * pk_operator_phase_form(f->op, phase_of(order), 1,
                                                                   f->request->lateral_shift,
                                                                   fields[0], fields[1]);
  double gap = edge[1].k0 * edge[1].k0 - edge[0].k0 * edge[0].k0;
  return 0.5 * gap / cabs(p);
}

/* κ and κ κ' at a frequency inside the band; κ² is nearly a parabola there, so κκ' is nearly a
 * line. */
static picket_status attenuation_at(finder *f, int order, double k0, double kappa_guess,
                                    const double complex *start, double *kappa, double *product) {
  picket_status status = pk_media_set(f->media, k0, f->op);
  if (status != PICKET_OK) {
    return status;
  }
  double sign = order % 2 ? -1 : 1, pitch = f->request->pitch_um;
  double complex slope = 0;
  pk_wave wave;
  status =
      pk_wave_near(f->solver, phase_of(order), k0, sign * exp(-kappa_guess * pitch), start, &wave);
  if (status != PICKET_OK) {
    return status;
  }
  *kappa = -log(cabs(wave.xi)) / pitch;
  double turn = carg(sign * wave.xi);
  status = pk_wave_slope(f->media, f->op, phase_of(order), k0, pitch, f->request->lateral_shift,
                         &wave, &slope);
  pk_wave_clear(f->context, &wave);
  /* Inside the band the wave stays at the zone boundary: anything else is another branch. */
  if (status == PICKET_OK && !(*kappa > 0 && fabs(turn) < 1e-6)) {
    return pk_fail(f->context, PICKET_ERROR_NUMERIC,
                   "no wave of the family inside the stop band at k0 = %g /um", k0);
  }
  *product = *kappa * cimag(slope);
  return status;
}

static picket_status largest_attenuation(finder *f, pk_stop_band *band,
                                         double complex *const fields[2]) {
  double low = band->edge[0].k0, high = band->edge[1].k0;
  double guess = guess_attenuation(f, band->order, band->edge, fields);
  double complex *start = PK_NEW(f->context, pk_operator_size(f->op), double complex);
  if (!start) {
    return PICKET_ERROR_MEMORY;
  }
  for (int64_t p = 0; p < pk_operator_size(f->op); p++) {
    start[p] = fields[0][p] + I * fields[1][p];
  }
  double product_low = 0, product_high = 0; /* unknown until met */
  double k0 = 0.5 * (low + high), kappa = guess, step = high - low;
  double enough = STATIONARY * (high - low);
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < ATTENUATION_STEPS; i++) {
    double product = 0;
    status = attenuation_at(f, band->order, k0, kappa, start, &kappa, &product);
    if (status != PICKET_OK || fabs(step) < enough) {
      break;
    }
    pk_log(f->context, PICKET_LOG_DETAIL, "attenuation %.9g /um at k0 %.9g, slope product %.3g",
           kappa, k0, product);
    /* False position, halving the value of an end that stays (the Illinois rule). */
    if (product > 0) {
      low = k0;
      product_low = product;
      product_high *= i > 0 && step > 0 ? 0.5 : 1;
    } else {
      high = k0;
      product_high = product;
      product_low *= i > 0 && step < 0 ? 0.5 : 1;
    }
    double next = 0.5 * (low + high);
    if (product_low > 0 && product_high < 0) {
      next = low + (high - low) * product_low / (product_low - product_high);
    }
    step = next - k0;
    k0 = next;
  }
  pk_free(f->context, start);
  if (status == PICKET_OK) {
    band->attenuation = kappa;
    band->has_attenuation = true;
  }
  if (status == PICKET_ERROR_NUMERIC) {
    pk_log(f->context, PICKET_LOG_DETAIL, "no attenuation: %s", picket_context_message(f->context));
    pk_message_clear(f->context);
    status = PICKET_OK;
  }
  return status;
}

/* --- One order -----------------------------------------------------------------------------------
 */

static picket_status one_order(finder *f, int order, double k0_start, pk_stop_band *band) {
  pk_mode modes[STATES];
  int found = 0, pair[2];
  double complex *fields[2] = {NULL, NULL};
  *band = (pk_stop_band){.order = order};
  picket_status status = standing_waves(f, order, k0_start, modes, &found);
  if (status != PICKET_OK) {
    return status;
  }
  if (order == 1) {
    pk_family_shape(f->op, f->request->pitch_um, 1, modes[0].field, f->shape);
  }
  pick_pair(f, order, found, modes, pair);
  f->closed =
      pair[0] >= 0 && pair[1] >= 0 &&
      creal(modes[pair[1]].lambda - modes[pair[0]].lambda) < CLOSED * creal(modes[pair[0]].lambda);
  for (int e = 0; e < 2 && status == PICKET_OK; e++) {
    if (pair[e] < 0) {
      band->edge[e].state = f->request->open ? PK_EDGE_RADIATES : PK_EDGE_LOST;
      continue;
    }
    status = settle_edge(f, order, &modes[pair[e]], e == 0, &band->edge[e], &fields[e]);
  }
  if (status == PICKET_OK && order == 1 && band->edge[0].state == PK_EDGE_RADIATES) {
    status = pk_fail(f->context, PICKET_ERROR_NO_MODE,
                     "the cell guides no mode at the zone edge: its lowest state lies above the "
                     "light line of the open sides");
  }
  if (status == PICKET_OK && fields[0] && fields[1] && band->edge[0].state == PK_EDGE_FOUND &&
      band->edge[1].state == PK_EDGE_FOUND) {
    status = largest_attenuation(f, band, fields);
  }
  pk_modes_clear(f->context, found, modes);
  pk_free(f->context, fields[0]);
  pk_free(f->context, fields[1]);
  return status;
}

picket_status pk_stop_bands(pk_solver *solver, pk_media *media, const pk_stop_band_request *request,
                            pk_stop_band *bands) {
  finder f = {
      .context = pk_solver_context(solver), .solver = solver, .media = media, .request = request};
  f.op = pk_solver_operator(solver);
  int nv = pk_operator_lines(f.op, PK_V);
  f.shape = PK_NEW(f.context, nv, double complex);
  f.work = PK_NEW(f.context, nv, double complex);
  picket_status status = f.shape && f.work ? PICKET_OK : PICKET_ERROR_MEMORY;
  double k0 = request->k0_start;
  for (int order = 1; status == PICKET_OK && order <= request->last_order; order++) {
    status = one_order(&f, order, k0, &bands[order - 1]);
    /* The next order lies near the same index: the mid frequency grows as (m + 1)/m. */
    double mid = 0.5 * (bands[order - 1].edge[0].k0 + bands[order - 1].edge[1].k0);
    if (status == PICKET_OK && mid > 0) {
      k0 = mid * (order + 1) / order;
    }
  }
  pk_free(f.context, f.shape);
  pk_free(f.context, f.work);
  return status;
}
