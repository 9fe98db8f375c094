/* See sweep_point.h. In the line: wavelength, estimate, note, number of modes; of each mode its
 * order, regime, quantities, radiated orders and profile. */
#include "study/sweep_point.h"

#include <stddef.h>

#include "base/memory.h"
#include "study/index.h"
#include "study/record_part.h"

/* Far above what a point has: they only bound what a damaged line can ask for. */
enum { MOST_MODES = 10000, MOST_ORDERS = 10000 };

/* Every quantity of a mode. */
static const size_t QUANTITY[] = {
    offsetof(picket_bloch_mode, bloch_index),
    offsetof(picket_bloch_mode, group_index),
    offsetof(picket_bloch_mode, dispersion_ps_per_nm_km),
    offsetof(picket_bloch_mode, loss_db_per_cm),
    offsetof(picket_bloch_mode, loss_db_per_pitch),
    offsetof(picket_bloch_mode, absorption_db_per_cm),
    offsetof(picket_bloch_mode, radiation_db_per_cm),
    offsetof(picket_bloch_mode, radiation_per_mm),
    offsetof(picket_bloch_mode, upward_share),
};
enum { QUANTITIES = sizeof QUANTITY / sizeof QUANTITY[0] };

static void write_mode(const picket_bloch_mode *mode, pk_record *record) {
  pk_record_whole(record, mode->order);
  pk_record_whole(record, (int)mode->regime);
  for (int i = 0; i < QUANTITIES; i++) {
    pk_part_write_quantity(record, (const picket_quantity *)((const char *)mode + QUANTITY[i]));
  }
  pk_record_whole(record, mode->radiated_count);
  for (int i = 0; i < mode->radiated_count; i++) {
    pk_record_whole(record, mode->radiated[i].order);
    pk_record_whole(record, (int)mode->radiated[i].side);
    pk_record_number(record, mode->radiated[i].angle_rad);
    pk_record_number(record, mode->radiated[i].share);
  }
}

static void write_profile(const pk_profile *profile, pk_record *record) {
  pk_record_whole(record, profile->known);
  for (int p = 0; p < PK_PROFILE_PLACES && profile->known; p++) {
    pk_record_whole(record, profile->real[p]);
    pk_record_whole(record, profile->imaginary[p]);
  }
}

void pk_sweep_point_write(const pk_sweep_point *point, pk_record *record) {
  pk_record_number(record, point->point.wavelength_um);
  pk_record_number(record, point->point.estimate);
  pk_record_text(record, point->point.note);
  pk_record_whole(record, point->point.mode_count);
  for (int i = 0; i < point->point.mode_count; i++) {
    write_mode(&point->point.modes[i], record);
    write_profile(&point->profile[i], record);
  }
}

static picket_status read_radiated(picket_result *result, pk_record_reader *reader,
                                   picket_bloch_mode *mode) {
  int count = pk_record_read_whole(reader, 0, MOST_ORDERS);
  if (count == 0) {
    return PICKET_OK;
  }
  picket_radiated_order *radiated = PK_NEW(result->context, count, picket_radiated_order);
  if (!radiated) {
    return PICKET_ERROR_MEMORY;
  }
  mode->radiated = radiated;
  mode->radiated_count = count;
  for (int i = 0; i < count; i++) {
    radiated[i].order = pk_record_read_whole(reader, -MOST_ORDERS, MOST_ORDERS);
    radiated[i].side = (picket_side)pk_record_read_whole(reader, PICKET_SIDE_LOW, PICKET_SIDE_HIGH);
    radiated[i].angle_rad = pk_record_read_number(reader);
    radiated[i].share = pk_record_read_number(reader);
  }
  return PICKET_OK;
}

static picket_status read_mode(picket_result *result, pk_record_reader *reader,
                               picket_bloch_mode *mode) {
  mode->order = pk_record_read_whole(reader, 0, MOST_MODES);
  mode->regime =
      (picket_regime)pk_record_read_whole(reader, PICKET_REGIME_UNKNOWN, PICKET_REGIME_RADIATING);
  picket_status status = PICKET_OK;
  for (int i = 0; i < QUANTITIES && status == PICKET_OK; i++) {
    picket_quantity *q = (picket_quantity *)((char *)mode + QUANTITY[i]);
    status = pk_part_read_quantity(result, reader, q);
  }
  return status == PICKET_OK ? read_radiated(result, reader, mode) : status;
}

static void read_profile(pk_record_reader *reader, pk_profile *profile) {
  profile->known = pk_record_read_whole(reader, 0, 1);
  for (int p = 0; p < PK_PROFILE_PLACES && profile->known; p++) {
    profile->real[p] = pk_record_read_whole(reader, -PK_PROFILE_UNIT, PK_PROFILE_UNIT);
    profile->imaginary[p] = pk_record_read_whole(reader, -PK_PROFILE_UNIT, PK_PROFILE_UNIT);
  }
}

static picket_status read_modes(picket_result *result, pk_record_reader *reader,
                                pk_sweep_point *point) {
  int count = pk_record_read_whole(reader, 0, MOST_MODES);
  if (count == 0) {
    return PICKET_OK;
  }
  picket_bloch_mode *modes = PK_NEW(result->context, count, picket_bloch_mode);
  point->point.modes = modes;
  point->profile = PK_NEW(result->context, count, pk_profile);
  picket_status status = modes && point->profile ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; i < count && status == PICKET_OK && reader->good; i++) {
    point->point.mode_count = i + 1;
    status = read_mode(result, reader, &modes[i]);
    if (status == PICKET_OK) {
      read_profile(reader, &point->profile[i]);
    }
  }
  return status;
}

picket_status pk_sweep_point_read(picket_result *result, pk_record_reader *reader,
                                  pk_sweep_point *out) {
  out->point.wavelength_um = pk_record_read_number(reader);
  out->point.estimate = pk_record_read_number(reader);
  picket_status status = pk_part_read_text(result, reader, &out->point.note);
  return status == PICKET_OK ? read_modes(result, reader, out) : status;
}

void pk_sweep_point_clear(picket_context *context, pk_sweep_point *point) {
  pk_index_point_clear(context, &point->point);
  pk_free(context, point->profile);
  point->profile = NULL;
}
