/* Whether a list of corners bounds an area.
 *
 * Two edges that share no corner must keep apart by more than the tolerance; edges that share one
 * must not fold back. Twice the area is the sum of the cross products of consecutive corners. The
 * test of all pairs is quadratic: half a million pairs for the 1000 corners allowed. */
#include <math.h>

#include "geometry/paint.h"

static const double nm_per_um = 1e3;

/* Edges that are parallel to an axis within the tolerance become exactly so. */
static picket_status straighten(pk_geometry *geometry, int count, double (*corners)[2]) {
  for (int i = 0; i < count; i++) {
    double *a = corners[i];
    double *b = corners[(i + 1) % count];
    for (int axis = 0; axis < 2; axis++) {
      bool level = fabs(a[axis] - b[axis]) <= geometry->tolerance;
      bool long_enough = fabs(a[1 - axis] - b[1 - axis]) > geometry->tolerance;
      if (!level || !long_enough) {
        continue;
      }
      picket_status status = pk_snap_edge(geometry, (pk_axis_name)axis, &a[axis]);
      if (status != PICKET_OK) {
        return status;
      }
      b[axis] = a[axis];
    }
  }
  return PICKET_OK;
}

static double cross(const double a[2], const double b[2], const double c[2]) {
  return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
}

/* Distance of p from the segment a..b. */
static double distance(const double p[2], const double a[2], const double b[2]) {
  double d[2] = {b[0] - a[0], b[1] - a[1]};
  double square = d[0] * d[0] + d[1] * d[1];
  double t = ((p[0] - a[0]) * d[0] + (p[1] - a[1]) * d[1]) / square;
  t = fmin(fmax(t, 0), 1);
  return hypot(p[0] - a[0] - t * d[0], p[1] - a[1] - t * d[1]);
}

static bool boxes_apart(const double a[2], const double b[2], const double c[2], const double d[2],
                        double slack) {
  for (int axis = 0; axis < 2; axis++) {
    if (fmin(a[axis], b[axis]) > fmax(c[axis], d[axis]) + slack ||
        fmin(c[axis], d[axis]) > fmax(a[axis], b[axis]) + slack) {
      return true;
    }
  }
  return false;
}

static bool edges_meet(const double a[2], const double b[2], const double c[2], const double d[2],
                       double slack) {
  if (boxes_apart(a, b, c, d, slack)) {
    return false;
  }
  bool crossing = cross(a, b, c) * cross(a, b, d) < 0 && cross(c, d, a) * cross(c, d, b) < 0;
  return crossing || distance(a, c, d) <= slack || distance(b, c, d) <= slack ||
         distance(c, a, b) <= slack || distance(d, a, b) <= slack;
}

/* The first pair of edges that meet; false if none do. */
static bool find_meeting(int count, double (*corners)[2], double slack, int *first, int *second) {
  for (int i = 0; i < count; i++) {
    const double *a = corners[i];
    const double *b = corners[(i + 1) % count];
    for (int k = i + 1; k < count; k++) {
      const double *c = corners[k];
      const double *d = corners[(k + 1) % count];
      bool meet;
      if (k == i + 1) { /* share b */
        meet = distance(d, a, b) <= slack || distance(a, c, d) <= slack;
      } else if (i == 0 && k == count - 1) { /* share a */
        meet = distance(b, c, d) <= slack || distance(c, a, b) <= slack;
      } else {
        meet = edges_meet(a, b, c, d, slack);
      }
      if (meet) {
        *first = i;
        *second = k;
        return true;
      }
    }
  }
  return false;
}

static double area(int count, double (*corners)[2]) {
  double twice = 0;
  for (int i = 1; i + 1 < count; i++) {
    twice += cross(corners[0], corners[i], corners[i + 1]);
  }
  return fabs(twice) / 2;
}

picket_status pk_polygon_check(pk_geometry *geometry, pk_place place, int count,
                               double (*corners)[2]) {
  picket_context *context = geometry->context;
  for (int i = 0; i < count; i++) {
    if (!isfinite(corners[i][0]) || !isfinite(corners[i][1])) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "polygon: corner %d is [%g, %g], must be finite", i + 1, corners[i][0],
                        corners[i][1]);
    }
  }
  picket_status status = straighten(geometry, count, corners);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; i < count; i++) {
    const double *a = corners[i];
    const double *b = corners[(i + 1) % count];
    if (hypot(b[0] - a[0], b[1] - a[1]) <= geometry->tolerance) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                        "polygon: corners %d and %d are %g nm apart, must be more than %g nm",
                        i + 1, (i + 1) % count + 1, hypot(b[0] - a[0], b[1] - a[1]) * nm_per_um,
                        geometry->tolerance * nm_per_um);
    }
  }
  int first = 0;
  int second = 0;
  if (find_meeting(count, corners, geometry->tolerance, &first, &second)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "polygon: edges %d and %d cross or touch, must not", first + 1, second + 1);
  }
  double extent = geometry->frame.to[0] - geometry->frame.from[0];
  if (!(area(count, corners) > geometry->tolerance * extent)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "polygon: area is %g nm^2, must be above %g nm^2",
                      area(count, corners) * nm_per_um * nm_per_um,
                      geometry->tolerance * extent * nm_per_um * nm_per_um);
  }
  return PICKET_OK;
}
