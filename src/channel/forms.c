/* See forms.h. How the mass moves with the media: e_x, e_y and the mixed term by [[dε]], e_z with
 * B = [[1/ε]] by d(B⁻¹) = B⁻¹ [[dε/ε²]] B⁻¹. */
#include "channel/forms.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "dense/dense.h"

/* Relative step of permittivities for the slopes of averages, which are smooth and differ from
 * straight lines by the square of it. */
static const double STEP = 1e-4;

/* --- Products --------------------------------------------------------------------------------- */

static void times(const pk_channel *c, double complex k, double complex k0_square, bool transposed,
                  const double complex *x, double complex *y) {
  memset(y, 0, (size_t)c->n * sizeof *y);
  pk_channel_curl_times(c, k, PK_CURL_WHOLE, PK_CURL_WHOLE, 1, x, y); /* is symmetric */
  pk_channel_mass_times(c, c->block, transposed, -k0_square, x, y);
}

void pk_channel_times(const pk_channel *c, double complex k, double complex k0_square,
                      const double complex *x, double complex *y) {
  times(c, k, k0_square, false, x, y);
}

void pk_channel_transposed_times(const pk_channel *c, double complex k, double complex k0_square,
                                 const double complex *x, double complex *y) {
  times(c, k, k0_square, true, x, y);
}

double complex pk_channel_mass_form(const pk_channel *c, const double complex *l,
                                    const double complex *r) {
  return pk_channel_block_form(c, c->block, l, r);
}

double complex pk_channel_form(const pk_channel *c, double complex k, double complex k0_square,
                               const double complex *l, const double complex *r) {
  return pk_channel_curl_form(c, k, PK_CURL_WHOLE, PK_CURL_WHOLE, l, r) -
         k0_square * pk_channel_mass_form(c, l, r);
}

double complex pk_channel_k_form(const pk_channel *c, double complex k, const double complex *l,
                                 const double complex *r) {
  return pk_channel_curl_form(c, k, PK_CURL_TURN, PK_CURL_WHOLE, l, r) +
         pk_channel_curl_form(c, k, PK_CURL_WHOLE, PK_CURL_TURN, l, r);
}

/* --- Media ------------------------------------------------------------------------------------ */

static void subtract(int count, double complex *a, const double complex *b) {
  for (int p = 0; p < count; p++) {
    a[p] = (a[p] - b[p]) / (2 * STEP);
  }
}

/* d(sites)/dt of a class for permittivities ε + t·direction, by a central difference. */
static picket_status class_slope(pk_channel *c, int class, const double complex *direction,
                                 double complex *moved, pk_sites *out) {
  pk_section *section = c->section[class];
  pk_sites side[2] = {{0}};
  picket_status status = PICKET_OK;
  for (int i = 0; i < 2 && status == PICKET_OK; i++) {
    for (int m = 0; m < 3 * c->media; m++) {
      moved[m] = c->permittivity[m] + (i == 0 ? STEP : -STEP) * direction[m];
    }
    status = pk_sites_create(section, &side[i]);
    if (status == PICKET_OK) {
      status = pk_sites_fill(section, moved, &side[i]);
    }
  }
  if (status == PICKET_OK) {
    subtract(c->mx * c->ny, side[0].x, side[1].x);
    subtract(c->nx * c->my, side[0].y, side[1].y);
    subtract(c->nx * c->ny, side[0].z, side[1].z);
    subtract(c->nx * c->ny, side[0].xy, side[1].xy);
    *out = side[0];
  } else {
    pk_sites_free(section, &side[0]);
  }
  pk_sites_free(section, &side[1]);
  return status;
}

static void free_slopes(pk_channel *c, pk_sites *slopes) {
  for (int k = 0; slopes && k < c->classes; k++) {
    pk_sites_free(c->section[k], &slopes[k]);
  }
  pk_free(c->context, slopes);
}

static picket_status site_slopes(pk_channel *c, const double complex *direction, pk_sites **out) {
  pk_sites *slopes = PK_NEW(c->context, c->classes, pk_sites);
  double complex *moved = PK_NEW(c->context, 3 * c->media, double complex);
  picket_status status = slopes && moved ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int k = 0; status == PICKET_OK && k < c->classes; k++) {
    status = class_slope(c, k, direction, moved, &slopes[k]);
  }
  pk_free(c->context, moved);
  if (status != PICKET_OK) {
    free_slopes(c, slopes);
    return status;
  }
  *out = slopes;
  return PICKET_OK;
}

/* B⁻¹ D B⁻¹ in the place of D. */
static void between(int n, const double complex *inverse, double complex *d, double complex *work) {
  pk_dense_times(n, n, n, 1, inverse, d, 0, work);
  pk_dense_times(n, n, n, 1, work, inverse, 0, d);
}

