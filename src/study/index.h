/* One point of an index study: the Bloch modes of a cell at one wavelength. */
#ifndef PK_STUDY_INDEX_H
#define PK_STUDY_INDEX_H

#include <picket/index.h>

#include "study/problem.h"
#include "study/profile.h"
#include "study/result.h"

/* Fills a point (arrays inside are owned by it: pk_index_point_clear), and gives the profiles of
 * its modes, [mode_count], yours to free. Points are independent of each other: any process may
 * take any of them. `result` is marked partial if a bar stays above the accuracy asked.
 * PICKET_ERROR_RANGE where a material is not known. */
picket_status pk_index_point(const pk_problem *problem, pk_polarization polarization,
                             double wavelength_um, const picket_options *options,
                             picket_index_point *point, pk_profile **profile,
                             picket_result *result);
void pk_index_point_clear(picket_context *context, picket_index_point *point);

#endif
