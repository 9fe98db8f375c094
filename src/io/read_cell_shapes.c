/* shapes of a cell, held against its border. See read.h.
 *
 * In a periodic direction a shape may wrap but not be longer than the period, at a wall it must end
 * before the wall or on it. */
#include <math.h>

#include "io/read.h"

static const pk_shape_plane PLANE = {.letter = {'z', 'x'},
                                     .rect_size = {"length_nm", "width_nm"},
                                     .farthest_nm = PK_LENGTH_HIGH_NM,
                                     .largest_nm = PK_LENGTH_HIGH_NM,
                                     .seen_from_above = true};

typedef struct canvas {
  picket_context *context;
  pk_cell *cell;
} canvas;

static picket_status fail_shape(const canvas *c, const pk_shape *s, int axis, double half,
                                const char *what) {
  return pk_fail_at(c->context, PICKET_ERROR_INPUT, s->node->place,
                    "%s %s: it spans %c from %.10g to %.10g nm, the cell from %.10g to %.10g nm",
                    pk_node_path(s->node).text, what, PLANE.letter[axis], s->low[axis],
                    s->high[axis], -half, half);
}

/* One axis of a shape against a cell that reaches from -half to half. */
static picket_status check_axis(const canvas *c, const pk_shape *s, int axis, double half,
                                bool periodic) {
  double slack = 2 * half * PK_BORDER_TOLERANCE;
  if (s->low[axis] >= half - slack || s->high[axis] <= -half + slack) {
    return fail_shape(c, s, axis, half, "lies wholly outside the cell");
  }
  if (periodic) {
    return s->high[axis] - s->low[axis] > 2 * half + slack
               ? fail_shape(c, s, axis, half, "is longer than one period")
               : PICKET_OK;
  }
  /* Endless shapes simply end at the wall. */
  bool below = isfinite(s->low[axis]) && s->low[axis] < -half - slack;
  bool above = isfinite(s->high[axis]) && s->high[axis] > half + slack;
  return below || above ? fail_shape(c, s, axis, half, "reaches outside the cell") : PICKET_OK;
}

/* A shape with ends on all sides. */
static picket_status check_finite(const canvas *c, const pk_shape *s) {
  const pk_cell *cell = c->cell;
  if (cell->lateral == PK_LATERAL_UNIFORM) {
    return pk_fail_at(c->context, PICKET_ERROR_INPUT, s->node->place,
                      "%s has a lateral end, but lateral is uniform; use a stripe across z",
                      pk_node_path(s->node).text);
  }
  picket_status status = check_axis(c, s, PK_U, cell->pitch_um * PK_NM_PER_UM / 2, true);
  if (status == PICKET_OK && cell->span_um > 0) {
    status = check_axis(c, s, PK_V, cell->span_um * PK_NM_PER_UM / 2,
                        cell->lateral == PK_LATERAL_PERIODIC);
  }
  return status;
}

/* Whether a stripe across an axis has a place in this kind of cell. */
static picket_status check_stripe(const canvas *c, const pk_shape *s) {
  const pk_cell *cell = c->cell;
  const pk_path_text path = pk_node_path(s->node);
  const int axis = s->across;
  bool periodic = axis == PK_U || cell->lateral == PK_LATERAL_PERIODIC;
  if (axis == PK_U && cell->lateral == PK_LATERAL_OPEN) {
    return pk_fail_at(c->context, PICKET_ERROR_INPUT, s->node->place,
                      "%s across z never ends laterally, but lateral is open; use a rect",
                      path.text);
  }
  if (axis == PK_V && cell->lateral == PK_LATERAL_UNIFORM) {
    return pk_fail_at(c->context, PICKET_ERROR_INPUT, s->node->place,
                      "%s is across x, but lateral is uniform; use a stripe across z", path.text);
  }
  if (periodic && (isinf(s->low[axis]) || isinf(s->high[axis]))) {
    return pk_fail_at(c->context, PICKET_ERROR_INPUT, s->node->place,
                      "%s is endless, but the cell repeats along %c; give finite ends", path.text,
                      PLANE.letter[axis]);
  }
  if (axis == PK_V && cell->lateral == PK_LATERAL_OPEN) {
    return PICKET_OK;
  }
  double size = axis == PK_U ? cell->pitch_um : cell->span_um;
  return check_axis(c, s, axis, size * PK_NM_PER_UM / 2, periodic);
}

static picket_status take(void *owner, const pk_shape *shape) {
  const canvas *c = owner;
  picket_status status =
      shape->kind == PK_SHAPE_STRIPE ? check_stripe(c, shape) : check_finite(c, shape);
  return status == PICKET_OK ? pk_shape_paint(c->context, shape, c->cell->geometry) : status;
}

picket_status pk_read_cell_shapes(const pk_reader *reader, const pk_node *list, pk_cell *cell) {
  canvas c = {reader->context, cell};
  return pk_read_shapes(reader, list, &PLANE, take, &c);
}
