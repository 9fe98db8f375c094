/* Derivatives of measurements. See measure.h.
 *
 * Edges and the Bloch index have analytic ones (derivative.h). The others are differenced, from
 * direct solves at one and two steps on both sides,
 *   D1 = (f₁ - f₋₁)/2h,  D2 = (f₂ - f₋₂)/4h,  f' ≈ (4 D1 - D2)/3   (L. F. Richardson 1911),
 * or on one side where the other is out of range or beyond a break of an index model:
 *   D1 = (-3 f₀ + 4 f₁ - f₂)/2h,  f' ≈ (-11 f₀ + 18 f₁ - 9 f₂ + 2 f₃)/6h,
 * with |D1 - f'| and what D2 differs by as the bar. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "study/measure_private.h"
#include "study/slope.h"

static const double NM_PER_UM = 1e3;

/* Step of a difference, as a part of the size of the number: values repeat from grid to grid to
 * some 1e-6 and better, and the fourth power of the step is far below that. */
static const double DIFFERENCE_STEP = 0.02;

const char *pk_slope_way_name(pk_slope_way way) {
  static const char *const names[] = {"none", "analytic", "difference"};
  return names[way];
}

bool pk_measured_has_slope(pk_measured what, pk_structure structure) {
  return structure == PK_STRUCTURE_CELL &&
         (what == PK_MEASURED_CLEARANCE || what == PK_MEASURED_LONG || what == PK_MEASURED_SHORT ||
          what == PK_MEASURED_BLOCH_INDEX);
}

static void refuse(pk_measured_slope *slope, const char *reason) {
  snprintf(slope->reason, sizeof slope->reason, "%s", reason);
  slope->q = (picket_quantity){NAN, NAN, slope->reason};
}

static void take(pk_measured_slope *slope, picket_quantity q, double factor) {
  if (isfinite(q.value)) {
    slope->q = (picket_quantity){factor * q.value, fabs(factor) * q.uncertainty, NULL};
  } else {
    refuse(slope, q.note ? q.note : "the mode was lost");
  }
}

/* --- Analytic ---------------------------------------------------------------------------------
 */

/* The same variation with one polarization and one wavelength (0: those given). */
typedef struct lit_variation {
  pk_lit at, near[PK_NEIGHBOURS];
  pk_variation variation;
} lit_variation;

static void light_up(const pk_variation *variation, const pk_question *question,
                     lit_variation *out) {
  double wavelength = pk_measured_at_wavelength(question->what) ? question->at_um : 0;
  pk_lit_make(variation->problem, wavelength, (int)question->family, &out->at);
  out->variation = (pk_variation){.problem = &out->at.problem, .step = variation->step};
  for (int n = 0; n < PK_NEIGHBOURS; n++) {
    pk_lit_make(variation->neighbour[n], wavelength, (int)question->family, &out->near[n]);
    out->variation.neighbour[n] = &out->near[n].problem;
  }
}

/* Of the shortest wavelength of light, µm per unit. */
static double light_slope(const pk_variation *variation) {
  double from[PK_NEIGHBOURS];
  for (int n = 0; n < PK_NEIGHBOURS; n++) {
    const pk_light *light = &variation->neighbour[n]->light;
    from[n] = light->count > 0 ? light->wavelength_um[0] : NAN;
  }
  return pk_variation_slope(variation, from);
}

static picket_status analytic(const pk_variation *given, const pk_question *question,
                              const picket_options *options, pk_measured_slope *out) {
  lit_variation lit;
  picket_result *result = NULL;
  light_up(given, question, &lit);
  bool index = question->what == PK_MEASURED_BLOCH_INDEX;
  picket_status status = index ? pk_study_index_derivatives(&lit.variation, options, &result)
                               : pk_study_edge_derivatives(&lit.variation, options, &result);
  if (status == PICKET_OK && index) {
    take(out, result->index_derivatives[0].points[0].bloch_index, 1);
  } else if (status == PICKET_OK) {
    const picket_edge_derivative *first = &result->edge_derivatives[0].bands[0];
    picket_quantity q = question->what == PK_MEASURED_SHORT ? first->short_um : first->long_um;
    if (question->what == PK_MEASURED_CLEARANCE) {
      q.value = light_slope(&lit.variation) - q.value;
    }
    take(out, q, NM_PER_UM);
  }
  pk_result_free(result);
  return status;
}

/* The centre of the neighbours: the value itself, but in temperature on one side of a break. */
static double analytic_centre(const char *path, double value, double *step) {
  bool temperature = strcmp(path, "temperature_c") == 0;
  if (temperature && fabs(value - PK_BREAK_C) <= 2 * *step) {
    /* So near that moving the centre changes nothing that counts: see pk_warm. */
    *step = 0.005;
    return value >= PK_BREAK_C ? fmax(value, PK_BREAK_C + 2.02 * *step)
                               : fmin(value, PK_BREAK_C - 2.02 * *step);
  }
  return value;
}

/* *done is false where the problem has no neighbours on both sides or no derivative. */
static picket_status try_analytic(const pk_variants *variants, const double *values, int i,
                                  const pk_question *question, const picket_options *options,
                                  pk_measured_slope *out, bool *done) {
  pk_problem *problem = NULL;
  pk_variation variation = {0};
  double step = pk_vary_step(variants->paths[i], values[i]);
  double centre = analytic_centre(variants->paths[i], values[i], &step);
  picket_status status = variants->make(variants->user, values, &problem);
  variation.problem = problem;
  if (status == PICKET_OK) {
    status = pk_variants_around(variants, values, i, centre, step, &variation);
  }
  if (status == PICKET_OK) {
    out->solves = 1;
    status = analytic(&variation, question, options, out);
  }
  *done = status == PICKET_OK && isfinite(out->q.value);
  if (status == PICKET_ERROR_INPUT || status == PICKET_ERROR_UNSUPPORTED ||
      status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
      status == PICKET_ERROR_NO_MODE) {
    pk_message_clear(variants->context);
    status = PICKET_OK;
  }
  pk_variants_forget(&variation);
  pk_problem_free(problem);
  return status;
}

