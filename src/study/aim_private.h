/* What the files of the aim study share: measuring at values of the varied numbers, and the search
 * for one number and for two. */
#ifndef PK_STUDY_AIM_PRIVATE_H
#define PK_STUDY_AIM_PRIVATE_H

#include "study/aim.h"
#include "study/measure.h"

enum { PK_AIM_SAMPLES = 48 };

/* A measurement at a value of the varied number. */
typedef struct pk_aim_sample {
  double x;
  double accuracy; /* asked of it */
  pk_measurement m;
  double slope; /* analytic derivative there, NaN if not asked for */
  double slope_bar;
} pk_aim_sample;

/* The search of one family. */
typedef struct pk_aim_search {
  const pk_problem *problem;
  const pk_variants *variants;
  const picket_options *options;
  const double *start; /* [parts] values in the file */
  pk_family family;
  pk_question question[PK_AIM_PARTS];
  pk_measure_memory memory[PK_AIM_PARTS];
  int solves, passes;
  bool reached[PK_AIM_PARTS]; /* the bars of what was found are below the accuracy asked */
  picket_result *result;      /* for texts */
  picket_aim_answer *answer;
  picket_aim_part *part; /* [parts] of the answer */
  int count;             /* samples, of a search for one number */
  pk_aim_sample sample[PK_AIM_SAMPLES];
} pk_aim_search;

/* Measures quantity k with the numbers at `values`, at an accuracy. A problem that would be wrong
 * there is an outcome without a value. */
picket_status pk_aim_measure(pk_aim_search *s, int k, const double *values, double accuracy,
                             pk_measurement *out);

/* The tolerance within which a measurement meets its target. */
double pk_aim_tolerance(const pk_aim_search *s, const pk_measurement *m);

/* Searches; each fills value, achieved, derivative and ends of the parts, and `found`, `unique` and
 * the reasons of the answer. */
picket_status pk_aim_one(pk_aim_search *s);
picket_status pk_aim_two(pk_aim_search *s);

/* --- One number: samples (by their numbers) and the bracket --- */

bool pk_aim_is_good(const pk_aim_search *s, int i); /* it has a value */
double pk_aim_residual(const pk_aim_search *s, int i);
bool pk_aim_is_met(const pk_aim_search *s, int i);
bool pk_aim_straddles(const pk_aim_search *s, int i, int k); /* the target lies between them */
double pk_aim_width(const pk_aim_search *s);                 /* of the bounds */
double pk_aim_coarse_accuracy(const pk_aim_search *s);       /* of the ends */

/* Measures at x and keeps it; *out is its number. */
picket_status pk_aim_take(pk_aim_search *s, double x, double accuracy, int *out);

typedef struct pk_aim_bracket {
  bool found;
  int low, high; /* samples on both sides of the target, by rising x */
  int last;      /* of a walk that met nothing: the last sample with a value, -1 without a walk */
  double gap;    /* and where there was none */
} pk_aim_bracket;
/* Samples 0 and 1 are those at the bounds. */
picket_status pk_aim_find_bracket(pk_aim_search *s, pk_aim_bracket *out);

/* What was measured, with its note as a text of the result. */
picket_status pk_aim_quantity(pk_aim_search *s, const pk_measurement *m, picket_quantity *out);

/* No solution, for this reason. */
picket_status pk_aim_decline(pk_aim_search *s, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

#endif
