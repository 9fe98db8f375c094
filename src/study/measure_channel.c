/* What temperature does to a channel. See measure.h.
 *
 * There is no analytic derivative: values are differenced over temperature (pk_warm_points_around).
 * Errors of the grids are nearly the same at all points and cancel; what does not shows when the
 * same is done on coarser grids, and that is the bar. */
#include <math.h>

#include "study/measure_private.h"

static const double COARSER = 10;    /* accuracy of the second difference, relative to the first */
static const double COARSEST = 1e-2; /* the least accuracy that a study takes */

static const double PM_PER_UM = 1e6, NM_PER_UM = 1e3;

/* The derivative of a quantity with respect to temperature; NaN with the reason in *m. */
static picket_status difference(const pk_problem *problem, const pk_question *question,
                                const picket_options *options, pk_measure_memory *memory,
                                double *rate, double *here, pk_measurement *m) {
  pk_warm_points points = pk_warm_points_around(problem->temperature_c);
  *rate = *here = 0;
  for (int i = 0; i < points.count; i++) {
    pk_problem moved = *problem;
    moved.temperature_c = points.at[i];
    picket_status status = pk_measure(&moved, question, options, memory, m);
    if (status != PICKET_OK) {
      return status;
    }
    *rate += points.weight[i] * m->q.value;
    *here += points.here[i] * m->q.value;
  }
  return PICKET_OK;
}

/* The group index, for the drift of a resonance. */
static picket_status group_index(const pk_problem *problem, const pk_question *question,
                                 const picket_options *options, pk_measure_memory *memory,
                                 pk_measurement *m) {
  pk_question group = *question;
  group.what = PK_MEASURED_GROUP_INDEX;
  return pk_measure(problem, &group, options, memory, m);
}

static picket_status take(const pk_problem *problem, const pk_question *question,
                          const picket_options *options, pk_measure_memory *memory,
                          picket_quantity rate, double here, pk_measurement *out) {
  double largest = 0, factor = 1;
  bool edge = question->what == PK_MEASURED_EDGE_DRIFT;
  pk_measurement group = {.q = {1, 0, NULL}};
  picket_status status =
      pk_measure_largest_rate(problem, edge ? here / NM_PER_UM : question->at_um, &largest);
  if (status == PICKET_OK && question->what == PK_MEASURED_DRIFT) {
    status = group_index(problem, question, options, memory, &group);
    factor = PM_PER_UM * question->at_um / group.q.value;
    rate.uncertainty += fabs(rate.value) * group.q.uncertainty / group.q.value;
  }
  if (status == PICKET_OK && isnan(group.q.value)) {
    pk_measurement_refuse(out, "%s", group.reason);
  } else if (status == PICKET_OK) {
    double scale = edge ? largest * here / 2 : factor * largest; /* see measure_cell.c */
    pk_measurement_take(out, rate, factor, scale, options->accuracy);
  }
  return status;
}

picket_status pk_measure_channel_rate(const pk_problem *problem, const pk_question *question,
                                      const picket_options *options, pk_measure_memory *memory,
                                      pk_measurement *out) {
  pk_question asked = *question;
  picket_options fine = *options, coarse = *options;
  coarse.accuracy = fmin(COARSER * options->accuracy, COARSEST);
  fine.accuracy = fmin(options->accuracy, coarse.accuracy / COARSER);
  asked.what =
      question->what == PK_MEASURED_EDGE_DRIFT ? PK_MEASURED_LONG : PK_MEASURED_BLOCH_INDEX;
  double rate = NAN, check = NAN, here = NAN, unused = NAN;
  pk_measurement m = {.q = {NAN, NAN, NULL}};
  picket_status status = difference(problem, &asked, &fine, memory, &rate, &here, &m);
  if (status == PICKET_OK && isfinite(rate)) {
    status = difference(problem, &asked, &coarse, memory, &check, &unused, &m);
  }
  if (status != PICKET_OK) {
    return status;
  }
  if (isnan(rate) || isnan(check)) {
    pk_measurement_refuse(out, "%s", m.reason[0] ? m.reason : "the mode was lost on the way");
    return PICKET_OK;
  }
  picket_quantity q = {rate, fabs(rate - check), NULL};
  return take(problem, question, options, memory, q, here, out);
}