picket_status pk_measure_slope_analytic(const pk_variants *variants, const double *values, int i,
                                        const pk_question *question, const picket_options *options,
                                        pk_measured_slope *out) {
  picket_options chosen = *options;
  chosen.count = 0;
  chosen.jobs = 1;
  bool done = false;
  pk_measured_slope slope = {.q = {NAN, NAN, NULL}, .way = PK_SLOPE_NONE};
  picket_status status = PICKET_OK;
  if (pk_measured_has_slope(question->what, question->structure)) {
    status = try_analytic(variants, values, i, question, &chosen, &slope, &done);
    slope.way = done ? PK_SLOPE_ANALYTIC : PK_SLOPE_NONE;
  }
  if (status == PICKET_OK) {
    *out = slope;
    out->q.note = isfinite(slope.q.value) ? NULL : out->reason;
  }
  return status;
}

/* --- Differences ------------------------------------------------------------------------------
 */

enum { POINTS = 4, MOST_VARIED = 64 };

/* Measures at `count` steps from the value; false in *good where one has no number. */
static picket_status measure_at(const pk_variants *variants, const double *values, int i,
                                const pk_question *question, const picket_options *options,
                                const pk_measure_memory *memory, const double *offset,
                                double value[POINTS], pk_measured_slope *out, bool *good) {
  double moved[MOST_VARIED];
  memcpy(moved, values, (size_t)variants->count * sizeof *values);
  *good = true;
  for (int n = 0; *good && n < POINTS; n++) {
    pk_problem *problem = NULL;
    pk_measure_memory own = *memory;
    pk_measurement m = {.q = {NAN, NAN, NULL}};
    moved[i] = values[i] + offset[n];
    picket_status status = variants->make(variants->user, moved, &problem);
    if (status == PICKET_OK) {
      out->solves++;
      status = pk_measure(problem, question, options, &own, &m);
    } else if (status == PICKET_ERROR_INPUT) {
      pk_measurement_refuse(&m, "%s", picket_context_message(variants->context));
      pk_message_clear(variants->context);
      status = PICKET_OK;
    }
    pk_problem_free(problem);
    if (status != PICKET_OK) {
      return status;
    }
    value[n] = m.q.value;
    *good = isfinite(m.q.value);
    if (!*good) {
      refuse(out, m.reason);
    }
  }
  return PICKET_OK;
}

static void take_difference(const double f[POINTS], double h, int side, pk_measured_slope *out) {
  double first, value;
  if (side == 0) { /* at -2, -1, 1, 2 */
    first = (f[2] - f[1]) / (2 * h);
    value = (4 * first - (f[3] - f[0]) / (4 * h)) / 3;
  } else { /* at 0, 1, 2, 3 */
    first = (-3 * f[0] + 4 * f[1] - f[2]) / (2 * side * h);
    value = (-11 * f[0] + 18 * f[1] - 9 * f[2] + 2 * f[3]) / (6 * side * h);
  }
  out->q = (picket_quantity){value, fabs(value - first), NULL};
  out->reason[0] = '\0';
}

static picket_status difference(const pk_variants *variants, const double *values, int i,
                                const pk_question *question, const picket_options *options,
                                const pk_measure_memory *memory, pk_measured_slope *out) {
  double h = DIFFERENCE_STEP * pk_vary_size(variants->paths[i], values[i]);
  bool temperature = strcmp(variants->paths[i], "temperature_c") == 0;
  bool broken = temperature && fabs(values[i] - PK_BREAK_C) <= 2 * h;
  int own_side = values[i] >= PK_BREAK_C ? 1 : -1;
  const int sides[3] = {0, 1, -1};
  for (int s = 0; s < 3; s++) {
    int side = sides[s];
    double f[POINTS] = {0};
    double offset[POINTS] = {-2 * h, -h, h, 2 * h};
    bool good = false;
    if (broken && side != own_side) {
      continue;
    }
    for (int n = 0; side != 0 && n < POINTS; n++) {
      offset[n] = n * side * h;
    }
    picket_status status =
        measure_at(variants, values, i, question, options, memory, offset, f, out, &good);
    if (status != PICKET_OK) {
      return status;
    }
    if (good) {
      out->way = PK_SLOPE_DIFFERENCE;
      take_difference(f, h, side, out);
      return PICKET_OK;
    }
  }
  return PICKET_OK;
}

picket_status pk_measure_slope(const pk_variants *variants, const double *values, int i,
                               const pk_question *question, const picket_options *options,
                               const pk_measure_memory *memory, pk_measured_slope *out) {
  picket_options chosen = *options;
  chosen.count = 0;
  chosen.jobs = 1;
  pk_measured_slope slope;
  picket_status status = pk_measure_slope_analytic(variants, values, i, question, &chosen, &slope);
  if (status == PICKET_OK && slope.way == PK_SLOPE_NONE) {
    status = difference(variants, values, i, question, &chosen, memory, &slope);
  }
  if (status == PICKET_OK) {
    *out = slope;
    out->q.note = isfinite(slope.q.value) ? NULL : out->reason;
  }
  return status;
}
