/* What a grid needs to know: coordinates of interfaces, the extent of the structure, the smallest
 * feature, the media along a line and beyond everything. See geometry.h for the promises and walk.c
 * for the method. */
#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "geometry/paint.h"
#include "geometry/walk.h"

bool pk_geometry_extent(const pk_geometry *geometry, pk_axis_name axis, double *low, double *high) {
  double lowest = INFINITY;
  double highest = -INFINITY;
  for (int s = 0; s < geometry->count; s++) {
    const pk_shape *shape = &geometry->shapes[s];
    double ends[2] = {shape->outline.low[axis], shape->outline.high[axis]};
    for (int end = 0; end < 2 && !shape->endless[axis]; end++) {
      if (isfinite(ends[end])) {
        lowest = fmin(lowest, ends[end]);
        highest = fmax(highest, ends[end]);
      }
    }
  }
  if (lowest > highest) {
    return false;
  }
  *low = lowest;
  *high = highest;
  return true;
}

static int compare(const void *a, const void *b) {
  double x = *(const double *)a;
  double y = *(const double *)b;
  return (x > y) - (x < y);
}

/* Sorts, and keeps the first of coordinates that are the same. */
static int sort_unique(double *values, int count, double tolerance) {
  qsort(values, (size_t)count, sizeof *values, compare);
  int kept = 0;
  for (int i = 0; i < count; i++) {
    if (kept == 0 || values[i] > values[kept - 1] + tolerance) {
      values[kept++] = values[i];
    }
  }
  return kept;
}

/* True if the piece gives a line: parallel, inside the frame, and visible there. */
static bool gives_line(const pk_geometry *geometry, pk_axis_name axis, const pk_piece *piece,
                       const double low[2], const double high[2]) {
  double at = piece->low[axis];
  return pk_piece_is_level(piece, axis) && at > geometry->frame.from[axis] + geometry->tolerance &&
         at < geometry->frame.to[axis] - geometry->tolerance &&
         pk_walk(geometry, piece, low, high, NULL, pk_visit_visible, NULL);
}

picket_status pk_geometry_lines(const pk_geometry *geometry, pk_axis_name axis, double **out,
                                int *count) {
  picket_context *context = geometry->context;
  double low[2];
  double high[2];
  int used = 0;
  int capacity = 16;
  double *lines = PK_NEW(context, capacity, double);
  if (!lines) {
    return PICKET_ERROR_MEMORY;
  }
  pk_window(geometry, low, high);
  pk_search search;
  pk_piece piece;
  pk_search_start(&search, geometry, low, high);
  while (pk_search_next(&search, &piece)) {
    if (!gives_line(geometry, axis, &piece, low, high)) {
      continue;
    }
    if (used == capacity) {
      double *more = pk_regrow(context, lines, (size_t)used, 2 * (size_t)capacity, sizeof *lines);
      if (!more) {
        pk_free(context, lines);
        return PICKET_ERROR_MEMORY;
      }
      lines = more;
      capacity *= 2;
    }
    lines[used++] = piece.low[axis];
  }
  *count = sort_unique(lines, used, geometry->tolerance);
  *out = lines;
  return PICKET_OK;
}

/* The shortest distance between changes of medium along one scan line. Along a periodic axis the
 * distances go around. */
static double shortest_along(const pk_geometry *geometry, pk_axis_name axis, double at) {
  bool periodic = geometry->frame.periodic[axis];
  double low[2];
  double high[2];
  int medium = 0;
  double shortest = INFINITY;
  pk_window(geometry, low, high);
  double to = high[axis];
  double first = pk_scan_next(geometry, axis, at, low[axis], to, &medium);
  if (periodic && first < to) { /* one period from the first change on */
    to = first + geometry->period[axis];
  }
  double here = first;
  while (here < to) {
    double next = pk_scan_next(geometry, axis, at, here, to, &medium);
    if (next < to || periodic) {
      shortest = fmin(shortest, next - here);
    }
    here = next;
  }
  return shortest;
}

/* Scans along `axis` through the middle of a shape, and between neighbouring edges of it that are
 * parallel to the scan. Scans through arbitrary heights would find the vanishing chords at the top
 * of a disc. */
