/* See section.h: making a section, its pattern and its values. */
#include "section/section.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "section/section_private.h"

/* --- Making ----------------------------------------------------------------------------------- */

static picket_status copy_axis(picket_context *context, const pk_axis *from, pk_axis *to) {
  pk_axis axis = *from;
  axis.line = pk_copy(context, from->line, (size_t)from->intervals + 1, sizeof *axis.line);
  axis.length = pk_copy(context, from->length, (size_t)from->intervals, sizeof *axis.length);
  *to = axis;
  return axis.line && axis.length ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static bool real_lengths(const pk_axis *axis) {
  for (int i = 0; i < axis->intervals; i++) {
    if (cimag(axis->length[i]) != 0) {
      return false;
    }
  }
  return true;
}

static picket_status take_widths(pk_section *s, const pk_axis *axis, int n, double **width,
                                 double complex **dual) {
  *width = PK_NEW(s->context, n, double);
  *dual = PK_NEW(s->context, n, double complex);
  if (!*width || !*dual) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < n; i++) {
    double low, high;
    pk_axis_dual(axis, i + pk_axis_first_line(axis), &low, &high, &(*dual)[i]);
    (*width)[i] = high - low;
  }
  return PICKET_OK;
}

/* g = 1 + x̃ curvature, with x̃ = x outside absorbing layers. */
static picket_status take_metric(pk_section *s) {
  const pk_axis *axis = &s->x;
  s->metric_line = PK_NEW(s->context, s->nx, double complex);
  s->metric_middle = PK_NEW(s->context, s->mx, double complex);
  if (!s->metric_line || !s->metric_middle) {
    return PICKET_ERROR_MEMORY;
  }
  double complex at = axis->line[0];
  double inside = axis->line[0] + axis->layer[0].thickness;
  for (int i = 0; i < s->mx; i++) {
    bool layered = 0.5 * (axis->line[i] + axis->line[i + 1]) < inside;
    at -= layered ? I * cimag(axis->length[i]) : 0;
  }
  for (int i = 0; i <= s->mx; i++) {
    int index = pk_line_index(axis, i);
    if (index >= 0) {
      s->metric_line[index] = 1 + s->curvature * at;
    }
    if (i < s->mx) {
      s->metric_middle[i] = 1 + s->curvature * (at + 0.5 * axis->length[i]);
      at += axis->length[i];
    }
  }
  return PICKET_OK;
}

double pk_section_plain_metric(const pk_section *s, double x) {
  return 1 + s->curvature * x;
}

static picket_status take_axes(pk_section *s, const pk_section_plan *plan) {
  picket_status status = copy_axis(s->context, plan->x, &s->x);
  if (status == PICKET_OK) {
    status = copy_axis(s->context, plan->y, &s->y);
  }
  if (status != PICKET_OK) {
    return status;
  }
  s->mx = s->x.intervals;
  s->my = s->y.intervals;
  s->nx = pk_axis_unknowns(&s->x);
  s->ny = pk_axis_unknowns(&s->y);
  s->hx_count = s->nx * s->my;
  s->n = s->hx_count + (int64_t)s->mx * s->ny;
  s->real_axes = real_lengths(&s->x) && real_lengths(&s->y);
  status = take_widths(s, &s->x, s->nx, &s->width_x, &s->dual_x);
  if (status == PICKET_OK) {
    status = take_widths(s, &s->y, s->ny, &s->width_y, &s->dual_y);
  }
  return status == PICKET_OK ? take_metric(s) : status;
}

static picket_status take_sites(pk_section *s, const pk_geometry *geometry) {
  s->mixture_x = PK_NEW(s->context, s->mx * s->ny, int);
  s->mixture_y = PK_NEW(s->context, s->nx * s->my, int);
  s->mixture_z = PK_NEW(s->context, s->nx * s->ny, int);
  s->mixed = PK_NEW(s->context, s->nx * s->ny, int);
  s->permittivity = PK_NEW(s->context, 3 * s->media, double complex);
  if (!s->mixture_x || !s->mixture_y || !s->mixture_z || !s->mixed || !s->permittivity) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = pk_mixtures_open(s->context, s->media, &s->mixtures);
  if (status == PICKET_OK) {
    status = pk_sites_create(s, &s->sites);
  }
  return status == PICKET_OK ? pk_section_average(s, geometry) : status;
}

