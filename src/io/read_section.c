/* section: a plane across a guide, x across and y up, and the shapes in it. See read.h. */
#include <math.h>

#include "base/memory.h"
#include "io/read.h"

enum { MOST_SHAPES = 1000, FEWEST_CORNERS = 3, MOST_CORNERS = 1000 };

/* Shapes lie within this distance of the origin: a section of 0.1 mm is larger than any guide's,
 * and coordinates in it are told apart to 1e-4 nm. */
static const double FARTHEST_NM = 50000.0;

enum { KEY_CLADDING, KEY_SPAN, KEY_SHAPES, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_CLADDING] = {"cladding", true},
    [KEY_SPAN] = {"span_nm", false},
    [KEY_SHAPES] = {"shapes", true},
};

enum { KIND_RECT, KIND_DISC, KIND_POLYGON, KIND_STRIPE, KIND_COUNT };
static const char *const kinds[KIND_COUNT] = {"rect", "disc", "polygon", "stripe"};

enum { RECT_FILL, RECT_WIDTH, RECT_HEIGHT, RECT_AT, RECT_COUNT };
static const pk_key rect_keys[RECT_COUNT] = {
    [RECT_FILL] = {"fill", true},
    [RECT_WIDTH] = {"width_nm", true},
    [RECT_HEIGHT] = {"height_nm", true},
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
  pk_section_block *section;
} painter;

static picket_status read_size(const painter *p, const pk_node *node, double *um) {
  const pk_limits limits = {0, 2 * FARTHEST_NM, true, false, false, "nm"};
  double nm = 0;
  picket_status status = pk_read_number(p->context, node, &limits, &nm);
  *um = nm / PK_NM_PER_UM;
  return status;
}

/* A point [x, y] in µm; `out` stays as it is if the point is left out. */
static picket_status read_point(const painter *p, const pk_node *node, double out[2]) {
  const pk_limits limits = {-FARTHEST_NM, FARTHEST_NM, false, false, false, "nm"};
  double nm[2] = {0, 0};
  picket_status status = node ? pk_read_numbers(p->context, node, &limits, 2, nm) : PICKET_OK;
  for (int axis = 0; node && status == PICKET_OK && axis < 2; axis++) {
    out[axis] = nm[axis] / PK_NM_PER_UM;
  }
  return status;
}

/* Marks a material as used and the extent of a shape with ends. */
static void note(const painter *p, int material, const double low[2], const double high[2]) {
  pk_section_block *s = p->section;
  s->used[material] = true;
  for (int axis = 0; low && axis < 2; axis++) {
    s->low_um[axis] = fmin(s->low_um[axis], low[axis]);
    s->high_um[axis] = fmax(s->high_um[axis], high[axis]);
  }
}

static void note_around(const painter *p, int material, const double at[2], const double size[2]) {
  const double low[2] = {at[0] - size[0] / 2, at[1] - size[1] / 2};
  const double high[2] = {at[0] + size[0] / 2, at[1] + size[1] / 2};
  note(p, material, low, high);
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
    status = read_size(p, values[RECT_WIDTH], &size[PK_U]);
  }
  if (status == PICKET_OK) {
    status = read_size(p, values[RECT_HEIGHT], &size[PK_V]);
  }
  if (status == PICKET_OK) {
    status = read_point(p, values[RECT_AT], at);
  }
  if (status == PICKET_OK) {
    note_around(p, material, at, size);
    status = pk_geometry_add_rect(p->section->geometry, node->place, material, at, size);
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
    note_around(p, material, at, (double[2]){diameter, diameter});
    status = pk_geometry_add_disc(p->section->geometry, node->place, material, at, diameter);
  }
  return status;
}

static picket_status read_corners(const painter *p, const pk_node *list, int material,
                                  double (*corners)[2]) {
  picket_status status = PICKET_OK;
  int i = 0;
  for (const pk_node *node = list->first; status == PICKET_OK && node; node = node->next, i++) {
    status = read_point(p, node, corners[i]);
    if (status == PICKET_OK) {
      note(p, material, corners[i], corners[i]);
    }
  }
  return status;
}

static picket_status read_polygon(const painter *p, const pk_node *node) {
  const pk_node *values[POLYGON_COUNT];
  int material = 0;
  double(*corners)[2] = NULL;
  picket_status status = pk_read_block(p->context, node, polygon_keys, POLYGON_COUNT, values);
  const pk_node *list = values[POLYGON_CORNERS];
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[POLYGON_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = pk_read_list(p->context, list, FEWEST_CORNERS, MOST_CORNERS, "corners [x, y]");
  }
  if (status == PICKET_OK) {
    corners = pk_alloc(p->context, (size_t)list->count, sizeof *corners);
    status = corners ? read_corners(p, list, material, corners) : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    status = pk_geometry_add_polygon(p->section->geometry, node->place, material, list->count,
                                     (const double(*)[2])corners);
  }
  pk_free(p->context, corners);
  return status;
}