static double shortest_through(const pk_geometry *geometry, const pk_shape *shape,
                               pk_axis_name axis) {
  int across = 1 - (int)axis;
  const pk_outline *outline = &shape->outline;
  double low = fmax(outline->low[across], geometry->frame.from[across]);
  double high = fmin(outline->high[across], geometry->frame.to[across]);
  double shortest = INFINITY;
  if (isfinite(low) && isfinite(high)) {
    shortest = shortest_along(geometry, axis, (low + high) / 2);
  } else if (isfinite(low) || isfinite(high)) {
    double margin = geometry->frame.to[0] - geometry->frame.from[0];
    shortest = shortest_along(geometry, axis, isfinite(low) ? low + margin : high - margin);
  } else if (outline->low[axis] > -INFINITY || outline->high[axis] < INFINITY) {
    double from[2];
    double to[2];
    pk_window(geometry, from, to);
    shortest = shortest_along(geometry, axis, (from[across] + to[across]) / 2);
  }
  for (int i = 0; i < outline->count && outline->count > 4; i++) {
    if (!pk_piece_is_level(&outline->pieces[i], (pk_axis_name)across)) {
      continue;
    }
    double level = outline->pieces[i].low[across];
    double next = INFINITY; /* the nearest parallel edge above */
    for (int k = 0; k < outline->count; k++) {
      double other = outline->pieces[k].low[across];
      if (pk_piece_is_level(&outline->pieces[k], (pk_axis_name)across) &&
          other > level + geometry->tolerance) {
        next = fmin(next, other);
      }
    }
    if (isfinite(next)) {
      shortest = fmin(shortest, shortest_along(geometry, axis, (level + next) / 2));
    }
  }
  return shortest;
}

double pk_geometry_smallest_along(const pk_geometry *geometry, pk_axis_name axis) {
  double shortest = INFINITY;
  for (int s = 0; s < geometry->count; s++) {
    shortest = fmin(shortest, shortest_through(geometry, &geometry->shapes[s], axis));
  }
  return shortest;
}

double pk_geometry_smallest_feature(const pk_geometry *geometry) {
  return fmin(pk_geometry_smallest_along(geometry, PK_U),
              pk_geometry_smallest_along(geometry, PK_V));
}

picket_status pk_geometry_profile(const pk_geometry *geometry, double v, int capacity,
                                  double *boundaries, int *media, int *count) {
  double point[2] = {geometry->frame.from[0], v};
  pk_wrap(geometry, point, NULL);
  double moved = geometry->frame.from[0] - point[0]; /* the shift of the rows passed */
  double at = pk_snap(geometry, PK_V, point[1]) + geometry->tolerance / 2;
  double to = geometry->frame.to[0];
  double here = geometry->frame.from[0];
  int medium = 0;
  int needed = 0;
  while (here < to) { /* count first: outputs stay untouched on failure */
    here = pk_scan_next(geometry, PK_U, at, here - moved, to - moved, &medium) + moved;
    needed++;
    if (needed > capacity) {
      return pk_fail(geometry->context, PICKET_ERROR_UNSUPPORTED,
                     "the profile has more than %d intervals, must be at most %d", capacity,
                     capacity);
    }
  }
  here = geometry->frame.from[0];
  boundaries[0] = here;
  for (int i = 0; i < needed; i++) {
    here = pk_scan_next(geometry, PK_U, at, here - moved, to - moved, &media[i]) + moved;
    boundaries[i + 1] = i + 1 < needed ? here : to;
  }
  *count = needed;
  return PICKET_OK;
}

/* The only medium along a whole line parallel to `axis`; false if there are several. */
static bool only_medium(const pk_geometry *geometry, pk_axis_name axis, double at, int *medium) {
  double low[2];
  double high[2];
  double from;
  double to;
  pk_window(geometry, low, high);
  if (!geometry->frame.periodic[axis] && pk_geometry_extent(geometry, axis, &from, &to)) {
    double margin = geometry->frame.to[0] - geometry->frame.from[0];
    low[axis] = fmin(low[axis], from - margin);
    high[axis] = fmax(high[axis], to + margin);
  }
  return !(pk_scan_next(geometry, axis, at, low[axis], high[axis], medium) < high[axis]);
}

bool pk_geometry_side_media(const pk_geometry *geometry, pk_axis_name axis, int *low_medium,
                            int *high_medium) {
  if (geometry->frame.periodic[axis]) {
    return false;
  }
  double low = 0;
  double high = 0;
  pk_geometry_extent(geometry, axis, &low, &high);
  /* Any distance beyond the last shape is as good as infinity. */
  double margin = geometry->frame.to[0] - geometry->frame.from[0];
  pk_axis_name across = (pk_axis_name)(1 - (int)axis);
  int media[2];
  if (!only_medium(geometry, across, low - margin, &media[0]) ||
      !only_medium(geometry, across, high + margin, &media[1])) {
    return false;
  }
  *low_medium = media[0];
  *high_medium = media[1];
  return true;
}