static picket_status slope_blocks(const pk_channel *c, const pk_sites *slopes, pk_block *block) {
  double complex *f = PK_NEW(c->context, 2 * c->classes, double complex);
  double complex *work = PK_NEW(c->context, c->count * c->count, double complex);
  picket_status status = f && work ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int b = 0; status == PICKET_OK && b < c->block_count; b++) {
    double complex *value = f + c->classes;
    pk_channel_site_values(c, slopes, block[b].site, f);
    pk_channel_site_values(c, c->sites, block[b].site, value);
    if (!block[b].varied) {
      block[b].scalar = f[0];
      continue;
    }
    for (int k = 0; block[b].inverse && k < c->classes; k++) {
      f[k] /= value[k] * value[k];
    }
    pk_channel_toeplitz(c, f, block[b].matrix);
    if (block[b].inverse) {
      between(c->count, c->block[b].matrix, block[b].matrix, work);
    }
  }
  pk_free(c->context, f);
  pk_free(c->context, work);
  return status;
}

picket_status pk_channel_media_form(pk_channel *c, double complex k0_square,
                                    const double complex *direction, const double complex *l,
                                    const double complex *r, double complex *out) {
  pk_block *block = NULL;
  pk_sites *slopes = NULL;
  picket_status status = site_slopes(c, direction, &slopes);
  if (status == PICKET_OK) {
    status = pk_blocks_create(c, &block);
  }
  if (status == PICKET_OK) {
    status = slope_blocks(c, slopes, block);
  }
  if (status == PICKET_OK) {
    *out = -k0_square * pk_channel_block_form(c, block, l, r);
  }
  pk_blocks_free(c, block);
  free_slopes(c, slopes);
  return status;
}

picket_status pk_channel_k0_form(pk_channel *c, double complex k0, const double complex *slope,
                                 const double complex *l, const double complex *r,
                                 double complex *out) {
  double complex dispersion = 0;
  picket_status status =
      slope ? pk_channel_media_form(c, k0 * k0, slope, l, r, &dispersion) : PICKET_OK;
  if (status == PICKET_OK) {
    *out = -2 * k0 * pk_channel_mass_form(c, l, r) + dispersion / k0;
  }
  return status;
}

/* The direction is the permittivity of the medium itself, so that the step is relative. */
picket_status pk_channel_pulls(pk_channel *c, double complex k0_square, const double complex *l,
                               const double complex *r, double complex *pulls) {
  double complex *direction = PK_NEW(c->context, 3 * c->media, double complex);
  picket_status status = direction ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int m = 0; status == PICKET_OK && m < c->media; m++) {
    double complex change = 0;
    memset(direction, 0, (size_t)(3 * c->media) * sizeof *direction);
    for (int i = 0; i < 3; i++) {
      direction[i * c->media + m] = cabs(c->permittivity[m]);
    }
    if (pk_channel_uses(c, m)) {
      status = pk_channel_media_form(c, k0_square, direction, l, r, &change);
    }
    pulls[m] = change / cabs(c->permittivity[m]);
  }
  pk_free(c->context, direction);
  return status;
}

/* --- Looks ------------------------------------------------------------------------------------ */

/* Σ area × Re eᴴ B e over sites from `first` to `end`. */
static double energy(const pk_channel *c, int first, int end, const double complex *e) {
  double sum = 0;
  for (int s = first; s < end; s++) {
    const pk_block *block = &c->block[c->block_of[s]];
    const double complex *at = e + (int64_t)s * c->count;
    double complex part = 0;
    for (int h = 0; h < c->count; h++) {
      for (int m = 0; block->varied && m < c->count; m++) {
        part += conj(at[m]) * block->matrix[h * c->count + m] * at[h];
      }
      part += block->varied ? 0 : conj(at[h]) * block->scalar * at[h];
    }
    sum += c->area[s] * creal(part);
  }
  return sum;
}

void pk_channel_look(const pk_channel *c, const double complex *e, pk_channel_looks *out) {
  double x = energy(c, 0, c->first_y, e);
  double y = energy(c, c->first_y, c->first_z, e);
  double z = energy(c, c->first_z, c->site_count, e);
  out->ex_share = x / (x + y);
  out->ez_share = z / (x + y + z);
}

static double complex electric(const pk_channel *c, const double complex *a,
                               const double complex *b) {
  double complex sum = 0;
  for (int s = 0; s < c->site_count; s++) {
    const pk_block *block = &c->block[c->block_of[s]];
    int64_t at = (int64_t)s * c->count;
    for (int h = 0; h < c->count; h++) {
      double complex d = block->varied ? 0 : block->scalar * b[at + h];
      for (int m = 0; block->varied && m < c->count; m++) {
        d += block->matrix[m * c->count + h] * b[at + m];
      }
      sum += c->area[s] * conj(a[at + h]) * d;
    }
  }
  return sum;
}

double pk_channel_overlap(const pk_channel *c, const double complex *a, const double complex *b) {
  double size = cabs(electric(c, a, b));
  return size * size / (cabs(electric(c, a, a)) * cabs(electric(c, b, b)));
}
