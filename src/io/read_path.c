/* path: the wave vectors along which bands are asked for. See read.h. */
#include "base/memory.h"
#include "io/read.h"

enum { MOST_POINTS = 1000, LABEL_BYTES = 40 };
/* Bands repeat every 2 units, so larger numbers are slips. */
static const double FARTHEST = 100.0;

enum { KEY_AT, KEY_LABEL, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_AT] = {"at", true},
    [KEY_LABEL] = {"label", false},
};

/* k_x means something in a lateral lattice, and in a stack with a length to count it in. */
static bool has_lateral_phase(const pk_cell *cell) {
  return cell->lateral == PK_LATERAL_PERIODIC ||
         (cell->lateral == PK_LATERAL_UNIFORM && cell->span_um > 0);
}

static picket_status read_point(const pk_reader *reader, const pk_node *node,
                                pk_path_point *point) {
  const pk_limits limits = {-FARTHEST, FARTHEST, false, false, false, "in units of pi/pitch"};
  const pk_node *values[KEY_COUNT];
  const pk_problem *problem = reader->problem;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_numbers(reader->context, values[KEY_AT], &limits, 2, point->at);
  }
  if (status == PICKET_OK && point->at[1] != 0 && problem->has_cell &&
      !has_lateral_phase(&problem->cell)) {
    const pk_node *k = values[KEY_AT]->last;
    status = pk_fail_at(reader->context, PICKET_ERROR_INPUT, k->place,
                        "%s is %s, must be 0 unless cell.lateral is periodic, or uniform with a "
                        "lateral_span_nm to count k_x in",
                        pk_node_path(k).text, k->text);
  }
  if (status == PICKET_OK && values[KEY_LABEL]) {
    const char *label = NULL;
    status = pk_read_text(reader->context, values[KEY_LABEL], LABEL_BYTES, &label);
    if (status == PICKET_OK) {
      point->label = pk_text_copy(reader->context, label);
      status = point->label ? PICKET_OK : PICKET_ERROR_MEMORY;
    }
  }
  return status;
}

picket_status pk_read_path(pk_reader *reader, const pk_node *node) {
  pk_path *path = &reader->problem->path;
  picket_status status = pk_read_list(reader->context, node, 2, MOST_POINTS, "points");
  if (status != PICKET_OK) {
    return status;
  }
  path->point = PK_NEW(reader->context, node->count, pk_path_point);
  if (!path->point) {
    return PICKET_ERROR_MEMORY;
  }
  path->given = true;
  path->count = node->count;
  int i = 0;
  for (const pk_node *child = node->first; child; child = child->next, i++) {
    pk_path_point *point = &path->point[i];
    status = read_point(reader, child, point);
    if (status == PICKET_OK && i > 0 && point->at[0] == point[-1].at[0] &&
        point->at[1] == point[-1].at[1]) {
      status = pk_fail_at(reader->context, PICKET_ERROR_INPUT, child->place,
                          "%s repeats the point before it", pk_node_path(child).text);
    }
    if (status != PICKET_OK) {
      return status;
    }
  }
  return PICKET_OK;
}
