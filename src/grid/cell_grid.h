/* The base grid of a cell: an axis along the guide (u = z) and a lateral one (v = x), from which a
 * family of exactly proportional grids is divided. */
#ifndef PK_GRID_CELL_GRID_H
#define PK_GRID_CELL_GRID_H

#include "geometry/cell.h"
#include "grid/axis.h"

typedef struct pk_cell_grid_wish {
  double steps_per_pitch; /* base intervals in a pitch, inside the structure */
  bool mirror;            /* halve the cell at a lateral mirror plane, keeping the even family */
  bool zero_walls;        /* the unknown vanishes on lateral walls (else its slope does); for open
                             sides, what stands in for infinity */
  double decay_um[2];     /* open sides: 1/e length of the field at -x and +x */
  double reach[2];        /* open sides: distance of the wall from the structure in decay lengths */
  pk_layer layer[2];    /* open sides: absorbing layer beyond that distance; thickness 0: a wall */
  double outer_step_um; /* open sides: largest base spacing there besides a share of the decay
                           lengths; 0: no other limit */
} pk_cell_grid_wish;

typedef struct pk_cell_grid {
  pk_axis u, v;
  bool uniform_v;   /* lateral uniform: one unknown along v */
  bool halved;      /* v starts at a mirror plane with a free end */
  double mirror_at; /* where, if halved */
  int copies;       /* the u axis repeats this often in a pitch (lateral shift p/q: q) */
  int shift_lines;  /* base lines along u per crossing of the lateral boundary; times m when divided
                     */
} pk_cell_grid;

picket_status pk_cell_grid_lay(picket_context *context, const pk_cell *cell,
                               const pk_cell_grid_wish *wish, pk_cell_grid *out);

/* Member m of the family. */
picket_status pk_cell_grid_divide(picket_context *context, const pk_cell_grid *base, int m,
                                  pk_cell_grid *out);
/* The base grid moved with the geometry: the same intervals, with every line on an interface at the
 * place of that interface in `to`, and the lines between in proportion; outer walls and layers keep
 * their distance from the structure. PICKET_ERROR_UNSUPPORTED when the two cells do not have the
 * same interfaces (a value at which shapes begin to touch, for example). */
picket_status pk_cell_grid_move(picket_context *context, const pk_cell_grid *base,
                                const pk_cell *from, const pk_cell *to, pk_cell_grid *out);

void pk_cell_grid_clear(picket_context *context, pk_cell_grid *grid);

#endif
