/* Mirror planes of the painted plane.
 *
 * The plane equals its mirror image if the media on both sides of every interface are those at the
 * mirrored points: lay the plane and its image over each other; every region of the overlay touches
 * a piece of the one or the other, and a region where they differ touches a stretch with a
 * difference beside it. It is enough to walk the pieces of the plane itself, because a difference
 * beside a piece of the image is, reflected, a difference beside a piece of the plane.
 *
 * Centres that can be: a mirror maps the low end of a shape that can be seen onto the high end of
 * some piece, so (low + high) / 2 over all pieces is tried, for the topmost shape. Along a periodic
 * axis every centre has a partner half a period away. */
#include <math.h>

#include "geometry/paint.h"
#include "geometry/walk.h"

static bool visit_difference(const pk_geometry *geometry, const double one_side[2],
                             const double other_side[2], void *user) {
  const pk_mirror *mirror = user;
  const double *sides[2] = {one_side, other_side};
  for (int i = 0; i < 2; i++) {
    double image[2] = {sides[i][0], sides[i][1]};
    image[mirror->axis] = 2 * mirror->centre - image[mirror->axis];
    if (pk_paint_at(geometry, sides[i][0], sides[i][1]) !=
        pk_paint_at(geometry, image[0], image[1])) {
      return true;
    }
  }
  return false;
}

/* How far a piece has to be walked: all of it, unless it is endless. Beyond the hull of the
 * structure and its image nothing changes along an endless edge; along a periodic axis, after one
 * period. */
static void walk_range(const pk_geometry *geometry, const pk_mirror *mirror, const pk_piece *piece,
                       double low[2], double high[2]) {
  double from[2];
  double to[2];
  pk_window(geometry, from, to);
  for (int a = 0; a < 2; a++) {
    low[a] = -INFINITY;
    high[a] = INFINITY;
    if (isfinite(piece->low[a]) && isfinite(piece->high[a])) {
      continue;
    }
    low[a] = from[a];
    high[a] = to[a];
    double margin = geometry->frame.to[0] - geometry->frame.from[0];
    double first;
    double last;
    if (!geometry->frame.periodic[a] &&
        pk_geometry_extent(geometry, (pk_axis_name)a, &first, &last)) {
      low[a] = fmin(low[a], first - margin);
      high[a] = fmax(high[a], last + margin);
    }
    if (a == (int)mirror->axis && !geometry->frame.periodic[a]) {
      double image = 2 * mirror->centre - high[a];
      high[a] = fmax(high[a], 2 * mirror->centre - low[a]);
      low[a] = fmin(low[a], image);
    }
  }
}

static bool is_mirror(const pk_geometry *geometry, pk_mirror mirror) {
  for (int s = 0; s < geometry->count; s++) {
    const pk_outline *outline = &geometry->shapes[s].outline;
    for (int i = 0; i < outline->count; i++) {
      const pk_piece *piece = &outline->pieces[i];
      double low[2];
      double high[2];
      bool nowhere = false; /* the side of a stripe at infinity */
      for (int a = 0; a < 2; a++) {
        nowhere = nowhere || (pk_piece_is_level(piece, (pk_axis_name)a) && isinf(piece->low[a]));
      }
      walk_range(geometry, &mirror, piece, low, high);
      if (!nowhere && pk_walk(geometry, piece, low, high, &mirror, visit_difference, &mirror)) {
        return false;
      }
    }
  }
  return true;
}

/* Of the equivalent centres along a periodic axis the one nearest to the middle of the frame. */
static double reduce(const pk_geometry *geometry, pk_axis_name axis, double centre) {
  if (!geometry->frame.periodic[axis]) {
    return centre;
  }
  double middle = (geometry->frame.from[axis] + geometry->frame.to[axis]) / 2;
  return middle + remainder(centre - middle, geometry->period[axis] / 2);
}

/* The low end of the topmost shape that has one; NaN if none has. */
static double topmost_low(const pk_geometry *geometry, pk_axis_name axis) {
  for (int s = geometry->count - 1; s >= 0; s--) {
    const pk_shape *shape = &geometry->shapes[s];
    if (!shape->endless[axis] && isfinite(shape->outline.low[axis])) {
      return shape->outline.low[axis];
    }
  }
  return NAN;
}

/* Tries the centre that maps `low` onto the high end of each piece, moved by whole periods too. */
static bool try_ends(const pk_geometry *geometry, pk_axis_name axis, double low, double *centre) {
  double last = NAN;
  for (int s = geometry->count - 1; s >= 0 && !isnan(low); s--) {
    const pk_outline *outline = &geometry->shapes[s].outline;
    for (int i = 0; i < outline->count; i++) {
      double high = outline->pieces[i].high[axis];
      double candidate = reduce(geometry, axis, (low + high) / 2);
      if (!isfinite(high) || candidate == last) {
        continue;
      }
      last = candidate;
      if (is_mirror(geometry, (pk_mirror){axis, candidate})) {
        *centre = candidate;
        return true;
      }
    }
  }
  return false;
}

bool pk_geometry_mirror(const pk_geometry *geometry, pk_axis_name axis, double *centre) {
  const pk_frame *frame = &geometry->frame;
  /* A mirror turns the shift around: the lattice stays itself for a shift of 0 or half a period. */
  if (frame->shift != 0 &&
      fabs(remainder(2 * frame->shift, geometry->period[0])) > geometry->tolerance) {
    return false;
  }
  double middle = (frame->from[axis] + frame->to[axis]) / 2;
  double first[2] = {0, middle};
  for (int i = 0; i < 2; i++) {
    if (isfinite(first[i]) && is_mirror(geometry, (pk_mirror){axis, first[i]})) {
      *centre = first[i];
      return true;
    }
  }
  return try_ends(geometry, axis, topmost_low(geometry, axis), centre);
}

bool pk_geometry_is_rectangular(const pk_geometry *geometry) {
  double low[2];
  double high[2];
  pk_window(geometry, low, high);
  pk_search search;
  pk_piece piece;
  pk_search_start(&search, geometry, low, high);
  while (pk_search_next(&search, &piece)) {
    if (!pk_piece_is_level(&piece, PK_U) && !pk_piece_is_level(&piece, PK_V) &&
        pk_walk(geometry, &piece, low, high, NULL, pk_visit_visible, NULL)) {
      return false;
    }
  }
  return true;
}
