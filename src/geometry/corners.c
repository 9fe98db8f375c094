/* Corners: points where visible interfaces meet or bend.
 *
 * Candidates are the ends of all pieces and their crossings. At a candidate the directions of all
 * pieces through it divide a small circle into sectors; the medium of a sector is that of its
 * middle; a direction with different media on its two sides is a visible ray. No ray, or two
 * opposite rays (a straight or smooth interface), is no corner. Rays that are all parallel to the
 * axes make a corner of four quadrants, for which the field singularity is known; other corners are
 * counted.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "geometry/paint.h"

static const double quarter_turn = 1.57079632679489661923;

/* Directions closer than this are one. The circle below is 1e-6 of the extent and points are known
 * to a few 1e-9 of it, so directions are known to some 1e-3; two interfaces at a smaller angle
 * would make a wedge that no grid resolves. */
static const double same_direction = 5e-3;

enum { RAYS_MAX = 64 }; /* more directions than this through one point: counted as other corner */

typedef enum pk_corner_kind { NO_CORNER, QUADRANTS, OTHER_CORNER } pk_corner_kind;

typedef struct pk_fan {
  double angle[RAYS_MAX]; /* [count], rising, 0 to 2π */
  bool curved[RAYS_MAX];  /* an arc leaves the point in this direction */
  int count;
  bool full;
} pk_fan;

static double circle_radius(const pk_geometry *geometry) {
  return 1e3 * geometry->tolerance;
}

static void add_direction(pk_fan *fan, double du, double dv, bool curved) {
  double angle = atan2(dv, du);
  angle = angle < -same_direction / 2 ? angle + 4 * quarter_turn : angle;
  for (int i = 0; i < fan->count; i++) {
    if (fabs(remainder(fan->angle[i] - angle, 4 * quarter_turn)) < same_direction) {
      fan->curved[i] = fan->curved[i] || curved;
      return;
    }
  }
  if (fan->count == RAYS_MAX) {
    fan->full = true;
    return;
  }
  int k = fan->count++;
  for (; k > 0 && fan->angle[k - 1] > angle; k--) {
    fan->angle[k] = fan->angle[k - 1];
    fan->curved[k] = fan->curved[k - 1];
  }
  fan->angle[k] = angle;
  fan->curved[k] = curved;
}

/* True if the point lies on the curve of a piece whose bounding box it is in. */
static bool lies_on(const pk_piece *piece, const double at[2], double slack) {
  if (piece->radius > 0) {
    return fabs(hypot(at[0] - piece->centre[0], at[1] - piece->centre[1]) - piece->radius) < slack;
  }
  double normal[2];
  pk_piece_normal(piece, at, normal);
  double offset = 0;
  for (int a = 0; a < 2; a++) { /* an end at infinity counts only along the edge */
    offset += normal[a] != 0 ? normal[a] * (at[a] - piece->from[a]) : 0;
  }
  return fabs(offset) < slack;
}

/* The directions in which a piece leaves the point: towards those of its ends that are not there.
 */
static void add_piece(pk_fan *fan, const pk_piece *piece, const double at[2], double slack) {
  if (!lies_on(piece, at, slack)) {
    return;
  }
  double normal[2];
  pk_piece_normal(piece, at, normal);
  const double *ends[2] = {piece->from, piece->to};
  for (int i = 0; i < 2; i++) {
    double d[2] = {ends[i][0] - at[0], ends[i][1] - at[1]};
    double along = 0;
    for (int a = 0; a < 2; a++) {
      double tangent = a == 0 ? -normal[1] : normal[0];
      along += tangent != 0 ? tangent * d[a] : 0;
    }
    if (fabs(along) > 2 * slack) {
      double sign = along > 0 ? 1 : -1;
      add_direction(fan, -sign * normal[1], sign * normal[0], piece->radius > 0);
    }
  }
}

static void gather(const pk_geometry *geometry, const double at[2], pk_fan *fan) {
  double slack = 2 * geometry->tolerance;
  double low[2] = {at[0] - slack, at[1] - slack};
  double high[2] = {at[0] + slack, at[1] + slack};
  pk_search search;
  pk_piece piece;
  pk_search_start(&search, geometry, low, high);
  while (pk_search_next(&search, &piece)) {
    add_piece(fan, &piece, at, slack);
  }
}

