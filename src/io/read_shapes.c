/* shapes of a painted plane: rect, disc, polygon and stripe, in the order of the file. See read.h.
 *
 * The planes of a cell (z, x), of a section and of a channel's slices (both x, y) differ in the
 * letters of their axes, in the keys of a rect's sizes, in how far out coordinates may lie, and in
 * whether a shape may be limited along z; all of that is in a pk_shape_plane. Each shape is reduced
 * to a pk_shape in nm and handed to the block it stands in, which checks and paints it. */
#include <math.h>
#include <stdio.h>

#include "base/memory.h"
#include "io/read.h"

enum { MOST_SHAPES = 1000, FEWEST_CORNERS = 3, MOST_CORNERS = 1000 };

static const char *const kinds[] = {[PK_SHAPE_RECT] = "rect",
                                    [PK_SHAPE_DISC] = "disc",
                                    [PK_SHAPE_POLYGON] = "polygon",
                                    [PK_SHAPE_STRIPE] = "stripe"};
enum { KIND_COUNT = PK_SHAPE_STRIPE + 1 };

/* Keys of a shape: the fill first, those of its kind, and the limits along z where allowed. */
enum { FILL, OWN, MOST_OWN = 5, MOST_KEYS = OWN + MOST_OWN + 1 };

static const double PI = 3.14159265358979323846;

typedef struct painter {
  const pk_reader *reader;
  picket_context *context;
  const pk_shape_plane *plane;
  void *owner;
} painter;

/* --- Values ----------------------------------------------------------------------------------- */

static picket_status read_size(const painter *p, const pk_node *node, double *nm) {
  const pk_limits limits = {0, p->plane->largest_nm, true, false, false, "nm"};
  return pk_read_number(p->context, node, &limits, nm);
}

/* A point in the plane; `out` stays as it is if the point is left out. */
static picket_status read_point(const painter *p, const pk_node *node, double out[2]) {
  const double far = p->plane->farthest_nm;
  const pk_limits limits = {-far, far, false, false, false, "nm"};
  return node ? pk_read_numbers(p->context, node, &limits, 2, out) : PICKET_OK;
}

static picket_status refuse_order(const painter *p, const pk_node *high, const char *above,
                                  const pk_node *low) {
  return pk_fail_at(p->context, PICKET_ERROR_INPUT, high->place, "%s is %s, must be above %s, %s",
                    pk_node_path(high).text, high->text, above, low->text);
}

static picket_status read_along(const painter *p, const pk_node *node, pk_shape *shape) {
  const double pitch = p->plane->pitch_nm;
  const pk_limits limits = {-PK_LENGTH_HIGH_NM, PK_LENGTH_HIGH_NM, false, false, false, "nm"};
  double *along = shape->along;
  picket_status status = pk_read_numbers(p->context, node, &limits, 2, along);
  if (status != PICKET_OK) {
    return status;
  }
  const double slack = pitch * PK_BORDER_TOLERANCE;
  const pk_node *low = pk_node_element(node, 0), *high = pk_node_element(node, 1);
  if (!(along[0] + slack < along[1])) {
    return refuse_order(p, high, "the start of the range", low);
  }
  if (along[1] - along[0] > pitch + slack) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s is %.10g nm long, must be at most the pitch, %.10g nm",
                      pk_node_path(node).text, along[1] - along[0], pitch);
  }
  if (along[0] >= pitch / 2 - slack || along[1] <= -pitch / 2 + slack) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s lies wholly outside the pitch, which is from %.10g to %.10g nm",
                      pk_node_path(node).text, -pitch / 2, pitch / 2);
  }
  return PICKET_OK;
}

/* Of leaning walls the wider end, as if its corners were sharp. */
static void surround(pk_shape *shape) {
  const double wider = shape->size[PK_V] * tan(fabs(shape->lean));
  for (int axis = 0; axis < 2; axis++) {
    const double extent = shape->size[axis] + (axis == PK_U ? wider : 0);
    shape->low[axis] = shape->at[axis] - extent / 2;
    shape->high[axis] = shape->at[axis] + extent / 2;
  }
}

/* --- Kinds ------------------------------------------------------------------------------------ */

/* The angle of the side walls from the vertical. Beyond 30 degrees a wall is a slope, drawn as a
 * polygon. Needs the sizes. */
