/* One period of a segmented guide: its painted plane (u = z along the guide, v = x lateral) and
 * what lies at its lateral sides. The media numbers of the geometry are numbers of pk_materials. */
#ifndef PK_GEOMETRY_CELL_H
#define PK_GEOMETRY_CELL_H

#include "geometry/geometry.h"

typedef enum pk_lateral {
  PK_LATERAL_OPEN,     /* free space on both sides: the field decays or radiates */
  PK_LATERAL_PERIODIC, /* a lattice: span is the lateral period */
  PK_LATERAL_UNIFORM,  /* a one-dimensional stack: nothing varies with x */
  PK_LATERAL_ELECTRIC, /* walls where the tangential electric field vanishes */
  PK_LATERAL_MAGNETIC  /* walls where the tangential magnetic field vanishes */
} pk_lateral;

typedef struct pk_cell {
  double pitch_um;
  pk_lateral lateral;
  double span_um;        /* distance of the walls or lateral period; 0: not given (open, uniform) */
  double shift;          /* lateral period: fraction of the pitch by which z advances, in [0, 1) */
  int cladding;          /* material where nothing is painted */
  pk_geometry *geometry; /* frame: z in ±pitch/2; x in ±span/2, or unbounded for open and uniform */
} pk_cell;

#endif
