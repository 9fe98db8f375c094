/* section: a plane across a guide, x across and y up, and the shapes in it. See read.h. */
#include <math.h>

#include "base/memory.h"
#include "io/read.h"

/* Shapes lie within this distance of the origin: a section of 0.1 mm is larger than any guide's,
 * and coordinates in it are told apart to 1e-4 nm. */
#define FARTHEST_NM 50000.0

const pk_shape_plane PK_PLANE_ACROSS = {.letter = {'x', 'y'},
                                        .rect_size = {"width_nm", "height_nm"},
                                        .farthest_nm = FARTHEST_NM,
                                        .largest_nm = 2 * FARTHEST_NM};

enum { KEY_CLADDING, KEY_SPAN, KEY_BEND, KEY_SHAPES, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_CLADDING] = {"cladding", true},
    [KEY_SPAN] = {"span_nm", false},
    [KEY_BEND] = {"bend_radius_um", false},
    [KEY_SHAPES] = {"shapes", true},
};

/* --- Planes across a guide -------------------------------------------------------------------- */

static picket_status read_span(picket_context *context, const pk_node *node,
                               pk_section_block *block) {
  const pk_limits limits = {0, 2 * FARTHEST_NM, true, false, false, "nm"};
  double nm[2] = {0, 0};
  picket_status status = pk_read_numbers(context, node, &limits, 2, nm);
  for (int axis = 0; status == PICKET_OK && axis < 2; axis++) {
    block->span_um[axis] = nm[axis] / PK_NM_PER_UM;
  }
  return status;
}

picket_status pk_read_plane_open(pk_reader *reader, int cladding, const pk_node *span,
                                 pk_section_block *block) {
  block->used = PK_NEW(reader->context, pk_materials_count(reader->problem->materials), bool);
  if (!block->used) {
    return PICKET_ERROR_MEMORY;
  }
  block->used[cladding] = true;
  for (int axis = 0; axis < 2; axis++) {
    block->low_um[axis] = INFINITY;
    block->high_um[axis] = -INFINITY;
  }
  return span ? read_span(reader->context, span, block) : PICKET_OK;
}

picket_status pk_read_plane_create(picket_context *context, int cladding, pk_geometry **out) {
  double side = FARTHEST_NM / PK_NM_PER_UM;
  pk_frame frame = {.from = {-side, -INFINITY}, .to = {side, INFINITY}, .background = cladding};
  return pk_geometry_create(context, &frame, out);
}

/* Only shapes with ends on all sides have an extent. */
void pk_read_plane_note(const pk_shape *shape, pk_section_block *block) {
  block->used[shape->material] = true;
  for (int axis = 0; shape->kind != PK_SHAPE_STRIPE && axis < 2; axis++) {
    block->low_um[axis] = fmin(block->low_um[axis], shape->low[axis] / PK_NM_PER_UM);
    block->high_um[axis] = fmax(block->high_um[axis], shape->high[axis] / PK_NM_PER_UM);
  }
}

/* Without a shape that ends sideways nothing says where the guide is. */
picket_status pk_read_plane_check(const pk_reader *reader, const pk_node *node, const char *what,
                                  const pk_section_block *block) {
  if (block->span_um[0] > 0 || block->low_um[0] < block->high_um[0]) {
    return PICKET_OK;
  }
  return pk_fail_at(reader->context, PICKET_ERROR_INPUT, node->place,
                    "%s holds stripes only, must have a rect, disc or polygon, or a \"span_nm\"",
                    what);
}

/* --- Bend ------------------------------------------------------------------------------------- */

/* The centre of curvature x = -radius must lie outside the shapes and the window: coordinates about
 * it end there. Half a micrometre is less than any mode of light fits round; a metre is straight.
 */
static picket_status read_bend(picket_context *context, const pk_node *node,
                               pk_section_block *block) {
  const pk_limits limits = {0.5, 1e6, false, false, false, "um"};
  double radius = 0;
  picket_status status = pk_read_number(context, node, &limits, &radius);
  double inside = block->span_um[0] > 0 ? 0.5 * block->span_um[0] : -block->low_um[0];
  if (status == PICKET_OK && !(radius > inside)) {
    status = pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                        "%s is %s, must be above %.10g um: the %s reach the centre of the bend",
                        pk_node_path(node).text, node->text, inside,
                        block->span_um[0] > 0 ? "walls of span_nm" : "shapes of the section");
  }
  block->bend_radius_um = status == PICKET_OK ? radius : 0;
  return status;
}

/* --- The block -------------------------------------------------------------------------------- */

typedef struct canvas {
  picket_context *context;
  pk_section_block *section;
} canvas;

static picket_status take(void *owner, const pk_shape *shape) {
  const canvas *c = owner;
  pk_read_plane_note(shape, c->section);
  return pk_shape_paint(c->context, shape, c->section->geometry);
}

picket_status pk_read_section(pk_reader *reader, const pk_node *node) {
  pk_section_block *section = &reader->problem->section;
  canvas c = {reader->context, section};
  reader->layered = true;
  const pk_node *values[KEY_COUNT];
  int cladding = 0;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[KEY_CLADDING], &cladding);
  }
  if (status == PICKET_OK) {
    status = pk_read_plane_open(reader, cladding, values[KEY_SPAN], section);
  }
  if (status == PICKET_OK) {
    status = pk_read_plane_create(reader->context, cladding, &section->geometry);
  }
  if (status == PICKET_OK) {
    status = pk_read_shapes(reader, values[KEY_SHAPES], &PK_PLANE_ACROSS, take, &c);
  }
  if (status == PICKET_OK) {
    status = pk_read_plane_check(reader, node, "section", section);
  }
  if (status == PICKET_OK && values[KEY_BEND]) {
    status = read_bend(reader->context, values[KEY_BEND], section);
  }
  reader->layered = false;
  section->given = status == PICKET_OK;
  section->place = node->place;
  return status;
}
