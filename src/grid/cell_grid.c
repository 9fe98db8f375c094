/* See cell_grid.h. */
#include "grid/cell_grid.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

/* Spacing may grow by a fifth of the distance: three-point differences stay second order and the
 * open sides cost few lines. */
static const double GROWTH = 0.2;

/* In an open side the field falls as exp(-x/decay): this many base steps per decay length. */
static const double STEPS_PER_DECAY = 3;

enum {
  LEAST_INTERVALS = 2, /* base intervals in the smallest feature: the family starts at twice that */
  LARGEST_DENOMINATOR = 12
};

/* q of a lateral shift p/q; the reader has made sure that there is one. */
static int shift_denominator(double shift) {
  for (int q = 1; q <= LARGEST_DENOMINATOR; q++) {
    if (fabs(shift * q - round(shift * q)) < 1e-6) {
      return q;
    }
  }
  return 1;
}

static picket_status lay_along(picket_context *context, const pk_cell *cell, double step,
                               pk_cell_grid *grid) {
  double *lines = NULL;
  int count = 0;
  picket_status status = pk_geometry_lines(cell->geometry, PK_U, &lines, &count);
  if (status != PICKET_OK) {
    return status;
  }
  double half = 0.5 * cell->pitch_um;
  pk_axis_wish wish = {.low = PK_END_PERIODIC,
                       .high = PK_END_PERIODIC,
                       .from = -half,
                       .to = half,
                       .line_count = count,
                       .lines = lines,
                       .step = step,
                       .inner_from = -half,
                       .inner_to = half,
                       .outer_step = step,
                       .growth = GROWTH,
                       .least_intervals = LEAST_INTERVALS};
  grid->copies = cell->lateral == PK_LATERAL_PERIODIC ? shift_denominator(cell->shift) : 1;
  status = pk_axis_lay_repeated(context, &wish, grid->copies, &grid->u);
  if (status == PICKET_OK) {
    grid->shift_lines = (int)lround(cell->shift * grid->copies) * grid->u.intervals / grid->copies;
  }
  pk_free(context, lines);
  return status;
}

/* The range of x in which the paint varies along z: outside it, films and sides need no fine steps.
 * False if nothing varies. Between two neighbouring lines a rectangular geometry is the same for
 * every x. */
static bool varying_range(const pk_cell *cell, int count, const double *lines, double *low,
                          double *high) {
  bool any = false;
  for (int i = 0; i + 1 < count; i++) {
    double boundaries[3];
    int media[2], intervals = 0;
    picket_status status = pk_geometry_profile(cell->geometry, 0.5 * (lines[i] + lines[i + 1]), 2,
                                               boundaries, media, &intervals);
    if (status != PICKET_OK || intervals > 1) { /* more intervals than fit also means: it varies */
      *low = any ? *low : lines[i];
      *high = lines[i + 1];
      any = true;
    }
  }
  return any;
}

/* An open side: the structure, room for the field to fall, a layer to absorb what is left. */
static void open_ends(const pk_cell *cell, const pk_cell_grid_wish *wish, int count,
                      const double *lines, pk_axis_wish *axis) {
  double low = 0, high = 0;
  pk_geometry_extent(cell->geometry, PK_V, &low, &high);
  axis->inner_from = low;
  axis->inner_to = high;
  if (pk_geometry_is_rectangular(cell->geometry)) {
    varying_range(cell, count, lines, &axis->inner_from, &axis->inner_to);
  }
  for (int side = 0; side < 2; side++) {
    axis->layer[side] = wish->layer[side];
  }
  axis->from = low - wish->reach[0] * wish->decay_um[0] - wish->layer[0].thickness;
  axis->to = high + wish->reach[1] * wish->decay_um[1] + wish->layer[1].thickness;
  if (cell->span_um > 0) { /* asked for in the file */
    axis->from = -0.5 * cell->span_um - wish->layer[0].thickness;
    axis->to = 0.5 * cell->span_um + wish->layer[1].thickness;
  }
  /* Each side as its own field wants: a mode may reach far into one and not into the other. */
  double most = wish->outer_step_um > 0 ? wish->outer_step_um : INFINITY;
  axis->low_step = fmax(axis->step, fmin(most, wish->decay_um[0] / STEPS_PER_DECAY));
  axis->outer_step = fmax(axis->step, fmin(most, wish->decay_um[1] / STEPS_PER_DECAY));
}