static bool parallel_to_axis(double angle) {
  return fabs(remainder(angle, quarter_turn)) < same_direction;
}

/* Drops directions that cannot be seen. */
static void keep_visible(const pk_geometry *geometry, const double at[2], pk_fan *fan) {
  double radius = circle_radius(geometry);
  int media[RAYS_MAX]; /* of the sector that begins at the direction */
  for (int i = 0; i < fan->count; i++) {
    double next = i + 1 < fan->count ? fan->angle[i + 1] : fan->angle[0] + 4 * quarter_turn;
    double middle = (fan->angle[i] + next) / 2;
    media[i] = pk_paint_at(geometry, at[0] + radius * cos(middle), at[1] + radius * sin(middle));
  }
  int count = fan->count;
  fan->count = 0;
  for (int i = 0; i < count; i++) {
    if (media[i] != media[(i + count - 1) % count]) {
      fan->curved[fan->count] = fan->curved[i];
      fan->angle[fan->count++] = fan->angle[i];
    }
  }
}

static pk_corner_kind classify(const pk_geometry *geometry, pk_corner *corner) {
  pk_fan fan = {.count = 0};
  gather(geometry, corner->at, &fan);
  if (fan.full) {
    return OTHER_CORNER;
  }
  keep_visible(geometry, corner->at, &fan);
  if (fan.count == 0) {
    return NO_CORNER;
  }
  if (fan.count == 2 && fabs(fan.angle[1] - fan.angle[0] - 2 * quarter_turn) < 2 * same_direction) {
    return NO_CORNER;
  }
  for (int i = 0; i < fan.count; i++) {
    if (fan.curved[i] || !parallel_to_axis(fan.angle[i])) {
      return OTHER_CORNER;
    }
  }
  static const double side[4][2] = {{1, 1}, {-1, 1}, {-1, -1}, {1, -1}};
  double radius = circle_radius(geometry);
  for (int q = 0; q < 4; q++) {
    corner->medium[q] = pk_paint_at(geometry, corner->at[0] + radius * side[q][0],
                                    corner->at[1] + radius * side[q][1]);
  }
  return QUADRANTS;
}

/* Corners found so far; without memory (context null) the first one ends the search. */
typedef struct pk_harvest {
  picket_context *context;
  pk_corner *corners; /* [count], of both kinds */
  bool *quadrants;    /* [count] */
  int count, capacity;
} pk_harvest;

static picket_status make_room(pk_harvest *harvest) {
  if (harvest->count < harvest->capacity) {
    return PICKET_OK;
  }
  size_t used = (size_t)harvest->count;
  size_t capacity = 2 * used + 16;
  pk_corner *corners =
      pk_regrow(harvest->context, harvest->corners, used, capacity, sizeof *corners);
  if (!corners) {
    return PICKET_ERROR_MEMORY;
  }
  harvest->corners = corners;
  bool *quadrants =
      pk_regrow(harvest->context, harvest->quadrants, used, capacity, sizeof *quadrants);
  if (!quadrants) {
    return PICKET_ERROR_MEMORY;
  }
  harvest->quadrants = quadrants;
  harvest->capacity = (int)capacity;
  return PICKET_OK;
}

static bool known_corner(const pk_geometry *geometry, const pk_harvest *harvest,
                         const double at[2]) {
  for (int i = 0; harvest->context && i < harvest->count; i++) {
    double d[2] = {at[0] - harvest->corners[i].at[0], at[1] - harvest->corners[i].at[1]};
    for (int a = 0; a < 2; a++) {
      d[a] = geometry->frame.periodic[a] ? remainder(d[a], geometry->period[a]) : d[a];
    }
    if (hypot(d[0], d[1]) < 2 * geometry->tolerance) {
      return true;
    }
  }
  return false;
}

/* A coordinate within the tolerance of the upper end of a period stands at its lower end. */
static void settle(const pk_geometry *geometry, double at[2]) {
  double nudged[2] = {at[0] + geometry->tolerance, at[1] + geometry->tolerance};
  pk_wrap(geometry, nudged, at);
}

