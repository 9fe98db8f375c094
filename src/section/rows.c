/* Rows of the matrix of a section, written as the chain of differences of section.h. */
#include <assert.h>

#include "section/section_private.h"

static void put(pk_row *row, int64_t column, double complex value) {
  assert(row->count < PK_ROW_TERMS);
  row->column[row->count] = column;
  row->value[row->count++] = value;
}

static void put_hx(const pk_section *s, pk_row *row, int i, int j, double complex v) {
  if (i >= 0 && j >= 0) {
    put(row, (int64_t)i * s->my + j, v);
  }
}

static void put_hy(const pk_section *s, pk_row *row, int i, int j, double complex v) {
  if (i >= 0 && j >= 0) {
    put(row, s->hx_count + (int64_t)i * s->ny + j, v);
  }
}

/* v g c at a node; c vanishes on electric walls (i or j is -1 there). */
static void put_gc(const pk_section *s, pk_row *row, int i, int j, double complex v) {
  if (i < 0 || j < 0) {
    return;
  }
  v *= s->metric_line[i] / s->sites.z[i * s->ny + j];
  put_hy(s, row, pk_interval_above(&s->x, i), j, v / s->dual_x[i]);
  put_hy(s, row, pk_interval_below(&s->x, i), j, -v / s->dual_x[i]);
  put_hx(s, row, i, pk_interval_above(&s->y, j), -v / s->dual_y[j]);
  put_hx(s, row, i, pk_interval_below(&s->y, j), v / s->dual_y[j]);
}

/* v q_x between the lines of x interval i, on y line j. */
static void put_qx(const pk_section *s, pk_row *row, double k0, int i, int j, double complex v) {
  if (i < 0) {
    return;
  }
  double complex slope = v / s->x.length[i];
  put_gc(s, row, pk_line_index(&s->x, i + 1), j, slope);
  put_gc(s, row, pk_line_index(&s->x, i), j, -slope);
  put_hy(s, row, i, j, v * k0 * k0 * s->metric_middle[i]);
}

static void put_qy(const pk_section *s, pk_row *row, double k0, int i, int j, double complex v) {
  if (j < 0) {
    return;
  }
  double complex slope = v / s->y.length[j];
  put_gc(s, row, i, pk_line_index(&s->y, j + 1), slope);
  put_gc(s, row, i, pk_line_index(&s->y, j), -slope);
  put_hx(s, row, i, j, -v * k0 * k0 * s->metric_line[i]);
}

/* v g h_x, 0 on an electric wall. */
static void put_ghx(const pk_section *s, pk_row *row, int i, int j, double complex v) {
  if (i >= 0) {
    put_hx(s, row, i, j, v * s->metric_line[i]);
  }
}

/* v g d in a cell. */
static void put_gd(const pk_section *s, pk_row *row, int i, int j, double complex v) {
  if (i < 0 || j < 0) {
    return;
  }
  double complex g = s->metric_middle[i];
  double complex sx = v * g / s->x.length[i], sy = v * g * g / s->y.length[j];
  put_ghx(s, row, pk_line_index(&s->x, i + 1), j, sx);
  put_ghx(s, row, pk_line_index(&s->x, i), j, -sx);
  put_hy(s, row, i, pk_line_index(&s->y, j + 1), sy);
  put_hy(s, row, i, pk_line_index(&s->y, j), -sy);
}

/* v times what g ε_xy at a node adds to D_y beside it: half a cell of the mean of E_x there. */
static void put_mixed_x(const pk_section *s, pk_row *row, double k0, int i, int j,
                        double complex v) {
  if (j < 0 || s->mixed[i * s->ny + j] < 0) {
    return;
  }
  double complex w = 0.25 * v * s->metric_line[i] * s->sites.xy[i * s->ny + j] / s->dual_x[i];
  for (int side = 0; side < 2; side++) {
    int k = side == 0 ? pk_interval_below(&s->x, i) : pk_interval_above(&s->x, i);
    if (k >= 0) {
      put_qx(s, row, k0, k, j, w * s->x.length[k]);
    }
  }
}

static void put_mixed_y(const pk_section *s, pk_row *row, double k0, int i, int j,
                        double complex v) {
  if (i < 0 || s->mixed[i * s->ny + j] < 0) {
    return;
  }
  double complex w = 0.25 * v * s->metric_line[i] * s->sites.xy[i * s->ny + j] / s->dual_y[j];
  for (int side = 0; side < 2; side++) {
    int k = side == 0 ? pk_interval_below(&s->y, j) : pk_interval_above(&s->y, j);
    if (k >= 0) {
      put_qy(s, row, k0, i, k, w * s->y.length[k]);
    }
  }
}

static void row_hx(const pk_section *s, double k0, int i, int j, pk_row *row) {
  put_gd(s, row, pk_interval_above(&s->x, i), j, 1 / s->dual_x[i]);
  put_gd(s, row, pk_interval_below(&s->x, i), j, -1 / s->dual_x[i]);
  put_qy(s, row, k0, i, j, -s->metric_line[i] * s->sites.y[i * s->my + j]);
  put_mixed_x(s, row, k0, i, pk_line_index(&s->y, j), -1);
  put_mixed_x(s, row, k0, i, pk_line_index(&s->y, j + 1), -1);
}

static void row_hy(const pk_section *s, double k0, int i, int j, pk_row *row) {
  put_gd(s, row, i, pk_interval_above(&s->y, j), 1 / s->dual_y[j]);
  put_gd(s, row, i, pk_interval_below(&s->y, j), -1 / s->dual_y[j]);
  put_qx(s, row, k0, i, j, s->metric_middle[i] * s->sites.x[i * s->ny + j]);
  put_mixed_y(s, row, k0, pk_line_index(&s->x, i), j, 1);
  put_mixed_y(s, row, k0, pk_line_index(&s->x, i + 1), j, 1);
}

void pk_section_row(const pk_section *s, double k0, int64_t r, pk_row *row) {
  row->count = 0;
  if (r < s->hx_count) {
    row_hx(s, k0, (int)r / s->my, (int)r % s->my, row);
  } else {
    int at = (int)(r - s->hx_count);
    row_hy(s, k0, at / s->ny, at % s->ny, row);
  }
}
