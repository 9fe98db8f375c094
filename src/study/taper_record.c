/* The line of a tooth (taper_cell.h). In it: polarization, pitch, feature, rule, quantities, band,
 * regime, next index, why there is no field; then of each grid its places, whether E jumps, and of
 * every place x, E, h and whether it is an interface. */
#include <math.h>
#include <stddef.h>

#include "base/memory.h"
#include "study/record_part.h"
#include "study/taper_cell.h"

enum { MOST_PLACES = 1000000 }; /* far above what a plane has: it bounds a damaged line */

static const size_t QUANTITY[] = {
    offsetof(pk_taper_cell, bloch_index),
    offsetof(pk_taper_cell, group_index),
    offsetof(pk_taper_cell, loss_db_per_cm),
    offsetof(pk_taper_cell, clearance_um),
};
enum { QUANTITIES = sizeof QUANTITY / sizeof QUANTITY[0] };

static void write_plane(const pk_plane *plane, pk_record *record) {
  pk_record_whole(record, plane->count);
  pk_record_whole(record, plane->jumps);
  for (int i = 0; i < plane->count; i++) {
    pk_record_number(record, plane->x[i]);
    pk_record_number(record, creal(plane->e[i]));
    pk_record_number(record, cimag(plane->e[i]));
    pk_record_number(record, creal(plane->h[i]));
    pk_record_number(record, cimag(plane->h[i]));
    pk_record_whole(record, plane->interface[i]);
  }
}

void pk_taper_cell_write(const pk_taper_cell *cell, pk_record *record) {
  pk_record_whole(record, (int)cell->polarization);
  pk_record_number(record, cell->pitch_um);
  pk_record_number(record, cell->smallest_um);
  pk_record_whole(record, cell->respects);
  for (int i = 0; i < QUANTITIES; i++) {
    pk_part_write_quantity(record, (const picket_quantity *)((const char *)cell + QUANTITY[i]));
  }
  pk_record_whole(record, cell->no_band);
  pk_record_whole(record, (int)cell->regime);
  pk_record_number(record, cell->next_index);
  pk_record_text(record, cell->why);
  for (int g = 0; g < PK_TAPER_GRIDS; g++) {
    write_plane(&cell->plane[g], record);
  }
}

static picket_status read_plane(picket_context *context, pk_record_reader *reader,
                                pk_plane *plane) {
  int count = pk_record_read_whole(reader, 0, MOST_PLACES);
  bool jumps = pk_record_read_whole(reader, 0, 1) != 0;
  if (count == 0 || !reader->good) {
    return PICKET_OK;
  }
  picket_status status = pk_plane_create(context, count, plane);
  for (int i = 0; i < count && status == PICKET_OK && reader->good; i++) {
    double part[5];
    for (int k = 0; k < 5; k++) {
      part[k] = pk_record_read_number(reader);
    }
    plane->x[i] = part[0];
    plane->e[i] = part[1] + I * part[2];
    plane->h[i] = part[3] + I * part[4];
    plane->interface[i] = pk_record_read_whole(reader, 0, 1) != 0;
    reader->good = reader->good && isfinite(part[0]) && (i == 0 || part[0] > plane->x[i - 1]);
  }
  plane->jumps = jumps;
  return status;
}

picket_status pk_taper_cell_read(picket_result *result, pk_record_reader *reader,
                                 pk_taper_cell *cell) {
  picket_status status = PICKET_OK;
  cell->polarization = (picket_polarization)pk_record_read_whole(reader, PICKET_EY, PICKET_TE_LIKE);
  cell->pitch_um = pk_record_read_number(reader);
  cell->smallest_um = pk_record_read_number(reader);
  cell->respects = pk_record_read_whole(reader, 0, 1) != 0;
  for (int i = 0; i < QUANTITIES && status == PICKET_OK; i++) {
    status = pk_part_read_quantity(result, reader, (picket_quantity *)((char *)cell + QUANTITY[i]));
  }
  cell->no_band = pk_record_read_whole(reader, 0, 1) != 0;
  cell->regime =
      (picket_regime)pk_record_read_whole(reader, PICKET_REGIME_UNKNOWN, PICKET_REGIME_RADIATING);
  cell->next_index = pk_record_read_number(reader);
  if (status == PICKET_OK) {
    status = pk_part_read_text(result, reader, &cell->why);
  }
  for (int g = 0; g < PK_TAPER_GRIDS && status == PICKET_OK; g++) {
    status = read_plane(result->context, reader, &cell->plane[g]);
  }
  return status;
}