static picket_status take_corners(pk_section *s, const pk_geometry *geometry) {
  pk_corner_list list;
  picket_status status = pk_corner_list_take(s->context, geometry, &s->x, &s->y, &list);
  if (status == PICKET_OK) {
    status = pk_corner_cache_create(s->context, &s->cures);
    s->corner = list.corner; /* taken over */
    s->corner_count = list.count;
  }
  return status;
}

/* --- Pattern ---------------------------------------------------------------------------------- */

typedef struct place_pair {
  int64_t column, row;
} place_pair;

static int compare_pairs(const void *a, const void *b) {
  const place_pair *p = a, *q = b;
  if (p->column != q->column) {
    return p->column < q->column ? -1 : 1;
  }
  return p->row < q->row ? -1 : p->row > q->row;
}

/* Sorted distinct pairs become compressed columns. */
static picket_status compress(pk_section *s, place_pair *pairs, int64_t count) {
  qsort(pairs, (size_t)count, sizeof *pairs, compare_pairs);
  int64_t kept = 0;
  for (int64_t k = 0; k < count; k++) {
    if (kept == 0 || compare_pairs(&pairs[k], &pairs[kept - 1]) != 0) {
      pairs[kept++] = pairs[k];
    }
  }
  s->pattern.n = s->n;
  s->pattern.start = PK_NEW(s->context, s->n + 1, int64_t);
  s->pattern.row = PK_NEW(s->context, kept, int64_t);
  if (!s->pattern.start || !s->pattern.row) {
    return PICKET_ERROR_MEMORY;
  }
  for (int64_t k = 0; k < kept; k++) {
    s->pattern.start[pairs[k].column + 1]++;
    s->pattern.row[k] = pairs[k].row;
  }
  for (int64_t c = 0; c < s->n; c++) {
    s->pattern.start[c + 1] += s->pattern.start[c];
  }
  return PICKET_OK;
}

/* Every place that a row may fill, its mirror image too, and the diagonal. */
static picket_status make_pattern(pk_section *s) {
  pk_row row;
  int64_t terms = 0, count = 0;
  for (int64_t r = 0; r < s->n; r++) {
    pk_section_row(s, 1, r, &row);
    terms += row.count;
  }
  place_pair *pairs = PK_NEW(s->context, 2 * terms + s->n, place_pair);
  if (!pairs) {
    return PICKET_ERROR_MEMORY;
  }
  for (int64_t r = 0; r < s->n; r++) {
    pk_section_row(s, 1, r, &row);
    pairs[count++] = (place_pair){r, r};
    for (int k = 0; k < row.count; k++) {
      pairs[count++] = (place_pair){row.column[k], r};
      pairs[count++] = (place_pair){r, row.column[k]};
    }
  }
  picket_status status = compress(s, pairs, count);
  pk_free(s->context, pairs);
  return status;
}

static void fill_ones(pk_section *s) {
  for (int p = 0; p < s->nx * s->ny; p++) {
    s->sites.z[p] = 1; /* a first pass over the rows divides by it */
  }
}

picket_status pk_section_create(picket_context *context, const pk_section_plan *plan,
                                pk_section **out) {
  pk_section *s = PK_NEW(context, 1, pk_section);
  if (!s) {
    return PICKET_ERROR_MEMORY;
  }
  s->context = pk_context_hold(context);
  s->media = plan->media;
  s->curvature = plan->curvature;
  assert(s->curvature == 0 || plan->x->low != PK_END_PERIODIC);
  assert(1 + s->curvature * plan->x->line[0] > 0);
  picket_status status = take_axes(s, plan);
  if (status == PICKET_OK) {
    status = take_sites(s, plan->geometry);
  }
  if (status == PICKET_OK && plan->correct_corners) {
    status = take_corners(s, plan->geometry);
  }
  if (status == PICKET_OK) {
    fill_ones(s);
    status = make_pattern(s);
  }
  if (status != PICKET_OK) {
    pk_section_free(s);
    return status;
  }
  *out = s;
  return PICKET_OK;
}

