/* See slope.h. */
#include "study/slope.h"

#include <string.h>

#include "base/memory.h"

picket_status pk_slope_open(const pk_variation *variation, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_slope *out) {
  pk_slope slope = {.variation = variation};
  const pk_problem *neighbour[2] = {variation->minus, variation->plus};
  picket_context *context = variation->problem->context;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < 2; i++) {
    pk_cell_grid moved;
    status =
        pk_cell_grid_move(context, base, &variation->problem->cell, &neighbour[i]->cell, &moved);
    if (status == PICKET_OK) {
      status = pk_level_open(neighbour[i], polarization, &moved, m, &slope.level[i]);
      pk_cell_grid_clear(context, &moved);
    }
  }
  if (status != PICKET_OK) {
    pk_slope_close(&slope);
    return status;
  }
  *out = slope;
  return PICKET_OK;
}

void pk_slope_close(pk_slope *slope) {
  pk_level_close(&slope->level[0]);
  pk_level_close(&slope->level[1]);
}

/* lᵀ T r of one operator. */
static picket_status form(pk_level *level, pk_phase phase, double k0, const double complex *l,
                          const double complex *r, double complex *out) {
  const pk_pattern *pattern = pk_operator_pattern(level->op);
  double complex *values = PK_NEW(level->context, pattern->start[pattern->n], double complex);
  if (!values) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = pk_media_set(&level->media, k0, level->op);
  double complex sum = 0;
  if (status == PICKET_OK) {
    pk_operator_values(level->op, phase, k0 * k0, values);
    for (int64_t c = 0; c < pattern->n; c++) {
      for (int64_t s = pattern->start[c]; s < pattern->start[c + 1]; s++) {
        sum += l[pattern->row[s]] * values[s] * r[c];
      }
    }
  }
  pk_free(level->context, values);
  *out = sum;
  return status;
}

picket_status pk_slope_form(pk_slope *slope, pk_phase phase, const double k0[2],
                            const double complex *l, const double complex *r, double complex *out) {
  double complex value[2];
  for (int i = 0; i < 2; i++) {
    picket_status status = form(&slope->level[i], phase, k0[i], l, r, &value[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  *out = (value[1] - value[0]) / (2 * slope->variation->step);
  return PICKET_OK;
}
