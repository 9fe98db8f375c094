/* See slope.h. */
#include "study/slope.h"

#include <assert.h>

#include "base/memory.h"

picket_status pk_slope_open(const pk_variation *variation, pk_polarization polarization,
                            const pk_cell_grid *base, int m, pk_slope *out) {
  pk_slope slope = {.variation = variation};
  picket_context *context = variation->problem->context;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < PK_NEIGHBOURS; i++) {
    const pk_problem *neighbour = variation->neighbour[i];
    pk_cell_grid moved;
    status = pk_cell_grid_move(context, base, &variation->problem->cell, &neighbour->cell, &moved);
    if (status == PICKET_OK) {
      status = pk_level_open(neighbour, polarization, &moved, m, &slope.level[i]);
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
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    pk_level_close(&slope->level[i]);
  }
}

/* Weights of the neighbours in a derivative, per step. */
static const double WEIGHT[PK_NEIGHBOURS] = {1.0 / 12, -8.0 / 12, 8.0 / 12, -1.0 / 12};

double pk_variation_slope(const pk_variation *variation, const double values[PK_NEIGHBOURS]) {
  /* Pairs first: what is the same on both sides leaves nothing, not even rounding. */
  double inner = WEIGHT[2] * (values[2] - values[1]), outer = WEIGHT[0] * (values[0] - values[3]);
  return (inner + outer) / variation->step;
}

/* dε/dp of the media [count]; leaves other media loaded. */
static picket_status media_rates(pk_slope *slope, const double k0[PK_NEIGHBOURS], int count,
                                 double complex *rate) {
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    pk_media *media = &slope->level[i].media;
    picket_status status = pk_media_set(media, k0[i], slope->level[i].op);
    if (status != PICKET_OK) {
      return status;
    }
  }
  for (int m = 0; m < count; m++) {
    double real[PK_NEIGHBOURS], imaginary[PK_NEIGHBOURS];
    for (int i = 0; i < PK_NEIGHBOURS; i++) {
      real[i] = creal(slope->level[i].media.permittivity[m]);
      imaginary[i] = cimag(slope->level[i].media.permittivity[m]);
    }
    rate[m] = pk_variation_slope(slope->variation, real) +
              I * pk_variation_slope(slope->variation, imaginary);
  }
  return PICKET_OK;
}

/* Adds factor × the entries of a neighbour's T with the media of the level. */
static picket_status add_entries(pk_level *neighbour, const pk_level *level, pk_phase phase,
                                 double shift, double factor, double complex *entries) {
  picket_status status = pk_operator_load(neighbour->op, level->media.permittivity);
  const pk_pattern *pattern = pk_operator_pattern(neighbour->op);
  int64_t count = pattern->start[pattern->n];
  double complex *values = PK_NEW(level->context, count, double complex);
  if (status == PICKET_OK && !values) {
    status = PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    pk_operator_values(neighbour->op, phase, shift, values);
    for (int64_t s = 0; s < count; s++) {
      entries[s] += factor * values[s];
    }
  }
  pk_free(level->context, values);
  return status;
}

/* The part of geometry and grid, with the media of the level held. Entry by entry, for the forms of
 * the neighbours are sums of large terms that cancel. */
static picket_status geometry_part(pk_slope *slope, const pk_level *level, pk_phase phase,
                                   double shift, const double complex *l, const double complex *r,
                                   double complex *out) {
  const pk_pattern *pattern = pk_operator_pattern(level->op);
  double complex *entries = PK_NEW(level->context, pattern->start[pattern->n], double complex);
  picket_status status = entries ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < PK_NEIGHBOURS; i++) {
    /* The grids have the same lines, so all operators have the same pattern. */
    assert(pk_operator_pattern(slope->level[i].op)->start[pattern->n] ==
           pattern->start[pattern->n]);
    status = add_entries(&slope->level[i], level, phase, shift, WEIGHT[i], entries);
  }
  double complex sum = 0;
  for (int64_t c = 0; status == PICKET_OK && c < pattern->n; c++) {
    for (int64_t s = pattern->start[c]; s < pattern->start[c + 1]; s++) {
      sum += l[pattern->row[s]] * entries[s] * r[c];
    }
  }
  pk_free(level->context, entries);
  *out = sum / slope->variation->step;
  return status;
}

/* The part of media and frequency, on the level itself. */
static picket_status media_part(const pk_level *level, pk_phase phase, double shift,
                                double shift_rate, const double complex *rate,
                                const double complex *l, const double complex *r,
                                double complex *out) {
  int count = level->media.count;
  double complex *forms = PK_NEW(level->context, 2 * count, double complex);
  if (!forms) {
    return PICKET_ERROR_MEMORY;
  }
  double complex *stiff = forms, *mass = forms + count;
  picket_status status = pk_operator_media_forms(level->op, phase, l, r, stiff, mass);
  double complex sum = -shift_rate * pk_operator_mass_form(level->op, l, r);
  for (int m = 0; m < count; m++) {
    sum += rate[m] * (stiff[m] - shift * mass[m]);
  }
  pk_free(level->context, forms);
  *out = sum;
  return status;
}

picket_status pk_slope_form(pk_slope *slope, pk_level *level, pk_phase phase, double level_k0,
                            const double k0[PK_NEIGHBOURS], const double complex *l,
                            const double complex *r, double complex *out) {
  double shift = level_k0 * level_k0, shifts[PK_NEIGHBOURS];
  double complex geometry = 0, media = 0;
  double complex *rate = PK_NEW(level->context, level->media.count, double complex);
  picket_status status =
      rate ? pk_media_set(&level->media, level_k0, level->op) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = media_rates(slope, k0, level->media.count, rate);
  }
  if (status == PICKET_OK) {
    status = geometry_part(slope, level, phase, shift, l, r, &geometry);
  }
  for (int i = 0; i < PK_NEIGHBOURS; i++) {
    shifts[i] = k0[i] * k0[i];
  }
  if (status == PICKET_OK) {
    double shift_rate = pk_variation_slope(slope->variation, shifts);
    status = media_part(level, phase, shift, shift_rate, rate, l, r, &media);
  }
  if (status == PICKET_OK) {
    *out = geometry + media;
  }
  pk_free(level->context, rate);
  return status;
}
