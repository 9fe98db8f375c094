/* A second-order surrogate of a quantity over the deviates t of its spreads,
 *
 *   f(t) = c + Σ g_i t_i + Σ q_ii t_i² + Σ_{i<j} q_ij t_i t_j,
 *
 * through its values at designed points: the centre, two points on each axis at ±a_i, and for each
 * pair of axes the points (a_i, a_j) and, with few axes, (-a_i, -a_j), which takes the cubic terms
 * out of q_ij. As many points as coefficients, or pairs of them: the coefficients are differences
 * (a composite design, Box & Wilson, J. R. Stat. Soc. B 13, 1, 1951). */
#ifndef PK_STUDY_QUADRATIC_H
#define PK_STUDY_QUADRATIC_H

#include "study/spread.h"

enum {
  PK_DESIGN_POINTS = 1 + 2 * PK_DEVIATES + PK_DEVIATES * (PK_DEVIATES - 1),
  PK_DESIGN_TWIN_AXES = 5 /* up to here pairs have two points: at most 20 of them */
};

typedef struct pk_quadratic {
  int axes;
  double constant;
  double linear[PK_DEVIATES];
  double square[PK_DEVIATES][PK_DEVIATES]; /* [i][i] q_ii, [i][j] with i < j q_ij */
} pk_quadratic;

/* Points of the design for so many axes. */
int pk_design_count(int axes);
/* Its point p: deviates [axes] with the axes' nodes [axes]. */
void pk_design_point(int axes, const double *node, int p, double *deviate);

/* From the values [pk_design_count(axes)] at the points of the design. */
void pk_quadratic_fit(int axes, const double *node, const double *value, pk_quadratic *out);

double pk_quadratic_at(const pk_quadratic *quadratic, const double *deviate);

#endif
