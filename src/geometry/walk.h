/* Walks along interfaces and scans along straight lines, without memory of their own. For this room
 * only. */
#ifndef PK_GEOMETRY_WALK_H
#define PK_GEOMETRY_WALK_H

#include "geometry/paint.h"

/* The plane and its mirror image about axis = centre. */
typedef struct pk_mirror {
  pk_axis_name axis;
  double centre;
} pk_mirror;

/* Called at the middle of a stretch of a piece: two points just beside it. Return true to stop. */
typedef bool (*pk_visit)(const pk_geometry *geometry, const double one_side[2],
                         const double other_side[2], void *user);

/* Visits every stretch of `piece` between low and high (may be infinite where the piece is not)
 * that no other piece crosses; with a mirror (may be null) no piece of the mirror image either.
 * True if a visit stopped it. */
bool pk_walk(const pk_geometry *geometry, const pk_piece *piece, const double low[2],
             const double high[2], const pk_mirror *mirror, pk_visit visit, void *user);

/* A visit that stops where the two sides have different media: where the piece can be seen. */
bool pk_visit_visible(const pk_geometry *geometry, const double one_side[2],
                      const double other_side[2], void *user);

/* Scan along `axis` at the other coordinate `at`: the first change of medium above `from`, at most
 * `to`. Returns its coordinate, or `to` if there is none, with the medium below it in *medium. */
double pk_scan_next(const pk_geometry *geometry, pk_axis_name axis, double at, double from,
                    double to, int *medium);

#endif
