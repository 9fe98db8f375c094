/* Where copies and coordinates are: wrapping into the frame, periodic copies of an outline, and the
 * list of known edge coordinates that new edges and boxes are snapped to. */
#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "geometry/paint.h"

void pk_wrap(const pk_geometry *geometry, double point[2], double second[2]) {
  const pk_frame *frame = &geometry->frame;
  for (int a = 1; a >= 0; a--) { /* v first: it moves u by the shift */
    double turns =
        frame->periodic[a] ? floor((point[a] - frame->from[a]) / geometry->period[a]) : 0;
    if (turns == 0) {
      continue; /* exact where nothing has to move */
    }
    double offset[2] = {a == 1 ? turns * frame->shift : 0, 0};
    offset[a] = turns * geometry->period[a];
    for (int b = 0; b < 2; b++) {
      point[b] -= offset[b];
      if (second) {
        second[b] -= offset[b];
      }
    }
  }
}

/* The range of copy numbers n for which a span moved by n periods meets low..high. A span with an
 * infinite end is not copied. */
static void copy_range(const pk_geometry *geometry, const pk_outline *outline, int axis, double low,
                       double high, double *first, double *last) {
  double period = geometry->period[axis];
  if (!isfinite(period) || !isfinite(outline->low[axis]) || !isfinite(outline->high[axis])) {
    *first = *last = 0;
    return;
  }
  *first = ceil((low - outline->high[axis]) / period);
  *last = floor((high - outline->low[axis]) / period);
}

static void start_row(pk_copies *copies) {
  double moved = copies->j * copies->geometry->frame.shift;
  copy_range(copies->geometry, copies->outline, PK_U, copies->low[0] - moved,
             copies->high[0] - moved, &copies->i, &copies->i_end);
}

void pk_copies_start(pk_copies *copies, const pk_geometry *geometry, const pk_outline *outline,
                     const double low[2], const double high[2]) {
  copies->geometry = geometry;
  copies->outline = outline;
  for (int a = 0; a < 2; a++) {
    copies->low[a] = low[a];
    copies->high[a] = high[a];
  }
  copy_range(geometry, outline, PK_V, low[1], high[1], &copies->j, &copies->j_end);
  start_row(copies);
}

bool pk_copies_next(pk_copies *copies) {
  while (copies->j <= copies->j_end && copies->i > copies->i_end) {
    copies->j++;
    start_row(copies);
  }
  if (copies->j > copies->j_end) {
    return false;
  }
  const pk_geometry *geometry = copies->geometry;
  /* 0 × infinite period must stay 0. */
  copies->offset[1] = copies->j != 0 ? copies->j * geometry->period[1] : 0;
  copies->offset[0] =
      (copies->i != 0 ? copies->i * geometry->period[0] : 0) + copies->j * geometry->frame.shift;
  copies->i++;
  return true;
}

void pk_search_start(pk_search *search, const pk_geometry *geometry, const double low[2],
                     const double high[2]) {
  *search = (pk_search){
      .geometry = geometry, .low = {low[0], low[1]}, .high = {high[0], high[1]}, .shape = -1};
}

/* Opens the next copy of this shape or the first of a later one. */
static bool next_copy(pk_search *search) {
  while (!(search->shape >= 0 && pk_copies_next(&search->copies))) {
    if (++search->shape >= search->geometry->count) {
      return false;
    }
    pk_copies_start(&search->copies, search->geometry,
                    &search->geometry->shapes[search->shape].outline, search->low, search->high);
  }
  search->piece = 0;
  return true;
}

static bool meets(const pk_search *search, const pk_piece *piece) {
  for (int a = 0; a < 2; a++) {
    double offset = search->copies.offset[a];
    if (piece->low[a] + offset > search->high[a] || piece->high[a] + offset < search->low[a]) {
      return false;
    }
  }
  return true;
}

bool pk_search_next(pk_search *search, pk_piece *piece) {
  for (;;) {
    if (!search->inside && !next_copy(search)) {
      return false;
    }
    search->inside = true;
    const pk_outline *outline = &search->geometry->shapes[search->shape].outline;
    while (search->piece < outline->count) {
      const pk_piece *candidate = &outline->pieces[search->piece++];
      if (meets(search, candidate)) {
        *piece = pk_piece_moved(candidate, search->copies.offset);
        return true;
      }
    }
    search->inside = false;
  }
}

