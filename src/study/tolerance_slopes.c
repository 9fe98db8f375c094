/* Sensitivities to each number alone. The first derivative is measure.h's. The second comes from
 * first ones at H and H/2 on both sides where they are analytic, else from values there,
 *   D(h) = (f'(h) - f'(-h))/2h  or  (f(h) - 2 f(0) + f(-h))/h²,
 *   f'' ≈ (4 D(H/2) - D(H))/3   (L. F. Richardson 1911),
 * with |D(H/2) - f''| and the relative bar of what was differenced as its bar. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "study/tolerance_private.h"

enum { FIRST, OUTER_UP, OUTER_DOWN, INNER_UP, INNER_DOWN };

/* Smallest outer step, as a part of the size of the number: values repeat from grid to grid to some
 * 1e-6, which over the square of this is some 1e-2 of a second derivative of the size of the
 * quantity over the size of the number squared. */
static const double SMALLEST_STEP = 0.02;

static int *tasks_of(const pk_tolerance_study *s, int i) {
  return s->slope + (size_t)i * PK_SENSITIVITY_TASKS;
}

static bool is_analytic(const pk_tolerance_study *s) {
  return pk_measured_has_slope(s->direct->question.what, s->direct->question.structure);
}

/* The outer step: two standard deviations, or a quarter of a range, whose ends it stays within. */
static double outer_step(const pk_tolerance_study *s, int i, double *centre) {
  const pk_spread *spread = &s->block->spread[i];
  *centre = s->spreading->start[i];
  if (spread->normal) {
    double size = pk_vary_size(spread->vary, *centre);
    return fmax(2 * spread->sigma, SMALLEST_STEP * size);
  }
  double step = 0.25 * (spread->to - spread->from);
  *centre = fmin(fmax(*centre, spread->from + step), spread->to - step);
  return step;
}

picket_status pk_tolerance_ask_slopes(pk_tolerance_study *s) {
  int count = s->spreading->count;
  double values[PK_SPREADS];
  picket_status status = PICKET_OK;
  s->slope = PK_NEW(s->problem->context, (size_t)count * PK_SENSITIVITY_TASKS, int);
  if (!s->slope) {
    return PICKET_ERROR_MEMORY;
  }
  memcpy(values, s->spreading->start, (size_t)count * sizeof *values);
  for (int i = 0; i < count && status == PICKET_OK; i++) {
    double centre = 0, step = outer_step(s, i, &centre);
    const double at[PK_SENSITIVITY_TASKS] = {s->spreading->start[i], centre + step, centre - step,
                                             centre + 0.5 * step, centre - 0.5 * step};
    for (int k = 0; k < PK_SENSITIVITY_TASKS && status == PICKET_OK; k++) {
      values[i] = at[k];
      int slope = k == FIRST || is_analytic(s) ? i : PK_DIRECT_VALUE;
      status = pk_direct_ask(s->direct, values, slope, &tasks_of(s, i)[k]);
    }
    values[i] = s->spreading->start[i];
  }
  return status;
}

/* What can be differenced at the centre: `inner` and `outer` are D(H/2) and D(H). False where there
 * is but one difference. */
static bool differences(const pk_tolerance_study *s, int i, const double at[PK_SENSITIVITY_TASKS],
                        double *inner, double *outer) {
  double centre = 0, step = outer_step(s, i, &centre), middle = s->answer->nominal.value;
  double wide = at[OUTER_UP] + at[OUTER_DOWN], close = at[INNER_UP] + at[INNER_DOWN];
  if (is_analytic(s)) {
    *outer = (at[OUTER_UP] - at[OUTER_DOWN]) / (2 * step);
    *inner = (at[INNER_UP] - at[INNER_DOWN]) / step;
    return true;
  }
  if (centre == s->spreading->start[i]) {
    *outer = (wide - 2 * middle) / (step * step);
    *inner = 4 * (close - 2 * middle) / (step * step);
    return true;
  }
  *outer = *inner = (wide - close) / (0.75 * step * step);
  return false;
}

static picket_quantity second_of(const pk_tolerance_study *s, int i) {
  double at[PK_SENSITIVITY_TASKS] = {0}, off = 0, inner = NAN, outer = NAN;
  for (int k = OUTER_UP; k < PK_SENSITIVITY_TASKS; k++) {
    const pk_direct_answer *a = pk_tolerance_answered(s, tasks_of(s, i)[k]);
    if (!isfinite(a->q.value)) {
      return (picket_quantity){NAN, NAN, a->q.note};
    }
    at[k] = a->q.value;
    off = fmax(off, a->q.uncertainty / (is_analytic(s) ? fabs(a->q.value) : a->scale));
  }
  bool twice = differences(s, i, at, &inner, &outer);
  double value = (4 * inner - outer) / 3;
  double bar = twice ? fabs(inner - value) + off * fabs(value) : NAN;
  return (picket_quantity){value, isfinite(bar) ? bar : NAN,
                           isfinite(bar) ? NULL
                           : twice       ? "what was differenced has no bar"
                                   : "at the end of a range there is but one second difference"};
}

/* By what its path says it is. */
static const char *unit_of(const char *path) {
  if (strcmp(path, "temperature_c") == 0) {
    return "K";
  }
  return strstr(path, "_nm")    ? "nm"
         : strstr(path, "_um")  ? "um"
         : strstr(path, "_deg") ? "deg"
                                : "";
}

static picket_derivative_way way_of(pk_slope_way way) {
  return way == PK_SLOPE_ANALYTIC     ? PICKET_DERIVATIVE_ANALYTIC
         : way == PK_SLOPE_DIFFERENCE ? PICKET_DERIVATIVE_DIFFERENCE
                                      : PICKET_DERIVATIVE_NONE;
}

static picket_status fill(pk_tolerance_study *s, int i, picket_tolerance_sensitivity *out) {
  const pk_spread *spread = &s->block->spread[i];
  const pk_direct_answer *first = pk_tolerance_answered(s, tasks_of(s, i)[FIRST]);
  *out = (picket_tolerance_sensitivity){
      .vary = pk_result_text(s->result, spread->vary),
      .group = spread->group ? pk_result_text(s->result, spread->group) : NULL,
      .unit = unit_of(spread->vary),
      .nominal = s->spreading->start[i],
      .sigma = spread->sigma,
      .from = spread->from,
      .to = spread->to,
      .per_unit = first->q,
      .per_unit_way = way_of(first->way),
      .second_per_unit2 = second_of(s, i)};
  return out->vary && (out->group || !spread->group) ? PICKET_OK : PICKET_ERROR_MEMORY;
}

picket_status pk_tolerance_take_slopes(pk_tolerance_study *s) {
  int count = s->spreading->count;
  picket_status status = PICKET_OK;
  picket_tolerance_sensitivity *list =
      PK_NEW(s->problem->context, count, picket_tolerance_sensitivity);
  if (!list) {
    return PICKET_ERROR_MEMORY;
  }
  s->answer->sensitivities = list;
  s->answer->sensitivity_count = count;
  for (int i = 0; i < count && status == PICKET_OK; i++) {
    status = fill(s, i, &list[i]);
  }
  return status;
}
