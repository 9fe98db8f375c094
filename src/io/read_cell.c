/* cell: one period of a guide, what lies at its sides and the shapes in it. See read.h. */
#include <math.h>

#include "io/read.h"

enum { LARGEST_DENOMINATOR = 12 }; /* the grid has a whole number of columns per 1/q of the pitch */
static const double SHIFT_TOLERANCE = 1e-9; /* so that 0.3333333333 counts as 1/3 */

enum {
  KEY_PITCH,
  KEY_CLADDING,
  KEY_LATERAL,
  KEY_LATERAL_SPAN,
  KEY_LATERAL_SHIFT,
  KEY_SHAPES,
  KEY_COUNT
};
static const pk_key keys[KEY_COUNT] = {
    [KEY_PITCH] = {"pitch_nm", true},
    [KEY_CLADDING] = {"cladding", true},
    [KEY_LATERAL] = {"lateral", false},
    [KEY_LATERAL_SPAN] = {"lateral_span_nm", false},
    [KEY_LATERAL_SHIFT] = {"lateral_shift", false},
    [KEY_SHAPES] = {"shapes", true},
};

static const char *const laterals[] = {
    [PK_LATERAL_OPEN] = "open",         [PK_LATERAL_PERIODIC] = "periodic",
    [PK_LATERAL_UNIFORM] = "uniform",   [PK_LATERAL_ELECTRIC] = "electric",
    [PK_LATERAL_MAGNETIC] = "magnetic",
};

static picket_status read_length(picket_context *context, const pk_node *node, double *um) {
  const pk_limits limits = {0, PK_LENGTH_HIGH_NM, true, false, false, "nm"};
  double nm = 0;
  picket_status status = pk_read_number(context, node, &limits, &nm);
  if (status == PICKET_OK) {
    *um = nm / PK_NM_PER_UM;
  }
  return status;
}

static bool needs_span(pk_lateral lateral) {
  return lateral != PK_LATERAL_OPEN && lateral != PK_LATERAL_UNIFORM;
}

static picket_status read_span(picket_context *context, const pk_node *cell_node,
                               const pk_node *node, pk_cell *cell) {
  double um = 0;
  picket_status status = node ? read_length(context, node, &um) : PICKET_OK;
  if (status == PICKET_OK && !node && needs_span(cell->lateral)) {
    status = pk_fail_at(context, PICKET_ERROR_INPUT, cell_node->place,
                        "cell has no \"lateral_span_nm\", which lateral: %s needs",
                        laterals[cell->lateral]);
  }
  cell->span_um = um;
  return status;
}

/* The fraction p/q closest to a shift, if it is one: the lattice must map onto the grid. */
static bool as_fraction(double shift, double *exact) {
  for (int q = 1; q <= LARGEST_DENOMINATOR; q++) {
    double p = round(shift * q);
    if (fabs(shift - p / q) <= SHIFT_TOLERANCE && p < q) {
      *exact = p / q;
      return true;
    }
  }
  return false;
}

static picket_status read_shift(picket_context *context, const pk_node *node, pk_cell *cell) {
  const pk_limits limits = {0, 1, false, true, false, ""};
  double shift = 0;
  picket_status status = pk_read_number(context, node, &limits, &shift);
  if (status != PICKET_OK) {
    return status;
  }
  if (shift != 0 && cell->lateral != PK_LATERAL_PERIODIC) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is %s, must be 0 unless lateral is periodic", pk_node_path(node).text,
                      node->text);
  }
  if (!as_fraction(shift, &cell->shift)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is %s, must be a fraction p/q with q at most %d, to nine decimals",
                      pk_node_path(node).text, node->text, LARGEST_DENOMINATOR);
  }
  return PICKET_OK;
}

static picket_status make_geometry(picket_context *context, pk_cell *cell) {
  bool bounded = needs_span(cell->lateral);
  double half = cell->pitch_um / 2;
  double side = bounded ? cell->span_um / 2 : INFINITY;
  pk_frame frame = {
      .from = {-half, -side},
      .to = {half, side},
      .periodic = {true, cell->lateral == PK_LATERAL_PERIODIC},
      .shift = cell->shift * cell->pitch_um,
      .background = cell->cladding,
  };
  return pk_geometry_create(context, &frame, &cell->geometry);
}

/* Everything but the shapes. */
static picket_status read_frame(const pk_reader *reader, const pk_node *node,
                                const pk_node *const *values, pk_cell *cell) {
  picket_context *context = reader->context;
  int lateral = PK_LATERAL_OPEN;
  picket_status status = read_length(context, values[KEY_PITCH], &cell->pitch_um);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[KEY_CLADDING], &cell->cladding);
  }
  if (status == PICKET_OK && values[KEY_LATERAL]) {
    status = pk_read_choice(context, values[KEY_LATERAL], laterals,
                            (int)(sizeof laterals / sizeof *laterals), &lateral);
  }
  cell->lateral = (pk_lateral)lateral;
  if (status == PICKET_OK) {
    status = read_span(context, node, values[KEY_LATERAL_SPAN], cell);
  }
  if (status == PICKET_OK && values[KEY_LATERAL_SHIFT]) {
    status = read_shift(context, values[KEY_LATERAL_SHIFT], cell);
  }
  return status;
}

picket_status pk_read_cell(pk_reader *reader, const pk_node *node) {
  pk_problem *problem = reader->problem;
  const pk_node *values[KEY_COUNT];
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = read_frame(reader, node, values, &problem->cell);
  }
  if (status == PICKET_OK) {
    status = make_geometry(reader->context, &problem->cell);
  }
  if (status == PICKET_OK) {
    status = pk_read_cell_shapes(reader, values[KEY_SHAPES], &problem->cell);
  }
  if (status == PICKET_OK) {
    problem->has_cell = true;
    problem->cell_place = node->place;
    problem->smallest_um = pk_geometry_smallest_feature(problem->cell.geometry);
  }
  return status;
}
