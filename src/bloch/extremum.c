/* See extremum.h. */
#include "bloch/extremum.h"

#include <math.h>

static const double PI = 3.141592653589793238;

/* First step off the boundary in π/Λ: far enough for a curvature of either sign to show above
 * rounding, near enough not to step over an extreme. */
static const double FIRST_STEP = 0.02;
static const double FARTHEST = 0.9;

/* A band that falls by less than this from its boundary value has its extreme there. */
static const double FLAT = 1e-9;

enum { BISECTIONS = 40 };
static const double PLACE = 1e-7; /* of the extreme; the frequency is then right to its square */

typedef struct probe {
  double offset; /* from the boundary, π/Λ */
  double slope;  /* dk0/dk towards the zone centre */
  pk_resonance at;
} probe;

/* Bloch modes are compared at different phases: the factor between them is smooth and near 1. */
static picket_status take(pk_solver *solver, pk_media *media, const pk_extremum_request *request,
                          double offset, const pk_resonance *near, probe *out) {
  pk_phase phase = {cexp(I * PI * (request->order - offset)), 1, 0};
  out->offset = offset;
  picket_status status = pk_resonance_near(solver, media, phase, near->k0, near->field, &out->at);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_resonance_slope(media, pk_solver_operator(solver), phase, request->pitch_um,
                              request->lateral_shift, &out->at, &out->slope);
  out->slope = -out->slope;
  if (status != PICKET_OK) {
    pk_resonance_clear(pk_solver_context(solver), &out->at);
  }
  return status;
}

/* Rising towards a wanted maximum, or falling towards a wanted minimum. */
static bool still_going(const pk_extremum_request *request, const probe *p) {
  return request->maximum ? p->slope > 0 : p->slope < 0;
}

/* Between `low` (still going) and `high` (past it): bisection with secant steps on the slope. `low`
 * is replaced by the extreme. */
static picket_status close_in(pk_solver *solver, pk_media *media,
                              const pk_extremum_request *request, probe *low, probe *high) {
  picket_context *context = pk_solver_context(solver);
  for (int i = 0; i < BISECTIONS && high->offset - low->offset > PLACE; i++) {
    double part = low->slope / (low->slope - high->slope);
    if (i % 3 == 2 || !(part > 0.01 && part < 0.99)) {
      part = 0.5;
    }
    probe mid;
    picket_status status = take(solver, media, request,
                                low->offset + part * (high->offset - low->offset), &low->at, &mid);
    if (status != PICKET_OK) {
      return status;
    }
    probe *replaced = still_going(request, &mid) ? low : high;
    pk_resonance_clear(context, &replaced->at);
    *replaced = mid;
  }
  return PICKET_OK;
}

/* Walks from the boundary until the slope turns. */
static picket_status walk(pk_solver *solver, pk_media *media, const pk_extremum_request *request,
                          probe *low, probe *high) {
  picket_context *context = pk_solver_context(solver);
  picket_status status = PICKET_OK;
  while (status == PICKET_OK) {
    double offset = 1.6 * low->offset;
    if (offset > FARTHEST) {
      return pk_fail(context, PICKET_ERROR_NUMERIC,
                     "the band of an edge has no extreme within %g of the zone boundary", FARTHEST);
    }
    status = take(solver, media, request, offset, &low->at, high);
    if (status != PICKET_OK || !still_going(request, high)) {
      return status;
    }
    pk_resonance_clear(context, &low->at);
    *low = *high;
    high->at = (pk_resonance){0};
  }
  return status;
}

picket_status pk_extremum_find(pk_solver *solver, pk_media *media,
                               const pk_extremum_request *request, pk_resonance *edge,
                               double *offset) {
  picket_context *context = pk_solver_context(solver);
  probe low = {0}, high = {0};
  *offset = 0;
  picket_status status = take(solver, media, request, FIRST_STEP, edge, &low);
  if (status != PICKET_OK) {
    return status;
  }
  double gained = (low.at.k0 / edge->k0 - 1) * (request->maximum ? 1 : -1);
  if (gained > FLAT && still_going(request, &low)) {
    status = walk(solver, media, request, &low, &high);
    if (status == PICKET_OK) {
      status = close_in(solver, media, request, &low, &high);
    }
    if (status == PICKET_OK) {
      pk_resonance_clear(context, edge);
      *edge = low.at;
      *offset = low.offset;
      low.at = (pk_resonance){0};
    }
  }
  pk_resonance_clear(context, &low.at);
  pk_resonance_clear(context, &high.at);
  return status;
}
