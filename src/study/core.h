/* The core of a cell as films of layers, for the estimate. */
#ifndef PK_STUDY_CORE_H
#define PK_STUDY_CORE_H

#include "slab/slab.h"
#include "study/problem.h"

/* A strip of the cell parallel to the guide: what lies along one period in its middle. */
typedef struct pk_strip {
  double thickness_um;
  int count;            /* intervals */
  double *boundary_um;  /* [count + 1] */
  int *material;        /* [count] */
  double *permittivity; /* [count], of the last wavelength asked for */
} pk_strip;

typedef struct pk_core {
  const pk_problem *problem;
  pk_polarization polarization;
  int count;
  pk_strip *strips;               /* [count], by rising x */
  pk_slab_film *films;            /* [count] */
  int low_side, high_side;        /* materials below and above the core; -1 for a uniform cell */
  double shortest_um, longest_um; /* where all materials are known */
} pk_core;

/* Cuts a cell into strips. *applies is false, and the core empty, for a cell that is neither open
 * nor uniform or has no core of finite width. */
picket_status pk_core_create(const pk_problem *problem, pk_polarization polarization, pk_core *out,
                             bool *applies);
void pk_core_free(pk_core *core); /* accepts an empty one */

/* Index of the homogenised core at a wavelength; NaN where it is unknown or guides nothing. */
picket_status pk_core_index(pk_core *core, double wavelength_um, double *index);

#endif
