/* shapes of a cell: rect, disc, polygon and stripe, painted in the order of the file. See read.h.
 *
 * Each shape is reduced to the box around it, [z, x] in nm, and the box is held against the cell:
 * in a periodic direction a shape may wrap but not be longer than the period, at a wall it must end
 * before the wall or on it. */
#include <math.h>

#include "base/memory.h"
#include "io/read.h"

enum { MOST_SHAPES = 1000, FEWEST_CORNERS = 3, MOST_CORNERS = 1000 };
/* Of the cell: a length that is computed from a file's decimals may miss the border by rounding. */
static const double BORDER_TOLERANCE = 1e-9;

enum { KIND_RECT, KIND_DISC, KIND_POLYGON, KIND_STRIPE, KIND_COUNT };
static const char *const kinds[KIND_COUNT] = {"rect", "disc", "polygon", "stripe"};

enum { RECT_FILL, RECT_LENGTH, RECT_WIDTH, RECT_AT, RECT_COUNT };
static const pk_key rect_keys[RECT_COUNT] = {
    [RECT_FILL] = {"fill", true},
    [RECT_LENGTH] = {"length_nm", true},
    [RECT_WIDTH] = {"width_nm", true},
    [RECT_AT] = {"at_nm", false},
};
enum { DISC_FILL, DISC_DIAMETER, DISC_AT, DISC_COUNT };
static const pk_key disc_keys[DISC_COUNT] = {
    [DISC_FILL] = {"fill", true},
    [DISC_DIAMETER] = {"diameter_nm", true},
    [DISC_AT] = {"at_nm", false},
};
enum { POLYGON_FILL, POLYGON_CORNERS, POLYGON_COUNT };
static const pk_key polygon_keys[POLYGON_COUNT] = {
    [POLYGON_FILL] = {"fill", true},
    [POLYGON_CORNERS] = {"corners_nm", true},
};
enum { STRIPE_FILL, STRIPE_ACROSS, STRIPE_FROM, STRIPE_TO, STRIPE_COUNT };
static const pk_key stripe_keys[STRIPE_COUNT] = {
    [STRIPE_FILL] = {"fill", true},
    [STRIPE_ACROSS] = {"across", true},
    [STRIPE_FROM] = {"from_nm", true},
    [STRIPE_TO] = {"to_nm", true},
};

typedef struct painter {
  const pk_reader *reader;
  picket_context *context;
  pk_cell *cell;
} painter;

/* The extent of a shape along z and x, nm. */
typedef struct extent {
  double low[2], high[2];
} extent;

static const char axis_letter[2] = {'z', 'x'};

static picket_status fail_shape(const painter *p, const pk_node *node, int axis, const extent *e,
                                double half, const char *what) {
  return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                    "%s %s: it spans %c from %.10g to %.10g nm, the cell from %.10g to %.10g nm",
                    pk_node_path(node).text, what, axis_letter[axis], e->low[axis], e->high[axis],
                    -half, half);
}

/* One axis of a shape against a cell that reaches from -half to half. */
static picket_status check_axis(const painter *p, const pk_node *node, int axis, const extent *e,
                                double half, bool periodic) {
  double slack = 2 * half * BORDER_TOLERANCE;
  if (e->low[axis] >= half - slack || e->high[axis] <= -half + slack) {
    return fail_shape(p, node, axis, e, half, "lies wholly outside the cell");
  }
  if (periodic) {
    return e->high[axis] - e->low[axis] > 2 * half + slack
               ? fail_shape(p, node, axis, e, half, "is longer than one period")
               : PICKET_OK;
  }
  /* Endless shapes simply end at the wall. */
  bool below = isfinite(e->low[axis]) && e->low[axis] < -half - slack;
  bool above = isfinite(e->high[axis]) && e->high[axis] > half + slack;
  return below || above ? fail_shape(p, node, axis, e, half, "reaches outside the cell")
                        : PICKET_OK;
}

/* A shape with ends on all sides. */
static picket_status check_finite(const painter *p, const pk_node *node, const extent *e) {
  const pk_cell *cell = p->cell;
  if (cell->lateral == PK_LATERAL_UNIFORM) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s has a lateral end, but lateral is uniform; use a stripe across z",
                      pk_node_path(node).text);
  }
  picket_status status = check_axis(p, node, PK_U, e, cell->pitch_um * PK_NM_PER_UM / 2, true);
  if (status == PICKET_OK && cell->span_um > 0) {
    status = check_axis(p, node, PK_V, e, cell->span_um * PK_NM_PER_UM / 2,
                        cell->lateral == PK_LATERAL_PERIODIC);
  }
  return status;
}

