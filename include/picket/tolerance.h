/* What the process does to a quantity: sensitivities, corners and yield. */
#ifndef PICKET_TOLERANCE_H
#define PICKET_TOLERANCE_H

#include <picket/aim.h>
#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* One number that spreads, and what the quantity makes of it. Numbers are in the unit of the file.
 */
typedef struct picket_tolerance_sensitivity {
  const char *vary;         /* dotted path of the number */
  const char *group;        /* null: it varies by itself */
  const char *unit;         /* of the number: "nm", "K", "deg" or "" */
  double nominal;           /* in the file */
  double sigma;             /* of a normal spread, else NaN */
  double from, to;          /* of a uniform spread, else NaN */
  picket_quantity per_unit; /* change of the quantity per unit of this number alone */
  picket_derivative_way per_unit_way;
  picket_quantity second_per_unit2; /* second derivative, per unit squared */
} picket_tolerance_sensitivity;

/* What is drawn once for a sample: a number by itself, or a group. Derivatives are those of the
 * surrogate at its centre, per unit of the deviate: one standard deviation of a normal spread, half
 * of the range of a uniform one. NaN if there is no surrogate. */
typedef struct picket_tolerance_deviate {
  const char *name; /* of the group, or the path of the number */
  int normal;       /* 1, or 0 for a uniform one */
  double first, second;
} picket_tolerance_deviate;

/* A number at a corner. */
typedef struct picket_tolerance_place {
  const char *vary;
  double value;
} picket_tolerance_place;

/* All spreads at an end at once: three standard deviations of the normal ones, the ends of the
 * ranges of the uniform ones. */
typedef struct picket_tolerance_corner {
  int place_count;
  const picket_tolerance_place *places; /* of every number that spreads */
  picket_quantity value;
  int direct; /* 1: by a direct solve; 0: by the surrogate, its error in the bar */
} picket_tolerance_corner;

/* A direct solve that the surrogate was held against, and had no part in. */
typedef struct picket_tolerance_check {
  picket_quantity direct;
  double surrogate;
  int near_limit; /* 1: chosen where the surrogate meets the limit, 0: at random */
} picket_tolerance_check;

/* How the samples were judged. */
typedef struct picket_tolerance_yield {
  picket_quantity value; /* share of the samples that meet the requirement; the bar reaches to the
                            farther end of the 95 % interval, and by the share of the undecided
                            samples beyond */
  double low, high;      /* 95 % interval for the count alone (E. B. Wilson, J. Am. Stat. Assoc. 22,
                            209, 1927), for what was left to chance */
  int samples, seed;
  int by_surrogate;  /* samples judged by the surrogate */
  int direct;        /* samples solved directly, too near to the limit for the surrogate */
  int estimated;     /* as near, but beyond `tolerance.direct_samples`: they count as the share of
                        those that were solved */
  int undecided;     /* nearer to the limit than the bar of the quantity itself: counted by their
                        value, and added to the bar of the yield */
  int without_value; /* solved, but without a number: counted as not met */
} picket_tolerance_yield;

typedef struct picket_tolerance_answer {
  const char *polarization; /* "ey", "hy", "te-like", "tm-like": static text */
  const char *quantity;
  const char *unit;         /* of the quantity; "" for a pure number */
  double at_um;             /* for a quantity at one wavelength, else NaN */
  double at_least, at_most; /* required; NaN where nothing is */
  picket_quantity nominal;  /* with every number as the file has it */
  int nominal_meets;        /* 1 or 0; -1 if it is not known within its bar */
  int sensitivity_count;
  const picket_tolerance_sensitivity *sensitivities; /* borrowed, as everything in the answer */
  int deviate_count;
  const picket_tolerance_deviate *deviates;
  int corner_count; /* all combinations up to 10 deviates, else the worst one by the surrogate */
  const picket_tolerance_corner *corners;
  const char *corner_convention; /* what the corners are, in words; static text */
  int worst;                     /* number of the worst corner; -1 if a corner has no value */
  picket_quantity worst_value;   /* the quantity there, by a direct solve */
  int check_count;
  const picket_tolerance_check *checks;
  double surrogate_error;     /* largest difference at the checks; NaN without a surrogate */
  const char *surrogate_note; /* why there is none, or null */
  picket_tolerance_yield yield;
  int solves; /* direct solves and passes for derivatives */
} picket_tolerance_answer;

/* Spreads the numbers of `tolerance.spreads` and says what becomes of `tolerance.require`: for each
 * polarization of `light` with a cell; with a section for each family of modes of
 * `tolerance.family` (te-like unless given).
 *
 * Sensitivities are derivatives of the discrete operator where there are such, else differences of
 * direct solves. The yield comes from samples drawn by a generator of our own from `seed`, judged
 * on a quadratic surrogate with cross terms, which is fitted to direct solves at designed points
 * and held against further ones at random and near the limit. Samples nearer to the limit than
 * twice the largest error seen are solved directly, up to `tolerance.direct_samples`. Numbers
 * depend neither on options->jobs nor on what a journal held.
 *
 *   journal_path  (resumable) file that keeps finished solves, made if it is not there; what is in
 *                 it is not solved again
 * PICKET_ERROR_INPUT without `tolerance`, or without the structure or the light that its quantity
 * needs; PICKET_ERROR_MEMORY, PICKET_ERROR_STOPPED, PICKET_ERROR_OUTPUT (the journal). Cost: for d
 * deviates of n numbers about 1 + 2d + d(d - 1) + 2^d (d <= 5) + 12 direct solves, and 5 n for the
 * sensitivities. */
PICKET_EXPORT picket_status picket_tolerance_find(picket_problem *problem,
                                                  const picket_options *options,
                                                  picket_result **out);
PICKET_EXPORT picket_status picket_tolerance_find_resumable(picket_problem *problem,
                                                            const picket_options *options,
                                                            const char *journal_path,
                                                            picket_result **out);

/* Polarizations in the result of picket_tolerance_find; 0 for another kind of result. */
PICKET_EXPORT int picket_tolerance_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_tolerance_get(const picket_result *result, int i,
                                                 picket_tolerance_answer *out);

#ifdef __cplusplus
}
#endif

#endif
