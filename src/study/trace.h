/* Which mode of one wavelength is which mode of the next: so that a label stays with a mode where
 * indices cross. */
#ifndef PK_STUDY_TRACE_H
#define PK_STUDY_TRACE_H

#include <picket/index.h>

#include "base/context.h"
#include "study/profile.h"

/* Gives the modes of a sweep, solved point by point, orders that follow them, and sorts each point
 * by them. Labels start at the longest wavelength, where the guide is most like a solid one, with
 * the orders the modes have there.
 *   points   [count] by rising wavelength; points without modes are stepped over
 *   profile  [count], of each point [mode_count] or null; sorted along
 * PICKET_ERROR_MEMORY; the orders are then unchanged from some point on. */
picket_status pk_trace(picket_context *context, int count, picket_index_point *points,
                       pk_profile *const *profile);

#endif