static picket_status read_size(const painter *p, const pk_node *node, double *nm) {
  const pk_limits limits = {0, PK_LENGTH_HIGH_NM, true, false, false, "nm"};
  return pk_read_number(p->context, node, &limits, nm);
}

/* A point [z, x]; `out` stays as it is if the point is left out. */
static picket_status read_point(const painter *p, const pk_node *node, double out[2]) {
  const pk_limits limits = {-PK_LENGTH_HIGH_NM, PK_LENGTH_HIGH_NM, false, false, false, "nm"};
  return node ? pk_read_numbers(p->context, node, &limits, 2, out) : PICKET_OK;
}

static extent around(const double at[2], const double size[2]) {
  extent e;
  for (int axis = 0; axis < 2; axis++) {
    e.low[axis] = at[axis] - size[axis] / 2;
    e.high[axis] = at[axis] + size[axis] / 2;
  }
  return e;
}

static picket_status read_rect(const painter *p, const pk_node *node) {
  const pk_node *values[RECT_COUNT];
  int material = 0;
  double at[2] = {0, 0};
  double size[2] = {0, 0};
  picket_status status = pk_read_block(p->context, node, rect_keys, RECT_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[RECT_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = read_size(p, values[RECT_LENGTH], &size[PK_U]);
  }
  if (status == PICKET_OK) {
    status = read_size(p, values[RECT_WIDTH], &size[PK_V]);
  }
  if (status == PICKET_OK) {
    status = read_point(p, values[RECT_AT], at);
  }
  if (status == PICKET_OK) {
    extent e = around(at, size);
    status = check_finite(p, node, &e);
  }
  if (status == PICKET_OK) {
    const double at_um[2] = {at[0] / PK_NM_PER_UM, at[1] / PK_NM_PER_UM};
    const double size_um[2] = {size[0] / PK_NM_PER_UM, size[1] / PK_NM_PER_UM};
    status = pk_geometry_add_rect(p->cell->geometry, node->place, material, at_um, size_um);
  }
  return status;
}

static picket_status read_disc(const painter *p, const pk_node *node) {
  const pk_node *values[DISC_COUNT];
  int material = 0;
  double at[2] = {0, 0};
  double diameter = 0;
  picket_status status = pk_read_block(p->context, node, disc_keys, DISC_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[DISC_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = read_size(p, values[DISC_DIAMETER], &diameter);
  }
  if (status == PICKET_OK) {
    status = read_point(p, values[DISC_AT], at);
  }
  if (status == PICKET_OK) {
    const double size[2] = {diameter, diameter};
    extent e = around(at, size);
    status = check_finite(p, node, &e);
  }
  if (status == PICKET_OK) {
    const double at_um[2] = {at[0] / PK_NM_PER_UM, at[1] / PK_NM_PER_UM};
    status = pk_geometry_add_disc(p->cell->geometry, node->place, material, at_um,
                                  diameter / PK_NM_PER_UM);
  }
  return status;
}

/* Corners in µm and the extent around them in nm. */
static picket_status read_corners(const painter *p, const pk_node *list, double (*corners)[2],
                                  extent *e) {
  int i = 0;
  *e = (extent){{INFINITY, INFINITY}, {-INFINITY, -INFINITY}};
  for (const pk_node *node = list->first; node; node = node->next, i++) {
    double corner[2] = {0, 0};
    picket_status status = read_point(p, node, corner);
    if (status != PICKET_OK) {
      return status;
    }
    for (int axis = 0; axis < 2; axis++) {
      e->low[axis] = fmin(e->low[axis], corner[axis]);
      e->high[axis] = fmax(e->high[axis], corner[axis]);
      corners[i][axis] = corner[axis] / PK_NM_PER_UM;
    }
  }
  return PICKET_OK;
}

static picket_status read_polygon(const painter *p, const pk_node *node) {
  const pk_node *values[POLYGON_COUNT];
  int material = 0;
  double(*corners)[2] = NULL;
  extent e;
  picket_status status = pk_read_block(p->context, node, polygon_keys, POLYGON_COUNT, values);
  const pk_node *list = values[POLYGON_CORNERS];
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[POLYGON_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = pk_read_list(p->context, list, FEWEST_CORNERS, MOST_CORNERS, "corners [z, x]");
  }
  if (status == PICKET_OK) {
    corners = pk_alloc(p->context, (size_t)list->count, sizeof *corners);
    status = corners ? read_corners(p, list, corners, &e) : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    status = check_finite(p, node, &e);
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_polygon(p->cell->geometry, node->place, material, list->count,
                                     (const double(*)[2])corners);
  }
  pk_free(p->context, corners);
  return status;
}

/* Whether a stripe across an axis has a place in this kind of cell. */
static picket_status check_stripe(const painter *p, const pk_node *node, int axis,
                                  const extent *e) {
  const pk_cell *cell = p->cell;
  const pk_path_text path = pk_node_path(node);
  bool periodic = axis == PK_U || cell->lateral == PK_LATERAL_PERIODIC;
  if (axis == PK_U && cell->lateral == PK_LATERAL_OPEN) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s across z never ends laterally, but lateral is open; use a rect",
                      path.text);
  }
  if (axis == PK_V && cell->lateral == PK_LATERAL_UNIFORM) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s is across x, but lateral is uniform; use a stripe across z", path.text);
  }
  if (periodic && (isinf(e->low[axis]) || isinf(e->high[axis]))) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s is endless, but the cell repeats along %c; give finite ends", path.text,
                      axis_letter[axis]);
  }
  if (axis == PK_V && cell->lateral == PK_LATERAL_OPEN) {
    return PICKET_OK;
  }
  double size = axis == PK_U ? cell->pitch_um : cell->span_um;
  return check_axis(p, node, axis, e, size * PK_NM_PER_UM / 2, periodic);
}

