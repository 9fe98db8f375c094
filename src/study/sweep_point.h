/* A point of an index sweep, with what a sweep must know of it, and its form as one line of text:
 * the same between processes and in a journal. */
#ifndef PK_STUDY_SWEEP_POINT_H
#define PK_STUDY_SWEEP_POINT_H

#include "study/record.h"
#include "study/result.h"

typedef struct pk_sweep_point {
  picket_index_point point;
  picket_status status;  /* PICKET_OK, or why the point failed */
  const char *shortfall; /* of its accuracy; null if it was met */
} pk_sweep_point;

void pk_sweep_point_write(const pk_sweep_point *point, pk_record *record);

/* Texts become the result's; what is in `out->point` is the caller's (pk_index_point_clear).
 * PICKET_ERROR_INTERNAL if the line is not a point. */
picket_status pk_sweep_point_read(picket_result *result, const char *line, pk_sweep_point *out);

#endif
