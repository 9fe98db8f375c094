/* What the files of the tolerance study share. Each part asks for its direct solves (…_ask), and
 * when they are done makes its piece of the answer of them. */
#ifndef PK_STUDY_TOLERANCE_PRIVATE_H
#define PK_STUDY_TOLERANCE_PRIVATE_H

#include "study/direct.h"
#include "study/quadratic.h"
#include "study/tolerance.h"

enum {
  PK_TOLERANCE_RANDOM = 8, /* checks of the surrogate at random */
  PK_TOLERANCE_NEAR = 4,   /* and where it meets the limit */
  PK_TOLERANCE_CHECKS = PK_TOLERANCE_RANDOM + PK_TOLERANCE_NEAR,
  PK_TOLERANCE_LISTED = 10, /* deviates up to which every corner is listed, */
  PK_TOLERANCE_SOLVED = 5   /* and up to which every one is solved directly */
};

/* The study of one family. */
typedef struct pk_tolerance_study {
  const pk_problem *problem;
  const pk_tolerance_block *block;
  const pk_spreading *spreading;
  pk_direct *direct;
  picket_result *result;           /* for texts */
  picket_tolerance_answer *answer; /* the result's */
  int *design;                     /* [pk_design_count] tasks */
  double node[PK_DEVIATES];
  bool fitted; /* there is a surrogate */
  pk_quadratic surrogate;
  double bar;   /* the largest of the quantity's own where the surrogate was made and held */
  double trust; /* what the surrogate may be off: twice the largest error seen */
  int check[PK_TOLERANCE_CHECKS]; /* tasks */
  double check_at[PK_TOLERANCE_CHECKS][PK_DEVIATES];
  int checks;
  int *corner; /* tasks of the corners that are solved, -1 of the others; [corner_count] */
  int worst_task;
  unsigned worst_number; /* bit j: deviate j is at its upper end */
  int *slope;            /* [spreads][PK_SENSITIVITY_TASKS] tasks */
} pk_tolerance_study;

enum { PK_SENSITIVITY_TASKS = 5 };

/* Signed distance to the nearer limit, positive where the requirement is met. */
double pk_tolerance_margin(const pk_tolerance_block *block, double value);

/* Asks for the quantity at deviates. */
picket_status pk_tolerance_ask(pk_tolerance_study *s, const double *deviate, int *task);
const pk_direct_answer *pk_tolerance_answered(const pk_tolerance_study *s, int task);

/* tolerance_slopes.c */
picket_status pk_tolerance_ask_slopes(pk_tolerance_study *s);
picket_status pk_tolerance_take_slopes(pk_tolerance_study *s);

/* tolerance_corners.c: every corner that is solved; when there is a surrogate, the worst by it;
 * then all of them. */
picket_status pk_tolerance_ask_corners(pk_tolerance_study *s);
picket_status pk_tolerance_ask_worst(pk_tolerance_study *s);
picket_status pk_tolerance_take_corners(pk_tolerance_study *s);

/* tolerance_surrogate.c */
picket_status pk_tolerance_ask_design(pk_tolerance_study *s); /* with the checks at random */
picket_status pk_tolerance_fit(pk_tolerance_study *s); /* asks for the checks near the limit */
picket_status pk_tolerance_take_checks(pk_tolerance_study *s);

/* tolerance_yield.c: draws, asks for samples near the limit, solves them, and counts. */
picket_status pk_tolerance_count_yield(pk_tolerance_study *s);

/* The 95 % interval of a share p of `count` trials (E. B. Wilson 1927):
 *   (p + z²/2n ± z sqrt(p(1 - p)/n + z²/4n²))/(1 + z²/n), z the normal deviate of 97.5 %. */
void pk_wilson(double share, double count, double *low, double *high);

#endif
