/* What the files of a measurement share: one per structure. */
#ifndef PK_STUDY_MEASURE_PRIVATE_H
#define PK_STUDY_MEASURE_PRIVATE_H

#include <picket/edges.h>
#include <picket/index.h>
#include <picket/modes.h>

#include "study/measure.h"
#include "study/result.h"

/* A problem with one wavelength (0: those it has) and one polarization (-1: those it has) of its
 * light. It borrows everything of the other: not to be freed. */
typedef struct pk_lit {
  pk_problem problem;
  double wavelength_um;
} pk_lit;
void pk_lit_make(const pk_problem *problem, double wavelength_um, int polarization, pk_lit *out);

/* No value, for this reason. */
void pk_measurement_refuse(pk_measurement *m, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

/* A value; whether it reached the accuracy asked of its scale. */
void pk_measurement_take(pk_measurement *m, picket_quantity q, double factor, double scale,
                         double accuracy);

/* Turns a failure that is an outcome into a refusal with the message, and PICKET_OK. */
picket_status pk_measurement_outcome(picket_context *context, picket_status status,
                                     pk_measurement *m);

/* The largest |dn/dT| of the materials that the structure uses, 1/K, at a wavelength. */
picket_status pk_measure_largest_rate(const pk_problem *problem, double wavelength_um,
                                      double *rate);

/* Of a cell or a channel. */
picket_status pk_measure_edges(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measurement *out);
picket_status pk_measure_bloch(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measure_memory *memory,
                               pk_measurement *out);

/* Edge drift, dn/dT and drift of a channel. */
picket_status pk_measure_channel_rate(const pk_problem *problem, const pk_question *question,
                                      const picket_options *options, pk_measure_memory *memory,
                                      pk_measurement *out);

/* How a derivative with respect to temperature is taken from values: on both sides, or at three
 * points on one side of the break of an index model. */
typedef struct pk_warm_points {
  int count;
  double at[3];     /* temperatures */
  double weight[3]; /* of the values, 1/K */
  double here[3];   /* of the values, for the one at the temperature itself */
} pk_warm_points;
pk_warm_points pk_warm_points_around(double temperature_c);

/* Of a section. */
picket_status pk_measure_section(const pk_problem *problem, const pk_question *question,
                                 const picket_options *options, pk_measure_memory *memory,
                                 pk_measurement *out);

/* The neighbours of a cell's problem in temperature, all on its side of a break of the index models
 * in use: copies and variation point into each other, not to be moved. */
typedef struct pk_warmed {
  pk_lit at;
  pk_lit near[PK_NEIGHBOURS];
  pk_variation variation;
} pk_warmed;
void pk_warm(const pk_problem *problem, double wavelength_um, int polarization, pk_warmed *out);

/* The temperature at which the two branches of silicon's index model (Li 1980) meet with a step:
 * 293 K. A difference must stay on one side. */
#define PK_BREAK_C 19.85

#endif
