/* The first look at a cell at a wavelength: which modes there are, on a coarse grid with absorbing
 * sides, and how the sides of finer grids must be prepared for them. Modes are then followed from
 * there to other grids. */
#ifndef PK_STUDY_LOOK_H
#define PK_STUDY_LOOK_H

#include "study/follow.h"
#include "study/level.h"
#include "study/survey.h"

typedef struct pk_look {
  const pk_problem *problem;
  pk_polarization polarization;
  double k0;        /* 1/µm */
  pk_survey survey; /* after the look: sides prepared for the mode that reaches farthest */
  int count;
  pk_followed *mode;   /* [count] by rising order */
  double least_inside; /* part of the energy near the structure that a mode must have; 0: usual */
  bool lossless;       /* no medium absorbs; known once a grid was opened */
} pk_look;

/* Finds up to `wanted` modes; none is an outcome. PICKET_ERROR_RANGE where a material is not known,
 * PICKET_ERROR_UNSUPPORTED for a cell with a lateral shift. */
picket_status pk_look_take(const pk_problem *problem, pk_polarization polarization,
                           double wavelength_um, int wanted, double accuracy, pk_look *out);
void pk_look_clear(pk_look *look); /* accepts zeros */

/* Member m of the family of a base grid, its media loaded for the wavelength. */
picket_status pk_look_open(pk_look *look, const pk_cell_grid *base, int m, pk_level *out);

/* A mode on such a grid: the wave nearest to the one remembered. *same is false if it is another
 * mode. PICKET_ERROR_NUMERIC if there is no wave near; outputs are then untouched. */
picket_status pk_look_follow(const pk_look *look, pk_level *level, const pk_followed *mode,
                             pk_wave *wave, pk_character *character, bool *same);

/* What to ask of the character of a wave. */
pk_character_request pk_look_request(const pk_look *look);

#endif
