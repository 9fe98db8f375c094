/* What the benchmarks work on: a row of teeth between walls, or a square lattice of pillars, both
 * of rectangles in the plane, as an operator of about the wanted number of unknowns. */
#ifndef BENCHMARKS_SUBJECT_H
#define BENCHMARKS_SUBJECT_H

#include "bloch/solver.h"
#include "geometry/cell.h"
#include "grid/cell_grid.h"

typedef enum subject_shape {
  TEETH,   /* a pitch of 0.3 µm between walls 2.4 µm apart: grids 8 times as wide as long */
  PILLARS, /* a square lattice of 0.6 µm: periodic both ways, the dearest pattern to factorise */
  SUBJECT_SHAPES
} subject_shape;

typedef struct subject {
  picket_context *context;
  pk_cell cell;
  pk_cell_grid grid;
  pk_operator *op;
  pk_solver *solver;
} subject;

const char *subject_name(subject_shape shape);

/* Ends the program with a sentence when anything fails, as everything here does. */
void subject_open(subject *s, subject_shape shape, double unknowns);
void subject_close(subject *s);

/* Loads the indices of the cell; `lossy` adds an absorption far below rounding of any result, which
 * sends a problem with a real phase through complex arithmetic. */
void subject_load(subject *s, bool lossy);

/* Ends the program unless the status is PICKET_OK. */
void subject_must(const subject *s, picket_status status);

#endif
