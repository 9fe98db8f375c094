/* How values of a cell depend on the grid when the magnetic field is singular at corners (hy). */
#ifndef PK_STUDY_CORNER_LAW_H
#define PK_STUDY_CORNER_LAW_H

#include "study/survey.h"

/* The law of the family of a base grid: that of the survey, with the exponents of the cell's
 * corners where it has some, and without a bar, with the reason, where they cannot be corrected. */
picket_status pk_corner_law(const pk_survey *survey, const pk_cell_grid *base, pk_error_law *out);

#endif
