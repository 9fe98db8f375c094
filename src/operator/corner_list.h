/* The corners of a painted plane as a grid sees them. */
#ifndef PK_OPERATOR_CORNER_LIST_H
#define PK_OPERATOR_CORNER_LIST_H

#include "geometry/geometry.h"
#include "grid/axis.h"

/* A corner at the crossing of two grid lines. Order of media and spacings as in pk_corner_site. */
typedef struct pk_grid_corner {
  int line[2]; /* of u and v */
  int medium[4];
  double spacing[4]; /* of the arms +u, +v, -u, -v */
} pk_grid_corner;

typedef struct pk_corner_list {
  int count;
  pk_grid_corner *corner; /* [count] */
  int other_count;        /* corners at which an oblique or curved interface takes part */
  int lost_count;         /* corners that are not at a crossing of grid lines */
} pk_corner_list;

/* Corners strictly between walls; what lies beyond a wall or a mirror plane is left out. On a
 * mirror plane there is none: a plane mirrored about it is straight there. */
picket_status pk_corner_list_take(picket_context *context, const pk_geometry *geometry,
                                  const pk_axis *u, const pk_axis *v, pk_corner_list *out);
void pk_corner_list_clear(picket_context *context, pk_corner_list *list); /* accepts zeros */

#endif
