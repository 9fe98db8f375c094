/* Building an operator: its pattern, its edges and what mixture of media each site holds. The
 * values come with a load (values.c). */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "operator/operator_private.h"

/* The neighbour of unknown (iu, iv) one step along an axis, and how the step wraps. False at a
 * wall. */
static bool neighbour(const pk_operator *op, int shift, int iu, int iv, int du, int dv,
                      int64_t *node, int *wu, int *wv) {
  *wu = *wv = 0;
  iv += dv;
  if (iv < 0 || iv >= op->nv) {
    if (op->v.low != PK_END_PERIODIC) {
      return false;
    }
    /* Row nv is row 0 moved by +shift lines along u, so its node iu is node iu - shift there. */
    int side = iv < 0 ? -1 : 1;
    *wv = side;
    iv -= side * op->nv;
    iu -= side * shift;
  }
  iu += du;
  if (iu < 0 || iu >= op->nu) {
    if (op->u.low != PK_END_PERIODIC) {
      return false;
    }
    *wu = iu < 0 ? -1 : 1;
    iu -= *wu * op->nu;
  }
  *node = (int64_t)iu * op->nv + iv;
  return true;
}

/* Offsets of the stencil: five points, and the four diagonal ones where interfaces are oblique. */
static const int STENCIL[9][2] = {{0, 0}, {1, 0},  {-1, 0}, {0, 1},  {0, -1},
                                  {1, 1}, {1, -1}, {-1, 1}, {-1, -1}};

typedef struct entry {
  int64_t row;
  signed char wu, wv;
} entry;

/* Entries of column (iu, iv), rows rising. */
static int column_entries(const pk_operator *op, int shift, int points, int iu, int iv,
                          entry entries[9]) {
  int count = 0;
  for (int k = 0; k < points; k++) {
    int64_t node;
    int wu, wv;
    if (!neighbour(op, shift, iu, iv, STENCIL[k][0], STENCIL[k][1], &node, &wu, &wv)) {
      continue;
    }
    if (k > 0 && node == (int64_t)iu * op->nv + iv) {
      continue; /* a uniform axis: the node is its own neighbour */
    }
    int at = count++;
    while (at > 0 && entries[at - 1].row > node) {
      entries[at] = entries[at - 1];
      at--;
    }
    /* The wrap of the row seen from the column is minus that of the column seen from the row. */
    entries[at] = (entry){node, (signed char)-wu, (signed char)-wv};
    assert(at == 0 || entries[at - 1].row != node);
  }
  return count;
}

static picket_status build_pattern(pk_operator *op, int shift, int points) {
  int64_t n = (int64_t)op->nu * op->nv;
  picket_context *context = op->context;
  op->pattern.n = n;
  op->pattern.start = PK_NEW(context, n + 1, int64_t);
  op->pattern.row = PK_NEW(context, n * points, int64_t);
  op->wu = PK_NEW(context, n * points, signed char);
  op->wv = PK_NEW(context, n * points, signed char);
  op->diagonal = PK_NEW(context, n, int64_t);
  if (!op->pattern.start || !op->pattern.row || !op->wu || !op->wv || !op->diagonal) {
    return PICKET_ERROR_MEMORY;
  }
  int64_t slot = 0;
  for (int64_t c = 0; c < n; c++) {
    entry entries[9];
    int count = column_entries(op, shift, points, (int)(c / op->nv), (int)(c % op->nv), entries);
    for (int k = 0; k < count; k++, slot++) {
      op->pattern.row[slot] = entries[k].row;
      op->wu[slot] = entries[k].wu;
      op->wv[slot] = entries[k].wv;
      if (entries[k].row == c) {
        op->diagonal[c] = slot;
      }
    }
    op->pattern.start[c + 1] = slot;
  }
  return PICKET_OK;
}

int64_t pk_operator_slot(const pk_operator *op, int64_t row, int64_t column) {
  int64_t slot = op->pattern.start[column];
  while (op->pattern.row[slot] != row) {
    slot++;
    assert(slot < op->pattern.start[column + 1]);
  }
  return slot;
}

