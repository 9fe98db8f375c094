/* See unfold.h. Line L of a mirrored axis of N intervals is line |L - N| of the part, middle M is
 * middle M - N or N - 1 - M of it. */
#include "section/unfold.h"

#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "section/section_private.h"

bool pk_whole_on_middles(pk_whole_name name, pk_axis_name axis) {
  bool x = name == PK_WHOLE_EX || name == PK_WHOLE_HY || name == PK_WHOLE_HZ;
  bool y = name == PK_WHOLE_EY || name == PK_WHOLE_HX || name == PK_WHOLE_HZ;
  return axis == PK_U ? x : y;
}

int pk_whole_count(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis) {
  return w->lines[axis] - (pk_whole_on_middles(name, axis) ? 1 : 0);
}

const double *pk_whole_places(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis) {
  return pk_whole_on_middles(name, axis) ? w->middle[axis] : w->line[axis];
}

/* Where a place of the whole is found in the part: the number there (-1: a wall, zero) and the
 * sign that it takes. */
typedef struct source {
  int at;
  double sign;
} source;

static source source_of(const pk_axis *axis, bool mirrored, bool on_middle, int place) {
  if (!mirrored) {
    return (source){on_middle ? place : pk_line_index(axis, place), 1};
  }
  int n = axis->intervals;
  bool other_side = place < n;
  bool odd = on_middle == (axis->low == PK_END_FREE);
  source s = {.sign = other_side && odd ? -1 : 1};
  if (on_middle) {
    s.at = other_side ? n - 1 - place : place - n;
  } else {
    s.at = pk_line_index(axis, abs(place - n));
  }
  return s;
}

static picket_status take_places(picket_context *context, const pk_axis *axis, bool mirrored,
                                 int *lines, double **line, double **middle) {
  int n = axis->intervals;
  int count = mirrored ? 2 * n + 1 : n + 1;
  *lines = count;
  *line = PK_NEW(context, count, double);
  *middle = PK_NEW(context, count - 1, double);
  if (!*line || !*middle) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < count; i++) {
    int part = mirrored ? abs(i - n) : i;
    bool other_side = mirrored && i < n;
    (*line)[i] = other_side ? 2 * axis->line[0] - axis->line[part] : axis->line[part];
  }
  for (int i = 0; i < count - 1; i++) {
    (*middle)[i] = 0.5 * ((*line)[i] + (*line)[i + 1]);
  }
  return PICKET_OK;
}

static picket_status take_component(const pk_section *s, const bool mirrored[2], pk_whole_name name,
                                    const double complex *part, pk_section_whole *w) {
  int columns = pk_whole_count(w, name, PK_U), rows = pk_whole_count(w, name, PK_V);
  bool middle_x = pk_whole_on_middles(name, PK_U), middle_y = pk_whole_on_middles(name, PK_V);
  int part_rows = middle_y ? s->my : s->ny;
  double complex *to = PK_NEW(w->context, (size_t)columns * (size_t)rows, double complex);
  if (!to) {
    return PICKET_ERROR_MEMORY;
  }
  w->field[name] = to;
  for (int i = 0; i < columns; i++) {
    source x = source_of(&s->x, mirrored[PK_U], middle_x, i);
    for (int j = 0; j < rows && x.at >= 0; j++) {
      source y = source_of(&s->y, mirrored[PK_V], middle_y, j);
      if (y.at >= 0) {
        to[(ptrdiff_t)i * rows + j] = x.sign * y.sign * part[(ptrdiff_t)x.at * part_rows + y.at];
      }
    }
  }
  return PICKET_OK;
}

picket_status pk_section_unfold(const pk_section *s, const pk_section_fields *part,
                                const bool mirrored[2], pk_section_whole *out) {
  pk_section_whole w = {.context = s->context};
  const pk_axis *axes[2] = {&s->x, &s->y};
  const double complex *from[PK_WHOLE_NAMES] = {part->ex, part->ey, part->ez,
                                                part->hx, part->hy, part->hz};
  picket_status status = PICKET_OK;
  for (int a = 0; status == PICKET_OK && a < 2; a++) {
    status = take_places(s->context, axes[a], mirrored[a], &w.lines[a], &w.line[a], &w.middle[a]);
  }
  for (int c = 0; status == PICKET_OK && c < PK_WHOLE_NAMES; c++) {
    status = take_component(s, mirrored, (pk_whole_name)c, from[c], &w);
  }
  if (status != PICKET_OK) {
    pk_section_whole_clear(&w);
    return status;
  }
  *out = w;
  return PICKET_OK;
}

void pk_section_whole_clear(pk_section_whole *w) {
  for (int a = 0; w->context && a < 2; a++) {
    pk_free(w->context, w->line[a]);
    pk_free(w->context, w->middle[a]);
  }
  for (int c = 0; w->context && c < PK_WHOLE_NAMES; c++) {
    pk_free(w->context, w->field[c]);
  }
  memset(w, 0, sizeof *w);
}
