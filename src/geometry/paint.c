/* The painted plane: frame, shapes in paint order, periodic copies.
 *
 * A shape is kept once, where it was painted; a question about a box or a point asks for the copies
 *   offset = i (P_u, 0) + j (shift, P_v),   i, j integer,
 * whose bounding box meets it. In other words paint(u, v) = paint(u + shift, v + P_v). A stripe is
 * a rectangle with infinite ends and is not copied along them.
 *
 * Points with the same coordinate within the tolerance must be one point, or slivers appear between
 * shapes that were meant to touch. So edges parallel to an axis are snapped when they are painted
 * (snap.c), and boxes when they are asked about. */
#include "geometry/paint.h"

#include <assert.h>
#include <float.h>
#include <math.h>

#include "base/memory.h"

/* 1e-9 of the u extent, the promise of geometry.h. */
static const double same_coordinate = 1e-9;

static const double nm_per_um = 1e3;

static picket_status check_frame(picket_context *context, const pk_frame *frame) {
  double low = frame->from[1];
  double high = frame->to[1];
  if (!(isfinite(frame->from[0]) && isfinite(frame->to[0]) && frame->from[0] < frame->to[0])) {
    return pk_fail(context, PICKET_ERROR_INPUT,
                   "frame: first axis runs from %g to %g um, must be finite and rising",
                   frame->from[0], frame->to[0]);
  }
  if (!(low < high) || (frame->periodic[1] && !(isfinite(low) && isfinite(high)))) {
    return pk_fail(context, PICKET_ERROR_INPUT,
                   "frame: second axis runs from %g to %g um, must be rising, and finite if "
                   "periodic",
                   low, high);
  }
  bool both = frame->periodic[0] && frame->periodic[1];
  if (!isfinite(frame->shift) || (frame->shift != 0 && !both)) {
    return pk_fail(context, PICKET_ERROR_INPUT,
                   "frame: shift is %g um, must be finite, and 0 unless both axes are periodic",
                   frame->shift);
  }
  return PICKET_OK;
}

/* Some units in the last place of the largest coordinate: twice the ends given, because wrapped
 * boxes and copies reach beyond them. */
static void widen_rounding(pk_geometry *geometry, const double low[2], const double high[2]) {
  for (int a = 0; a < 2; a++) {
    double reach = fmax(isfinite(low[a]) ? fabs(low[a]) : 0, isfinite(high[a]) ? fabs(high[a]) : 0);
    geometry->rounding = fmax(geometry->rounding, 8 * DBL_EPSILON * reach);
  }
}

picket_status pk_geometry_create(picket_context *context, const pk_frame *frame,
                                 pk_geometry **out) {
  picket_status status = check_frame(context, frame);
  if (status != PICKET_OK) {
    return status;
  }
  pk_geometry *geometry = PK_NEW(context, 1, pk_geometry);
  if (!geometry) {
    return PICKET_ERROR_MEMORY;
  }
  geometry->context = pk_context_hold(context);
  geometry->frame = *frame;
  for (int a = 0; a < 2; a++) {
    geometry->period[a] = frame->periodic[a] ? frame->to[a] - frame->from[a] : INFINITY;
  }
  geometry->tolerance = same_coordinate * (frame->to[0] - frame->from[0]);
  widen_rounding(geometry, frame->from, frame->to);
  *out = geometry;
  return PICKET_OK;
}

void pk_geometry_free(pk_geometry *geometry) {
  if (!geometry) {
    return;
  }
  picket_context *context = geometry->context;
  for (int i = 0; i < geometry->count; i++) {
    pk_outline_clear(context, &geometry->shapes[i].outline);
  }
  pk_free(context, geometry->shapes);
  pk_free(context, geometry->known[0].at);
  pk_free(context, geometry->known[1].at);
  pk_free(context, geometry);
  pk_context_release(context);
}

int pk_geometry_shape_count(const pk_geometry *geometry) {
  return geometry->count;
}

const pk_frame *pk_geometry_frame(const pk_geometry *geometry) {
  return &geometry->frame;
}