/* The box of an interval or a dual interval along one axis, seen from a line. */
typedef struct reach {
  double low, high;
  double complex length;
} reach;

static reach dual_of(const pk_axis *axis, int unknown) {
  reach r;
  pk_axis_dual(axis, unknown + pk_axis_first_line(axis), &r.low, &r.high, &r.length);
  return r;
}

static reach interval_of(const pk_axis *axis, int unknown) {
  int line = unknown + pk_axis_first_line(axis);
  return (reach){axis->line[line], axis->line[line + 1], axis->length[line]};
}

/* Twice as wide about the same middle, but not across a wall. */
static reach widened(const pk_geometry *geometry, pk_axis_name axis, reach r) {
  const pk_frame *frame = pk_geometry_frame(geometry);
  double half = 0.5 * (r.high - r.low);
  reach wide = {r.low - half, r.high + half, r.length};
  if (!frame->periodic[axis]) {
    wide.low = fmax(wide.low, frame->from[axis]);
    wide.high = fmin(wide.high, frame->to[axis]);
  }
  return wide;
}

static picket_status box_of(const pk_geometry *geometry, reach u, reach v, pk_box *box) {
  double low[2] = {u.low, v.low}, high[2] = {u.high, v.high};
  return pk_geometry_box(geometry, low, high, box);
}

/* hy near an oblique or curved interface: a box twice as wide brings the error down by 2 to 4
 * (measured on circles); rectangles on grid lines keep the box of the edge. */
static picket_status site_mixture(pk_operator *op, const pk_operator_plan *plan, reach u, reach v,
                                  int *mixture) {
  pk_box box;
  picket_status status = box_of(plan->geometry, u, v, &box);
  if (status == PICKET_OK && plan->polarization == PK_HY &&
      !pk_geometry_is_rectangular(plan->geometry)) {
    pk_box wide;
    status = box_of(plan->geometry, widened(plan->geometry, PK_U, u),
                    widened(plan->geometry, PK_V, v), &wide);
    if (status == PICKET_OK && wide.oblique) {
      box = wide;
    }
  }
  return status == PICKET_OK ? pk_mixtures_take(&op->mixtures, &box, mixture) : status;
}

static picket_status add_edge(pk_operator *op, const pk_operator_plan *plan, int iu, int iv,
                              pk_axis_name along) {
  int64_t q;
  int wu, wv;
  bool forward = along == PK_U;
  pk_edge edge = {.p = (int64_t)iu * op->nv + iv, .along = (unsigned char)along};
  reach u = dual_of(&op->u, iu), v = plan->uniform_v ? (reach){-0.5, 0.5, 1} : dual_of(&op->v, iv);
  bool uniform = plan->uniform_v && !forward;
  if (!uniform) {
    if (!neighbour(op, plan->shift_lines, iu, iv, forward, !forward, &q, &wu, &wv)) {
      return PICKET_OK;
    }
    reach step = interval_of(forward ? &op->u : &op->v, forward ? iu : iv);
    *(forward ? &u : &v) = step;
    edge.scale = forward ? v.length / step.length : u.length / step.length;
    edge.q = q;
    edge.wu = (signed char)wu;
    edge.wv = (signed char)wv;
  } else {
    edge.q = edge.p;
    edge.scale = u.length;
  }
  if (plan->polarization == PK_HY) {
    picket_status status = site_mixture(op, plan, u, v, &edge.mixture);
    if (status != PICKET_OK) {
      return status;
    }
  }
  edge.slot[0] = op->diagonal[edge.p];
  edge.slot[1] = op->diagonal[edge.q];
  edge.slot[2] = uniform ? edge.slot[0] : pk_operator_slot(op, edge.p, edge.q);
  edge.slot[3] = uniform ? edge.slot[0] : pk_operator_slot(op, edge.q, edge.p);
  op->edge[op->edge_count++] = edge;
  return PICKET_OK;
}

