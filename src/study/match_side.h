/* One section of a match: which mode of it is meant, and its field on a member of its grids. */
#ifndef PK_STUDY_MATCH_SIDE_H
#define PK_STUDY_MATCH_SIDE_H

#include "section/unfold.h"
#include "study/section_look.h"

typedef struct pk_match_side {
  pk_section_survey survey;
  pk_section_families families;
  pk_section_family *family; /* of the mode meant; null: there is no such mode */
  int place;                 /* in it */
  int order;
  pk_axis x, y;               /* base grid */
  pk_axis closed_x, closed_y; /* without leaking sides; see section_member.h */
  pk_axis free_x, free_y;     /* the base grid within magnetic walls; without intervals if the file
                                 gives the window */
  pk_error_law law;
} pk_match_side;

/* Looks for mode `order` and lays its grids. The side must stay where it is.
 * pk_match_side_clear, after a failure too. */
picket_status pk_match_side_take(const pk_problem *problem, double wavelength_um, int order,
                                 double accuracy, pk_match_side *side);
void pk_match_side_clear(picket_context *context, pk_match_side *side); /* accepts zeros */

/* The mode's field on member m and its index. free_walls: within magnetic walls. */
picket_status pk_match_side_solve(const pk_match_side *side, int m, bool free_walls,
                                  pk_section_whole *out, double *index);

#endif
