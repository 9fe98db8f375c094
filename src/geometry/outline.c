/* Monotone pieces: points on them, areas under them, crossings between them.
 *
 * A straight piece is p(t) = from + t (to - from). An arc piece is one quadrant (or less) of the
 * circle |p - c| = r, so that u(v) = c_u + s_u sqrt(r² - (v - c_v)²) with a fixed sign s_u.
 *
 * Area: the integral of u dv is the trapezoid of the chord, and for an arc the circular segment
 *   r²/2 (θ - sin θ),  θ = 2 asin(chord / 2r),
 * added with the sign s_u. θ - sin θ is summed as a series for small θ, where the difference would
 * lose digits.
 *
 * Facing: with the normal at the angle φ, the integral of n nᵀ along an arc from m - h to m + h is
 *   r [h + cos(2m) sin(2h)/2,  sin(2m) sin(2h)/2,  h - cos(2m) sin(2h)/2]   (uu, uv, vv),
 * and m is the angle of the normal of the chord. */
#include "geometry/outline.h"

#include <assert.h>
#include <math.h>

#include "base/memory.h"

static const double half_turn = 3.14159265358979323846;

picket_status pk_outline_start(picket_context *context, int capacity, pk_outline *outline) {
  pk_piece *pieces = PK_NEW(context, capacity, pk_piece);
  if (!pieces) {
    return PICKET_ERROR_MEMORY;
  }
  *outline = (pk_outline){pieces, 0, capacity, {INFINITY, INFINITY}, {-INFINITY, -INFINITY}};
  return PICKET_OK;
}

void pk_outline_clear(picket_context *context, pk_outline *outline) {
  pk_free(context, outline->pieces);
  *outline = (pk_outline){0};
}

static void append(pk_outline *outline, pk_piece piece) {
  assert(outline->count < outline->capacity);
  for (int a = 0; a < 2; a++) {
    piece.low[a] = fmin(piece.from[a], piece.to[a]);
    piece.high[a] = fmax(piece.from[a], piece.to[a]);
    outline->low[a] = fmin(outline->low[a], piece.low[a]);
    outline->high[a] = fmax(outline->high[a], piece.high[a]);
  }
  outline->pieces[outline->count++] = piece;
}

void pk_outline_add_line(pk_outline *outline, const double from[2], const double to[2]) {
  append(outline, (pk_piece){.from = {from[0], from[1]}, .to = {to[0], to[1]}});
}

static void append_arc(pk_outline *outline, const double centre[2], double radius,
                       const double from[2], const double to[2], double middle_angle) {
  pk_piece piece = {.from = {from[0], from[1]},
                    .to = {to[0], to[1]},
                    .centre = {centre[0], centre[1]},
                    .radius = radius,
                    .side = {cos(middle_angle) > 0 ? 1 : -1, sin(middle_angle) > 0 ? 1 : -1}};
  append(outline, piece);
}

void pk_outline_add_arc(pk_outline *outline, const double centre[2], double radius,
                        const double from[2], const double to[2]) {
  /* Angles closer than this to an extreme start at the extreme: far above rounding, far below the
   * angle any drawn arc spans. */
  const double same = 1e-9;
  static const double extreme[4][2] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  double angle = atan2(from[1] - centre[1], from[0] - centre[0]);
  double end = atan2(to[1] - centre[1], to[0] - centre[0]);
  if (end <= angle + same) {
    end += 2 * half_turn;
  }
  double start[2] = {from[0], from[1]};
  for (int k = (int)floor(angle / (half_turn / 2) + same) + 1; k * half_turn / 2 < end - same;
       k++) {
    const double *e = extreme[((k % 4) + 4) % 4];
    double stop[2] = {centre[0] + radius * e[0], centre[1] + radius * e[1]};
    append_arc(outline, centre, radius, start, stop, (angle + k * half_turn / 2) / 2);
    angle = k * half_turn / 2;
    start[0] = stop[0];
    start[1] = stop[1];
  }
  append_arc(outline, centre, radius, start, to, (angle + end) / 2);
}

bool pk_outline_contains(const pk_outline *outline, double u, double v) {
  if (u < outline->low[0] || u >= outline->high[0] || v < outline->low[1] ||
      v >= outline->high[1]) {
    return false;
  }
  bool inside = false;
  for (int i = 0; i < outline->count; i++) {
    const pk_piece *piece = &outline->pieces[i];
    if (v < piece->low[1] || v >= piece->high[1] || u < piece->low[0]) {
      continue;
    }
    inside ^= u >= piece->high[0] || pk_piece_at(piece, PK_V, v) <= u;
  }
  return inside;
}

