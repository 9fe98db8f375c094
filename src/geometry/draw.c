/* The boundary of a shape as one closed polygon.
 *
 * An outline holds its pieces in any order and either sense. The walk starts at the first piece and
 * goes on with the piece that has an end nearest to where it stands; ends that belong together
 * differ by rounding only. A straight piece adds its far end; an arc of angle θ adds chords of at
 * most 7.5 degrees, which leave the circle by at most r (1 - cos 3.75°) = 0.002 r: less than a dot
 * of a picture. A stripe has ends at infinity and is cut off at the window. */
#include "geometry/draw.h"

#include <math.h>

#include "base/memory.h"
#include "geometry/paint.h"

enum { CHORDS = 12 }; /* of a quarter turn, the longest arc of an outline */

static const double turn = 6.28318530717958647692;

static bool is_endless(const pk_outline *outline) {
  return !isfinite(outline->low[0]) || !isfinite(outline->low[1]) || !isfinite(outline->high[0]) ||
         !isfinite(outline->high[1]);
}

static void add(pk_drawn *drawn, double u, double v) {
  drawn->at[drawn->count][0] = u;
  drawn->at[drawn->count][1] = v;
  drawn->count++;
}

/* The part of a stripe in the window, which is that of its bounding box. */
static void draw_box(const pk_outline *outline, const double low[2], const double high[2],
                     pk_drawn *drawn) {
  double from[2], to[2];
  for (int a = 0; a < 2; a++) {
    from[a] = fmax(outline->low[a], low[a]);
    to[a] = fmin(outline->high[a], high[a]);
  }
  add(drawn, from[0], from[1]);
  add(drawn, to[0], from[1]);
  add(drawn, to[0], to[1]);
  add(drawn, from[0], to[1]);
}

/* Everything after the point the walk stands at, up to the far end of the piece. */
static void follow(const pk_piece *piece, bool backwards, pk_drawn *drawn) {
  const double *start = backwards ? piece->to : piece->from;
  const double *end = backwards ? piece->from : piece->to;
  if (piece->radius > 0) {
    double first = atan2(start[1] - piece->centre[1], start[0] - piece->centre[0]);
    double angle =
        remainder(atan2(end[1] - piece->centre[1], end[0] - piece->centre[0]) - first, turn);
    for (int i = 1; i < CHORDS; i++) {
      double here = first + angle * i / CHORDS;
      add(drawn, piece->centre[0] + piece->radius * cos(here),
          piece->centre[1] + piece->radius * sin(here));
    }
  }
  add(drawn, end[0], end[1]);
}

/* The piece not yet taken that goes on from a point, and which of its ends is there. */
static int next_piece(const pk_outline *outline, const bool *taken, const double at[2],
                      bool *backwards) {
  double nearest = INFINITY;
  int found = 0;
  for (int i = 0; i < outline->count; i++) {
    const pk_piece *piece = &outline->pieces[i];
    double to_start = hypot(piece->from[0] - at[0], piece->from[1] - at[1]);
    double to_end = hypot(piece->to[0] - at[0], piece->to[1] - at[1]);
    if (!taken[i] && fmin(to_start, to_end) < nearest) {
      nearest = fmin(to_start, to_end);
      found = i;
      *backwards = to_end < to_start;
    }
  }
  return found;
}

static picket_status draw_chain(picket_context *context, const pk_outline *outline,
                                pk_drawn *drawn) {
  bool *taken = PK_NEW(context, outline->count, bool);
  if (!taken) {
    return PICKET_ERROR_MEMORY;
  }
  const double *at = outline->pieces[0].from;
  for (int i = 0; i < outline->count; i++) {
    bool backwards = false;
    int found = next_piece(outline, taken, at, &backwards);
    taken[found] = true;
    follow(&outline->pieces[found], backwards, drawn);
    at = backwards ? outline->pieces[found].from : outline->pieces[found].to;
  }
  pk_free(context, taken);
  return PICKET_OK;
}

static picket_status draw_shape(picket_context *context, const pk_shape *shape, const double low[2],
                                const double high[2], pk_drawn *drawn) {
  const pk_outline *outline = &shape->outline;
  bool endless = is_endless(outline);
  int most = endless ? 4 : outline->count * CHORDS;
  drawn->medium = shape->medium;
  drawn->at = (double(*)[2])PK_NEW(context, 2 * (size_t)most, double);
  if (!drawn->at) {
    return PICKET_ERROR_MEMORY;
  }
  if (endless) {
    draw_box(outline, low, high, drawn);
    return PICKET_OK;
  }
  return draw_chain(context, outline, drawn);
}

/* A list that grows. */
typedef struct list {
  picket_context *context;
  pk_drawn *drawn;
  int count, capacity;
} list;

static picket_status make_room(list *l) {
  if (l->count < l->capacity) {
    return PICKET_OK;
  }
  int capacity = 2 * l->capacity + 16;
  pk_drawn *larger =
      pk_regrow(l->context, l->drawn, (size_t)l->count, (size_t)capacity, sizeof *larger);
  if (!larger) {
    return PICKET_ERROR_MEMORY;
  }
  l->drawn = larger;
  l->capacity = capacity;
  return PICKET_OK;
}

static picket_status draw_copies(list *l, const pk_geometry *geometry, const pk_shape *shape,
                                 const double low[2], const double high[2]) {
  picket_status status = PICKET_OK;
  pk_copies copies;
  pk_copies_start(&copies, geometry, &shape->outline, low, high);
  while (status == PICKET_OK && pk_copies_next(&copies)) {
    status = make_room(l);
    if (status != PICKET_OK) {
      break;
    }
    const double *offset = copies.offset;
    double from[2] = {low[0] - offset[0], low[1] - offset[1]};
    double to[2] = {high[0] - offset[0], high[1] - offset[1]};
    pk_drawn *drawn = &l->drawn[l->count++];
    status = draw_shape(l->context, shape, from, to, drawn);
    for (int i = 0; i < drawn->count; i++) {
      drawn->at[i][0] += offset[0];
      drawn->at[i][1] += offset[1];
    }
  }
  return status;
}

picket_status pk_geometry_draw(const pk_geometry *geometry, const double low[2],
                               const double high[2], pk_drawn **out, int *count) {
  list l = {.context = geometry->context};
  picket_status status = PICKET_OK;
  for (int s = 0; s < geometry->count && status == PICKET_OK; s++) {
    status = draw_copies(&l, geometry, &geometry->shapes[s], low, high);
  }
  if (status != PICKET_OK) {
    pk_drawn_free(geometry->context, l.drawn, l.count);
    return status;
  }
  *out = l.drawn;
  *count = l.count;
  return PICKET_OK;
}

void pk_drawn_free(picket_context *context, pk_drawn *drawn, int count) {
  for (int i = 0; i < count; i++) {
    pk_free(context, drawn[i].at);
  }
  pk_free(context, drawn);
}