/* An edge from a wall line, where the unknown is zero, to the first unknown (or from the last one
 * to the wall): only the diagonal is touched. Kept as an edge whose far end is missing. */
static picket_status add_wall_edge(pk_operator *op, const pk_operator_plan *plan, int iu, int iv,
                                   pk_axis_name along, bool at_low) {
  const pk_axis *axis = along == PK_U ? &op->u : &op->v;
  if ((at_low ? axis->low : axis->high) != PK_END_ZERO) {
    return PICKET_OK;
  }
  int line = at_low ? 0 : axis->intervals - 1;
  reach step = {axis->line[line], axis->line[line + 1], axis->length[line]};
  reach u = along == PK_U ? step : dual_of(&op->u, iu);
  reach v = along == PK_V ? step : plan->uniform_v ? (reach){-0.5, 0.5, 1} : dual_of(&op->v, iv);
  pk_edge edge = {.p = (int64_t)iu * op->nv + iv, .q = -1, .along = (unsigned char)along};
  edge.scale = (along == PK_U ? v.length : u.length) / step.length;
  if (plan->polarization == PK_HY) {
    picket_status status = site_mixture(op, plan, u, v, &edge.mixture);
    if (status != PICKET_OK) {
      return status;
    }
  }
  edge.slot[0] = op->diagonal[edge.p];
  op->edge[op->edge_count++] = edge;
  return PICKET_OK;
}

static picket_status add_wall_edges(pk_operator *op, const pk_operator_plan *plan) {
  picket_status status = PICKET_OK;
  for (int iu = 0; status == PICKET_OK && iu < op->nu; iu++) {
    status = add_wall_edge(op, plan, iu, 0, PK_V, true);
    if (status == PICKET_OK) {
      status = add_wall_edge(op, plan, iu, op->nv - 1, PK_V, false);
    }
  }
  for (int iv = 0; status == PICKET_OK && iv < op->nv; iv++) {
    status = add_wall_edge(op, plan, 0, iv, PK_U, true);
    if (status == PICKET_OK) {
      status = add_wall_edge(op, plan, op->nu - 1, iv, PK_U, false);
    }
  }
  return status;
}

static picket_status build_edges(pk_operator *op, const pk_operator_plan *plan) {
  int64_t most = 2 * op->pattern.n + 2 * ((int64_t)op->nu + op->nv);
  op->edge = PK_NEW(op->context, most, pk_edge);
  picket_status status = op->edge ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int64_t p = 0; status == PICKET_OK && p < op->pattern.n; p++) {
    int iu = (int)(p / op->nv), iv = (int)(p % op->nv);
    status = add_edge(op, plan, iu, iv, PK_U);
    if (status == PICKET_OK) {
      status = add_edge(op, plan, iu, iv, PK_V);
    }
  }
  return status == PICKET_OK ? add_wall_edges(op, plan) : status;
}

/* D along one axis at a node as the mean of the differences on its two edges. */
static void cross_difference(const pk_operator *op, int shift, int iu, int iv, int axis,
                             pk_cross *cross) {
  const pk_axis *a = axis == 0 ? &op->u : &op->v;
  int line = (axis == 0 ? iu : iv) + pk_axis_first_line(a);
  int count = 1;
  cross->node[axis][0] = (int64_t)iu * op->nv + iv;
  for (int side = -1; side <= 1; side += 2) {
    int interval = side < 0 ? line - 1 : line;
    if (a->low == PK_END_PERIODIC) {
      interval = (interval + a->intervals) % a->intervals;
    }
    if (interval < 0 || interval >= a->intervals) {
      continue; /* on a free wall the derivative beyond mirrors this side's and cancels it */
    }
    double complex half = 0.5 * side / a->length[interval];
    cross->coefficient[axis][0] -= half;
    int64_t node;
    int wu, wv;
    if (neighbour(op, shift, iu, iv, axis == 0 ? side : 0, axis == 1 ? side : 0, &node, &wu, &wv)) {
      cross->node[axis][count] = node;
      cross->wu[axis][count] = (signed char)wu;
      cross->wv[axis][count] = (signed char)wv;
      cross->coefficient[axis][count++] = half;
    }
  }
  cross->count[axis] = count;
}

