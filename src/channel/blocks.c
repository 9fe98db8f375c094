/* Blocks of the mass: how ε of the slices couples the harmonics at one site.
 *
 *   e_z:       Σ f [[1/ε]]⁻¹  over the parts of the box of the site, fractions f: D_z jumps between
 *              them, e_z does not
 *   e_x, e_y:  Σ f [[ε]] + N ((Σ f [[ε]]⁻¹)⁻¹ - Σ f [[ε]]),  N the part of interfaces that face the
 *              component (0 where they lie on grid lines), times the correction of corners
 *   mixed:     N_xy ((Σ f [[ε]]⁻¹)⁻¹ - Σ f [[ε]])  at oblique nodes
 *
 * (Averaging before the rules along z would leave a layer of wrong ε_z one step thick on every wall
 * of a tooth, an error of first order.) Sites with the same profile share a block; where nothing
 * varies along z it is a multiple of one. */
#include <math.h>
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

/* As counted in the marks. */
static int site_at(const pk_channel *c, int place) {
  return place < c->site_count ? place : c->node[place - c->site_count].site;
}

/* Fractions that differ by rounding only count as equal. */
static double rounded(double fraction) {
  return round(1e12 * fraction) + 0.0; /* -0 becomes 0 */
}

static uint64_t tag_of(const pk_channel *c, int site, const pk_profile *profile) {
  bool changes;
  pk_kind kind = pk_channel_kind(c, site);
  uint64_t hash = pk_channel_corner_mark(c, site, &changes);
  hash = pk_hash_bytes(hash, &kind, sizeof kind);
  size_t media = (size_t)(profile->count * c->classes);
  hash = pk_hash_bytes(hash, profile->medium, media * sizeof *profile->medium);
  for (int p = 0; p < profile->count; p++) {
    hash = pk_hash_number(hash, rounded(profile->fraction[p]));
  }
  for (int i = 0; kind != PK_KIND_Z && i < 3; i++) {
    hash = pk_hash_number(hash, rounded(profile->facing[i]));
  }
  return hash;
}

static bool varied(const pk_channel *c, int site, const pk_profile *profile) {
  bool changes;
  (void)pk_channel_corner_mark(c, site, &changes);
  for (int i = 0; i < profile->count * c->classes; i++) {
    changes = changes || profile->medium[i] != profile->medium[i - i % c->classes];
  }
  return changes;
}

static picket_status keep_profile(const pk_channel *c, const pk_profile *from, pk_profile *to) {
  *to = *from;
  to->medium = pk_copy(c->context, from->medium, (size_t)(from->count * c->classes), sizeof(int));
  to->fraction = pk_copy(c->context, from->fraction, (size_t)from->count, sizeof(double));
  return to->medium && to->fraction ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status add_block(pk_channel *c, pk_profiler *profiler, int site,
                               pk_profile *profile) {
  int b = c->block_count++;
  picket_status status = pk_profiler_take(profiler, site, profile);
  if (status != PICKET_OK) {
    return status;
  }
  c->block[b] = (pk_block){.kind = pk_channel_kind(c, site), .site = site};
  c->block[b].varied = varied(c, site, profile);
  return keep_profile(c, profile, &c->profile[b]);
}

static picket_status group(pk_channel *c, pk_profiler *profiler, const tagged *sorted, int count,
                           pk_profile *profile) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    int place = sorted[i].place;
    if (i == 0 || sorted[i].tag != sorted[i - 1].tag) {
      status = add_block(c, profiler, site_at(c, place), profile);
    }
    *(place < c->site_count ? &c->block_of[place] : &c->node[place - c->site_count].block) =
        c->block_count - 1;
  }
  return status;
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

static picket_status tag_all(const pk_channel *c, pk_profiler *profiler, pk_profile *profile,
                             int count, tagged *sorted) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    int site = site_at(c, i);
    status = pk_profiler_take(profiler, site, profile);
    sorted[i] = (tagged){tag_of(c, site, profile), i};
  }
  qsort(sorted, (size_t)count, sizeof *sorted, compare);
  return status;
}