static picket_status check_span(const pk_geometry *geometry, pk_place place, const char *kind,
                                const pk_shape *shape) {
  for (int a = 0; a < 2; a++) {
    if (shape->endless[a]) {
      continue;
    }
    double low = shape->outline.low[a];
    double high = shape->outline.high[a];
    double from = geometry->frame.from[a];
    double to = geometry->frame.to[a];
    if (!(high > low)) {
      return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                        "%s: size is %g nm, must be above %g nm", kind, (high - low) * nm_per_um,
                        2 * geometry->tolerance * nm_per_um);
    }
    if (high <= from || low >= to) {
      return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                        "%s: reaches from %g to %g nm, must not lie wholly outside %g to %g nm",
                        kind, low * nm_per_um, high * nm_per_um, from * nm_per_um, to * nm_per_um);
    }
    if (high - low > geometry->period[a] + geometry->tolerance) {
      return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                        "%s: length is %g nm in a periodic direction, must be at most the period "
                        "of %g nm",
                        kind, (high - low) * nm_per_um, geometry->period[a] * nm_per_um);
    }
  }
  return PICKET_OK;
}

picket_status pk_paint_add(pk_geometry *geometry, pk_place place, const char *kind,
                           pk_shape *shape) {
  picket_status status = check_span(geometry, place, kind, shape);
  if (status == PICKET_OK && geometry->count == geometry->capacity) {
    int capacity = 2 * geometry->capacity + 4;
    pk_shape *shapes = pk_regrow(geometry->context, geometry->shapes, (size_t)geometry->count,
                                 (size_t)capacity, sizeof *shapes);
    if (shapes) {
      geometry->shapes = shapes;
      geometry->capacity = capacity;
    } else {
      status = PICKET_ERROR_MEMORY;
    }
  }
  if (status == PICKET_OK) {
    geometry->shapes[geometry->count++] = *shape;
    widen_rounding(geometry, shape->outline.low, shape->outline.high);
    pk_known_keep(geometry);
  } else {
    pk_outline_clear(geometry->context, &shape->outline);
    pk_known_forget(geometry);
  }
  return status;
}

/* A rectangle, whose ends may be infinite. */
static picket_status add_span(pk_geometry *geometry, pk_place place, const char *kind,
                              pk_shape shape, double low[2], double high[2]) {
  picket_status status = PICKET_OK;
  for (int a = 0; a < 2 && status == PICKET_OK; a++) {
    status = pk_snap_edge(geometry, (pk_axis_name)a, &low[a]);
    if (status == PICKET_OK) {
      status = pk_snap_edge(geometry, (pk_axis_name)a, &high[a]);
    }
  }
  if (status == PICKET_OK) {
    status = pk_outline_start(geometry->context, 4, &shape.outline);
  }
  if (status != PICKET_OK) {
    pk_known_forget(geometry);
    return status;
  }
  const double corners[4][2] = {
      {low[0], low[1]}, {high[0], low[1]}, {high[0], high[1]}, {low[0], high[1]}};
  for (int i = 0; i < 4; i++) {
    pk_outline_add_line(&shape.outline, corners[i], corners[(i + 1) % 4]);
  }
  return pk_paint_add(geometry, place, kind, &shape);
}

static picket_status check_finite(const pk_geometry *geometry, pk_place place, const char *kind,
                                  const double at[2]) {
  if (isfinite(at[0]) && isfinite(at[1])) {
    return PICKET_OK;
  }
  return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                    "%s: position is [%g, %g], must be finite", kind, at[0], at[1]);
}

picket_status pk_geometry_add_rect(pk_geometry *geometry, pk_place place, int medium,
                                   const double at[2], const double size[2]) {
  picket_status status = check_finite(geometry, place, "rectangle", at);
  if (status != PICKET_OK) {
    return status;
  }
  if (!(size[0] > 0 && size[1] > 0 && isfinite(size[0]) && isfinite(size[1]))) {
    return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                      "rectangle: size is %g x %g nm, both must be above 0 and finite",
                      size[0] * nm_per_um, size[1] * nm_per_um);
  }
  double low[2] = {at[0] - size[0] / 2, at[1] - size[1] / 2};
  double high[2] = {at[0] + size[0] / 2, at[1] + size[1] / 2};
  return add_span(geometry, place, "rectangle", (pk_shape){.medium = medium}, low, high);
}

