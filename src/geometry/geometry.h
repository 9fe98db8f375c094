/* Shapes painted over each other in a plane, and exact questions about them.
 *
 * The plane has axes u and v: (z, x) for a cell, (x, y) for a section. Later shapes cover earlier
 * ones; where nothing is painted there is the background. In a periodic direction a shape may lie
 * across the boundary: it wraps. Crossing the v boundary of a doubly periodic plane can advance u
 * by a shift (rhombic and triangular lattices): with the periods P_u and P_v,
 *   paint(u, v) = paint(u + P_u, v) = paint(u + shift, v + P_v).
 *
 * Every boundary is a chain of straight edges and circular arcs. Areas and the facing of a
 * box come from an exact sweep: the box is cut into strips at every vertex, crossing and extreme;
 * inside a strip the order of the curves is fixed, so each piece has a closed form. */
#ifndef PK_GEOMETRY_GEOMETRY_H
#define PK_GEOMETRY_GEOMETRY_H

#include <stdbool.h>

#include "base/context.h"

enum { PK_BOX_MEDIA = 8 }; /* distinct media that one averaging box may hold */

typedef enum pk_axis_name { PK_U = 0, PK_V = 1 } pk_axis_name;

typedef struct pk_geometry pk_geometry;

/* The plane in which shapes are painted. Media are small integers given by the caller. */
typedef struct pk_frame {
  double from[2], to[2]; /* extent along u and v, µm; from < to; INFINITE v extent is allowed for
                            an open side (-INFINITY, INFINITY) */
  bool periodic[2];
  double shift;   /* the row above is advanced along u by this length, µm; only if both
                     directions are periodic */
  int background; /* medium where nothing is painted */
} pk_frame;

picket_status pk_geometry_create(picket_context *context, const pk_frame *frame, pk_geometry **out);
void pk_geometry_free(pk_geometry *geometry); /* accepts null */

/* Painting. Lengths in µm; `at` is the centre (u, v). Sizes must be above 0 (PICKET_ERROR_INPUT at
 * `place` otherwise). A shape that lies wholly outside the frame, or is longer than the period in a
 * periodic direction, is PICKET_ERROR_INPUT. */
picket_status pk_geometry_add_rect(pk_geometry *geometry, pk_place place, int medium,
                                   const double at[2], const double size[2]);
picket_status pk_geometry_add_disc(pk_geometry *geometry, pk_place place, int medium,
                                   const double at[2], double diameter);
/* A rectangle whose sides lean and whose corners are rounded. `lean` is the angle of the sides from
 * the v axis, rad: positive where the top (high v) is narrower than the base; size[0] is the width
 * at half height, so leaning keeps the area. `radius` of all four corners, 0 to the largest that
 * fits: the arcs touch the edges, so the boundary has no corner. */
picket_status pk_geometry_add_rounded_rect(pk_geometry *geometry, pk_place place, int medium,
                                           const double at[2], const double size[2], double lean,
                                           double radius);
/* The largest radius that fits; half the shorter side where lean is 0. */
double pk_geometry_largest_radius(const double size[2], double lean);
/* corners [count][2] in either sense of rotation, 3 to 1000, not self-crossing, area above 0. */
picket_status pk_geometry_add_polygon(pk_geometry *geometry, pk_place place, int medium, int count,
                                      const double (*corners)[2]);
/* Fills a range of one axis over the whole other axis; ±INFINITY allowed along an open axis, from <
 * to. In a plane with a shift a stripe across u is advanced row by row. */
picket_status pk_geometry_add_stripe(pk_geometry *geometry, pk_place place, int medium,
                                     pk_axis_name across, double from, double to);

int pk_geometry_shape_count(const pk_geometry *geometry);
const pk_frame *pk_geometry_frame(const pk_geometry *geometry);

/* The medium at a point (wrapped into the frame in periodic directions). A point on an interface
 * belongs to the side of rising u and v. */
int pk_geometry_medium_at(const pk_geometry *geometry, double u, double v);

/* What an axis-parallel box holds: area fractions that add up to 1, and how its interface lies.
 * `facing` is the mean of n nᵀ over all interface pieces strictly inside the box (between different
 * media, weighted by length, n the unit normal): entries uu, uv, vv, with uu + vv = 1; all zero
 * when the box holds one medium. It has no sign, so thin films and several media need no
 * convention. */