static picket_status make_groups(pk_channel *c, pk_profiler *profiler, pk_profile *profile,
                                 int count, tagged *sorted) {
  picket_status status = tag_all(c, profiler, profile, count, sorted);
  int groups = 0;
  for (int i = 0; i < count; i++) {
    groups += i == 0 || sorted[i].tag != sorted[i - 1].tag;
  }
  c->block = PK_NEW(c->context, groups, pk_block);
  c->profile = PK_NEW(c->context, groups, pk_profile);
  c->mean_z = PK_NEW(c->context, groups * c->classes, double complex);
  if (!c->block || !c->profile || !c->mean_z) {
    return PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    status = group(c, profiler, sorted, count, profile);
  }
  return status == PICKET_OK ? make_matrices(c, c->block) : status;
}

picket_status pk_channel_take_blocks(pk_channel *c, const pk_channel_plan *plan) {
  int count = c->site_count + c->node_count;
  pk_profiler *profiler = NULL;
  pk_profile profile = {0};
  tagged *sorted = PK_NEW(c->context, count, tagged);
  c->block_of = PK_NEW(c->context, c->site_count, int);
  profile.medium = PK_NEW(c->context, PK_PROFILE_PARTS * c->classes, int);
  profile.fraction = PK_NEW(c->context, PK_PROFILE_PARTS, double);
  picket_status status = PICKET_ERROR_MEMORY;
  if (sorted && c->block_of && profile.medium && profile.fraction) {
    status = pk_profiler_create(c, plan, &profiler);
  }
  if (status == PICKET_OK) {
    status = make_groups(c, profiler, &profile, count, sorted);
  }
  pk_profiler_free(profiler);
  pk_free(c->context, profile.medium);
  pk_free(c->context, profile.fraction);
  pk_free(c->context, sorted);
  return status;
}

