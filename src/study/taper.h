/* A row that changes tooth by tooth. See picket/taper.h for what is promised. */
#ifndef PK_STUDY_TAPER_H
#define PK_STUDY_TAPER_H

#include <picket/options.h>

#include "study/taper_cell.h"
#include "study/variants.h"

/* The numbers of `variants` are those of problem->taper, in their order.
 *   document  a fingerprint of the file, for journals
 *   journal   file of finished teeth; null: none
 * As pk_sweep_run. */
picket_status pk_study_taper(const pk_problem *problem, const pk_variants *variants,
                             uint64_t document, const picket_options *options, const char *journal,
                             picket_result **out);

/* Makes the answer of one polarization from its solved teeth, [problem->taper.teeth] of them
 * `stride` apart. Its arrays are the caller's (pk_taper_answer_clear), also after a failure. */
picket_status pk_taper_row(const pk_problem *problem, const pk_taper_cell *cells, int stride,
                           picket_result *result, picket_taper_answer *out);
void pk_taper_answer_clear(picket_context *context, picket_taper_answer *answer);

/* Teeth that a result holds on its way to answers; accepts null. */
void pk_taper_cells_free(picket_context *context, int count, pk_taper_cell *cells);

#endif
