/* From values on exactly proportional grids to a value and a bar.
 *
 *   v(m) = X + Σ_j c_j m^(-p_j),   h = h_base / m
 *
 * with known exponents p_j (L. F. Richardson, Phil. Trans. R. Soc. A 210, 307 (1911); exponents of
 * singular solutions: see the corner room of operator). */
#ifndef PK_STUDY_EXTRAPOLATE_H
#define PK_STUDY_EXTRAPOLATE_H

#include <picket/quantity.h>

enum { PK_GRIDS = 6, PK_EXPONENTS = 5 };

/* How values of a quantity depend on the grid. */
typedef struct pk_error_law {
  int count; /* exponents that are known, rising */
  double exponent[PK_EXPONENTS];
  int smooth;   /* 1: interfaces lie on grid lines and the law holds; 0: interfaces cut
                   the cells and the values scatter about it */
  double share; /* scattered: relative error share·m^-share_order that no fit may show */
  double share_order;
  int curved;         /* scattered, of a section, where h³ takes part: 1; with corners that are not
                         corrected: 2 (extrapolate.c) */
  int corners;        /* 1: smooth, and the second exponent is 4 - 2α of the strongest corner */
  const char *no_bar; /* why no bar can be vouched for, or null; static text */
} pk_error_law;

/* X from the last `used` of `count` grids with the first used - 1 exponents of the law. */
double pk_extrapolated(const pk_error_law *law, int count, const int *m, const double *values,
                       int used);

/* Value and bar from `count` grids (2 to PK_GRIDS), m rising.
 * Smooth law: the value takes every grid; the bar is the largest difference to the values with the
 * last exponent left out, and without the coarsest grid, and never below rounding or, with two
 * exponents, a share of what the extrapolation adds to the finest grid, see SMOOTH_SHARE.
 * Corners (three or four grids; exponents 2, 4 - 2α, 4): also without the finest of four grids, and
 * never below a share of what the extrapolation adds to the finest grid, see CORNER_SHARE_THREE.
 * Scattered values: least squares with h² on all grids; the bar is the step from the finest grid to
 * the value, SCATTER_MISFIT times the largest misfit, and the law's share. Curved sections on more
 * than three grids: least squares with h² and h³, a part of that step, and what h³ changed. A NaN
 * among the values gives NaN. */
picket_quantity pk_extrapolate(const pk_error_law *law, int count, const int *m,
                               const double *values);

#endif