typedef struct pk_box {
  int count; /* media present with a fraction above 1e-13, in rising order */
  int medium[PK_BOX_MEDIA];
  double fraction[PK_BOX_MEDIA];
  double facing[3];
  bool oblique; /* part of an interface in the box is not parallel to an axis */
} pk_box;

/* Contents of the box from `low` to `high` (low < high). The box may reach outside the frame: in a
 * periodic direction it wraps, elsewhere the outside is what the paint continues to (stripes and
 * background extend; finite shapes end where they end). Coordinates closer than 1e-9 of the frame's
 * u extent to an axis-parallel interface are taken to lie on it. PICKET_ERROR_UNSUPPORTED for more
 * than PK_BOX_MEDIA media in one box. */
picket_status pk_geometry_box(const pk_geometry *geometry, const double low[2],
                              const double high[2], pk_box *box);

/* The coordinates a grid should have lines on: of every axis-parallel edge that is visible in the
 * frame; the extremes of discs and oblique shapes are not included. Sorted, unique to 1e-9 of the u
 * extent, inside the open interval of the frame (frame boundaries are not included). In *out, owned
 * by the caller (pk_free). Shapes that wrap contribute their wrapped coordinates. */
picket_status pk_geometry_lines(const pk_geometry *geometry, pk_axis_name axis, double **out,
                                int *count);

/* The extremes (lowest and highest coordinate) over all finite shapes and finite stripe edges of an
 * axis, as painted (not wrapped): the extent of the structure. False if there is nothing finite. */
bool pk_geometry_extent(const pk_geometry *geometry, pk_axis_name axis, double *low, double *high);

/* The media at -infinity and +infinity along an open axis, beyond all finite shapes. False (outputs
 * untouched) if the axis is periodic or one of the sides is not of one medium, e.g. because a
 * stripe across the other axis runs out there. */
bool pk_geometry_side_media(const pk_geometry *geometry, pk_axis_name axis, int *low_medium,
                            int *high_medium);

/* The shortest distance between neighbouring interfaces met along lines parallel to the axes,
 * through the middle of every shape and between its neighbouring parallel edges (teeth and gaps;
 * around the period where periodic), µm; INFINITY if none. For advice and for the base grid. */
double pk_geometry_smallest_feature(const pk_geometry *geometry);
/* The same along one axis only. */
double pk_geometry_smallest_along(const pk_geometry *geometry, pk_axis_name axis);

/* True if reflecting the painted plane about the line axis = centre maps every medium onto itself.
 * Centres tried: 0, the middle of the frame, and those that map the low end of the topmost finite
 * shape onto the high end of any edge; along a periodic axis each stands for its partner half a
 * period away too. Exact to 1e-9 of the u extent. False for a shift other than 0 or half a period.
 */
bool pk_geometry_mirror(const pk_geometry *geometry, pk_axis_name axis, double *centre);

/* True if no interface that is visible in the frame is oblique or curved. */
bool pk_geometry_is_rectangular(const pk_geometry *geometry);

/* A point where visible interfaces, all parallel to the axes, meet or turn. */
typedef struct pk_corner {
  double at[2];
  int medium[4]; /* of the quadrants (+u +v), (-u +v), (-u -v), (+u -v) */
} pk_corner;

/* All corners with four quadrants, each once per period, wrapped into the frame and strictly inside
 * its open sides, sorted by v, then u. *out is owned by the caller (pk_free). `other_count`
 * receives the number of corners at which an oblique or curved interface takes part; these are not
 * listed. An interface that turns by less than 0.01 rad counts as smooth. */
picket_status pk_geometry_corners(const pk_geometry *geometry, pk_corner **out, int *count,
                                  int *other_count);

/* True if there is a point where visible interfaces meet or bend (a corner): three or more media
 * sectors, or an interface that turns. */
bool pk_geometry_has_corners(const pk_geometry *geometry);

/* The fraction of each medium along the line v = constant over one period of u, as a profile of
 * intervals: boundaries[0..count], media[0..count-1]; rising u from frame.from to frame.to, merged
 * where neighbours are equal. On an interface along u the upper side counts. Capacity is in
 * intervals; PICKET_ERROR_UNSUPPORTED if it is too small. */
picket_status pk_geometry_profile(const pk_geometry *geometry, double v, int capacity,
                                  double *boundaries, int *media, int *count);

#endif
