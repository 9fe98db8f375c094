/* See components.h. Sums run over the edges of the operator; an edge from p to q gives its J to
 * both nodes. What crosses a period is u_q f in the frame of p, f = ξ^wu χ^wv, and J/f in the frame
 * of q.
 */
#include "operator/components.h"

#include <assert.h>
#include <string.h>

#include "base/memory.h"
#include "operator/operator_private.h"

typedef struct taking {
  const pk_operator *op;
  pk_phase phase;
  double complex k;
  const double complex *u;
  double complex *along, *across; /* [n] J × exp(-ikz) at the unknowns */
  pk_components *out;
} taking;

static double complex wrap(pk_phase phase, int wu, int wv) {
  double complex factor = wu > 0 ? phase.xi : wu < 0 ? 1 / phase.xi : 1;
  return wv > 0 ? factor * phase.chi : wv < 0 ? factor / phase.chi : factor;
}

static double line_of(const pk_axis *axis, int unknown) {
  return axis->line[unknown + pk_axis_first_line(axis)];
}

static double interval(const pk_axis *axis, int i) {
  return axis->line[i + 1] - axis->line[i];
}

/* The part that the edge above (or below) a node has in the value at the node: what is nearer
 * counts more. On a free end there is one edge, and the slope is odd about the wall: nothing. */
static double part_of(const pk_axis *axis, int unknown, bool above) {
  int line = unknown + pk_axis_first_line(axis), n = axis->intervals;
  int up = line, down = line - 1;
  if (axis->low == PK_END_PERIODIC) {
    up %= n;
    down = (down + n) % n;
  } else if (down < 0 || up >= n) {
    return 0;
  }
  double high = interval(axis, up), low = interval(axis, down);
  return (above ? low : high) / (low + high);
}

static double complex dual_across(const pk_operator *op, const pk_edge *edge) {
  double low, high;
  double complex length = 1;
  int iu = (int)(edge->p / op->nv), iv = (int)(edge->p % op->nv);
  if (edge->along == PK_V) {
    pk_axis_dual(&op->u, iu + pk_axis_first_line(&op->u), &low, &high, &length);
  } else if (!op->lateral) {
    pk_axis_dual(&op->v, iv + pk_axis_first_line(&op->v), &low, &high, &length);
  }
  return length;
}

/* exp(-ikz) at a node, moved along z. */
static double complex strip(const taking *t, int64_t node, double step) {
  return cexp(-I * t->k * (line_of(&t->op->u, (int)(node / t->op->nv)) + step));
}

static void add_along(taking *t, const pk_edge *edge, double complex flow) {
  const pk_axis *axis = &t->op->u;
  int ip = (int)(edge->p / t->op->nv), iq = (int)(edge->q / t->op->nv);
  /* The same number for both nodes: what is left is periodic. */
  flow *= strip(t, edge->p, 0.5 * interval(axis, ip));
  t->along[edge->p] += part_of(axis, ip, true) * flow;
  t->along[edge->q] += part_of(axis, iq, false) * flow;
}

static void add_across(taking *t, const pk_edge *edge, double complex flow, double complex factor) {
  const pk_axis *axis = &t->op->v;
  int ip = (int)(edge->p % t->op->nv), iq = (int)(edge->q % t->op->nv);
  t->across[edge->p] += part_of(axis, ip, true) * flow * strip(t, edge->p, 0);
  t->across[edge->q] += part_of(axis, iq, false) * flow / factor * strip(t, edge->q, 0);
}

/* From a wall where u vanishes: the wall takes the flow of its edge. */
static void add_wall(taking *t, const pk_edge *edge, double complex flow) {
  int iu = (int)(edge->p / t->op->nv), iv = (int)(edge->p % t->op->nv);
  bool at_low = iv == 0;
  flow *= (at_low ? 1 : -1) * strip(t, edge->p, 0);
  t->across[edge->p] += part_of(&t->op->v, iv, !at_low) * flow;
  t->out->across[(int64_t)iu * t->out->nx + (at_low ? 0 : t->out->nx - 1)] = flow;
}

