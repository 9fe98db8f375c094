/* What was understood of a problem, with derived values: nothing is solved on a grid. */
#ifndef PICKET_SUMMARY_H
#define PICKET_SUMMARY_H

#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Checks a problem and lists what was understood: for each material its source and its index at the
 * ends of the operating band, the cell with its duty, smallest feature, light lines and the
 * estimated centre of the first stop band. PICKET_ERROR_INPUT or PICKET_ERROR_RANGE with the
 * message of the first fault. */
PICKET_EXPORT picket_status picket_summary_find(picket_problem *problem, picket_result **out);

/* Line i of the summary for people, null past its end; null for another kind of result. Borrowed.
 */
PICKET_EXPORT const char *picket_summary_line(const picket_result *result, int i);

#ifdef __cplusplus
}
#endif

#endif