picket_status pk_geometry_add_stripe(pk_geometry *geometry, pk_place place, int medium,
                                     pk_axis_name across, double from, double to) {
  if (!(from < to)) {
    return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                      "stripe: runs from %g to %g nm, must be rising", from * nm_per_um,
                      to * nm_per_um);
  }
  double low[2] = {-INFINITY, -INFINITY};
  double high[2] = {INFINITY, INFINITY};
  pk_shape shape = {.medium = medium};
  shape.endless[1 - (int)across] = true;
  if (across == PK_U && geometry->frame.shift != 0) {
    /* Every row of a sheared lattice has its own piece of the stripe. */
    low[1] = geometry->frame.from[1];
    high[1] = geometry->frame.to[1];
  }
  low[across] = from;
  high[across] = to;
  return add_span(geometry, place, "stripe", shape, low, high);
}

picket_status pk_geometry_add_disc(pk_geometry *geometry, pk_place place, int medium,
                                   const double at[2], double diameter) {
  picket_status status = check_finite(geometry, place, "disc", at);
  if (status != PICKET_OK) {
    return status;
  }
  if (!(diameter > 2 * geometry->tolerance && isfinite(diameter))) {
    return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                      "disc: diameter is %g nm, must be above %g nm and finite",
                      diameter * nm_per_um, 2 * geometry->tolerance * nm_per_um);
  }
  pk_shape shape = {.medium = medium};
  status = pk_outline_start(geometry->context, 4, &shape.outline);
  if (status != PICKET_OK) {
    return status;
  }
  double east[2] = {at[0] + diameter / 2, at[1]};
  pk_outline_add_arc(&shape.outline, at, diameter / 2, east, east);
  return pk_paint_add(geometry, place, "disc", &shape);
}

picket_status pk_geometry_add_polygon(pk_geometry *geometry, pk_place place, int medium, int count,
                                      const double (*corners)[2]) {
  enum { CORNERS_MIN = 3, CORNERS_MAX = 1000 };
  if (count < CORNERS_MIN || count > CORNERS_MAX) {
    return pk_fail_at(geometry->context, PICKET_ERROR_INPUT, place,
                      "polygon: has %d corners, must be %d to %d", count, CORNERS_MIN, CORNERS_MAX);
  }
  pk_shape shape = {.medium = medium};
  double(*own)[2] = pk_copy(geometry->context, corners, (size_t)count, sizeof *own);
  picket_status status = own ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = pk_polygon_check(geometry, place, count, own);
  }
  if (status == PICKET_OK) {
    status = pk_outline_start(geometry->context, count, &shape.outline);
  }
  if (status == PICKET_OK) {
    for (int i = 0; i < count; i++) {
      pk_outline_add_line(&shape.outline, own[i], own[(i + 1) % count]);
    }
    status = pk_paint_add(geometry, place, "polygon", &shape);
  } else {
    pk_known_forget(geometry);
  }
  pk_free(geometry->context, own);
  return status;
}

int pk_paint_at(const pk_geometry *geometry, double u, double v) {
  double point[2] = {u, v};
  for (int s = geometry->count - 1; s >= 0; s--) {
    const pk_outline *outline = &geometry->shapes[s].outline;
    pk_copies copies;
    pk_copies_start(&copies, geometry, outline, point, point);
    while (pk_copies_next(&copies)) {
      if (pk_outline_contains(outline, u - copies.offset[0], v - copies.offset[1])) {
        return geometry->shapes[s].medium;
      }
    }
  }
  return geometry->frame.background;
}

int pk_geometry_medium_at(const pk_geometry *geometry, double u, double v) {
  double point[2] = {u, v};
  pk_wrap(geometry, point, NULL);
  /* Half a tolerance up from a snapped coordinate: what lies on an edge belongs to the upper side
   * whatever the rounding. */
  double up = geometry->tolerance / 2;
  return pk_paint_at(geometry, pk_snap(geometry, PK_U, point[0]) + up,
                     pk_snap(geometry, PK_V, point[1]) + up);
}
