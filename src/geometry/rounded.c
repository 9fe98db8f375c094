/* A rectangle whose sides lean and whose corners are rounded.
 *
 * The corners p_0 ... p_3 of the trapezoid, counter-clockwise; at each the boundary turns from the
 * unit direction d to e. The arc of radius r that touches both edges leaves them at the distance
 *   t = r tan(turn / 2) = r (d x e) / (1 + d . e)
 * from the corner, and its centre is p - t d + r n with n the left normal of d. With upright sides
 * d x e = 1 and d . e = 0 hold exactly, so t = r and nothing is rounded off.
 *
 * An arc fits if the two t of every edge are at most its length. With the lean a that is: r at most
 * half the height, because the two of a side add up to r 2 / cos a, and r at most the base or the
 * top over 2 tan(turn / 2), where the turns are a quarter plus a at the base and minus a at the
 * top. */
#include <math.h>

#include "geometry/paint.h"

static const double nm_per_um = 1e3;
static const double eighth_turn = 0.78539816339744830962;

/* Radii that a file meant to fit may miss by rounding of its decimals. */
static const double fits = 1e-12;

enum { CORNERS = 4, ARC_PIECES = 5 }; /* outline.h: an arc takes at most five places */

double pk_geometry_largest_radius(const double size[2], double lean) {
  double base = size[0] + size[1] * tan(lean);
  double top = size[0] - size[1] * tan(lean);
  double within = fmin(base * tan(eighth_turn - lean / 2), top * tan(eighth_turn + lean / 2));
  return fmin(lean == 0 ? size[0] : within, size[1]) / 2;
}

static picket_status check(const pk_geometry *geometry, pk_place place, const double at[2],
                           const double size[2], double lean, double radius) {
  picket_context *context = geometry->context;
  if (!isfinite(at[0]) || !isfinite(at[1])) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "rectangle: position is [%g, %g], must be finite", at[0], at[1]);
  }
  if (!(size[0] > 0 && size[1] > 0 && isfinite(size[0]) && isfinite(size[1]))) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "rectangle: size is %g x %g nm, both must be above 0 and finite",
                      size[0] * nm_per_um, size[1] * nm_per_um);
  }
  if (!(fabs(lean) < eighth_turn && size[1] * tan(fabs(lean)) < size[0])) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "rectangle: sides lean by %g rad, must be within %g rad and leave the top "
                      "and the base a width",
                      lean, fmin(eighth_turn, atan(size[0] / size[1])));
  }
  double most = pk_geometry_largest_radius(size, lean);
  if (!(radius >= 0 && radius <= most * (1 + fits))) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "rectangle: corner radius is %.10g nm, must be 0 to %.10g nm",
                      radius * nm_per_um, most * nm_per_um);
  }
  return PICKET_OK;
}

/* The corners, with the edges parallel to the axes on coordinates that are known already. */
static picket_status lay_corners(pk_geometry *geometry, const double at[2], const double size[2],
                                 double lean, double corners[CORNERS][2]) {
  double low[2], high[2];
  picket_status status = PICKET_OK;
  for (int a = lean == 0 ? 0 : 1; a < 2 && status == PICKET_OK; a++) {
    low[a] = at[a] - size[a] / 2;
    high[a] = at[a] + size[a] / 2;
    status = pk_snap_edge(geometry, (pk_axis_name)a, &low[a]);
    if (status == PICKET_OK) {
      status = pk_snap_edge(geometry, (pk_axis_name)a, &high[a]);
    }
  }
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; i < CORNERS; i++) {
    bool right = i == 1 || i == 2, up = i >= 2;
    corners[i][1] = up ? high[1] : low[1];
    if (lean == 0) {
      corners[i][0] = right ? high[0] : low[0];
    } else {
      double half = (size[0] + (up ? -1 : 1) * size[1] * tan(lean)) / 2;
      corners[i][0] = at[0] + (right ? half : -half);
    }
  }
  return PICKET_OK;
}

static double direction(const double from[2], const double to[2], double d[2]) {
  double length = hypot(to[0] - from[0], to[1] - from[1]);
  d[0] = (to[0] - from[0]) / length;
  d[1] = (to[1] - from[1]) / length;
  return length;
}

static void add_pieces(const pk_geometry *geometry, double corners[CORNERS][2], double radius,
                       pk_outline *outline) {
  double d[CORNERS][2]; /* of the edge that leaves the corner */
  double begin[CORNERS][2], end[CORNERS][2], centre[CORNERS][2];
  for (int i = 0; i < CORNERS; i++) {
    direction(corners[i], corners[(i + 1) % CORNERS], d[i]);
  }
  for (int i = 0; i < CORNERS; i++) {
    const double *in = d[(i + CORNERS - 1) % CORNERS], *out = d[i];
    double t = radius * (in[0] * out[1] - in[1] * out[0]) / (1 + in[0] * out[0] + in[1] * out[1]);
    const double normal[2] = {-in[1], in[0]};
    for (int a = 0; a < 2; a++) {
      begin[i][a] = corners[i][a] - t * in[a];
      end[i][a] = corners[i][a] + t * out[a];
      centre[i][a] = begin[i][a] + radius * normal[a];
    }
  }
  for (int i = 0; i < CORNERS; i++) {
    int next = (i + 1) % CORNERS;
    /* Arcs that use up the edge between them meet in one point. */
    if (hypot(begin[next][0] - end[i][0], begin[next][1] - end[i][1]) <= geometry->rounding) {
      begin[next][0] = end[i][0];
      begin[next][1] = end[i][1];
    }
  }
  for (int i = 0; i < CORNERS; i++) {
    int next = (i + 1) % CORNERS;
    if (radius > 0) {
      pk_outline_add_arc(outline, centre[i], radius, begin[i], end[i]);
    }
    if (end[i][0] != begin[next][0] || end[i][1] != begin[next][1]) {
      pk_outline_add_line(outline, end[i], begin[next]);
    }
  }
}

picket_status pk_geometry_add_rounded_rect(pk_geometry *geometry, pk_place place, int medium,
                                           const double at[2], const double size[2], double lean,
                                           double radius) {
  picket_status status = check(geometry, place, at, size, lean, radius);
  if (status != PICKET_OK) {
    return status;
  }
  /* What no coordinate can tell from a sharp corner, an upright side and a circle is one. */
  radius = fmin(radius, pk_geometry_largest_radius(size, lean));
  radius = radius > geometry->tolerance ? radius : 0;
  lean = size[1] * tan(fabs(lean)) > geometry->tolerance ? lean : 0;
  if (lean == 0 && radius == 0) {
    return pk_geometry_add_rect(geometry, place, medium, at, size);
  }
  if (lean == 0 && fmax(size[0], size[1]) - 2 * radius <= geometry->rounding) {
    return pk_geometry_add_disc(geometry, place, medium, at, size[0]);
  }
  pk_shape shape = {.medium = medium};
  double corners[CORNERS][2];
  status = lay_corners(geometry, at, size, lean, corners);
  if (status == PICKET_OK) {
    status = pk_outline_start(geometry->context, CORNERS * (1 + ARC_PIECES), &shape.outline);
  }
  if (status != PICKET_OK) {
    pk_known_forget(geometry);
    return status;
  }
  add_pieces(geometry, corners, radius, &shape.outline);
  return pk_paint_add(geometry, place, "rectangle", &shape);
}
