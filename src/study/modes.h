/* One point of a study of a section: its modes at one wavelength. */
#ifndef PK_STUDY_MODES_H
#define PK_STUDY_MODES_H

#include <picket/modes.h>

#include "study/problem.h"
#include "study/result.h"

/* Fills a point of zeros; its arrays are owned by it (pk_modes_point_clear, also after a failure),
 * its texts by `result`, which is marked partial if a bar stays above the accuracy asked. Points
 * are independent of each other: any process may take any of them. PICKET_ERROR_RANGE where a
 * material is not known. */
picket_status pk_modes_point(const pk_problem *problem, double wavelength_um,
                             const picket_options *options, picket_modes_point *point,
                             picket_result *result);
void pk_modes_point_clear(picket_context *context, picket_modes_point *point);

#endif
