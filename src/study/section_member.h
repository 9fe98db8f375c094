/* One member of a family of grids of a section: the section on it, and its modes. */
#ifndef PK_STUDY_SECTION_MEMBER_H
#define PK_STUDY_SECTION_MEMBER_H

#include "section/modes.h"
#include "study/section_survey.h"

enum { PK_FAMILY_MODES = 200 };

/* The section on member m of the family of base axes x and y, loaded; and bent (1/µm). */
picket_status pk_section_member_bent(const pk_section_survey *survey, const pk_axis *x,
                                     const pk_axis *y, int m, double curvature, pk_section **out);
picket_status pk_section_member_open(const pk_section_survey *survey, const pk_axis *x,
                                     const pk_axis *y, int m, pk_section **out);

/* The modes of highest index, whether guided or not. */
picket_status pk_section_member_uppermost(const pk_section_survey *survey, pk_section *section,
                                          int wanted, pk_section_mode *modes, int *found);

/* The first `count` guided modes of the section on member m, by falling index. Where sides leak,
 * those of the guide closed towards them (closed_x, closed_y; without intervals: no side leaks)
 * say what to look for. modes [count]; pk_section_modes_clear. */
picket_status pk_section_member_solve(const pk_section_survey *survey, const pk_axis *closed_x,
                                      const pk_axis *closed_y, int m, pk_section *section,
                                      int count, pk_section_mode *modes);

/* The same where the highest index is known roughly, which is faster. */
picket_status pk_section_member_solve_near(const pk_section_survey *survey, const pk_axis *closed_x,
                                           const pk_axis *closed_y, int m, pk_section *section,
                                           double highest, int count, pk_section_mode *modes);

#endif