static void take_edges(taking *t) {
  const pk_operator *op = t->op;
  for (int64_t e = 0; e < op->edge_count; e++) {
    const pk_edge *edge = &op->edge[e];
    if (edge->q == edge->p) {
      continue; /* nothing varies along a uniform axis at kx = 0 */
    }
    double complex weight = pk_edge_weight(op, edge) / dual_across(op, edge);
    if (edge->q < 0) {
      add_wall(t, edge, weight * t->u[edge->p]);
      continue;
    }
    double complex factor = wrap(t->phase, edge->wu, edge->wv);
    double complex flow = weight * (factor * t->u[edge->q] - t->u[edge->p]);
    if (edge->along == PK_U) {
      add_along(t, edge, flow);
    } else {
      add_across(t, edge, flow, factor);
    }
  }
}

static double complex cross_difference(const pk_cross *cross, int axis, pk_phase phase,
                                       const double complex *u) {
  double complex sum = 0;
  for (int a = 0; a < cross->count[axis]; a++) {
    sum += cross->coefficient[axis][a] * u[cross->node[axis][a]] *
           wrap(phase, cross->wu[axis][a], cross->wv[axis][a]);
  }
  return sum;
}

static double complex cross_weight(const pk_operator *op, const pk_cross *cross) {
  return pk_mixture_mixed(&op->mixtures.list[cross->mixture], op->permittivity);
}

/* At oblique interfaces each direction of ∇u drives a flow along the other. */
static void take_crosses(taking *t) {
  for (int64_t i = 0; i < t->op->cross_count; i++) {
    const pk_cross *cross = &t->op->cross[i];
    int64_t node = cross->node[0][0];
    double complex weight = cross_weight(t->op, cross) * strip(t, node, 0);
    t->along[node] += weight * cross_difference(cross, 1, t->phase, t->u);
    t->across[node] += weight * cross_difference(cross, 0, t->phase, t->u);
  }
}

/* The node that line nv of a lateral period repeats, and its factor. With two periodic axes every
 * unknown has two edges, the one along v second. */
static int64_t beyond(const taking *t, int iu, double complex *factor) {
  const pk_operator *op = t->op;
  int64_t p = (int64_t)iu * op->nv + op->nv - 1;
  const pk_edge *edge = &op->edge[2 * p + 1];
  assert(edge->p == p && edge->along == PK_V && edge->wv > 0);
  *factor = wrap(t->phase, edge->wu, edge->wv) * strip(t, p, 0) / strip(t, edge->q, 0);
  return edge->q;
}

static void put_node(taking *t, int64_t place, int64_t node, double complex factor) {
  t->out->u[place] = factor * t->u[node] * strip(t, node, 0);
  t->out->along[place] = factor * t->along[node];
  t->out->across[place] = factor * t->across[node];
}

/* From unknowns to lines: walls stay zero but for what their edges gave, ends of periods repeat. */
static void put_lines(taking *t) {
  const pk_operator *op = t->op;
  int nx = t->out->nx, first = op->lateral ? 0 : pk_axis_first_line(&op->v);
  for (int iu = 0; iu < op->nu; iu++) {
    for (int iv = 0; iv < op->nv; iv++) {
      put_node(t, (int64_t)iu * nx + iv + first, (int64_t)iu * op->nv + iv, 1);
    }
    if (!op->lateral && op->v.low == PK_END_PERIODIC) {
      double complex factor;
      int64_t node = beyond(t, iu, &factor);
      put_node(t, (int64_t)iu * nx + nx - 1, node, factor);
    }
  }
  double complex *arrays[] = {t->out->u, t->out->along, t->out->across};
  for (int a = 0; a < 3; a++) {
    memcpy(arrays[a] + (int64_t)op->nu * nx, arrays[a], (size_t)nx * sizeof *arrays[a]);
  }
}

static picket_status take_permittivity(taking *t, const pk_geometry *geometry) {
  const pk_operator *op = t->op;
  pk_components *c = t->out;
  picket_status status = PICKET_OK;
  for (int64_t i = 0; status == PICKET_OK && i < (int64_t)c->nz * c->nx; i++) {
    double low[2] = {0, -0.5}, high[2] = {0, 0.5};
    double complex length, mean = 0;
    int lu = (int)(i / c->nx) % op->nu, lv = (int)(i % c->nx);
    pk_axis_dual(&op->u, lu, &low[0], &high[0], &length);
    if (!op->lateral) {
      bool repeats = op->v.low == PK_END_PERIODIC && lv == c->nx - 1;
      pk_axis_dual(&op->v, repeats ? 0 : lv, &low[1], &high[1], &length);
      if (repeats) { /* the box of line 0, one period on: a shift is in the geometry */
        double period = op->v.line[op->v.intervals] - op->v.line[0];
        low[1] += period;
        high[1] += period;
      }
    }
    pk_box box;
    status = pk_geometry_box(geometry, low, high, &box);
    for (int b = 0; status == PICKET_OK && b < box.count; b++) {
      mean += box.fraction[b] * op->permittivity[box.medium[b]];
    }
    c->permittivity[i] = mean;
  }
  return status;
}

