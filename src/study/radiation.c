/* See radiation.h. */
#include "study/radiation.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

enum { FARTHEST_ORDER = 30 };

static const double PI = 3.141592653589793238;

static picket_status add_row(picket_context *context, pk_radiation_table *table,
                             const pk_radiation *row) {
  if (table->count == table->capacity) {
    int capacity = 2 * table->capacity + 8;
    pk_radiation *grown =
        pk_regrow(context, table->row, (size_t)table->count, (size_t)capacity, sizeof *table->row);
    if (!grown) {
      return PICKET_ERROR_MEMORY;
    }
    table->row = grown;
    table->capacity = capacity;
  }
  table->row[table->count++] = *row;
  return PICKET_OK;
}

static void drop_mode(pk_radiation_table *table, int mode) {
  int kept = 0;
  for (int i = 0; i < table->count; i++) {
    if (table->row[i].mode != mode) {
      table->row[kept++] = table->row[i];
    }
  }
  table->count = kept;
}

/* (1/Λ) ∫ u exp(-i k z) dz on a line across the guide. */
static double complex harmonic_on(const pk_operator *op, int iv, double complex k, double pitch_um,
                                  const double complex *u) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  double complex sum = 0;
  for (int iu = 0; iu < nu; iu++) {
    double z, length;
    pk_operator_line(op, PK_U, iu, &z, &length);
    sum += length * cexp(-I * k * z) * u[(int64_t)iu * nv + iv];
  }
  return sum / pitch_um;
}

picket_status pk_radiation_take(picket_context *context, const pk_operator *op,
                                const pk_character_request *request, const pk_survey *survey,
                                const pk_wave *wave, double complex k, int mode,
                                pk_radiation_table *table) {
  drop_mode(table, mode);
  pk_power_window window = pk_power_window_of(op);
  picket_status status = PICKET_OK;
  for (int side = 0; survey->open && side < 2; side++) {
    double in_side = request->k0 * pk_survey_side_index(survey, side, request->k0);
    for (int m = -FARTHEST_ORDER; status == PICKET_OK && m <= FARTHEST_ORDER; m++) {
      double complex km = k + 2 * PI * m / request->pitch_um;
      if (fabs(creal(km)) >= in_side) {
        continue;
      }
      int line = side ? window.high : window.low;
      double complex a = harmonic_on(op, line, km, request->pitch_um, wave->right);
      double across = sqrt(in_side * in_side - creal(km) * creal(km));
      double permittivity = survey->polarization == PK_HY ? in_side * in_side : 1;
      pk_radiation row = {
          .mode = mode, .power = across * creal(a * conj(a)) / permittivity, .in_side = in_side};
      row.wave.order = m;
      row.wave.side = side ? PICKET_SIDE_HIGH : PICKET_SIDE_LOW;
      status = add_row(context, table, &row);
    }
  }
  return status;
}

int pk_radiation_count(const pk_radiation_table *table, int mode) {
  int count = 0;
  for (int i = 0; i < table->count; i++) {
    count += table->row[i].mode == mode;
  }
  return count;
}

bool pk_radiation_has_grating_order(const pk_radiation_table *table, int mode) {
  for (int i = 0; i < table->count; i++) {
    if (table->row[i].mode == mode && table->row[i].wave.order != 0) {
      return true;
    }
  }
  return false;
}

picket_status pk_radiation_fill(picket_context *context, const pk_radiation_table *table, int mode,
                                double k, double pitch_um, picket_bloch_mode *answer) {
  picket_radiated_order *orders =
      PK_NEW(context, pk_radiation_count(table, mode), picket_radiated_order);
  if (!orders) {
    return PICKET_ERROR_MEMORY;
  }
  double total = 0;
  int count = 0;
  for (int i = 0; i < table->count; i++) {
    total += table->row[i].mode == mode ? table->row[i].power : 0;
  }
  for (int i = 0; i < table->count; i++) {
    if (table->row[i].mode == mode) {
      const pk_radiation *row = &table->row[i];
      double sine = (k + 2 * PI * row->wave.order / pitch_um) / row->in_side;
      orders[count] = row->wave;
      /* An order that only just radiates on the last grid may not do so any more at this k. */
      orders[count].angle_rad = asin(fmax(-1, fmin(1, sine)));
      orders[count++].share = total > 0 ? table->row[i].power / total : 0;
    }
  }
  answer->radiated = orders;
  answer->radiated_count = count;
  return PICKET_OK;
}

void pk_radiation_clear(picket_context *context, pk_radiation_table *table) {
  pk_free(context, table->row);
  memset(table, 0, sizeof *table);
}