void pk_section_free(pk_section *s) {
  if (!s) {
    return;
  }
  picket_context *context = s->context;
  pk_axis_clear(context, &s->x);
  pk_axis_clear(context, &s->y);
  pk_free(context, s->dual_x);
  pk_free(context, s->dual_y);
  pk_free(context, s->width_x);
  pk_free(context, s->width_y);
  pk_free(context, s->metric_line);
  pk_free(context, s->metric_middle);
  pk_mixtures_close(&s->mixtures);
  pk_free(context, s->mixture_x);
  pk_free(context, s->mixture_y);
  pk_free(context, s->mixture_z);
  pk_free(context, s->mixed);
  pk_free(context, s->corner);
  pk_corner_cache_free(s->cures);
  pk_free(context, s->permittivity);
  pk_sites_free(s, &s->sites);
  pk_free(context, s->pattern.start);
  pk_free(context, s->pattern.row);
  pk_free(context, s);
  pk_context_release(context);
}

/* --- Numbers ---------------------------------------------------------------------------------- */

int64_t pk_section_size(const pk_section *s) {
  return s->n;
}

const pk_pattern *pk_section_pattern(const pk_section *s) {
  return &s->pattern;
}

double pk_section_curvature(const pk_section *s) {
  return s->curvature;
}

bool pk_section_is_real(const pk_section *s) {
  return s->is_real;
}

static bool among(const pk_section *s, const int *mixtures, int count, int medium) {
  for (int p = 0; p < count; p++) {
    const pk_mixture *mixture = &s->mixtures.list[mixtures[p]];
    for (int i = 0; i < mixture->count; i++) {
      if (mixture->medium[i] == medium) {
        return true;
      }
    }
  }
  return false;
}

bool pk_section_uses(const pk_section *s, int medium) {
  return among(s, s->mixture_z, s->nx * s->ny, medium) ||
         among(s, s->mixture_x, s->mx * s->ny, medium) ||
         among(s, s->mixture_y, s->nx * s->my, medium);
}

picket_status pk_section_load(pk_section *s, const double complex *permittivity) {
  picket_status status = pk_sites_fill(s, permittivity, &s->sites);
  if (status != PICKET_OK) {
    return status;
  }
  s->is_real = s->real_axes;
  for (int m = 0; m < 3 * s->media; m++) {
    s->permittivity[m] = permittivity[m];
    s->is_real = s->is_real && cimag(permittivity[m]) == 0;
  }
  return PICKET_OK;
}

static int64_t slot_of(const pk_pattern *pattern, int64_t row, int64_t column) {
  int64_t low = pattern->start[column], high = pattern->start[column + 1];
  while (high - low > 1) {
    int64_t middle = (low + high) / 2;
    *(pattern->row[middle] > row ? &high : &low) = middle;
  }
  assert(pattern->row[low] == row);
  return low;
}

void pk_section_values(const pk_section *s, double k0, double complex shift,
                       double complex *values) {
  memset(values, 0, (size_t)s->pattern.start[s->n] * sizeof *values);
  pk_row row;
  for (int64_t r = 0; r < s->n; r++) {
    pk_section_row(s, k0, r, &row);
    values[slot_of(&s->pattern, r, r)] -= shift;
    for (int k = 0; k < row.count; k++) {
      values[slot_of(&s->pattern, r, row.column[k])] += row.value[k];
    }
  }
}

void pk_section_values_real(const pk_section *s, double k0, double shift, double *values) {
  assert(s->is_real);
  memset(values, 0, (size_t)s->pattern.start[s->n] * sizeof *values);
  pk_row row;
  for (int64_t r = 0; r < s->n; r++) {
    pk_section_row(s, k0, r, &row);
    values[slot_of(&s->pattern, r, r)] -= shift;
    for (int k = 0; k < row.count; k++) {
      values[slot_of(&s->pattern, r, row.column[k])] += creal(row.value[k]);
    }
  }
}
