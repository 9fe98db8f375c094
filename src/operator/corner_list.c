/* See corner_list.h. */
#include "operator/corner_list.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

/* Grid lines are laid on interfaces, and corners are known to a few 1e-9 of the pitch. */
static const double ON_LINE = 1e-7;

typedef enum place { ON_A_LINE, BETWEEN_LINES, BEYOND_WALL } place;

static place find_line(const pk_axis *axis, double at, double slack, int *line) {
  bool wraps = axis->low == PK_END_PERIODIC;
  double from = axis->line[0], to = axis->line[axis->intervals];
  if (!wraps && (at < from + slack || at > to - slack)) {
    return BEYOND_WALL;
  }
  int low = 0, high = axis->intervals;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    *(axis->line[middle] > at ? &high : &low) = middle;
  }
  bool near_low = fabs(at - axis->line[low]) < slack;
  if (!near_low && !(fabs(at - axis->line[high]) < slack)) {
    return BETWEEN_LINES;
  }
  *line = near_low ? low : high;
  *line = wraps && *line == axis->intervals ? 0 : *line;
  return ON_A_LINE;
}

static double step_at(const pk_axis *axis, int line, int side) {
  int interval = side > 0 ? line : line > 0 ? line - 1 : axis->intervals - 1;
  return axis->line[interval + 1] - axis->line[interval];
}

static void add_corner(pk_corner_list *list, const pk_corner *corner, const pk_axis *u,
                       const pk_axis *v) {
  double slack = ON_LINE * (u->line[u->intervals] - u->line[0]);
  pk_grid_corner at;
  place in_u = find_line(u, corner->at[0], slack, &at.line[0]);
  place in_v = find_line(v, corner->at[1], slack, &at.line[1]);
  if (in_u == BEYOND_WALL || in_v == BEYOND_WALL) {
    return;
  }
  if (in_u == BETWEEN_LINES || in_v == BETWEEN_LINES) {
    list->lost_count++;
    return;
  }
  memcpy(at.medium, corner->medium, sizeof at.medium);
  for (int arm = 0; arm < 4; arm++) {
    int axis = arm % 2;
    at.spacing[arm] = step_at(axis == 0 ? u : v, at.line[axis], arm < 2 ? 1 : -1);
  }
  list->corner[list->count++] = at;
}

picket_status pk_corner_list_take(picket_context *context, const pk_geometry *geometry,
                                  const pk_axis *u, const pk_axis *v, pk_corner_list *out) {
  pk_corner_list list = {0};
  pk_corner *corners = NULL;
  int count = 0;
  picket_status status = pk_geometry_corners(geometry, &corners, &count, &list.other_count);
  if (status != PICKET_OK) {
    return status;
  }
  list.corner = PK_NEW(context, count, pk_grid_corner);
  status = list.corner ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    add_corner(&list, &corners[i], u, v);
  }
  pk_free(context, corners);
  if (status == PICKET_OK) {
    *out = list;
  }
  return status;
}

void pk_corner_list_clear(picket_context *context, pk_corner_list *list) {
  pk_free(context, list->corner);
  memset(list, 0, sizeof *list);
}
