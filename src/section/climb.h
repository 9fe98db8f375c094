/* The highest point of a smooth function of a few variables, without derivatives. */
#ifndef PK_SECTION_CLIMB_H
#define PK_SECTION_CLIMB_H

enum { PK_CLIMB_VARIABLES = 3 };

typedef double (*pk_climb_height)(const double *at, void *user);

/* Climbs from `at` [count], which receives the summit; returns the height there.
 *   step  [count] size of the first strides; the summit is found to about 1e-5 of them */
double pk_climb(int count, double *at, const double *step, pk_climb_height height, void *user);

#endif