void pk_channel_drop_profiles(pk_channel *c) {
  for (int b = 0; c->profile && b < c->block_count; b++) {
    pk_free(c->context, c->profile[b].medium);
    pk_free(c->context, c->profile[b].fraction);
  }
  pk_free(c->context, c->profile);
  pk_free(c->context, c->mean_z);
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

/* Work of a fill; a block that does not vary is a matrix of order 1. */
typedef struct fill {
  const pk_channel *channel;
  const double complex *permittivity;
  double complex *f, *factor;            /* [classes] each */
  double complex *part, *mean, *reverse; /* [count][count] each */
} fill;

static double complex entry(const fill *w, pk_kind component, int medium) {
  return w->permittivity[(int)component * w->channel->media + medium];
}

/* [[ε]] or [[1/ε]] of a part, with each class times its factor. */
static void part_matrix(const fill *w, const pk_profile *profile, int p, pk_kind component,
                        bool reciprocal, bool along_z, double complex *matrix) {
  const pk_channel *c = w->channel;
  for (int k = 0; k < c->classes; k++) {
    double complex e = entry(w, component, profile->medium[p * c->classes + k]) * w->factor[k];
    w->f[k] = reciprocal ? 1 / e : e;
  }
  if (along_z) {
    pk_channel_toeplitz(c, w->f, matrix);
  } else {
    matrix[0] = w->f[0];
  }
}

static void accumulate(int entries, double factor, const double complex *from, double complex *to) {
  for (int i = 0; i < entries; i++) {
    to[i] += factor * from[i];
  }
}

/* Σ fraction × part, or × its inverse, into `sum`. */
static picket_status average(const fill *w, const pk_profile *profile, pk_kind component,
                             bool reciprocal, bool inverted, bool along_z, double complex *sum) {
  int n = along_z ? w->channel->count : 1;
  picket_status status = PICKET_OK;
  memset(sum, 0, (size_t)(n * n) * sizeof *sum);
  for (int p = 0; status == PICKET_OK && p < profile->count; p++) {
    part_matrix(w, profile, p, component, reciprocal, along_z, w->part);
    if (inverted) {
      status = pk_dense_inverse(w->channel->context, n, w->part);
    }
    accumulate(n * n, profile->fraction[p], w->part, sum);
  }
  return status;
}

/* What tangential and normal E make of it: ⟨ε⟩ + N (⟨1/ε⟩⁻¹ - ⟨ε⟩), added to `out` with a factor;
 * without the first term for the mixed one. */
static picket_status add_average(const fill *w, const pk_profile *profile, pk_kind component,
                                 double normal, double tangential, bool along_z,
                                 double complex *out) {
  int n = along_z ? w->channel->count : 1;
  picket_status status = average(w, profile, component, false, false, along_z, w->mean);
  accumulate(n * n, tangential, w->mean, out);
  if (status == PICKET_OK && profile->count > 1 && normal != 0) {
    status = average(w, profile, component, false, true, along_z, w->reverse);
    if (status == PICKET_OK) {
      status = pk_dense_inverse(w->channel->context, n, w->reverse);
    }
    accumulate(n * n, normal, w->reverse, out);
    accumulate(n * n, -normal, w->mean, out);
  }
  return status;
}

/* For two classes ⟨ε⟩ commutes with the factor of the corners; both are symmetric (Hermitian). */
static picket_status correct(const fill *w, const pk_block *block, double complex *out) {
  int n = w->channel->count;
  picket_status status =
      pk_channel_matrix_factor(w->channel, block->site, w->permittivity, w->part);
  if (status == PICKET_OK) {
    memcpy(w->mean, out, (size_t)(n * n) * sizeof *out);
    pk_dense_times(n, n, n, 1, w->mean, w->part, 0, out);
  }
  return status;
}

static picket_status fill_transverse(const fill *w, const pk_profile *profile,
                                     const pk_block *block, double complex *out) {
  const pk_channel *c = w->channel;
  bool corner = pk_channel_corner_at(c, block->site);
  bool as_matrix = corner && block->varied && c->classes == 2;
  picket_status status = PICKET_OK;
  if (corner && !as_matrix) {
    status = pk_channel_class_factors(c, block->site, w->permittivity, w->factor);
  }
  if (status == PICKET_OK) {
    double normal = profile->facing[block->kind == PK_KIND_X ? 0 : 2];
    status = add_average(w, profile, block->kind, normal, 1, block->varied, out);
  }
  return status == PICKET_OK && as_matrix ? correct(w, block, out) : status;
}

static picket_status fill_block(fill *w, const pk_profile *profile, double complex *mean_z,
                                pk_block *block) {
  const pk_channel *c = w->channel;
  int n = block->varied ? c->count : 1;
  double complex *out = block->varied ? block->matrix : &block->scalar;
  memset(out, 0, (size_t)(n * n) * sizeof *out);
  for (int k = 0; k < c->classes; k++) {
    w->factor[k] = 1;
    mean_z[k] = 0;
    for (int p = 0; p < profile->count; p++) {
      mean_z[k] += profile->fraction[p] * entry(w, PK_KIND_Z, profile->medium[p * c->classes + k]);
    }
  }
  if (block->kind == PK_KIND_Z) {
    return average(w, profile, PK_KIND_Z, true, true, block->varied, out);
  }
  if (block->kind != PK_KIND_XY) {
    return fill_transverse(w, profile, block, out);
  }
  /* Of a medium with different entries xx and yy the mean of the two. */
  double share = 0.5 * profile->facing[1];
  picket_status status = add_average(w, profile, PK_KIND_X, share, 0, block->varied, out);
  return status == PICKET_OK ? add_average(w, profile, PK_KIND_Y, share, 0, block->varied, out)
                             : status;
}

picket_status pk_blocks_fill(const pk_channel *c, const double complex *permittivity,
                             double complex *mean_z, pk_block *block) {
  int n = c->count * c->count;
  double complex *memory = PK_NEW(c->context, 2 * c->classes + 3 * n, double complex);
  if (!memory) {
    return PICKET_ERROR_MEMORY;
  }
  fill w = {.channel = c, .permittivity = permittivity, .f = memory};
  w.factor = w.f + c->classes;
  w.part = w.factor + c->classes;
  w.mean = w.part + n;
  w.reverse = w.mean + n;
  picket_status status = PICKET_OK;
  for (int b = 0; status == PICKET_OK && b < c->block_count; b++) {
    status = fill_block(&w, &c->profile[b], mean_z + (ptrdiff_t)b * c->classes, &block[b]);
  }
  pk_free(c->context, memory);
  return status;
}
