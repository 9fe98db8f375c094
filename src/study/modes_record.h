/* A point of a study of a section as part of a line of text (record.h). */
#ifndef PK_STUDY_MODES_RECORD_H
#define PK_STUDY_MODES_RECORD_H

#include <picket/modes.h>

#include "study/record.h"
#include "study/result.h"

void pk_modes_record_write(const picket_modes_point *point, pk_record *record);

/* Into a point of zeros. Texts become the result's; the rest is the caller's
 * (pk_modes_point_clear), also after a failure or a line that is no point, which shows in the
 * reader. */
picket_status pk_modes_record_read(picket_result *result, pk_record_reader *reader,
                                   picket_modes_point *point);

#endif