double pk_piece_at(const pk_piece *piece, pk_axis_name axis, double value) {
  int other = 1 - (int)axis;
  if (piece->low[other] == piece->high[other]) {
    return piece->low[other];
  }
  value = fmin(fmax(value, piece->low[axis]), piece->high[axis]);
  double at;
  if (piece->radius > 0) {
    double d = value - piece->centre[axis];
    double square = (piece->radius - d) * (piece->radius + d);
    at = piece->centre[other] + piece->side[other] * sqrt(fmax(square, 0));
  } else {
    double t = (value - piece->from[axis]) / (piece->to[axis] - piece->from[axis]);
    at = piece->from[other] + t * (piece->to[other] - piece->from[other]);
  }
  return fmin(fmax(at, piece->low[other]), piece->high[other]);
}

/* θ - sin θ; below 0.5 the series, whose next term is below 1e-17 of the sum there. */
static double angle_less_sine(double t) {
  if (t > 0.5) {
    return t - sin(t);
  }
  double s = t * t;
  return t * s / 6 * (1 - s / 20 * (1 - s / 42 * (1 - s / 72 * (1 - s / 110 * (1 - s / 156)))));
}

double pk_piece_integral(const pk_piece *piece, double v0, double v1, double origin) {
  double u0 = pk_piece_at(piece, PK_V, v0);
  double u1 = pk_piece_at(piece, PK_V, v1);
  double area = ((u0 - origin) + (u1 - origin)) / 2 * (v1 - v0);
  if (piece->radius > 0) {
    double half_chord = hypot(u1 - u0, v1 - v0) / 2;
    double angle = 2 * asin(fmin(half_chord / piece->radius, 1));
    area += piece->side[0] * piece->radius * piece->radius / 2 * angle_less_sine(angle);
  }
  return area;
}

void pk_piece_facing(const pk_piece *piece, double v0, double v1, double facing[3]) {
  double du = pk_piece_at(piece, PK_V, v1) - pk_piece_at(piece, PK_V, v0);
  double dv = v1 - v0;
  double chord = hypot(du, dv);
  if (chord == 0) {
    return;
  }
  double n[2] = {dv / chord, -du / chord}; /* at the middle of the piece, straight or arc */
  double half_length = chord / 2;
  double spread = chord / 2; /* r sin(2h) / 2 of an arc of half-angle h */
  if (piece->radius > 0) {
    double half_angle = asin(fmin(chord / (2 * piece->radius), 1));
    half_length = piece->radius * half_angle;
    spread = piece->radius * sin(2 * half_angle) / 2;
  }
  double cosine = (n[0] - n[1]) * (n[0] + n[1]); /* of twice the angle of n */
  double sine = 2 * n[0] * n[1];
  facing[0] += half_length + cosine * spread;
  facing[1] += sine * spread;
  facing[2] += half_length - cosine * spread;
}

bool pk_piece_is_level(const pk_piece *piece, pk_axis_name axis) {
  return piece->low[axis] == piece->high[axis];
}

void pk_piece_normal(const pk_piece *piece, const double at[2], double normal[2]) {
  if (piece->radius > 0) {
    normal[0] = (at[0] - piece->centre[0]) / piece->radius;
    normal[1] = (at[1] - piece->centre[1]) / piece->radius;
  } else if (pk_piece_is_level(piece, PK_U) || pk_piece_is_level(piece, PK_V)) {
    normal[0] = pk_piece_is_level(piece, PK_U); /* its length may be infinite */
    normal[1] = 1 - normal[0];
  } else {
    double d[2] = {piece->to[0] - piece->from[0], piece->to[1] - piece->from[1]};
    double length = hypot(d[0], d[1]);
    normal[0] = d[1] / length;
    normal[1] = -d[0] / length;
  }
}

pk_piece pk_piece_moved(const pk_piece *piece, const double offset[2]) {
  pk_piece moved = *piece;
  for (int a = 0; a < 2; a++) {
    moved.from[a] += offset[a];
    moved.to[a] += offset[a];
    moved.low[a] += offset[a];
    moved.high[a] += offset[a];
    moved.centre[a] += offset[a];
  }
  return moved;
}

pk_piece pk_piece_mirrored(const pk_piece *piece, pk_axis_name axis, double centre) {
  pk_piece mirrored = *piece;
  mirrored.from[axis] = 2 * centre - piece->from[axis];
  mirrored.to[axis] = 2 * centre - piece->to[axis];
  mirrored.low[axis] = 2 * centre - piece->high[axis];
  mirrored.high[axis] = 2 * centre - piece->low[axis];
  mirrored.centre[axis] = 2 * centre - piece->centre[axis];
  mirrored.side[axis] = -piece->side[axis];
  return mirrored;
}

