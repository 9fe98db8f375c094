/* See forms.h. How the mass moves with the media is differenced, block by block. */
#include "channel/forms.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

/* Four values about the media, relative step: what is left is the fourth power of it, while
 * corrections of corners, known to 5e-11, leave 5e-8 of their own slope. */
enum { NEIGHBOURS = 4 };
static const double STEP = 1e-3;
static const double AT[NEIGHBOURS] = {-2, -1, 1, 2};
static const double WEIGHT[NEIGHBOURS] = {1.0 / 12, -8.0 / 12, 8.0 / 12, -1.0 / 12};

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

/* Adds factor × a block to another. */
static void add_blocks(const pk_channel *c, double factor, const pk_block *from, pk_block *to) {
  for (int b = 0; b < c->block_count; b++) {
    to[b].scalar += factor * from[b].scalar;
    for (int i = 0; to[b].varied && i < c->count * c->count; i++) {
      to[b].matrix[i] += factor * from[b].matrix[i];
    }
  }
}

/* The mass for permittivities ε + step × direction, in blocks of its own. */
static picket_status mass_at(pk_channel *c, double step, const double complex *direction,
                             double complex *moved, pk_sites *sites, pk_block *block) {
  for (int m = 0; m < 3 * c->media; m++) {
    moved[m] = c->permittivity[m] + step * direction[m];
  }
  picket_status status = PICKET_OK;
  for (int k = 0; status == PICKET_OK && k < c->classes; k++) {
    status = pk_sites_fill(c->section[k], moved, &sites[k]);
  }
  return status == PICKET_OK ? pk_blocks_fill(c, sites, block) : status;
}

/* d(mass)/dt into `slope`, of zeros. */
static picket_status mass_slope(pk_channel *c, const double complex *direction, pk_sites *sites,
                                pk_block *slope) {
  double complex *moved = PK_NEW(c->context, 3 * c->media, double complex);
  pk_block *block = NULL;
  picket_status status = moved ? pk_blocks_create(c, &block) : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < NEIGHBOURS; i++) {
    status = mass_at(c, AT[i] * STEP, direction, moved, sites, block);
    if (status == PICKET_OK) {
      add_blocks(c, WEIGHT[i] / STEP, block, slope);
    }
  }
  pk_free(c->context, moved);
  pk_blocks_free(c, block);
  return status;
}

static void free_sites(pk_channel *c, pk_sites *sites) {
  for (int k = 0; sites && k < c->classes; k++) {
    pk_sites_free(c->section[k], &sites[k]);
  }
  pk_free(c->context, sites);
}

static picket_status make_sites(pk_channel *c, pk_sites **out) {
  pk_sites *sites = PK_NEW(c->context, c->classes, pk_sites);
  picket_status status = sites ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int k = 0; status == PICKET_OK && k < c->classes; k++) {
    status = pk_sites_create(c->section[k], &sites[k]);
  }
  if (status != PICKET_OK) {
    free_sites(c, sites);
    return status;
  }
  *out = sites;
  return PICKET_OK;
}

picket_status pk_channel_media_form(pk_channel *c, double complex k0_square,
                                    const double complex *direction, const double complex *l,
                                    const double complex *r, double complex *out) {
  pk_block *slope = NULL;
  pk_sites *sites = NULL;
  picket_status status = make_sites(c, &sites);
  if (status == PICKET_OK) {
    status = pk_blocks_create(c, &slope);
  }
  if (status == PICKET_OK) {
    status = mass_slope(c, direction, sites, slope);
  }
  if (status == PICKET_OK) {
    *out = -k0_square * pk_channel_block_form(c, slope, l, r);
  }
  pk_blocks_free(c, slope);
  free_sites(c, sites);
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