static picket_status read_wall(const painter *p, const pk_node *node, pk_shape *shape) {
  const pk_limits limits = {-30, 30, false, false, false, "deg"};
  double degrees = 0;
  if (p->plane->seen_from_above) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s has no meaning in a cell, which is seen from above: walls lean in a "
                      "section or a channel",
                      pk_node_path(node).text);
  }
  picket_status status = pk_read_number(p->context, node, &limits, &degrees);
  const double tangent = tan(degrees * PI / 180), width = shape->size[PK_U];
  const double height = shape->size[PK_V];
  if (status == PICKET_OK && !(height * fabs(tangent) < width)) {
    return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                      "%s is %s deg, must be between -%.4g and %.4g deg, where walls %.10g nm high "
                      "and %.10g nm apart at half height meet",
                      pk_node_path(node).text, node->text, atan2(width, height) * 180 / PI,
                      atan2(width, height) * 180 / PI, height, width);
  }
  shape->lean = degrees * PI / 180;
  return status;
}

/* Needs the sizes and the lean. */
static picket_status read_corners(const painter *p, const pk_node *node, pk_shape *shape) {
  const double most = pk_geometry_largest_radius(shape->size, shape->lean);
  const double slack = most * PK_BORDER_TOLERANCE;
  const pk_limits limits = {0, INFINITY, false, false, false, "nm"};
  double radius = 0;
  picket_status status = pk_read_number(p->context, node, &limits, &radius);
  if (status == PICKET_OK && radius > most + slack) {
    status = pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                        "%s is %s nm, must be at most %.10g nm, the largest arcs that fit in",
                        pk_node_path(node).text, node->text, most);
  }
  shape->radius = fmin(radius, most);
  return status;
}

static picket_status read_rect(const painter *p, const pk_node *const *own, pk_shape *shape) {
  picket_status status = read_size(p, own[0], &shape->size[PK_U]);
  if (status == PICKET_OK) {
    status = read_size(p, own[1], &shape->size[PK_V]);
  }
  if (status == PICKET_OK) {
    status = read_point(p, own[2], shape->at);
  }
  if (status == PICKET_OK && own[3]) {
    status = read_wall(p, own[3], shape);
  }
  if (status == PICKET_OK && own[4]) {
    status = read_corners(p, own[4], shape);
  }
  surround(shape);
  return status;
}

static picket_status read_disc(const painter *p, const pk_node *const *own, pk_shape *shape) {
  picket_status status = read_size(p, own[0], &shape->size[PK_U]);
  shape->size[PK_V] = shape->size[PK_U];
  if (status == PICKET_OK) {
    status = read_point(p, own[1], shape->at);
  }
  surround(shape);
  return status;
}

/* The corners are the caller's. */
static picket_status read_polygon(const painter *p, const pk_node *const *own, pk_shape *shape) {
  const pk_node *list = own[0];
  const char *letter = p->plane->letter;
  char what[32];
  snprintf(what, sizeof what, "corners [%c, %c]", letter[0], letter[1]);
  picket_status status = pk_read_list(p->context, list, FEWEST_CORNERS, MOST_CORNERS, what);
  if (status != PICKET_OK) {
    return status;
  }
  shape->corners = pk_alloc(p->context, (size_t)list->count, sizeof *shape->corners);
  if (!shape->corners) {
    return PICKET_ERROR_MEMORY;
  }
  for (int axis = 0; axis < 2; axis++) {
    shape->low[axis] = INFINITY;
    shape->high[axis] = -INFINITY;
  }
  const pk_node *node = list->first;
  for (; status == PICKET_OK && node; node = node->next, shape->corner_count++) {
    double *corner = shape->corners[shape->corner_count];
    status = read_point(p, node, corner);
    for (int axis = 0; axis < 2; axis++) {
      shape->low[axis] = fmin(shape->low[axis], corner[axis]);
      shape->high[axis] = fmax(shape->high[axis], corner[axis]);
    }
  }
  return status;
}

static picket_status read_stripe(const painter *p, const pk_node *const *own, pk_shape *shape) {
  const char letters[2][2] = {{p->plane->letter[0], '\0'}, {p->plane->letter[1], '\0'}};
  const char *const axes[] = {letters[0], letters[1]};
  const double far = p->plane->farthest_nm;
  const pk_limits limits = {-far, far, false, false, true, "nm"};
  const pk_node *from = own[1], *to = own[2];
  int axis = 0;
  picket_status status = pk_read_choice(p->context, own[0], axes, 2, &axis);
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, from, &limits, &shape->low[axis]);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, to, &limits, &shape->high[axis]);
  }
  if (status == PICKET_OK && !(shape->low[axis] < shape->high[axis])) {
    status = refuse_order(p, to, "from_nm", from);
  }
  shape->across = (pk_axis_name)axis;
  shape->low[1 - axis] = -INFINITY;
  shape->high[1 - axis] = INFINITY;
  return status;
}

typedef picket_status reader_of_kind(const painter *, const pk_node *const *, pk_shape *);

