/* Parts that many lines have (record.h): quantities, and texts that become a result's own. */
#ifndef PK_STUDY_RECORD_PART_H
#define PK_STUDY_RECORD_PART_H

#include "study/record.h"
#include "study/result.h"

void pk_part_write_quantity(pk_record *record, const picket_quantity *quantity);

/* PICKET_ERROR_MEMORY; what is not as expected shows in the reader. */
picket_status pk_part_read_text(picket_result *result, pk_record_reader *reader, const char **out);
picket_status pk_part_read_quantity(picket_result *result, pk_record_reader *reader,
                                    picket_quantity *out);

#endif