static bool on_free_wall(const pk_axis *axis, int unknown) {
  int line = unknown + pk_axis_first_line(axis);
  return axis->low != PK_END_PERIODIC && (line == 0 || line == axis->intervals);
}

static picket_status add_cross(pk_operator *op, const pk_operator_plan *plan, int64_t p) {
  int iu = (int)(p / op->nv), iv = (int)(p % op->nv);
  reach u = dual_of(&op->u, iu), v = dual_of(&op->v, iv);
  pk_cross cross = {0};
  picket_status status = site_mixture(op, plan, u, v, &cross.mixture);
  if (status != PICKET_OK || op->mixtures.list[cross.mixture].facing[1] == 0 ||
      on_free_wall(&op->u, iu) || on_free_wall(&op->v, iv)) {
    return status;
  }
  cross.scale = u.length * v.length;
  cross_difference(op, plan->shift_lines, iu, iv, 0, &cross);
  cross_difference(op, plan->shift_lines, iu, iv, 1, &cross);
  for (int s = 0; s < 2; s++) {
    for (int a = 0; a < cross.count[s]; a++) {
      for (int b = 0; b < cross.count[1 - s]; b++) {
        cross.slot[s][a][b] = pk_operator_slot(op, cross.node[s][a], cross.node[1 - s][b]);
      }
    }
  }
  op->cross[op->cross_count++] = cross;
  return PICKET_OK;
}

static picket_status build_crosses(pk_operator *op, const pk_operator_plan *plan) {
  op->cross = PK_NEW(op->context, op->pattern.n, pk_cross);
  picket_status status = op->cross ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int64_t p = 0; status == PICKET_OK && p < op->pattern.n; p++) {
    status = add_cross(op, plan, p);
  }
  return status;
}

static picket_status build_nodes(pk_operator *op, const pk_operator_plan *plan) {
  int64_t n = op->pattern.n;
  op->cell = PK_NEW(op->context, n, double complex);
  op->mass = PK_NEW(op->context, n, double complex);
  op->lateral = plan->uniform_v ? PK_NEW(op->context, n, double complex) : NULL;
  op->node_mixture = PK_NEW(op->context, n, int);
  op->stiff = PK_NEW(op->context, op->pattern.start[n], double complex);
  op->permittivity = PK_NEW(op->context, plan->media, double complex);
  if (!op->cell || !op->mass || !op->node_mixture || !op->stiff || !op->permittivity ||
      (plan->uniform_v && !op->lateral)) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = PICKET_OK;
  for (int64_t p = 0; status == PICKET_OK && p < n; p++) {
    reach u = dual_of(&op->u, (int)(p / op->nv));
    reach v = plan->uniform_v ? (reach){-0.5, 0.5, 1} : dual_of(&op->v, (int)(p % op->nv));
    op->cell[p] = u.length * v.length;
    if (plan->polarization == PK_EY) {
      pk_box box;
      status = box_of(plan->geometry, u, v, &box);
      if (status == PICKET_OK) {
        status = pk_mixtures_take(&op->mixtures, &box, &op->node_mixture[p]);
      }
    }
  }
  return status;
}