/* The table of keys of a kind. */
static int list_keys(const pk_shape_plane *plane, pk_shape_kind kind, pk_key *keys) {
  const pk_key own[KIND_COUNT][MOST_OWN] = {
      [PK_SHAPE_RECT] = {{plane->rect_size[0], true},
                         {plane->rect_size[1], true},
                         {"at_nm", false},
                         {"wall_angle_deg", false},
                         {"corner_radius_nm", false}},
      [PK_SHAPE_DISC] = {{"diameter_nm", true}, {"at_nm", false}},
      [PK_SHAPE_POLYGON] = {{"corners_nm", true}},
      [PK_SHAPE_STRIPE] = {{"across", true}, {"from_nm", true}, {"to_nm", true}},
  };
  int count = 0;
  keys[count++] = (pk_key){"fill", true};
  for (int i = 0; i < MOST_OWN && own[kind][i].name; i++) {
    keys[count++] = own[kind][i];
  }
  if (plane->pitch_nm > 0) {
    keys[count++] = (pk_key){"along_nm", false};
  }
  return count;
}

static picket_status read_shape(const painter *p, const pk_node *node, pk_shape *shape) {
  static reader_of_kind *const read[KIND_COUNT] = {
      [PK_SHAPE_RECT] = read_rect,
      [PK_SHAPE_DISC] = read_disc,
      [PK_SHAPE_POLYGON] = read_polygon,
      [PK_SHAPE_STRIPE] = read_stripe,
  };
  pk_key keys[MOST_KEYS];
  const pk_node *values[MOST_KEYS];
  int count = list_keys(p->plane, shape->kind, keys);
  picket_status status = pk_read_block(p->context, node, keys, count, values);
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[FILL], &shape->material);
  }
  if (status == PICKET_OK) {
    status = read[shape->kind](p, values + OWN, shape);
  }
  const pk_node *along = p->plane->pitch_nm > 0 ? values[count - 1] : NULL;
  shape->along[0] = -p->plane->pitch_nm / 2;
  shape->along[1] = p->plane->pitch_nm / 2;
  if (status == PICKET_OK && along) {
    status = read_along(p, along, shape);
  }
  return status;
}

picket_status pk_read_shapes(const pk_reader *reader, const pk_node *list,
                             const pk_shape_plane *plane, pk_shape_taker *take, void *owner) {
  const painter p = {reader, reader->context, plane, owner};
  picket_status status = pk_read_list(reader->context, list, 1, MOST_SHAPES, "shapes");
  const pk_node *node = status == PICKET_OK ? list->first : NULL;
  for (; status == PICKET_OK && node; node = node->next) {
    const pk_node *value = NULL;
    int kind = 0;
    status = pk_read_kind(reader->context, node, kinds, KIND_COUNT, &kind, &value);
    pk_shape shape = {.node = value, .kind = (pk_shape_kind)kind};
    if (status == PICKET_OK) {
      status = read_shape(&p, value, &shape);
    }
    if (status == PICKET_OK) {
      status = take(owner, &shape);
    }
    pk_free(reader->context, shape.corners);
  }
  return status;
}

/* --- Painting --------------------------------------------------------------------------------- */

static picket_status paint_polygon(picket_context *context, const pk_shape *s,
                                   pk_geometry *geometry) {
  double(*corners)[2] = pk_alloc(context, (size_t)s->corner_count, sizeof *corners);
  if (!corners) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < s->corner_count; i++) {
    corners[i][PK_U] = s->corners[i][PK_U] / PK_NM_PER_UM;
    corners[i][PK_V] = s->corners[i][PK_V] / PK_NM_PER_UM;
  }
  picket_status status = pk_geometry_add_polygon(geometry, s->node->place, s->material,
                                                 s->corner_count, (const double(*)[2])corners);
  pk_free(context, corners);
  return status;
}

picket_status pk_shape_paint(picket_context *context, const pk_shape *s, pk_geometry *geometry) {
  const pk_place place = s->node->place;
  const double at[2] = {s->at[PK_U] / PK_NM_PER_UM, s->at[PK_V] / PK_NM_PER_UM};
  const double size[2] = {s->size[PK_U] / PK_NM_PER_UM, s->size[PK_V] / PK_NM_PER_UM};
  switch (s->kind) {
    case PK_SHAPE_RECT:
      return pk_geometry_add_rounded_rect(geometry, place, s->material, at, size, s->lean,
                                          s->radius / PK_NM_PER_UM);
    case PK_SHAPE_DISC: return pk_geometry_add_disc(geometry, place, s->material, at, size[PK_U]);
    case PK_SHAPE_POLYGON: return paint_polygon(context, s, geometry);
    default:
      return pk_geometry_add_stripe(geometry, place, s->material, s->across,
                                    s->low[s->across] / PK_NM_PER_UM,
                                    s->high[s->across] / PK_NM_PER_UM);
  }
}
