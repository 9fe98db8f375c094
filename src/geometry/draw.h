/* A painted plane as closed polygons, for pictures: the shapes as painted, one over the other. */
#ifndef PK_GEOMETRY_DRAW_H
#define PK_GEOMETRY_DRAW_H

#include "geometry/geometry.h"

/* One copy of a shape: the polygon that bounds it, arcs as chords. */
typedef struct pk_drawn {
  int medium;
  int count; /* corners */
  double (*at)[2];
} pk_drawn;

/* Every copy of every shape that meets the finite window low..high, in paint order: later ones
 * cover earlier ones. Stripes end at the window, other shapes may reach out of it. *out is the
 * caller's, pk_drawn_free. PICKET_ERROR_MEMORY. */
picket_status pk_geometry_draw(const pk_geometry *geometry, const double low[2],
                               const double high[2], pk_drawn **out, int *count);
void pk_drawn_free(picket_context *context, pk_drawn *drawn, int count); /* accepts null */

#endif
