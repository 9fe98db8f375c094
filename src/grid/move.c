/* Moving a grid with its cell; see cell_grid.h. The marks that guide the move are the interfaces
 * that the grid has lines on, and the fixed ends of the cell. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "grid/cell_grid.h"

typedef struct marks {
  int count;
  double *from, *to;
} marks;

/* A small move of a value leaves the distances between interfaces nearly as they were. Where one
 * doubles or halves, two interfaces are about to meet, or have passed each other: sorted lines
 * cannot tell. The same where one is about to pass an end of the cell and comes in at the other. */
static const double MOST_STRETCH = 2;

static picket_status check_order(picket_context *context, int count, const double *from,
                                 const double *to) {
  for (int i = 0; i + 1 < count; i++) {
    double before = from[i + 1] - from[i], after = to[i + 1] - to[i];
    if (after > MOST_STRETCH * before || before > MOST_STRETCH * after) {
      return pk_fail(context, PICKET_ERROR_UNSUPPORTED,
                     "interfaces %g um apart meet or part at this value: there is no derivative "
                     "here",
                     before);
    }
  }
  return PICKET_OK;
}

static picket_status take_lines(picket_context *context, const pk_cell *from, const pk_cell *to,
                                pk_axis_name axis, marks *m) {
  double *a = NULL, *b = NULL;
  int count_a = 0, count_b = 0;
  picket_status status = pk_geometry_lines(from->geometry, axis, &a, &count_a);
  if (status == PICKET_OK) {
    status = pk_geometry_lines(to->geometry, axis, &b, &count_b);
  }
  if (status == PICKET_OK && count_a != count_b) {
    status = pk_fail(context, PICKET_ERROR_UNSUPPORTED,
                     "interfaces meet or part at this value: there is no derivative here");
  }
  if (status == PICKET_OK) {
    m->from = PK_NEW(context, count_a + 2, double);
    m->to = PK_NEW(context, count_a + 2, double);
    status = m->from && m->to ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  for (int i = 0; status == PICKET_OK && i < count_a; i++) {
    m->from[m->count] = a[i];
    m->to[m->count++] = b[i];
  }
  pk_free(context, a);
  pk_free(context, b);
  return status;
}

/* Puts a mark in its place; a mark that is there already stays as it is. */
static void add_mark(marks *m, double from, double to) {
  int at = m->count;
  while (at > 0 && m->from[at - 1] > from) {
    at--;
  }
  if ((at > 0 && m->from[at - 1] == from) || (at < m->count && m->from[at] == from)) {
    return;
  }
  memmove(m->from + at + 1, m->from + at, (size_t)(m->count - at) * sizeof *m->from);
  memmove(m->to + at + 1, m->to + at, (size_t)(m->count - at) * sizeof *m->to);
  m->from[at] = from;
  m->to[at] = to;
  m->count++;
}

static void add_ends(const pk_cell *from, const pk_cell *to, pk_axis_name axis, marks *m) {
  if (axis == PK_U) {
    add_mark(m, -0.5 * from->pitch_um, -0.5 * to->pitch_um);
    add_mark(m, 0.5 * from->pitch_um, 0.5 * to->pitch_um);
  } else if (from->lateral != PK_LATERAL_OPEN && from->lateral != PK_LATERAL_UNIFORM) {
    add_mark(m, -0.5 * from->span_um, -0.5 * to->span_um);
    add_mark(m, 0.5 * from->span_um, 0.5 * to->span_um);
  } else if (m->count == 0) {
    double a[2] = {0, 0}, b[2] = {0, 0};
    pk_geometry_extent(from->geometry, PK_V, &a[0], &a[1]);
    pk_geometry_extent(to->geometry, PK_V, &b[0], &b[1]);
    add_mark(m, a[0], b[0]);
    add_mark(m, a[1], b[1]);
  }
}

static picket_status move_axis(picket_context *context, const pk_axis *axis, const pk_cell *from,
                               const pk_cell *to, pk_axis_name name, pk_axis *out) {
  marks m = {0};
  picket_status status = take_lines(context, from, to, name, &m);
  if (status == PICKET_OK) {
    add_ends(from, to, name, &m);
    status = check_order(context, m.count, m.from, m.to);
  }
  if (status == PICKET_OK) {
    status = pk_axis_move(context, axis, m.count, m.from, m.to, out);
  }
  pk_free(context, m.from);
  pk_free(context, m.to);
  return status;
}

picket_status pk_cell_grid_move(picket_context *context, const pk_cell_grid *base,
                                const pk_cell *from, const pk_cell *to, pk_cell_grid *out) {
  pk_cell_grid grid = *base;
  memset(&grid.u, 0, sizeof grid.u);
  memset(&grid.v, 0, sizeof grid.v);
  picket_status status = move_axis(context, &base->u, from, to, PK_U, &grid.u);
  if (status == PICKET_OK) {
    status = base->uniform_v ? pk_axis_divide(context, &base->v, 1, &grid.v)
                             : move_axis(context, &base->v, from, to, PK_V, &grid.v);
  }
  if (status == PICKET_OK && grid.halved) {
    grid.mirror_at = grid.v.line[0];
  }
  if (status != PICKET_OK) {
    pk_cell_grid_clear(context, &grid);
    return status;
  }
  *out = grid;
  return PICKET_OK;
}
