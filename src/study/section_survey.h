/* A first look at a section at a wavelength: its media, what is at its sides, its mirror planes,
 * and the base grids of its families of modes. */
#ifndef PK_STUDY_SECTION_SURVEY_H
#define PK_STUDY_SECTION_SURVEY_H

#include "grid/axis.h"
#include "study/extrapolate.h"
#include "study/problem.h"

/* Sides of the window: left, right, down, up. */
enum { PK_SIDES = 4 };

typedef struct pk_section_survey {
  const pk_problem *problem;     /* borrowed: its materials and temperature */
  const pk_section_block *block; /* borrowed: the plane that is looked at */
  double k0;                     /* 1/µm */
  int media;                     /* materials of the problem */
  double complex *permittivity;  /* [3][media]; 1 where the section does not use one */
  double complex *slope;         /* [3][media] k0 dε/dk0 */
  bool dispersive;
  double top;            /* highest index of the media */
  double side[PK_SIDES]; /* index that a wave has far out at a side: of the medium there, or of
                            the best guided mode of the films there */
  bool closed[2];        /* a window is given along x, y and nothing varies along it */
  double cut; /* highest index of the sides that are not closed: guided modes lie above */
  double low[2], high[2]; /* extent of the shapes, or the window if it is given */
  bool mirror[2];         /* there is a mirror plane across x, across y */
  double centre[2];       /* where */
  bool leaks[PK_SIDES];   /* sides that modes leak into */
  double edge[PK_SIDES];  /* where the medium of a leaking side begins */
} pk_section_survey;

/* `block` is the problem's section, or another plane across a guide (of a channel). */
picket_status pk_section_survey_take(const pk_problem *problem, const pk_section_block *block,
                                     double wavelength_um, pk_section_survey *out);
/* Sets the sides of the highest index apart: modes below it leak there. `cut` becomes that of the
 * other sides. False, and nothing done, if there is no such side with an edge. */
picket_status pk_section_survey_set_apart(pk_section_survey *survey, bool *done);

void pk_section_survey_clear(pk_section_survey *survey); /* accepts zeros */

/* What a base grid is laid for. */
typedef struct pk_section_wish {
  double index;    /* lowest index of the modes wanted: how far they reach */
  double reach;    /* distance of the walls from the shapes in decay lengths */
  double leaking;  /* index of the mode that the outer side of a bend is open for; 0: none */
  bool closed;     /* walls at the edges of leaking sides, not absorbing layers beyond them */
  double accuracy; /* of the absorbing layers */
  pk_end outer;    /* what stands in for infinity */
  pk_end plane[2]; /* what the mirror planes are, where there are any */
  double step;     /* largest spacing at the shapes besides; 0: as the wavelength wants */
} pk_section_wish;

picket_status pk_section_survey_lay(const pk_section_survey *survey, const pk_section_wish *wish,
                                    pk_axis *x, pk_axis *y);

/* n² of a mode above that of the surroundings below which its tails are not followed further. */
double pk_section_survey_least_depth(void);

/* How values depend on the grid. */
picket_status pk_section_survey_law(const pk_section_survey *survey, const pk_axis *x,
                                    const pk_axis *y, pk_error_law *out);

#endif