static picket_status read_stripe(const painter *p, const pk_node *node) {
  static const char *const axes[] = {"x", "y"};
  const pk_limits limits = {-FARTHEST_NM, FARTHEST_NM, false, false, true, "nm"};
  const pk_node *values[STRIPE_COUNT];
  int material = 0;
  int axis = 0;
  double from = 0, to = 0;
  picket_status status = pk_read_block(p->context, node, stripe_keys, STRIPE_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(p->reader, values[STRIPE_FILL], &material);
  }
  if (status == PICKET_OK) {
    status = pk_read_choice(p->context, values[STRIPE_ACROSS], axes, 2, &axis);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, values[STRIPE_FROM], &limits, &from);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(p->context, values[STRIPE_TO], &limits, &to);
  }
  if (status == PICKET_OK && !(from < to)) {
    status = pk_fail_at(p->context, PICKET_ERROR_INPUT, values[STRIPE_TO]->place,
                        "%s is %s, must be above from_nm, %s", pk_node_path(values[STRIPE_TO]).text,
                        values[STRIPE_TO]->text, values[STRIPE_FROM]->text);
  }
  if (status == PICKET_OK) {
    note(p, material, NULL, NULL);
    status = pk_geometry_add_stripe(p->section->geometry, node->place, material, (pk_axis_name)axis,
                                    from / PK_NM_PER_UM, to / PK_NM_PER_UM);
  }
  return status;
}

static picket_status read_shapes(const painter *p, const pk_node *list) {
  static picket_status (*const read[KIND_COUNT])(const painter *, const pk_node *) = {
      [KIND_RECT] = read_rect,
      [KIND_DISC] = read_disc,
      [KIND_POLYGON] = read_polygon,
      [KIND_STRIPE] = read_stripe,
  };
  picket_status status = pk_read_list(p->context, list, 1, MOST_SHAPES, "shapes");
  const pk_node *node = status == PICKET_OK ? list->first : NULL;
  for (; status == PICKET_OK && node; node = node->next) {
    const pk_node *value = NULL;
    int kind = 0;
    status = pk_read_kind(p->context, node, kinds, KIND_COUNT, &kind, &value);
    if (status == PICKET_OK) {
      status = read[kind](p, value);
    }
  }
  return status;
}

static picket_status open_block(const painter *p, int cladding) {
  pk_section_block *s = p->section;
  double side = FARTHEST_NM / PK_NM_PER_UM;
  pk_frame frame = {.from = {-side, -INFINITY}, .to = {side, INFINITY}, .background = cladding};
  s->used = PK_NEW(p->context, pk_materials_count(p->reader->problem->materials), bool);
  if (!s->used) {
    return PICKET_ERROR_MEMORY;
  }
  s->used[cladding] = true;
  for (int axis = 0; axis < 2; axis++) {
    s->low_um[axis] = INFINITY;
    s->high_um[axis] = -INFINITY;
  }
  return pk_geometry_create(p->context, &frame, &s->geometry);
}

static picket_status read_span(const painter *p, const pk_node *node) {
  const pk_limits limits = {0, 2 * FARTHEST_NM, true, false, false, "nm"};
  double nm[2] = {0, 0};
  picket_status status = pk_read_numbers(p->context, node, &limits, 2, nm);
  for (int axis = 0; status == PICKET_OK && axis < 2; axis++) {
    p->section->span_um[axis] = nm[axis] / PK_NM_PER_UM;
  }
  return status;
}

/* Without a shape that ends sideways nothing says where the guide is. */
static picket_status check_extent(const painter *p, const pk_node *node) {
  const pk_section_block *s = p->section;
  if (s->span_um[0] > 0 || s->low_um[0] < s->high_um[0]) {
    return PICKET_OK;
  }
  return pk_fail_at(p->context, PICKET_ERROR_INPUT, node->place,
                    "section holds stripes only, must have a rect, disc or polygon, or a "
                    "\"span_nm\"");
}

picket_status pk_read_section(pk_reader *reader, const pk_node *node) {
  pk_section_block *section = &reader->problem->section;
  painter p = {reader, reader->context, section};
  reader->layered = true;
  const pk_node *values[KEY_COUNT];
  int cladding = 0;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[KEY_CLADDING], &cladding);
  }
  if (status == PICKET_OK) {
    status = open_block(&p, cladding);
  }
  if (status == PICKET_OK && values[KEY_SPAN]) {
    status = read_span(&p, values[KEY_SPAN]);
  }
  if (status == PICKET_OK) {
    status = read_shapes(&p, values[KEY_SHAPES]);
  }
  if (status == PICKET_OK) {
    status = check_extent(&p, node);
  }
  reader->layered = false;
  section->given = status == PICKET_OK;
  section->place = node->place;
  return status;
}
