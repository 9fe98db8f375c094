/* A point of an index sweep with what its modes are followed by, and its part of a line of text:
 * the same between processes and in a journal. */
#ifndef PK_STUDY_SWEEP_POINT_H
#define PK_STUDY_SWEEP_POINT_H

#include "study/profile.h"
#include "study/record.h"
#include "study/result.h"

typedef struct pk_sweep_point {
  picket_index_point point;
  pk_profile *profile; /* [modes of the point]; owned */
} pk_sweep_point;

void pk_sweep_point_write(const pk_sweep_point *point, pk_record *record);

/* Into a point of zeros. Texts become the result's; the rest is the caller's
 * (pk_sweep_point_clear), also after a failure or a line that is no point, which shows in the
 * reader. */
picket_status pk_sweep_point_read(picket_result *result, pk_record_reader *reader,
                                  pk_sweep_point *out);

void pk_sweep_point_clear(picket_context *context, pk_sweep_point *point); /* accepts zeros */

#endif
