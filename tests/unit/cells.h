/* Cells painted by hand, with grid, operator and solver: for tests of the rooms between geometry
 * and study. Every step asserts that it worked; cell_close gives everything back. */
#ifndef PICKET_TESTS_CELLS_H
#define PICKET_TESTS_CELLS_H

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include <complex.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/media.h"
#include "bloch/phase.h"
#include "bloch/solver.h"
#include "grid/cell_grid.h"
#include "operator/operator.h"

static const double PI = 3.141592653589793238;
static const pk_place nowhere = {NULL, 0, 0};

typedef struct test_cell {
  picket_context *context;
  pk_materials *materials;
  pk_cell cell;
  pk_cell_grid base, grid;
  pk_operator *op;
  pk_solver *solver;
  pk_media media;
} test_cell;

/* A cell of constant indices, material 0 the cladding; span 0 for open and uniform sides. The cell
 * takes the context over. */
static inline test_cell cell_in(picket_context *context, pk_lateral lateral, double pitch,
                                double span, double shift, int count, const double *index) {
  test_cell c = {.context = context, .cell = {pitch, lateral, span, shift, 0, NULL}};
  assert_int_equal(pk_materials_create(c.context, &c.materials), PICKET_OK);
  for (int i = 0; i < count; i++) {
    char name[8] = {'m', (char)('0' + i)};
    assert_int_equal(pk_materials_add_constant(c.materials, nowhere, name, index[i], 0, 0),
                     PICKET_OK);
  }
  double side = span > 0 ? 0.5 * span : INFINITY;
  pk_frame frame = {.from = {-0.5 * pitch, -side},
                    .to = {0.5 * pitch, side},
                    .periodic = {true, lateral == PK_LATERAL_PERIODIC},
                    .shift = shift * pitch};
  assert_int_equal(pk_geometry_create(c.context, &frame, &c.cell.geometry), PICKET_OK);
  return c;
}

static inline test_cell cell_of(pk_lateral lateral, double pitch, double span, double shift,
                                int count, const double *index) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  return cell_in(context, lateral, pitch, span, shift, count, index);
}

static inline void cell_rect(test_cell *c, int medium, double z, double x, double length,
                             double width) {
  assert_int_equal(pk_geometry_add_rect(c->cell.geometry, nowhere, medium, (double[2]){z, x},
                                        (double[2]){length, width}),
                   PICKET_OK);
}

static inline void cell_disc(test_cell *c, int medium, double z, double x, double diameter) {
  assert_int_equal(
      pk_geometry_add_disc(c->cell.geometry, nowhere, medium, (double[2]){z, x}, diameter),
      PICKET_OK);
}

static inline void cell_polygon(test_cell *c, int medium, int count, const double (*corners)[2]) {
  assert_int_equal(pk_geometry_add_polygon(c->cell.geometry, nowhere, medium, count, corners),
                   PICKET_OK);
}

/* A layer across the guide. */
static inline void cell_layer(test_cell *c, int medium, double from, double to) {
  assert_int_equal(pk_geometry_add_stripe(c->cell.geometry, nowhere, medium, PK_U, from, to),
                   PICKET_OK);
}

static inline void cell_lay(test_cell *c, const pk_cell_grid_wish *wish) {
  assert_int_equal(pk_cell_grid_lay(c->context, &c->cell, wish, &c->base), PICKET_OK);
}

/* Equal intervals, each line at from + i (to - from)/n, whatever is painted. */
static inline pk_axis even_axis(picket_context *context, double from, double to, int intervals,
                                pk_end end) {
  pk_axis axis = {.low = end, .high = end, .intervals = intervals};
  axis.line = PK_NEW(context, intervals + 1, double);
  axis.length = PK_NEW(context, intervals, double complex);
  assert_non_null(axis.line);
  assert_non_null(axis.length);
  for (int i = 0; i <= intervals; i++) {
    axis.line[i] = from + (to - from) * i / intervals;
  }
  for (int i = 0; i < intervals; i++) {
    axis.length[i] = axis.line[i + 1] - axis.line[i];
  }
  return axis;
}

/* An even base grid nu × nv (nv ignored by uniform sides); walls are zero for closed cells. */
static inline void cell_lay_even(test_cell *c, int nu, int nv) {
  double half = 0.5 * c->cell.pitch_um, side = 0.5 * c->cell.span_um;
  c->base = (pk_cell_grid){.copies = 1};
  c->base.u = even_axis(c->context, -half, half, nu, PK_END_PERIODIC);
  if (c->cell.lateral == PK_LATERAL_UNIFORM) {
    c->base.uniform_v = true;
    c->base.v = even_axis(c->context, -0.5, 0.5, 1, PK_END_PERIODIC);
  } else {
    pk_end end = c->cell.lateral == PK_LATERAL_PERIODIC ? PK_END_PERIODIC : PK_END_ZERO;
    c->base.v = even_axis(c->context, -side, side, nv, end);
  }
  c->base.shift_lines = (int)lround(c->cell.shift * nu);
}

