/* The derivative of T with respect to the strength of the absorbing layers: every weight that holds
 * a stretched length of the v axis changes with it. See power.h. */
#include "base/memory.h"
#include "operator/operator_private.h"
#include "operator/power.h"

/* S ∂length/∂S of interval i: the imaginary part of a stretched length is proportional to S. */
static double complex interval_slope(const pk_axis *v, int i) {
  return I * cimag(v->length[i]);
}

static double complex dual_slope(const pk_axis *v, int line) {
  double complex slope = 0;
  slope += line > 0 ? 0.5 * interval_slope(v, line - 1) : 0;
  slope += line < v->intervals ? 0.5 * interval_slope(v, line) : 0;
  return slope;
}

/* Relative change of the scale of an edge. */
static double complex edge_slope(const pk_operator *op, const pk_edge *edge,
                                 const double complex *dual) {
  int iv = (int)(edge->p % op->nv), first = pk_axis_first_line(&op->v);
  if (edge->along == PK_U) {
    return dual[iv];
  }
  int interval = iv + first;
  if (edge->q < 0 && iv == 0 && first == 1) {
    interval = 0; /* from the low wall to the first unknown */
  }
  return -interval_slope(&op->v, interval) / op->v.length[interval];
}

static double complex edge_form(const pk_operator *op, const pk_edge *edge, pk_phase phase,
                                const double complex *l, const double complex *r) {
  double complex weight = pk_edge_weight(op, edge);
  if (edge->q < 0) {
    return weight * l[edge->p] * r[edge->p];
  }
  double complex factor = edge->wu > 0 ? phase.xi : edge->wu < 0 ? 1 / phase.xi : 1;
  return weight * (l[edge->q] / factor - l[edge->p]) * (r[edge->q] * factor - r[edge->p]);
}

double complex pk_operator_layer_form(picket_context *context, const pk_operator *op,
                                      pk_phase phase, double k0, const double complex *l,
                                      const double complex *r, picket_status *status) {
  *status = PICKET_OK;
  if (op->v.layer[0].thickness == 0 && op->v.layer[1].thickness == 0) {
    return 0;
  }
  double complex *dual = PK_NEW(context, op->nv, double complex);
  if (!dual) {
    *status = PICKET_ERROR_MEMORY;
    return 0;
  }
  int first = pk_axis_first_line(&op->v);
  for (int iv = 0; iv < op->nv; iv++) {
    double low, high;
    double complex length;
    pk_axis_dual(&op->v, iv + first, &low, &high, &length);
    dual[iv] = dual_slope(&op->v, iv + first) / length;
  }
  double complex sum = 0;
  for (int64_t e = 0; e < op->edge_count; e++) {
    double complex slope = edge_slope(op, &op->edge[e], dual);
    if (slope != 0) {
      sum += slope * edge_form(op, &op->edge[e], phase, l, r);
    }
  }
  for (int64_t p = 0; p < op->pattern.n; p++) {
    sum -= k0 * k0 * dual[p % op->nv] * op->mass[p] * l[p] * r[p];
  }
  pk_free(context, dual);
  return sum;
}
