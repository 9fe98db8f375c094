/* A measured table: natural cubic splines of n and κ over the wavelength.
 *
 * With M_i the second derivative at row i, h the width of interval i and s, t the distances to its
 * ends over h (s + t = 1),
 *   y = s y_i + t y_{i+1} + ((s³ - s) M_i + (t³ - t) M_{i+1}) h²/6,
 * M_0 = M_{count-1} = 0, the others from continuity of y' (a tridiagonal system). C. de Boor, "A
 * Practical Guide to Splines" (1978). */
#include <math.h>
#include <stdio.h>

#include "base/memory.h"
#include "material/material_private.h"

enum { LEAST_ROWS = 4, MOST_ROWS = 1000000 };

static picket_status check_row(pk_materials *materials, pk_place place, const char *name, int i,
                               const double *wavelength_um, double n, double k) {
  picket_context *context = materials->context;
  double here = wavelength_um[i], before = i > 0 ? wavelength_um[i - 1] : 0;
  if (!(here > before && here < INFINITY)) {
    return pk_fail_at(
        context, PICKET_ERROR_INPUT, place,
        "material '%s': wavelength in row %d of the table is %g nm, must be finite and "
        "above %g nm",
        name, i + 1, 1e3 * here, 1e3 * before);
  }
  if (!(n > 0 && n < INFINITY)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': n in row %d of the table is %g, must be above 0 and finite",
                      name, i + 1, n);
  }
  if (!(k >= 0 && k < INFINITY)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, place,
                      "material '%s': k in row %d of the table is %g, must be 0 or more and finite",
                      name, i + 1, k);
  }
  return PICKET_OK;
}

/* Second derivatives of the natural spline, by elimination down and back; work is [count]. */
static void bend(int count, const double *x, const double *y, double *work, double *m) {
  m[0] = work[0] = 0;
  for (int i = 1; i + 1 < count; i++) {
    double left = x[i] - x[i - 1], right = x[i + 1] - x[i];
    double rise = (y[i + 1] - y[i]) / right - (y[i] - y[i - 1]) / left;
    double pivot = 2 * (left + right) - left * work[i - 1];
    work[i] = right / pivot;
    m[i] = (6 * rise - left * m[i - 1]) / pivot;
  }
  m[count - 1] = 0;
  for (int i = count - 2; i > 0; i--) {
    m[i] -= work[i] * m[i + 1];
  }
}

static picket_status fill(picket_context *context, int count, const double *wavelength_um,
                          const double *n, const double *k, pk_table *table) {
  const size_t size = sizeof(double);
  table->count = count;
  table->wavelength_um = pk_copy(context, wavelength_um, (size_t)count, size);
  table->n = table->wavelength_um ? pk_copy(context, n, (size_t)count, size) : NULL;
  table->k = table->n ? pk_copy(context, k, (size_t)count, size) : NULL;
  table->n_bend = table->k ? PK_NEW(context, count, double) : NULL;
  table->k_bend = table->n_bend ? PK_NEW(context, count, double) : NULL;
  double *work = table->k_bend ? PK_NEW(context, count, double) : NULL;
  if (!work) {
    return PICKET_ERROR_MEMORY;
  }
  bend(count, wavelength_um, n, work, table->n_bend);
  bend(count, wavelength_um, k, work, table->k_bend);
  pk_free(context, work);
  return PICKET_OK;
}

picket_status pk_materials_add_table(pk_materials *materials, pk_place place, const char *name,
                                     int count, const double *wavelength_um, const double *n,
                                     const double *k) {
  if (count < LEAST_ROWS || count > MOST_ROWS) {
    return pk_fail_at(materials->context, PICKET_ERROR_INPUT, place,
                      "material '%s': the table has %d rows, must have %d to %d", name, count,
                      LEAST_ROWS, MOST_ROWS);
  }
  for (int i = 0; i < count; i++) {
    picket_status status = check_row(materials, place, name, i, wavelength_um, n[i], k[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  pk_material item;
  picket_status status = pk_material_begin(materials, place, name, &item);
  if (status != PICKET_OK) {
    return status;
  }
  item.model = PK_MODEL_TABLE;
  item.range.shortest_um = wavelength_um[0];
  item.range.longest_um = wavelength_um[count - 1];
  snprintf(item.brief, sizeof item.brief, "table");
  snprintf(item.source, sizeof item.source,
           "table of %d rows, cubic spline, %g to %g nm; no temperature model", count,
           1e3 * wavelength_um[0], 1e3 * wavelength_um[count - 1]);
  status = fill(materials->context, count, wavelength_um, n, k, &item.table);
  if (status != PICKET_OK) {
    pk_material_clear(materials->context, &item);
    return status;
  }
  return pk_materials_append(materials, &item);
}

/* The interval that holds x: i with x_i <= x < x_{i+1}, the outer ones at the ends. */
static int interval_of(const pk_table *table, double x) {
  int low = 0, high = table->count - 1;
  while (high - low > 1) {
    int middle = low + (high - low) / 2;
    *(table->wavelength_um[middle] <= x ? &low : &high) = middle;
  }
  return low;
}

static void spline(const pk_table *table, const double *y, const double *m, double x, double *value,
                   double *derivative) {
  int i = interval_of(table, x);
  double h = table->wavelength_um[i + 1] - table->wavelength_um[i];
  double t = (x - table->wavelength_um[i]) / h, s = 1 - t;
  *value =
      s * y[i] + t * y[i + 1] + ((s * s * s - s) * m[i] + (t * t * t - t) * m[i + 1]) * h * h / 6;
  *derivative =
      (y[i + 1] - y[i]) / h + ((1 - 3 * s * s) * m[i] + (3 * t * t - 1) * m[i + 1]) * h / 6;
}

picket_status pk_table_at(const pk_materials *materials, const pk_material *item,
                          double wavelength_um, pk_medium *out) {
  const pk_table *table = &item->table;
  double n, n_slope, k, k_slope;
  spline(table, table->n, table->n_bend, wavelength_um, &n, &n_slope);
  spline(table, table->k, table->k_bend, wavelength_um, &k, &k_slope);
  if (!(n > 0)) {
    return pk_fail_at(
        materials->context, PICKET_ERROR_RANGE, item->place,
        "material '%s' (table): the curve through the rows has n = %g at %g nm, must be "
        "above 0; more rows are needed there",
        item->name, n, 1e3 * wavelength_um);
  }
  if (k < 0) {
    k = 0;
    k_slope = 0;
  }
  *out = pk_medium_of_index((pk_index){n + I * k, wavelength_um * (n_slope + I * k_slope), 0});
  return PICKET_OK;
}
