/* See fields.h; the formulas stand in section.h. */
#include "section/fields.h"

#include <string.h>

#include "base/memory.h"
#include "section/section_private.h"

typedef struct maker {
  const pk_section *s;
  pk_section_fields *f;
  double k0;
  double complex beta;
} maker;

static double complex hx_at(const maker *k, int i, int j) {
  return i < 0 || j < 0 ? 0 : k->f->hx[i * k->s->my + j];
}

static double complex ghx_at(const maker *k, int i, int j) {
  return i < 0 ? 0 : k->s->metric_line[i] * hx_at(k, i, j);
}

static double complex hy_at(const maker *k, int i, int j) {
  return i < 0 || j < 0 ? 0 : k->f->hy[i * k->s->ny + j];
}

static double complex gez_at(const maker *k, int i, int j) {
  return i < 0 || j < 0 ? 0 : k->s->metric_line[i] * k->f->ez[i * k->s->ny + j];
}

/* E_z = i c / k0 */
static void make_ez(const maker *k) {
  const pk_section *s = k->s;
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; j < s->ny; j++) {
      double complex rot =
          (hy_at(k, pk_interval_above(&s->x, i), j) - hy_at(k, pk_interval_below(&s->x, i), j)) /
              s->dual_x[i] -
          (hx_at(k, i, pk_interval_above(&s->y, j)) - hx_at(k, i, pk_interval_below(&s->y, j))) /
              s->dual_y[j];
      k->f->ez[i * s->ny + j] = I * rot / (k->k0 * s->sites.z[i * s->ny + j]);
    }
  }
}

/* E_x = (k0 g h_y - i ∂x(g E_z))/β, E_y = -(k0 g h_x + i ∂y(g E_z))/β: with c = -i k0 E_z. */
static void make_transverse(const maker *k) {
  const pk_section *s = k->s;
  for (int i = 0; i < s->mx; i++) {
    int low = pk_line_index(&s->x, i), high = pk_line_index(&s->x, i + 1);
    for (int j = 0; j < s->ny; j++) {
      double complex slope = (gez_at(k, high, j) - gez_at(k, low, j)) / s->x.length[i];
      double complex h = s->metric_middle[i] * hy_at(k, i, j);
      k->f->ex[i * s->ny + j] = (k->k0 * h - I * slope) / k->beta;
    }
  }
  for (int j = 0; j < s->my; j++) {
    int low = pk_line_index(&s->y, j), high = pk_line_index(&s->y, j + 1);
    for (int i = 0; i < s->nx; i++) {
      double complex slope = (gez_at(k, i, high) - gez_at(k, i, low)) / s->y.length[j];
      k->f->ey[i * s->my + j] = -(k->k0 * ghx_at(k, i, j) + I * slope) / k->beta;
    }
  }
}

/* h_z = i d / β */
static void make_hz(const maker *k) {
  const pk_section *s = k->s;
  for (int i = 0; i < s->mx; i++) {
    int low = pk_line_index(&s->x, i), high = pk_line_index(&s->x, i + 1);
    for (int j = 0; j < s->my; j++) {
      double complex divergence =
          (ghx_at(k, high, j) - ghx_at(k, low, j)) / s->x.length[i] +
          s->metric_middle[i] *
              (hy_at(k, i, pk_line_index(&s->y, j + 1)) - hy_at(k, i, pk_line_index(&s->y, j))) /
              s->y.length[j];
      k->f->hz[i * s->my + j] = I * divergence / k->beta;
    }
  }
}

picket_status pk_section_fields_take(const pk_section *s, double k0, const pk_section_mode *mode,
                                     pk_section_fields *out) {
  pk_section_fields f = {.context = s->context, .nx = s->nx, .ny = s->ny, .mx = s->mx, .my = s->my};
  f.ex = PK_NEW(s->context, s->mx * s->ny, double complex);
  f.ey = PK_NEW(s->context, s->nx * s->my, double complex);
  f.ez = PK_NEW(s->context, s->nx * s->ny, double complex);
  f.hz = PK_NEW(s->context, s->mx * s->my, double complex);
  if (!f.ex || !f.ey || !f.ez || !f.hz) {
    pk_section_fields_clear(&f);
    return PICKET_ERROR_MEMORY;
  }
  f.hx = mode->h;
  f.hy = mode->h + s->hx_count;
  maker k = {s, &f, k0, mode->beta};
  make_ez(&k);
  make_transverse(&k);
  make_hz(&k);
  *out = f;
  return PICKET_OK;
}

void pk_section_fields_clear(pk_section_fields *f) {
  if (f->context) {
    pk_free(f->context, f->ex);
    pk_free(f->context, f->ey);
    pk_free(f->context, f->ez);
    pk_free(f->context, f->hz);
  }
  memset(f, 0, sizeof *f);
}

double pk_section_line_at(const pk_section *s, pk_axis_name axis, int index) {
  const pk_axis *a = axis == PK_U ? &s->x : &s->y;
  return a->line[index + pk_axis_first_line(a)];
}

double pk_section_middle_at(const pk_section *s, pk_axis_name axis, int index) {
  const pk_axis *a = axis == PK_U ? &s->x : &s->y;
  return 0.5 * (a->line[index] + a->line[index + 1]);
}
