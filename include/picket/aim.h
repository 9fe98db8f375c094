/* The dimension that meets a target: one number of the problem (or two, for two targets) is varied
 * until a quantity has the value wanted. */
#ifndef PICKET_AIM_H
#define PICKET_AIM_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* How a derivative was found. */
typedef enum picket_derivative_way {
  PICKET_DERIVATIVE_NONE = 0,
  PICKET_DERIVATIVE_ANALYTIC = 1,   /* of the discrete operator, without a further solve */
  PICKET_DERIVATIVE_DIFFERENCE = 2, /* from direct solves on both sides */
  PICKET_DERIVATIVE_SAMPLES = 3     /* from the direct solves of the search */
} picket_derivative_way;

/* The word of a way: "none", "analytic", "difference", "samples"; "unknown" for any other number.
 * Static text. */
PICKET_EXPORT const char *picket_derivative_way_name(picket_derivative_way way);

/* One varied number and its target. Values of the varied number are in the unit of the file. */
typedef struct picket_aim_part {
  const char *vary; /* dotted path of the number */
  double from, to;  /* its bounds */
  const char *quantity;
  const char *unit; /* of the quantity; "" for a pure number */
  double target;
  double at_um; /* for a quantity at one wavelength, else NaN */
  /* What was found. The bar is that of the quantity, with what is left to the target, over the
   * derivative. NaN with a note if there is no solution between the bounds. */
  picket_quantity value;
  picket_quantity achieved;   /* the quantity by a direct solve at `value` */
  picket_quantity derivative; /* of the quantity per unit of the number, at `value` */
  picket_derivative_way derivative_way;
  picket_quantity at_from, at_to; /* the quantity at the bounds, with one target; may be coarse */
  double snapped;                 /* value on the mask grid; NaN without a grid or for no length */
  picket_quantity snapped_achieved; /* the quantity there, by a direct solve */
} picket_aim_part;

typedef struct picket_aim_answer {
  const char *polarization;     /* "ey", "hy", "te-like", "tm-like": static text */
  int part_count;               /* 1 or 2 */
  const picket_aim_part *parts; /* borrowed from the result, as are the texts in it */
  int found;                    /* 1 if the targets are met between the bounds */
  const char *reason;           /* why not; null if found */
  int solves;                   /* direct solves of a quantity, those on the mask grid included */
  int derivative_passes;        /* passes over the grids for analytic derivatives */
  int unique; /* 1: the quantity is monotone over what was sampled between the bounds; 0: it meets
                 the target more than once; -1: not shown either way */
  const char *unique_basis;   /* how that was judged */
  double smallest_feature_um; /* of the structure at `value`; NaN if there is none */
  int respects_rules;         /* 1 or 0 against rules.smallest_feature_nm; -1 without one */
  int snapped;                /* 1 if there is a mask grid and a length to put on it */
  double snapped_smallest_feature_um;
  int snapped_respects_rules; /* as above, on the mask grid */
} picket_aim_answer;

/* Varies `aim.vary` between its bounds until `aim.quantity` meets `aim.target`: for each
 * polarization of `light` with a cell; with a section for each family of modes of `aim.family`
 * (te-like unless given). Newton's method with safeguards on a bracket, with analytic derivatives
 * of edges and Bloch indices. Modes are followed: a value from the other side of a stop band or of
 * another mode is refused. What is found is verified by a direct solve at options->accuracy, and
 * lies within half of that accuracy of the target.
 *
 * That there is no solution between the bounds is an outcome: the result is then partial, and holds
 * the values at both ends.
 *
 * PICKET_ERROR_INPUT without `aim`, or without the structure or the light that its quantity needs;
 * PICKET_ERROR_MEMORY, PICKET_ERROR_STOPPED. Cost: three to six direct solves. */
PICKET_EXPORT picket_status picket_aim_find(picket_problem *problem, const picket_options *options,
                                            picket_result **out);

/* Polarizations in the result of picket_aim_find; 0 for another kind of result. */
PICKET_EXPORT int picket_aim_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_aim_get(const picket_result *result, int i,
                                           picket_aim_answer *out);

#ifdef __cplusplus
}
#endif

#endif