/* The crossing of a piece that is level along `axis` with any other piece. */
static int cross_level(const pk_piece *level, const pk_piece *other, pk_axis_name axis,
                       double points[2][2]) {
  if (pk_piece_is_level(other, axis)) {
    return 0;
  }
  points[0][axis] = level->low[axis];
  points[0][1 - (int)axis] = pk_piece_at(other, axis, level->low[axis]);
  return 1;
}

static int cross_lines(const pk_piece *a, const pk_piece *b, double points[2][2]) {
  double d[2] = {a->to[0] - a->from[0], a->to[1] - a->from[1]};
  double e[2] = {b->to[0] - b->from[0], b->to[1] - b->from[1]};
  double turn = d[0] * e[1] - d[1] * e[0];
  if (turn == 0) {
    return 0;
  }
  double t = ((b->from[0] - a->from[0]) * e[1] - (b->from[1] - a->from[1]) * e[0]) / turn;
  points[0][0] = a->from[0] + t * d[0];
  points[0][1] = a->from[1] + t * d[1];
  return 1;
}

static int cross_line_circle(const pk_piece *line, const pk_piece *arc, double points[2][2]) {
  double d[2] = {line->to[0] - line->from[0], line->to[1] - line->from[1]};
  double length = hypot(d[0], d[1]);
  d[0] /= length;
  d[1] /= length;
  double p[2] = {line->from[0] - arc->centre[0], line->from[1] - arc->centre[1]};
  double distance = p[0] * d[1] - p[1] * d[0];
  double square = (arc->radius - distance) * (arc->radius + distance);
  if (square < 0) {
    return 0;
  }
  for (int i = 0; i < 2; i++) {
    double t = -(p[0] * d[0] + p[1] * d[1]) + (i ? sqrt(square) : -sqrt(square));
    points[i][0] = line->from[0] + t * d[0];
    points[i][1] = line->from[1] + t * d[1];
  }
  return 2;
}

static int cross_circles(const pk_piece *a, const pk_piece *b, double points[2][2]) {
  double e[2] = {b->centre[0] - a->centre[0], b->centre[1] - a->centre[1]};
  double distance = hypot(e[0], e[1]);
  if (distance == 0 || distance > a->radius + b->radius || distance < fabs(a->radius - b->radius)) {
    return 0;
  }
  e[0] /= distance;
  e[1] /= distance;
  double along = distance / 2 + (a->radius - b->radius) * (a->radius + b->radius) / (2 * distance);
  double across = sqrt(fmax((a->radius - along) * (a->radius + along), 0));
  for (int i = 0; i < 2; i++) {
    double s = i ? across : -across;
    points[i][0] = a->centre[0] + along * e[0] - s * e[1];
    points[i][1] = a->centre[1] + along * e[1] + s * e[0];
  }
  return 2;
}

static bool near_piece(const pk_piece *piece, const double point[2], double slack) {
  return point[0] >= piece->low[0] - slack && point[0] <= piece->high[0] + slack &&
         point[1] >= piece->low[1] - slack && point[1] <= piece->high[1] + slack;
}

static int cross_curves(const pk_piece *a, const pk_piece *b, double points[2][2]) {
  for (int axis = 0; axis < 2; axis++) {
    if (pk_piece_is_level(a, (pk_axis_name)axis)) {
      return cross_level(a, b, (pk_axis_name)axis, points);
    }
    if (pk_piece_is_level(b, (pk_axis_name)axis)) {
      return cross_level(b, a, (pk_axis_name)axis, points);
    }
  }
  if (a->radius > 0 && b->radius > 0) {
    return cross_circles(a, b, points);
  }
  if (a->radius > 0) {
    return cross_line_circle(b, a, points);
  }
  return b->radius > 0 ? cross_line_circle(a, b, points) : cross_lines(a, b, points);
}

int pk_piece_crossings(const pk_piece *a, const pk_piece *b, double slack, double points[2][2]) {
  for (int axis = 0; axis < 2; axis++) {
    if (a->low[axis] > b->high[axis] + slack || b->low[axis] > a->high[axis] + slack) {
      return 0;
    }
  }
  double found[2][2];
  int count = cross_curves(a, b, found);
  int kept = 0;
  for (int i = 0; i < count; i++) {
    if (near_piece(a, found[i], slack) && near_piece(b, found[i], slack)) {
      points[kept][0] = found[i][0];
      points[kept][1] = found[i][1];
      kept++;
    }
  }
  return kept;
}
