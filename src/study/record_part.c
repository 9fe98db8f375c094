/* See record_part.h. A quantity: value, uncertainty, note. */
#include "study/record_part.h"

void pk_part_write_quantity(pk_record *record, const picket_quantity *quantity) {
  pk_record_number(record, quantity->value);
  pk_record_number(record, quantity->uncertainty);
  pk_record_text(record, quantity->note);
}

picket_status pk_part_read_text(picket_result *result, pk_record_reader *reader, const char **out) {
  char buffer[PK_RECORD_TEXT];
  const char *text = pk_record_read_text(reader, buffer);
  *out = text ? pk_result_text(result, text) : NULL;
  return text && !*out ? PICKET_ERROR_MEMORY : PICKET_OK;
}

picket_status pk_part_read_quantity(picket_result *result, pk_record_reader *reader,
                                    picket_quantity *out) {
  out->value = pk_record_read_number(reader);
  out->uncertainty = pk_record_read_number(reader);
  return pk_part_read_text(result, reader, &out->note);
}
