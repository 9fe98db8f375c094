/* A point of an index sweep, with what a sweep must know of it, and its form as one line of text:
 * the same between processes and in a journal. */
#ifndef PK_STUDY_SWEEP_POINT_H
#define PK_STUDY_SWEEP_POINT_H

#include "study/profile.h"
#include "study/record.h"
#include "study/result.h"

typedef struct pk_sweep_point {
  picket_index_point point;
  picket_status status;  /* PICKET_OK, or why the point failed */
  const char *shortfall; /* of its accuracy; null if it was met */
  pk_profile *profile;   /* [modes of the point], by which they are followed; owned */
} pk_sweep_point;

void pk_sweep_point_write(const pk_sweep_point *point, pk_record *record);

/* Texts become the result's; the rest is the caller's (pk_sweep_point_clear).
 * PICKET_ERROR_INTERNAL if the line is not a point. */
picket_status pk_sweep_point_read(picket_result *result, const char *line, pk_sweep_point *out);

void pk_sweep_point_clear(picket_context *context, pk_sweep_point *point); /* accepts zeros */

#endif