static picket_status read_stripe(const painter *p, const pk_node *node) {
  static const char *const axes[] = {"z", "x"};
  const pk_limits limits = {-PK_LENGTH_HIGH_NM, PK_LENGTH_HIGH_NM, false, false, true, "nm"};
  const pk_node *values[STRIPE_COUNT];
  int material = 0;
  int axis = 0;
  extent e = {{0, 0}, {0, 0}};
  picket_status status = pk_read_block(p->context, node, stripe_keys, STRIPE_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[STRIPE_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = pk_read_choice(p->context, values[STRIPE_ACROSS], axes, 2, &axis);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, values[STRIPE_FROM], &limits, &e.low[axis]);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, values[STRIPE_TO], &limits, &e.high[axis]);
  }
  if (status == PICKET_OK && !(e.low[axis] < e.high[axis])) {
    status = pk_fail_at(p->context, PICKET_ERROR_INPUT, values[STRIPE_TO]->place,
                        "%s is %s, must be above from_nm, %s", pk_node_path(values[STRIPE_TO]).text,
                        values[STRIPE_TO]->text, values[STRIPE_FROM]->text);
  }
  if (status == PICKET_OK) {
    status = check_stripe(p, node, axis, &e);
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_stripe(p->cell->geometry, node->place, material, (pk_axis_name)axis,
                                    e.low[axis] / PK_NM_PER_UM, e.high[axis] / PK_NM_PER_UM);
  }
  return status;
}

picket_status pk_read_shapes(const pk_reader *reader, const pk_node *list, pk_cell *cell) {
  static picket_status (*const read[KIND_COUNT])(const painter *, const pk_node *) = {
      [KIND_RECT] = read_rect,
      [KIND_DISC] = read_disc,
      [KIND_POLYGON] = read_polygon,
      [KIND_STRIPE] = read_stripe,
  };
  painter p = {reader, reader->context, cell};
  picket_status status = pk_read_list(reader->context, list, 1, MOST_SHAPES, "shapes");
  const pk_node *node = status == PICKET_OK ? list->first : NULL;
  for (; status == PICKET_OK && node; node = node->next) {
    const pk_node *value = NULL;
    int kind = 0;
    status = pk_read_kind(reader->context, node, kinds, KIND_COUNT, &kind, &value);
    if (status == PICKET_OK) {
      status = read[kind](&p, value);
    }
  }
  return status;
}