static picket_status make_lines(const pk_operator *op, pk_components *c) {
  c->nz = op->u.intervals + 1;
  c->nx = op->lateral ? 1 : op->v.intervals + 1;
  int64_t places = (int64_t)c->nz * c->nx;
  c->z = pk_copy(c->context, op->u.line, (size_t)c->nz, sizeof *c->z);
  c->x = op->lateral ? PK_NEW(c->context, 1, double)
                     : pk_copy(c->context, op->v.line, (size_t)c->nx, sizeof *c->x);
  c->u = PK_NEW(c->context, places, double complex);
  c->along = PK_NEW(c->context, places, double complex);
  c->across = PK_NEW(c->context, places, double complex);
  c->permittivity = PK_NEW(c->context, places, double complex);
  return c->z && c->x && c->u && c->along && c->across && c->permittivity ? PICKET_OK
                                                                          : PICKET_ERROR_MEMORY;
}

picket_status pk_components_take(picket_context *context, const pk_operator *op,
                                 const pk_geometry *geometry, pk_phase phase, double complex k,
                                 const double complex *u, pk_components *out) {
  assert(op->u.low == PK_END_PERIODIC && phase.kx == 0);
  pk_components c = {.context = context};
  taking t = {op, phase, k, u, NULL, NULL, &c};
  t.along = PK_NEW(context, op->pattern.n, double complex);
  t.across = PK_NEW(context, op->pattern.n, double complex);
  picket_status status = t.along && t.across ? make_lines(op, &c) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    take_edges(&t);
    take_crosses(&t);
    put_lines(&t);
    status = take_permittivity(&t, geometry);
  }
  pk_free(context, t.along);
  pk_free(context, t.across);
  if (status != PICKET_OK) {
    pk_components_clear(&c);
    return status;
  }
  *out = c;
  return PICKET_OK;
}

void pk_components_clear(pk_components *components) {
  if (components->context) {
    void *arrays[] = {components->z,     components->x,      components->u,
                      components->along, components->across, components->permittivity};
    for (size_t i = 0; i < sizeof arrays / sizeof arrays[0]; i++) {
      pk_free(components->context, arrays[i]);
    }
  }
  memset(components, 0, sizeof *components);
}

/* Mean of the two neighbours along u: what stands in for u where D_u is a mean of two edges, so
 * that the flux is conserved on oblique interfaces too. */
static double complex neighbours_mean(const pk_cross *cross, pk_phase phase,
                                      const double complex *u) {
  double complex sum = 0;
  for (int a = 1; a < cross->count[0]; a++) {
    sum += 0.5 * wrap(phase, cross->wu[0][a], cross->wv[0][a]) * u[cross->node[0][a]];
  }
  return sum;
}

double pk_components_flux(const pk_operator *op, pk_phase phase, pk_power_window window,
                          const double complex *u) {
  double sum = 0;
  for (int64_t e = 0; e < op->edge_count; e++) {
    const pk_edge *edge = &op->edge[e];
    int iv = (int)(edge->p % op->nv);
    if (edge->along != PK_U || iv < window.low || iv > window.high) {
      continue;
    }
    double complex other = wrap(phase, edge->wu, edge->wv) * u[edge->q];
    double complex flow = pk_edge_weight(op, edge) * (other - u[edge->p]);
    sum +=
        interval(&op->u, (int)(edge->p / op->nv)) * cimag(flow * conj(0.5 * (other + u[edge->p])));
  }
  for (int64_t i = 0; i < op->cross_count; i++) {
    const pk_cross *cross = &op->cross[i];
    int iv = (int)(cross->node[0][0] % op->nv);
    if (iv >= window.low && iv <= window.high) {
      double complex flow =
          cross->scale * cross_weight(op, cross) * cross_difference(cross, 1, phase, u);
      sum += cimag(flow * conj(neighbours_mean(cross, phase, u)));
    }
  }
  return sum / (op->u.line[op->u.intervals] - op->u.line[0]);
}
