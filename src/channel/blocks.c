/* Blocks of the mass: how ε of the slices couples the harmonics at one site.
 *
 *   e_x, e_y, and the mixed term of oblique nodes:  [[ε]]
 *   e_z:                                            [[1/ε]]⁻¹
 *
 * Sites that hold the same mixtures in every slice share a block; where all slices hold the same it
 * is a multiple of one. */
#include <stdlib.h>
#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "channel/channel_private.h"
#include "dense/dense.h"

/* --- Grouping --------------------------------------------------------------------------------- */

typedef struct tagged {
  uint64_t tag;
  int place; /* a site, or site_count + the number of an oblique node */
} tagged;

static int compare(const void *a, const void *b) {
  const tagged *p = a, *q = b;
  if (p->tag != q->tag) {
    return p->tag < q->tag ? -1 : 1;
  }
  return p->place < q->place ? -1 : p->place > q->place;
}

/* Which entry of the permittivity a site holds: 0 xx, 1 yy, 2 zz, 3 the mixed one. */
static int kind_of(const pk_channel *c, int site) {
  return (site >= c->first_y) + (site >= c->first_z) + (site >= c->site_count);
}

typedef struct marking {
  const uint64_t *marks; /* [classes][stride] */
  size_t stride;
} marking;

/* As counted in the marks. */
static int site_at(const pk_channel *c, int place) {
  return place < c->site_count ? place : c->node[place - c->site_count].site;
}

static tagged tag(const pk_channel *c, const marking *m, int place) {
  int site = site_at(c, place), kind = kind_of(c, site);
  uint64_t hash = pk_hash_bytes(PK_HASH_START, &kind, sizeof kind);
  for (int k = 0; k < c->classes; k++) {
    const uint64_t *mark = &m->marks[(size_t)k * m->stride + (size_t)site];
    hash = pk_hash_bytes(hash, mark, sizeof *mark);
  }
  return (tagged){hash, place};
}

static bool varied(const pk_channel *c, const marking *m, int site) {
  for (int k = 1; k < c->classes; k++) {
    if (m->marks[(size_t)k * m->stride + (size_t)site] != m->marks[site]) {
      return true;
    }
  }
  return false;
}

static void group(pk_channel *c, const marking *m, const tagged *sorted, int count) {
  for (int i = 0; i < count; i++) {
    int place = sorted[i].place, site = site_at(c, place);
    if (i == 0 || sorted[i].tag != sorted[i - 1].tag) {
      c->block[c->block_count++] =
          (pk_block){.site = site, .inverse = kind_of(c, site) == 2, .varied = varied(c, m, site)};
    }
    *(place < c->site_count ? &c->block_of[place] : &c->node[place - c->site_count].block) =
        c->block_count - 1;
  }
}

static picket_status make_matrices(const pk_channel *c, pk_block *block) {
  picket_status status = PICKET_OK;
  for (int b = 0; b < c->block_count && status == PICKET_OK; b++) {
    block[b].matrix = NULL;
    if (block[b].varied) {
      block[b].matrix = PK_NEW(c->context, c->count * c->count, double complex);
      status = block[b].matrix ? PICKET_OK : PICKET_ERROR_MEMORY;
    }
  }
  return status;
}

picket_status pk_channel_take_blocks(pk_channel *c) {
  int count = c->site_count + c->node_count;
  uint64_t *marks = NULL;
  tagged *sorted = PK_NEW(c->context, count, tagged);
  c->block_of = PK_NEW(c->context, c->site_count, int);
  picket_status status = pk_channel_take_marks(c, &marks);
  if (status != PICKET_OK || !sorted || !c->block_of) {
    pk_free(c->context, marks);
    pk_free(c->context, sorted);
    return PICKET_ERROR_MEMORY;
  }
  marking m = {marks, (size_t)pk_section_site_count(c->section[0])};
  for (int i = 0; i < count; i++) {
    sorted[i] = tag(c, &m, i);
  }
  qsort(sorted, (size_t)count, sizeof *sorted, compare);
  int groups = 0;
  for (int i = 0; i < count; i++) {
    groups += i == 0 || sorted[i].tag != sorted[i - 1].tag;
  }
  c->block = PK_NEW(c->context, groups, pk_block);
  if (c->block) {
    group(c, &m, sorted, count);
    status = make_matrices(c, c->block);
  } else {
    status = PICKET_ERROR_MEMORY;
  }
  pk_free(c->context, marks);
  pk_free(c->context, sorted);
  return status;
}

picket_status pk_blocks_create(const pk_channel *c, pk_block **out) {
  pk_block *block = pk_copy(c->context, c->block, (size_t)c->block_count, sizeof *block);
  if (!block) {
    return PICKET_ERROR_MEMORY;
  }
  for (int b = 0; b < c->block_count; b++) {
    block[b].matrix = NULL;
    block[b].scalar = 0;
  }
  picket_status status = make_matrices(c, block);
  if (status != PICKET_OK) {
    pk_blocks_free(c, block);
    return status;
  }
  *out = block;
  return PICKET_OK;
}

void pk_blocks_free(const pk_channel *c, pk_block *block) {
  for (int b = 0; block && b < c->block_count; b++) {
    pk_free(c->context, block[b].matrix);
  }
  pk_free(c->context, block);
}

/* --- Values ----------------------------------------------------------------------------------- */

void pk_channel_toeplitz(const pk_channel *c, const double complex *f, double complex *matrix) {
  int most = c->count - 1, width = 2 * c->count - 1;
  for (int n = -most; n <= most; n++) {
    double complex value = 0;
    for (int k = 0; k < c->classes; k++) {
      value += f[k] * c->coefficient[(ptrdiff_t)k * width + most + n];
    }
    for (int column = n < 0 ? -n : 0; column < c->count - (n > 0 ? n : 0); column++) {
      matrix[column * c->count + column + n] = value; /* row - column = n */
    }
  }
}

void pk_channel_site_values(const pk_channel *c, const pk_sites *sites, int site,
                            double complex *f) {
  for (int k = 0; k < c->classes; k++) {
    const pk_sites *s = &sites[k];
    switch (kind_of(c, site)) {
      case 0: f[k] = s->x[site]; break;
      case 1: f[k] = s->y[site - c->first_y]; break;
      case 2: f[k] = s->z[site - c->first_z]; break;
      default: f[k] = s->xy[site - c->site_count]; break;
    }
  }
}

picket_status pk_blocks_fill(const pk_channel *c, const pk_sites *sites, pk_block *block) {
  double complex *f = PK_NEW(c->context, c->classes, double complex);
  picket_status status = f ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int b = 0; status == PICKET_OK && b < c->block_count; b++) {
    pk_channel_site_values(c, sites, block[b].site, f);
    if (!block[b].varied) {
      block[b].scalar = f[0];
      continue;
    }
    for (int k = 0; block[b].inverse && k < c->classes; k++) {
      f[k] = 1 / f[k];
    }
    pk_channel_toeplitz(c, f, block[b].matrix);
    if (block[b].inverse) {
      status = pk_dense_inverse(c->context, c->count, block[b].matrix);
    }
  }
  pk_free(c->context, f);
  return status;
}
