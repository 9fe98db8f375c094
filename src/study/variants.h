/* Variants of a problem: the same file with some of its numbers at other values. The studies that
 * move values (aim, tolerance) ask for them here; who reads the file makes them. */
#ifndef PK_STUDY_VARIANTS_H
#define PK_STUDY_VARIANTS_H

#include "study/derivative.h"
#include "study/problem.h"

typedef struct pk_variants {
  picket_context *context;
  int count;                /* varied numbers */
  const char *const *paths; /* [count] their dotted paths; borrowed */
  void *user;
  /* The problem with every varied number at its value, [count], in the units of the file; yours to
   * free. PICKET_ERROR_INPUT (message set) if the file would be wrong with them. */
  picket_status (*make)(void *user, const double *values, pk_problem **out);
} pk_variants;

/* What counts as the size of a number: itself, or, as a position or a temperature may be near zero
 * and has no size of its own then, what its unit makes of it. */
double pk_vary_size(const char *path, double value);

/* The step of a varied number with which the operator is differenced (see derivative.h). */
double pk_vary_step(const char *path, double value);

/* The same problem at four neighbouring values of number i around `centre`, `step` apart;
 * variation->problem is left alone. On failure nothing is left. */
picket_status pk_variants_around(const pk_variants *variants, const double *values, int i,
                                 double centre, double step, pk_variation *variation);
/* Frees the neighbours; accepts zeros. */
void pk_variants_forget(pk_variation *variation);

#endif
