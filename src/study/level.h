/* One member of a family of grids for a cell and a polarization, ready to be solved. */
#ifndef PK_STUDY_LEVEL_H
#define PK_STUDY_LEVEL_H

#include "bloch/media.h"
#include "bloch/solver.h"
#include "grid/cell_grid.h"
#include "study/problem.h"

typedef struct pk_level {
  picket_context *context;
  pk_cell_grid grid;
  pk_operator *op;
  pk_solver *solver;
  pk_media media;
} pk_level;

/* Member m of the family of a base grid. */
picket_status pk_level_open(const pk_problem *problem, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_level *out);
void pk_level_close(pk_level *level); /* accepts zeros */

/* Unknowns of member m. */
double pk_level_unknowns(const pk_cell_grid *base, int m);

#endif
