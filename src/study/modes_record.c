/* See modes_record.h. In the line: wavelength, note, number of modes; of each mode what the table
 * below lists, and its confinement.
 *
 * A new quantity or number of a mode is one line of the table. */
#include "study/modes_record.h"

#include <assert.h>
#include <stddef.h>

#include "base/memory.h"
#include "study/record_part.h"

/* Far above what a point has: they only bound what a damaged line can ask for. */
enum { MOST_MODES = 10000, MOST_MATERIALS = 100000, MOST_WHOLE = 1000000000 };

typedef enum kind { WHOLE, NUMBER, QUANTITY } kind;
typedef int whole_type;
typedef double number_type;
typedef picket_quantity quantity_type;

/* Every member of picket_section_mode that is a whole number, a number or a quantity; arrays of one
 * of these too. */
#define MEMBERS(X)                                    \
  X(WHOLE, whole_type, order)                         \
  X(QUANTITY, quantity_type, index)                   \
  X(QUANTITY, quantity_type, group_index)             \
  X(QUANTITY, quantity_type, loss_db_per_cm)          \
  X(QUANTITY, quantity_type, bend_loss_db_per_90_deg) \
  X(QUANTITY, quantity_type, effective_area_um2)      \
  X(QUANTITY, quantity_type, diameters)               \
  X(NUMBER, number_type, ex_share)                    \
  X(WHOLE, whole_type, nodes_x)                       \
  X(WHOLE, whole_type, nodes_y)

typedef struct member {
  kind kind;
  size_t offset, size;
  int count; /* of an array; else 1 */
} member;

#define SIZE_OF(name) sizeof(((picket_section_mode *)0)->name)
#define AS_ROW(kind, type, name) \
  {kind, offsetof(picket_section_mode, name), sizeof(type), (int)(SIZE_OF(name) / sizeof(type))},
static const member MEMBER[] = {MEMBERS(AS_ROW)};
enum { MEMBER_COUNT = sizeof MEMBER / sizeof MEMBER[0] };

/* A member that is in no line of the table would be lost between processes: together with what is
 * written apart and the gaps of alignment (of 64-bit machines), the table must make up the struct.
 */
#define PLUS_SIZE(kind, type, name) +SIZE_OF(name)
enum {
  TABLED = 0 MEMBERS(PLUS_SIZE),
  APART = SIZE_OF(material_count) + SIZE_OF(confinement),
  GAPS = 8 /* after `order`, and after `material_count` */
};
static_assert(sizeof(void *) != 8 || TABLED + APART + GAPS == sizeof(picket_section_mode),
              "a member of picket_section_mode is missing in MEMBERS above");

static void write_member(const picket_section_mode *mode, const member *m, pk_record *record) {
  const char *at = (const char *)mode + m->offset;
  for (int i = 0; i < m->count; i++, at += m->size) {
    switch (m->kind) {
      case WHOLE: pk_record_whole(record, *(const int *)at); break;
      case NUMBER: pk_record_number(record, *(const double *)at); break;
      case QUANTITY: pk_part_write_quantity(record, (const picket_quantity *)at); break;
    }
  }
}

static picket_status read_member(picket_result *result, pk_record_reader *reader, const member *m,
                                 picket_section_mode *mode) {
  char *at = (char *)mode + m->offset;
  picket_status status = PICKET_OK;
  for (int i = 0; i < m->count && status == PICKET_OK; i++, at += m->size) {
    switch (m->kind) {
      case WHOLE: *(int *)at = pk_record_read_whole(reader, -MOST_WHOLE, MOST_WHOLE); break;
      case NUMBER: *(double *)at = pk_record_read_number(reader); break;
      case QUANTITY: status = pk_part_read_quantity(result, reader, (picket_quantity *)at); break;
    }
  }
  return status;
}

static void write_mode(const picket_section_mode *mode, pk_record *record) {
  for (int i = 0; i < MEMBER_COUNT; i++) {
    write_member(mode, &MEMBER[i], record);
  }
  pk_record_whole(record, mode->material_count);
  for (int i = 0; i < mode->material_count; i++) {
    pk_record_text(record, mode->confinement[i].material);
    pk_record_number(record, mode->confinement[i].share);
  }
}

static picket_status read_confinement(picket_result *result, pk_record_reader *reader,
                                      picket_section_mode *mode) {
  int count = pk_record_read_whole(reader, 0, MOST_MATERIALS);
  picket_confinement *list = PK_NEW(result->context, count, picket_confinement);
  if (!list) {
    return PICKET_ERROR_MEMORY;
  }
  mode->confinement = list;
  mode->material_count = count;
  picket_status status = PICKET_OK;
  for (int i = 0; i < count && status == PICKET_OK && reader->good; i++) {
    status = pk_part_read_text(result, reader, &list[i].material);
    list[i].share = pk_record_read_number(reader);
    reader->good = reader->good && list[i].material;
  }
  return status;
}

static picket_status read_mode(picket_result *result, pk_record_reader *reader,
                               picket_section_mode *mode) {
  picket_status status = PICKET_OK;
  for (int i = 0; i < MEMBER_COUNT && status == PICKET_OK; i++) {
    status = read_member(result, reader, &MEMBER[i], mode);
  }
  return status == PICKET_OK ? read_confinement(result, reader, mode) : status;
}

void pk_modes_record_write(const picket_modes_point *point, pk_record *record) {
  pk_record_number(record, point->wavelength_um);
  pk_record_text(record, point->note);
  pk_record_whole(record, point->mode_count);
  for (int i = 0; i < point->mode_count; i++) {
    write_mode(&point->modes[i], record);
  }
}

picket_status pk_modes_record_read(picket_result *result, pk_record_reader *reader,
                                   picket_modes_point *point) {
  point->wavelength_um = pk_record_read_number(reader);
  picket_status status = pk_part_read_text(result, reader, &point->note);
  int count = status == PICKET_OK ? pk_record_read_whole(reader, 0, MOST_MODES) : 0;
  if (count == 0) {
    return status;
  }
  picket_section_mode *modes = PK_NEW(result->context, count, picket_section_mode);
  status = modes ? PICKET_OK : PICKET_ERROR_MEMORY;
  point->modes = modes;
  for (int i = 0; i < count && status == PICKET_OK && reader->good; i++) {
    point->mode_count = i + 1;
    status = read_mode(result, reader, &modes[i]);
  }
  return status;
}