/* Where the lateral axis starts and ends, and what its ends are. */
static void lateral_ends(const pk_cell *cell, const pk_cell_grid_wish *wish, int count,
                         const double *lines, pk_axis_wish *axis) {
  pk_end wall = wish->zero_walls ? PK_END_ZERO : PK_END_FREE;
  axis->low = axis->high = wall;
  if (cell->lateral == PK_LATERAL_OPEN) {
    open_ends(cell, wish, count, lines, axis);
    return;
  }
  axis->from = axis->inner_from = -0.5 * cell->span_um;
  axis->to = axis->inner_to = 0.5 * cell->span_um;
  if (cell->lateral == PK_LATERAL_PERIODIC) {
    axis->low = axis->high = PK_END_PERIODIC;
  }
}

/* Starts the axis at a mirror plane if there is one: even modes have a free end there. In a lateral
 * period both the plane and the one half a period away are free ends. */
static void halve(const pk_cell *cell, pk_axis_wish *axis, pk_cell_grid *grid) {
  double centre;
  if (cell->shift != 0 || !pk_geometry_mirror(cell->geometry, PK_V, &centre)) {
    return;
  }
  if (cell->lateral != PK_LATERAL_OPEN && centre != 0) {
    return; /* walls and periods are centred on 0: another plane would move the boundary */
  }
  grid->halved = true;
  grid->mirror_at = centre;
  axis->from = centre;
  axis->low = PK_END_FREE;
  axis->layer[0] = (pk_layer){0};
  if (cell->lateral == PK_LATERAL_PERIODIC) {
    axis->high = PK_END_FREE;
  }
}

static int keep_inside(double from, double to, int count, double *lines) {
  int kept = 0;
  for (int i = 0; i < count; i++) {
    if (lines[i] > from && lines[i] < to) {
      lines[kept++] = lines[i];
    }
  }
  return kept;
}

static picket_status lay_across(picket_context *context, const pk_cell *cell,
                                const pk_cell_grid_wish *wish, double step, pk_cell_grid *grid) {
  double *lines = NULL;
  int count = 0;
  picket_status status = pk_geometry_lines(cell->geometry, PK_V, &lines, &count);
  if (status != PICKET_OK) {
    return status;
  }
  pk_axis_wish axis = {
      .step = step, .outer_step = step, .growth = GROWTH, .least_intervals = LEAST_INTERVALS};
  lateral_ends(cell, wish, count, lines, &axis);
  if (wish->mirror) {
    halve(cell, &axis, grid);
  }
  axis.lines = lines;
  axis.line_count = keep_inside(axis.from, axis.to, count, lines);
  status = pk_axis_lay(context, &axis, &grid->v);
  pk_free(context, lines);
  return status;
}

/* A lateral axis with a single unknown: its length does not matter, its ends are never used. */
static picket_status lay_uniform(picket_context *context, pk_cell_grid *grid) {
  grid->uniform_v = true;
  pk_axis_wish axis = {.low = PK_END_PERIODIC,
                       .high = PK_END_PERIODIC,
                       .from = -0.5,
                       .to = 0.5,
                       .step = 1,
                       .outer_step = 1,
                       .inner_from = -0.5,
                       .inner_to = 0.5,
                       .growth = 1,
                       .least_intervals = 1};
  return pk_axis_lay(context, &axis, &grid->v);
}

picket_status pk_cell_grid_lay(picket_context *context, const pk_cell *cell,
                               const pk_cell_grid_wish *wish, pk_cell_grid *out) {
  pk_cell_grid grid = {0};
  double step = cell->pitch_um / wish->steps_per_pitch;
  picket_status status = lay_along(context, cell, step, &grid);
  if (status == PICKET_OK) {
    status = cell->lateral == PK_LATERAL_UNIFORM ? lay_uniform(context, &grid)
                                                 : lay_across(context, cell, wish, step, &grid);
  }
  if (status != PICKET_OK) {
    pk_cell_grid_clear(context, &grid);
    return status;
  }
  *out = grid;
  return PICKET_OK;
}

picket_status pk_cell_grid_divide(picket_context *context, const pk_cell_grid *base, int m,
                                  pk_cell_grid *out) {
  pk_cell_grid grid = *base;
  memset(&grid.u, 0, sizeof grid.u);
  memset(&grid.v, 0, sizeof grid.v);
  grid.shift_lines = base->shift_lines * m;
  picket_status status = pk_axis_divide(context, &base->u, m, &grid.u);
  if (status == PICKET_OK) {
    status = pk_axis_divide(context, &base->v, base->uniform_v ? 1 : m, &grid.v);
  }
  if (status != PICKET_OK) {
    pk_cell_grid_clear(context, &grid);
    return status;
  }
  *out = grid;
  return PICKET_OK;
}

void pk_cell_grid_clear(picket_context *context, pk_cell_grid *grid) {
  pk_axis_clear(context, &grid->u);
  pk_axis_clear(context, &grid->v);
}