static picket_status copy_axis(picket_context *context, const pk_axis *from, pk_axis *to,
                               bool *is_real) {
  *to = *from;
  to->line = pk_copy(context, from->line, (size_t)from->intervals + 1, sizeof(double));
  to->length = pk_copy(context, from->length, (size_t)from->intervals, sizeof(double complex));
  for (int i = 0; i < from->intervals; i++) {
    *is_real = *is_real && cimag(from->length[i]) == 0;
  }
  return to->line && to->length ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status build(pk_operator *op, const pk_operator_plan *plan) {
  op->polarization = plan->polarization;
  op->media = plan->media;
  op->real_axes = true;
  picket_status status = copy_axis(op->context, plan->u, &op->u, &op->real_axes);
  if (status == PICKET_OK) {
    status = copy_axis(op->context, plan->v, &op->v, &op->real_axes);
  }
  if (status == PICKET_OK) {
    status = pk_mixtures_open(op->context, plan->media, &op->mixtures);
  }
  if (status != PICKET_OK) {
    return status;
  }
  op->nu = pk_axis_unknowns(&op->u);
  op->nv = plan->uniform_v ? 1 : pk_axis_unknowns(&op->v);
  assert(op->nu >= 3 || op->u.low != PK_END_PERIODIC);
  assert(plan->uniform_v || op->nv >= 3 || op->v.low != PK_END_PERIODIC);
  bool oblique = plan->polarization == PK_HY && !pk_geometry_is_rectangular(plan->geometry);
  status = build_pattern(op, plan->shift_lines, oblique ? 9 : 5);
  if (status == PICKET_OK) {
    status = build_nodes(op, plan);
  }
  if (status == PICKET_OK) {
    status = build_edges(op, plan);
  }
  if (status == PICKET_OK && oblique) {
    status = build_crosses(op, plan);
  }
  return status;
}

picket_status pk_operator_create(picket_context *context, const pk_operator_plan *plan,
                                 pk_operator **out) {
  pk_operator *op = PK_NEW(context, 1, pk_operator);
  if (!op) {
    return PICKET_ERROR_MEMORY;
  }
  op->context = pk_context_hold(context);
  picket_status status = build(op, plan);
  if (status != PICKET_OK) {
    pk_operator_free(op);
    return status;
  }
  *out = op;
  return PICKET_OK;
}

void pk_operator_free(pk_operator *op) {
  if (!op) {
    return;
  }
  picket_context *context = op->context;
  pk_axis_clear(context, &op->u);
  pk_axis_clear(context, &op->v);
  pk_mixtures_close(&op->mixtures);
  pk_corner_cache_free(op->cures);
  void *arrays[] = {op->pattern.start, op->pattern.row,  op->wu,    op->wv,
                    op->diagonal,      op->edge,         op->cross, op->node_mixture,
                    op->cell,          op->permittivity, op->stiff, op->lateral,
                    op->mass,          op->corner,       op};
  for (size_t i = 0; i < sizeof arrays / sizeof arrays[0]; i++) {
    pk_free(context, arrays[i]);
  }
  pk_context_release(context);
}

static bool holds(const pk_mixture *mixture, int medium) {
  for (int i = 0; i < mixture->count; i++) {
    if (mixture->medium[i] == medium) {
      return true;
    }
  }
  return false;
}

bool pk_operator_uses(const pk_operator *op, int medium) {
  if (op->polarization == PK_EY) {
    for (int64_t p = 0; p < op->pattern.n; p++) {
      if (holds(&op->mixtures.list[op->node_mixture[p]], medium)) {
        return true;
      }
    }
    return false;
  }
  for (int64_t e = 0; e < op->edge_count; e++) {
    if (holds(&op->mixtures.list[op->edge[e].mixture], medium)) {
      return true;
    }
  }
  return false;
}

int pk_operator_lines(const pk_operator *op, pk_axis_name axis) {
  return axis == PK_U ? op->nu : op->nv;
}

void pk_operator_line(const pk_operator *op, pk_axis_name axis, int i, double *at, double *length) {
  const pk_axis *a = axis == PK_U ? &op->u : &op->v;
  if (axis == PK_V && op->lateral) {
    *at = 0; /* a uniform axis: any unit of length */
    *length = 1;
    return;
  }
  int line = i + pk_axis_first_line(a);
  double low, high;
  double complex stretched;
  pk_axis_dual(a, line, &low, &high, &stretched);
  *at = a->line[line];
  *length = high - low;
}