/* Member m of the family of the base grid, ready to be solved; media taken at k0. */
static inline void cell_open(test_cell *c, pk_polarization polarization, int m, double k0) {
  assert_int_equal(pk_cell_grid_divide(c->context, &c->base, m, &c->grid), PICKET_OK);
  pk_operator_plan plan = {polarization,
                           c->cell.geometry,
                           &c->grid.u,
                           &c->grid.v,
                           c->grid.uniform_v,
                           c->grid.shift_lines,
                           pk_materials_count(c->materials)};
  assert_int_equal(pk_operator_create(c->context, &plan, &c->op), PICKET_OK);
  assert_int_equal(pk_solver_create(c->context, c->op, &c->solver), PICKET_OK);
  assert_int_equal(pk_media_open(c->context, c->materials, 20, c->op, &c->media), PICKET_OK);
  assert_int_equal(pk_media_set(&c->media, k0, c->op), PICKET_OK);
}

static inline void cell_shut(test_cell *c) {
  pk_media_close(&c->media);
  pk_solver_free(c->solver);
  pk_operator_free(c->op);
  pk_cell_grid_clear(c->context, &c->grid);
  c->solver = NULL;
  c->op = NULL;
}

static inline void cell_close(test_cell *c) {
  cell_shut(c);
  pk_cell_grid_clear(c->context, &c->base);
  pk_geometry_free(c->cell.geometry);
  pk_materials_free(c->materials);
  picket_context_free(c->context);
}

enum { MOST_MODES = 12 };

/* λ of the `count` lowest modes at k = (kz, kx) in π/pitch and π/span, rising; the shift lies below
 * them all. */
static inline void lowest(test_cell *c, double kz, double kx, int count, double *lambda) {
  pk_mode modes[MOST_MODES];
  int found = 0;
  double shift = -0.3 / (c->cell.pitch_um * c->cell.pitch_um);
  assert_true(count <= MOST_MODES);
  assert_int_equal(
      pk_solver_modes(c->solver, pk_phase_at(&c->cell, kz, kx), shift, count, NULL, modes, &found),
      PICKET_OK);
  assert_int_equal(found, count);
  for (int i = 0; i < count; i++) {
    lambda[i] = creal(modes[i].lambda);
  }
  pk_modes_clear(c->context, found, modes);
}

/* T(phase) with k0² = shift as a dense matrix, column-major; free it with free(). */
static inline double complex *dense_of(const pk_operator *op, pk_phase phase, double shift) {
  const pk_pattern *pattern = pk_operator_pattern(op);
  size_t n = (size_t)pattern->n;
  double complex *values = malloc((size_t)pattern->start[n] * sizeof *values);
  double complex *dense = calloc(n * n, sizeof *dense);
  assert_non_null(values);
  assert_non_null(dense);
  pk_operator_values(op, phase, shift, values);
  for (size_t c = 0; c < n; c++) {
    for (int64_t s = pattern->start[c]; s < pattern->start[c + 1]; s++) {
      dense[c * n + (size_t)pattern->row[s]] = values[s];
    }
  }
  free(values);
  return dense;
}

/* Uniform in [low, high); the multiplier is the one of Knuth's MMIX. */
static inline double random_in(uint64_t *state, double low, double high) {
  *state = *state * 6364136223846793005u + 1442695040888963407u;
  return low + (high - low) * ((double)(*state >> 11) / 9007199254740992.0);
}

static inline void random_vector(uint64_t *state, int64_t n, double complex *x) {
  for (int64_t i = 0; i < n; i++) {
    x[i] = random_in(state, -1, 1) + I * random_in(state, -1, 1);
  }
}

/* Three rectangles of different indices over each other, some across the boundary. */
static inline test_cell random_cell(pk_lateral lateral, uint64_t *state) {
  double pitch = random_in(state, 0.2, 0.5), span = random_in(state, 0.5, 1.0);
  double index[4] = {random_in(state, 1, 1.5), random_in(state, 2, 3.5), random_in(state, 1.5, 2.5),
                     random_in(state, 1.2, 3)};
  test_cell c = cell_of(lateral, pitch, span, 0, 4, index);
  for (int medium = 1; medium < 4; medium++) {
    double reach = 0.25 * span;
    double z = random_in(state, -0.5, 0.5) * pitch, x = random_in(state, -reach, reach);
    cell_rect(&c, medium, z, x, random_in(state, 0.2, 0.7) * pitch,
              random_in(state, 0.15, 0.45) * span);
  }
  return c;
}

#endif