static picket_status try_point(const pk_geometry *geometry, pk_harvest *harvest, double u,
                               double v) {
  pk_corner corner = {.at = {u, v}};
  settle(geometry, corner.at);
  for (int a = 0; a < 2; a++) {
    if (!isfinite(corner.at[a]) ||
        (!geometry->frame.periodic[a] &&
         !(corner.at[a] > geometry->frame.from[a] + geometry->tolerance &&
           corner.at[a] < geometry->frame.to[a] - geometry->tolerance))) {
      return PICKET_OK;
    }
  }
  if (known_corner(geometry, harvest, corner.at)) {
    return PICKET_OK;
  }
  pk_corner_kind kind = classify(geometry, &corner);
  if (kind == NO_CORNER) {
    return PICKET_OK;
  }
  if (!harvest->context) {
    harvest->count = 1;
    return PICKET_OK;
  }
  picket_status status = make_room(harvest);
  if (status == PICKET_OK) {
    harvest->corners[harvest->count] = corner;
    harvest->quadrants[harvest->count++] = kind == QUADRANTS;
  }
  return status;
}

/* Ends of a piece and its crossings with all others. */
static picket_status try_piece(const pk_geometry *geometry, pk_harvest *harvest,
                               const pk_piece *piece) {
  double low[2];
  double high[2];
  double from[2];
  double to[2];
  pk_window(geometry, from, to);
  for (int a = 0; a < 2; a++) {
    low[a] = isfinite(piece->low[a]) ? piece->low[a] : from[a];
    high[a] = isfinite(piece->high[a]) ? piece->high[a] : to[a];
  }
  picket_status status = try_point(geometry, harvest, piece->from[0], piece->from[1]);
  if (status == PICKET_OK) {
    status = try_point(geometry, harvest, piece->to[0], piece->to[1]);
  }
  pk_search search;
  pk_piece other;
  pk_search_start(&search, geometry, low, high);
  while (status == PICKET_OK && pk_search_next(&search, &other)) {
    double points[2][2];
    int count = pk_piece_crossings(piece, &other, geometry->tolerance, points);
    for (int i = 0; i < count && status == PICKET_OK; i++) {
      status = try_point(geometry, harvest, points[i][0], points[i][1]);
    }
  }
  return status;
}

static picket_status harvest_all(const pk_geometry *geometry, pk_harvest *harvest) {
  picket_status status = PICKET_OK;
  bool first_only = !harvest->context;
  for (int s = 0; s < geometry->count; s++) {
    const pk_outline *outline = &geometry->shapes[s].outline;
    for (int i = 0; i < outline->count && status == PICKET_OK; i++) {
      status = try_piece(geometry, harvest, &outline->pieces[i]);
      if (first_only && harvest->count > 0) {
        return PICKET_OK;
      }
    }
  }
  return status;
}

static int compare(const void *a, const void *b) {
  const pk_corner *x = a;
  const pk_corner *y = b;
  if (x->at[1] != y->at[1]) {
    return x->at[1] < y->at[1] ? -1 : 1;
  }
  return (x->at[0] > y->at[0]) - (x->at[0] < y->at[0]);
}

picket_status pk_geometry_corners(const pk_geometry *geometry, pk_corner **out, int *count,
                                  int *other_count) {
  picket_context *context = geometry->context;
  pk_harvest harvest = {.context = context};
  picket_status status = make_room(&harvest);
  if (status == PICKET_OK) {
    status = harvest_all(geometry, &harvest);
  }
  if (status == PICKET_OK) {
    int kept = 0;
    for (int i = 0; i < harvest.count; i++) {
      if (harvest.quadrants[i]) {
        harvest.corners[kept++] = harvest.corners[i];
      }
    }
    qsort(harvest.corners, (size_t)kept, sizeof *harvest.corners, compare);
    *out = harvest.corners;
    *count = kept;
    *other_count = harvest.count - kept;
  } else {
    pk_free(context, harvest.corners);
  }
  pk_free(context, harvest.quadrants);
  return status;
}

bool pk_geometry_has_corners(const pk_geometry *geometry) {
  pk_harvest harvest = {.context = NULL};
  harvest_all(geometry, &harvest);
  return harvest.count > 0;
}
