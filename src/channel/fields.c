/* See fields.h. With z' = z - z0, E(z) = Σ_m e_m exp(iβ_m z'), E_z = i e_z; k0 h = -i ∇×E:
 *   h_x = (Ce)_x/k0, h_y = (Ce)_y/k0, h_z = -i (Ce)_z/k0. */
#include "channel/fields.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

picket_status pk_channel_fields_create(const pk_channel *c, pk_channel_fields *out) {
  picket_context *context = c->context;
  pk_channel_fields f = {.context = context, .nx = c->nx, .ny = c->ny, .mx = c->mx, .my = c->my};
  f.ex = PK_NEW(context, c->mx * c->ny, double complex);
  f.ey = PK_NEW(context, c->nx * c->my, double complex);
  f.ez = PK_NEW(context, c->nx * c->ny, double complex);
  f.hx = PK_NEW(context, c->nx * c->my, double complex);
  f.hy = PK_NEW(context, c->mx * c->ny, double complex);
  f.hz = PK_NEW(context, c->mx * c->my, double complex);
  f.work = PK_NEW(
      context, c->n > (int64_t)c->curl_count * c->count ? c->n : (int64_t)c->curl_count * c->count,
      double complex);
  f.wave = PK_NEW(context, c->count, double complex);
  if (!f.ex || !f.ey || !f.ez || !f.hx || !f.hy || !f.hz || !f.work || !f.wave) {
    pk_channel_fields_clear(&f);
    return PICKET_ERROR_MEMORY;
  }
  *out = f;
  return PICKET_OK;
}

void pk_channel_fields_clear(pk_channel_fields *f) {
  if (f->context) {
    pk_free(f->context, f->ex);
    pk_free(f->context, f->ey);
    pk_free(f->context, f->ez);
    pk_free(f->context, f->hx);
    pk_free(f->context, f->hy);
    pk_free(f->context, f->hz);
    pk_free(f->context, f->work);
    pk_free(f->context, f->wave);
  }
  memset(f, 0, sizeof *f);
}

/* Sums of harmonics at `count` places, times a factor. */
static void sum_waves(const pk_channel *c, const pk_channel_fields *f, int count,
                      double complex factor, const double complex *harmonics, double complex *out) {
  for (int p = 0; p < count; p++) {
    double complex sum = 0;
    for (int h = 0; h < c->count; h++) {
      sum += harmonics[(int64_t)p * c->count + h] * f->wave[h];
    }
    out[p] = factor * sum;
  }
}

static int class_at(const pk_channel *c, double z) {
  double offset = fmod(z - c->from[0], c->pitch);
  double at = c->from[0] + (offset < 0 ? offset + c->pitch : offset);
  int slice = 0;
  while (slice + 1 < c->slices && at >= c->from[slice + 1]) {
    slice++;
  }
  return c->class_of[slice];
}

/* D_z = [[1/ε]]⁻¹ e_z, harmonics into f->work. */
static void flux(const pk_channel *c, const double complex *e, const pk_channel_fields *f) {
  for (int p = 0; p < c->nx * c->ny; p++) {
    const pk_block *block = &c->block[c->block_of[c->first_z + p]];
    const double complex *from = e + (int64_t)(c->first_z + p) * c->count;
    double complex *to = f->work + (int64_t)p * c->count;
    for (int r = 0; r < c->count; r++) {
      to[r] = block->varied ? 0 : block->scalar * from[r];
      for (int h = 0; block->varied && h < c->count; h++) {
        to[r] += block->matrix[h * c->count + r] * from[h];
      }
    }
  }
}

void pk_channel_fields_at(const pk_channel *c, double complex k, double complex k0,
                          const double complex *e, double z, pk_channel_fields *f) {
  for (int h = 0; h < c->count; h++) {
    f->wave[h] = cexp(I * pk_channel_beta(c, k, h) * (z - c->origin));
  }
  sum_waves(c, f, c->mx * c->ny, 1, e, f->ex);
  sum_waves(c, f, c->nx * c->my, 1, e + (int64_t)c->first_y * c->count, f->ey);
  flux(c, e, f);
  sum_waves(c, f, c->nx * c->ny, I, f->work, f->ez);
  const double complex *permittivity = c->sites[class_at(c, z)].z;
  for (int p = 0; p < c->nx * c->ny; p++) {
    f->ez[p] /= permittivity[p];
  }
  pk_channel_curl(c, k, PK_CURL_WHOLE, e, f->work);
  int first_hy = c->nx * c->my, first_hz = first_hy + c->mx * c->ny;
  sum_waves(c, f, c->nx * c->my, 1 / k0, f->work, f->hx);
  sum_waves(c, f, c->mx * c->ny, 1 / k0, f->work + (int64_t)first_hy * c->count, f->hy);
  sum_waves(c, f, c->mx * c->my, -I / k0, f->work + (int64_t)first_hz * c->count, f->hz);
}

double pk_channel_line_at(const pk_channel *c, pk_axis_name axis, int index) {
  const pk_axis *a = axis == PK_U ? &c->x : &c->y;
  return a->line[index + pk_axis_first_line(a)];
}

double pk_channel_middle_at(const pk_channel *c, pk_axis_name axis, int index) {
  const pk_axis *a = axis == PK_U ? &c->x : &c->y;
  return 0.5 * (a->line[index] + a->line[index + 1]);
}
