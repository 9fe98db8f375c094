/* Along an interface the media on its two sides change only where another curve crosses it or ends
 * on it. So the walk goes from crossing to crossing, each time looking for the nearest one ahead,
 * and asks for the media at one point per stretch. The points stand beside the interface by two
 * tolerances: far enough that coordinates meant to be equal are equal, too near for anything else
 * to fit between. Stretches shorter than some tolerances are passed over.
 *
 * The position p along a piece is its coordinate along the longer side of its bounding box. */
#include "geometry/walk.h"

#include <math.h>

typedef struct pk_route {
  const pk_geometry *geometry;
  pk_piece piece;
  pk_axis_name axis; /* of the position */
  double here, end;
  double next; /* nearest crossing ahead so far */
} pk_route;

static void consider_position(pk_route *route, double position) {
  if (position > route->here + route->geometry->tolerance && position < route->next) {
    route->next = position;
  }
}

/* Crossings with one other piece, and its ends where they lie on the piece: a curve that leaves the
 * piece in its own direction crosses it at no well-defined point. */
static void consider_piece(pk_route *route, const pk_piece *other) {
  double slack = 2 * route->geometry->tolerance;
  double points[2][2];
  int count = pk_piece_crossings(&route->piece, other, slack, points);
  for (int i = 0; i < count; i++) {
    consider_position(route, points[i][route->axis]);
  }
  const double *ends[2] = {other->from, other->to};
  for (int i = 0; i < 2; i++) {
    double position = ends[i][route->axis];
    double beside = ends[i][1 - (int)route->axis];
    if (fabs(pk_piece_at(&route->piece, route->axis, position) - beside) <= slack) {
      consider_position(route, position);
    }
  }
}

/* The part of the piece still ahead, grown by the tolerance. */
static void box_ahead(const pk_route *route, double low[2], double high[2]) {
  int across = 1 - (int)route->axis;
  double slack = 2 * route->geometry->tolerance;
  double a = pk_piece_at(&route->piece, route->axis, route->here);
  double b = pk_piece_at(&route->piece, route->axis, route->end);
  low[route->axis] = route->here - slack;
  high[route->axis] = route->end + slack;
  low[across] = fmin(a, b) - slack;
  high[across] = fmax(a, b) + slack;
}

static void find_next(pk_route *route, const pk_mirror *mirror) {
  double low[2];
  double high[2];
  pk_search search;
  pk_piece other;
  route->next = route->end;
  box_ahead(route, low, high);
  pk_search_start(&search, route->geometry, low, high);
  while (pk_search_next(&search, &other)) {
    consider_piece(route, &other);
  }
  if (!mirror) {
    return;
  }
  double reflected_low = 2 * mirror->centre - high[mirror->axis];
  high[mirror->axis] = 2 * mirror->centre - low[mirror->axis];
  low[mirror->axis] = reflected_low;
  pk_search_start(&search, route->geometry, low, high);
  while (pk_search_next(&search, &other)) {
    pk_piece image = pk_piece_mirrored(&other, mirror->axis, mirror->centre);
    consider_piece(route, &image);
  }
}

/* The positions between which the monotone piece is inside the box; false if it is not. */
static bool clip(pk_route *route, const double low[2], const double high[2]) {
  pk_axis_name across = (pk_axis_name)(1 - (int)route->axis);
  const pk_piece *piece = &route->piece;
  route->here = fmax(piece->low[route->axis], low[route->axis]);
  route->end = fmin(piece->high[route->axis], high[route->axis]);
  if (piece->low[across] > high[across] || piece->high[across] < low[across]) {
    return false;
  }
  if (!pk_piece_is_level(piece, across)) {
    double a = pk_piece_at(piece, across, low[across]);
    double b = pk_piece_at(piece, across, high[across]);
    route->here = fmax(route->here, fmin(a, b));
    route->end = fmin(route->end, fmax(a, b));
  }
  return route->here < route->end;
}

static bool visit_stretch(const pk_route *route, pk_visit visit, void *user) {
  double tolerance = route->geometry->tolerance;
  if (route->next - route->here <= 16 * tolerance) {
    return false;
  }
  double middle[2];
  double normal[2];
  middle[route->axis] = (route->here + route->next) / 2;
  middle[1 - (int)route->axis] = pk_piece_at(&route->piece, route->axis, middle[route->axis]);
  pk_piece_normal(&route->piece, middle, normal);
  double beside = 2 * tolerance;
  double one[2] = {middle[0] - beside * normal[0], middle[1] - beside * normal[1]};
  double other[2] = {middle[0] + beside * normal[0], middle[1] + beside * normal[1]};
  return visit(route->geometry, one, other, user);
}

bool pk_walk(const pk_geometry *geometry, const pk_piece *piece, const double low[2],
             const double high[2], const pk_mirror *mirror, pk_visit visit, void *user) {
  double extent[2] = {piece->high[0] - piece->low[0], piece->high[1] - piece->low[1]};
  pk_route route = {
      .geometry = geometry, .piece = *piece, .axis = extent[1] > extent[0] ? PK_V : PK_U};
  if (!clip(&route, low, high)) {
    return false;
  }
  while (route.here < route.end) {
    find_next(&route, mirror);
    if (visit_stretch(&route, visit, user)) {
      return true;
    }
    route.here = route.next;
  }
  return false;
}

bool pk_visit_visible(const pk_geometry *geometry, const double one_side[2],
                      const double other_side[2], void *user) {
  (void)user;
  return pk_paint_at(geometry, one_side[0], one_side[1]) !=
         pk_paint_at(geometry, other_side[0], other_side[1]);
}

/* The nearest curve ahead on a scan line, at most `to`. */
static double next_curve(const pk_geometry *geometry, pk_axis_name axis, double at, double from,
                         double to) {
  int across = 1 - (int)axis;
  double low[2];
  double high[2];
  low[axis] = from;
  high[axis] = to;
  low[across] = high[across] = at;
  double next = to;
  pk_search search;
  pk_piece piece;
  pk_search_start(&search, geometry, low, high);
  while (pk_search_next(&search, &piece)) {
    if (pk_piece_is_level(&piece, (pk_axis_name)across)) {
      continue;
    }
    double position = pk_piece_at(&piece, (pk_axis_name)across, at);
    if (position > from + geometry->tolerance && position < next) {
      next = position;
    }
  }
  return next;
}

static int scan_medium(const pk_geometry *geometry, pk_axis_name axis, double at, double position) {
  return axis == PK_U ? pk_paint_at(geometry, position, at) : pk_paint_at(geometry, at, position);
}

double pk_scan_next(const pk_geometry *geometry, pk_axis_name axis, double at, double from,
                    double to, int *medium) {
  double here = next_curve(geometry, axis, at, from, to);
  *medium = scan_medium(geometry, axis, at, (from + here) / 2);
  while (here < to) {
    double next = next_curve(geometry, axis, at, here, to);
    if (scan_medium(geometry, axis, at, (here + next) / 2) != *medium) {
      return here;
    }
    here = next;
  }
  return to;
}