/* The first sorted known coordinate that is not below `value`. */
static int first_not_below(const pk_known *known, double value) {
  int low = 0;
  int high = known->sorted;
  while (low < high) {
    int middle = low + (high - low) / 2;
    if (known->at[middle] < value) {
      low = middle + 1;
    } else {
      high = middle;
    }
  }
  return low;
}

/* Makes `known` the nearest so far, if it is nearer to `value` than `best` is. */
static void try_known(double known, double value, double *distance, double *best) {
  if (fabs(known - value) <= *distance) {
    *distance = fabs(known - value);
    *best = known;
  }
}

double pk_snap(const pk_geometry *geometry, pk_axis_name axis, double value) {
  const pk_known *known = &geometry->known[axis];
  if (!isfinite(value) || known->count == 0) {
    return value;
  }
  bool periodic = geometry->frame.periodic[axis];
  double period = periodic ? geometry->period[axis] : 0;
  double turns = periodic ? floor((value - geometry->frame.from[axis]) / period) : 0;
  double reduced = value - turns * period;
  double distance = geometry->tolerance;
  double best = NAN;
  for (int wrap = periodic ? -1 : 0; wrap <= (periodic ? 1 : 0); wrap++) {
    double move = wrap * period;
    int i = first_not_below(known, reduced - move);
    if (i < known->sorted) {
      try_known(known->at[i] + move, reduced, &distance, &best);
    }
    if (i > 0) {
      try_known(known->at[i - 1] + move, reduced, &distance, &best);
    }
    for (int k = known->sorted; k < known->count; k++) {
      try_known(known->at[k] + move, reduced, &distance, &best);
    }
  }
  return isnan(best) ? value : best + turns * period;
}

picket_status pk_known_note(pk_geometry *geometry, pk_axis_name axis, double value) {
  pk_known *known = &geometry->known[axis];
  if (known->count == known->capacity) {
    int capacity = 2 * known->capacity + 8;
    double *at =
        pk_regrow(geometry->context, known->at, (size_t)known->count, (size_t)capacity, sizeof *at);
    if (!at) {
      return PICKET_ERROR_MEMORY;
    }
    known->at = at;
    known->capacity = capacity;
  }
  if (geometry->frame.periodic[axis]) {
    value -= floor((value - geometry->frame.from[axis]) / geometry->period[axis]) *
             geometry->period[axis];
  }
  known->at[known->count++] = value;
  return PICKET_OK;
}

picket_status pk_snap_edge(pk_geometry *geometry, pk_axis_name axis, double *value) {
  double snapped = pk_snap(geometry, axis, *value);
  *value = snapped;
  if (!isfinite(snapped)) {
    return PICKET_OK;
  }
  picket_status status = pk_known_note(geometry, axis, snapped);
  /* Boxes in the frame meet the rows above and below it, whose edges are moved by the shift. */
  double shift = axis == PK_U ? geometry->frame.shift : 0;
  for (int row = -1; row <= 1 && shift != 0 && status == PICKET_OK; row += 2) {
    status = pk_known_note(geometry, axis, snapped + row * shift);
  }
  return status;
}

static int compare(const void *a, const void *b) {
  double x = *(const double *)a;
  double y = *(const double *)b;
  return (x > y) - (x < y);
}

void pk_known_keep(pk_geometry *geometry) {
  for (int a = 0; a < 2; a++) {
    pk_known *known = &geometry->known[a];
    if (known->count == known->sorted) {
      continue;
    }
    qsort(known->at, (size_t)known->count, sizeof *known->at, compare);
    int kept = 0;
    for (int i = 0; i < known->count; i++) { /* equal ones once */
      if (kept == 0 || known->at[i] > known->at[kept - 1] + geometry->rounding) {
        known->at[kept++] = known->at[i];
      }
    }
    known->count = known->sorted = kept;
  }
}

void pk_known_forget(pk_geometry *geometry) {
  for (int a = 0; a < 2; a++) {
    geometry->known[a].count = geometry->known[a].sorted;
  }
}

void pk_window(const pk_geometry *geometry, double low[2], double high[2]) {
  for (int a = 0; a < 2; a++) {
    double from = 0;
    double to = 0;
    double margin = geometry->frame.to[0] - geometry->frame.from[0];
    pk_geometry_extent(geometry, (pk_axis_name)a, &from, &to);
    low[a] = isfinite(geometry->frame.from[a]) ? geometry->frame.from[a] : from - margin;
    high[a] = isfinite(geometry->frame.to[a]) ? geometry->frame.to[a] : to + margin;
  }
}
