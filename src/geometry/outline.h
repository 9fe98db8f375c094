/* The boundary of one shape: a closed chain of straight edges and circular arcs, every arc cut at
 * its extremes so that each piece is monotone in u and in v. For this room only. */
#ifndef PK_GEOMETRY_OUTLINE_H
#define PK_GEOMETRY_OUTLINE_H

#include <stdbool.h>

#include "base/context.h"
#include "geometry/geometry.h"

/* A straight edge (radius 0) or a monotone arc. Ends may be infinite if the edge is parallel to an
 * axis: the sides of a stripe. */
typedef struct pk_piece {
  double from[2], to[2];
  double low[2], high[2]; /* bounding box; by monotony spanned by the two ends */
  double centre[2];       /* arc only */
  double radius;
  double side[2]; /* arc only: signs of (u - centre u) and (v - centre v) on the piece */
} pk_piece;

/* The pieces in any order: only the area they bound together matters. */
typedef struct pk_outline {
  pk_piece *pieces; /* [count] */
  int count, capacity;
  double low[2], high[2];
} pk_outline;

picket_status pk_outline_start(picket_context *context, int capacity, pk_outline *outline);
void pk_outline_clear(picket_context *context, pk_outline *outline);

/* Each takes one place of the capacity, an arc one per quadrant it touches (at most five). */
void pk_outline_add_line(pk_outline *outline, const double from[2], const double to[2]);

/* Counter-clockwise (from +u towards +v) from `from` to `to`; a full turn if they are equal. */
void pk_outline_add_arc(pk_outline *outline, const double centre[2], double radius,
                        const double from[2], const double to[2]);

/* Closed on the lower sides, open on the upper ones, so that shapes that share an edge neither
 * overlap nor leave a gap. */
bool pk_outline_contains(const pk_outline *outline, double u, double v);

/* The other coordinate of the point of a piece whose coordinate along `axis` is `value`; the value
 * is clamped to the piece. The piece must have an extent along `axis`. */
double pk_piece_at(const pk_piece *piece, pk_axis_name axis, double value);

/* Integral of u dv along the piece, v from v0 up to v1, with u counted from `origin`. */
double pk_piece_integral(const pk_piece *piece, double v0, double v1, double origin);

/* Adds the integral of n nᵀ dl (entries uu, uv, vv; n the unit normal) along the piece, v from v0
 * to v1. The trace is the length. */
void pk_piece_facing(const pk_piece *piece, double v0, double v1, double facing[3]);

/* True if all points of the piece have the same coordinate along `axis`. */
bool pk_piece_is_level(const pk_piece *piece, pk_axis_name axis);

/* Unit normal at a point of the piece; its sense is not defined. */
void pk_piece_normal(const pk_piece *piece, const double at[2], double normal[2]);

pk_piece pk_piece_moved(const pk_piece *piece, const double offset[2]);
pk_piece pk_piece_mirrored(const pk_piece *piece, pk_axis_name axis, double centre);

/* Points where the curves of two pieces cross within both bounding boxes grown by `slack`. Returns
 * their number, 0 to 2; coincident and parallel curves give none. */
int pk_piece_crossings(const pk_piece *a, const pk_piece *b, double slack, double points[2][2]);

#endif
