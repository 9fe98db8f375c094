/* See level.h. */
#include "study/level.h"

#include <string.h>

static picket_status open_level(const pk_problem *problem, pk_polarization polarization,
                                const pk_cell_grid *base, int m, pk_level *level) {
  picket_context *context = problem->context;
  picket_status status = pk_cell_grid_divide(context, base, m, &level->grid);
  if (status != PICKET_OK) {
    return status;
  }
  pk_operator_plan plan = {polarization,
                           problem->cell.geometry,
                           &level->grid.u,
                           &level->grid.v,
                           level->grid.uniform_v,
                           level->grid.shift_lines,
                           pk_materials_count(problem->materials)};
  status = pk_operator_create(context, &plan, &level->op);
  if (status == PICKET_OK) {
    status = pk_operator_correct_corners(level->op, problem->cell.geometry);
  }
  if (status == PICKET_OK) {
    status = pk_solver_create(context, level->op, &level->solver);
  }
  if (status == PICKET_OK) {
    status = pk_media_open(context, problem->materials, problem->temperature_c, level->op,
                           &level->media);
  }
  return status;
}

picket_status pk_level_open(const pk_problem *problem, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_level *out) {
  pk_level level = {.context = problem->context};
  picket_status status = open_level(problem, polarization, base, m, &level);
  if (status != PICKET_OK) {
    pk_level_close(&level);
    return status;
  }
  *out = level;
  return PICKET_OK;
}

void pk_level_close(pk_level *level) {
  if (level->context) {
    pk_media_close(&level->media);
    pk_solver_free(level->solver);
    pk_operator_free(level->op);
    pk_cell_grid_clear(level->context, &level->grid);
  }
  memset(level, 0, sizeof *level);
}

double pk_level_unknowns(const pk_cell_grid *base, int m) {
  double v = base->uniform_v ? 1 : (double)base->v.intervals * m;
  return (double)base->u.intervals * m * v;
}
