/* Small cells that between them use every kind of edge, box and boundary of the operator. */
#ifndef TEST_OPERATOR_SAMPLES_H
#define TEST_OPERATOR_SAMPLES_H

#include "unit/cells.h"

enum { SAMPLE_COUNT = 8 };

static const double SAMPLE_INDEX[] = {1.3, 3.4, 2.1};

static inline void paint_oblique(test_cell *c) {
  static const double TRIANGLE[3][2] = {{-0.2, -0.15}, {0.15, -0.1}, {0.05, 0.25}};
  cell_polygon(c, 1, 3, TRIANGLE);
  cell_disc(c, 2, 0.1, 0.12, 0.3);
}

/* Sample number i, 0 to SAMPLE_COUNT - 1, opened for a polarization with 7 to 15 unknowns along
 * each axis. */
static inline test_cell sample(int i, pk_polarization polarization) {
  static const pk_lateral LATERAL[SAMPLE_COUNT] = {
      PK_LATERAL_PERIODIC, PK_LATERAL_PERIODIC, PK_LATERAL_PERIODIC, PK_LATERAL_PERIODIC,
      PK_LATERAL_ELECTRIC, PK_LATERAL_ELECTRIC, PK_LATERAL_UNIFORM,  PK_LATERAL_PERIODIC};
  static const double SHIFT[SAMPLE_COUNT] = {0, 0, 0.5, 1.0 / 3, 0, 0, 0, 0.25};
  static const bool OBLIQUE[SAMPLE_COUNT] = {false, true, true, false, false, true, false, true};
  double span = LATERAL[i] == PK_LATERAL_UNIFORM ? 0 : 0.8;
  test_cell c = cell_of(LATERAL[i], 0.6, span, SHIFT[i], 3, SAMPLE_INDEX);
  if (LATERAL[i] == PK_LATERAL_UNIFORM) {
    cell_layer(&c, 1, -0.21, 0.1);
    c.cell.span_um = 1; /* the unit of kx */
  } else if (OBLIQUE[i]) {
    paint_oblique(&c);
  } else {
    cell_rect(&c, 1, 0.2, 0.05, 0.3, 0.31); /* across the boundary */
    cell_rect(&c, 2, -0.1, -0.2, 0.1, 0.19);
  }
  /* A mirror plane is not there, so the second kind of wall is asked for instead. */
  pk_cell_grid_wish wish = {.steps_per_pitch = 7, .zero_walls = i != 5};
  cell_lay(&c, &wish);
  cell_open(&c, polarization, 1, 4);
  return c;
}

/* A phase that belongs to a real wavenumber. */
static inline pk_phase sample_phase(const test_cell *c) {
  return pk_phase_at(&c->cell, 0.37, 0.61);
}

static inline double largest(int64_t n, const double complex *x) {
  double size = 0;
  for (int64_t i = 0; i < n; i++) {
    size = fmax(size, cabs(x[i]));
  }
  return size;
}

#endif
