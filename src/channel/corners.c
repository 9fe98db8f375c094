/* Corners of the section in a channel: where edges parallel to z meet the grid.
 *
 * With finitely many harmonics an edge that comes and goes along z has its own singular fields:
 * near it, where E is minus a transverse gradient, each eigenvector of the Toeplitz matrix
 * X = [[χ]] of the indicator χ of a slice sees a corner of its own, with the permittivities
 *
 *   ε_q(t) = (1 - t) ε_q + t ε'_q
 *
 * of the quadrants q in both kinds of slices, t its eigenvalue (0 < t < 1, most of them near the
 * ends). The edges of the grid that meet there therefore get Q diag(ε(t) (1 + c(t))) Qᴴ in the
 * place of [[ε]] (corner_patch.h), X = Q diag(t) Qᴴ. One harmonic sees the mean. With more than
 * two kinds of slices the eigenvectors of their matrices differ, though less and less with many
 * harmonics; each kind then keeps its own correction, [[ε (1 + c)]], which is the same in that
 * limit. */
#include "operator/corner_list.h"

#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "channel/channel_private.h"
#include "dense/dense.h"

/* Where the media around a corner are looked up, in parts of the spacing: outside of rounding. */
static const double ASIDE = 1e-3;

/* --- Finding ---------------------------------------------------------------------------------- */

static bool known(const pk_channel *c, const pk_grid_corner *corner) {
  for (int i = 0; i < c->corner_count; i++) {
    if (memcmp(c->corner[i].line, corner->line, sizeof corner->line) == 0) {
      return true;
    }
  }
  return false;
}

static void look_around(const pk_channel *c, const pk_geometry *geometry,
                        const pk_grid_corner *corner, int medium[4]) {
  static const int SIDE[4][2] = {{1, 1}, {-1, 1}, {-1, -1}, {1, -1}};
  double u = c->x.line[corner->line[0]], v = c->y.line[corner->line[1]];
  for (int q = 0; q < 4; q++) {
    double right = corner->spacing[SIDE[q][0] > 0 ? 0 : 2];
    double up = corner->spacing[SIDE[q][1] > 0 ? 1 : 3];
    medium[q] = pk_geometry_medium_at(geometry, u + ASIDE * SIDE[q][0] * right,
                                      v + ASIDE * SIDE[q][1] * up);
  }
}

static void touch(pk_channel *c, int site, int corner) {
  int *of = c->corner_of + 2 * (ptrdiff_t)site;
  of[of[0] < 0 ? 0 : 1] = corner;
}

static picket_status add_corner(pk_channel *c, const pk_channel_plan *plan,
                                const pk_grid_corner *found) {
  pk_channel_corner *corner = &c->corner[c->corner_count];
  corner->medium = PK_NEW(c->context, 4 * c->classes, int);
  if (!corner->medium) {
    return PICKET_ERROR_MEMORY;
  }
  memcpy(corner->line, found->line, sizeof corner->line);
  memcpy(corner->spacing, found->spacing, sizeof corner->spacing);
  for (int k = 0; k < c->classes; k++) {
    look_around(c, plan->geometry[c->example[k]], found, corner->medium + 4 * k);
  }
  int i = pk_line_index(&c->x, found->line[0]), j = pk_line_index(&c->y, found->line[1]);
  touch(c, pk_interval_above(&c->x, i) * c->ny + j, c->corner_count);
  touch(c, pk_interval_below(&c->x, i) * c->ny + j, c->corner_count);
  touch(c, c->first_y + i * c->my + pk_interval_above(&c->y, j), c->corner_count);
  touch(c, c->first_y + i * c->my + pk_interval_below(&c->y, j), c->corner_count);
  c->corner_count++;
  return PICKET_OK;
}

static picket_status take_class(pk_channel *c, const pk_channel_plan *plan, int class) {
  pk_corner_list list = {0};
  picket_status status =
      pk_corner_list_take(c->context, plan->geometry[c->example[class]], &c->x, &c->y, &list);
  if (status == PICKET_OK) {
    pk_channel_corner *grown = pk_regrow(c->context, c->corner, (size_t)c->corner_count,
                                         (size_t)(c->corner_count + list.count), sizeof *c->corner);
    status = grown ? PICKET_OK : PICKET_ERROR_MEMORY;
    c->corner = grown ? grown : c->corner;
  }
  for (int i = 0; status == PICKET_OK && i < list.count; i++) {
    if (!known(c, &list.corner[i])) {
      status = add_corner(c, plan, &list.corner[i]);
    }
  }
  pk_corner_list_clear(c->context, &list);
  return status;
}

/* X of class 1 and its eigenvectors, in real numbers where they are real. */
static picket_status diagonalise(pk_channel *c) {
  int n = c->count;
  double complex f[2] = {0, 1};
  double *real = PK_NEW(c->context, n * n, double);
  c->share = PK_NEW(c->context, n, double);
  c->eigenvector = PK_NEW(c->context, n * n, double complex);
  picket_status status = PICKET_ERROR_MEMORY;
  if (real && c->share && c->eigenvector) {
    pk_channel_toeplitz(c, f, c->eigenvector);
    for (int i = 0; i < n * n; i++) {
      real[i] = creal(c->eigenvector[i]);
    }
    status = c->mirrored ? pk_dense_symmetric(c->context, n, real, c->share)
                         : pk_dense_hermitian(c->context, n, c->eigenvector, c->share);
  }
  for (int i = 0; status == PICKET_OK && c->mirrored && i < n * n; i++) {
    c->eigenvector[i] = real[i];
  }
  pk_free(c->context, real);
  return status;
}

picket_status pk_channel_take_corners(pk_channel *c, const pk_channel_plan *plan) {
  c->corner_of = PK_NEW(c->context, 2 * c->site_count, int);
  if (!c->corner_of) {
    return PICKET_ERROR_MEMORY;
  }
  memset(c->corner_of, -1, 2 * (size_t)c->site_count * sizeof *c->corner_of);
  picket_status status = PICKET_OK;
  if (plan->correct_corners) {
    status = pk_corner_cache_create(c->context, &c->cures);
  }
  for (int k = 0; plan->correct_corners && status == PICKET_OK && k < c->classes; k++) {
    status = take_class(c, plan, k);
  }
  return status == PICKET_OK && c->classes == 2 ? diagonalise(c) : status;
}

void pk_channel_drop_corners(pk_channel *c) {
  for (int i = 0; i < c->corner_count; i++) {
    pk_free(c->context, c->corner[i].medium);
  }
  pk_free(c->context, c->corner);
  pk_free(c->context, c->corner_of);
  pk_free(c->context, c->share);
  pk_free(c->context, c->eigenvector);
  pk_corner_cache_free(c->cures);
}

uint64_t pk_channel_corner_mark(const pk_channel *c, int site, bool *varied) {
  uint64_t mark = PK_HASH_START;
  *varied = false;
  for (int i = 0; site < c->first_z && i < 2; i++) {
    int at = c->corner_of[2 * (ptrdiff_t)site + i];
    if (at >= 0) {
      const pk_channel_corner *corner = &c->corner[at];
      size_t media = 4 * sizeof *corner->medium;
      mark = pk_hash_bytes(mark, corner->medium, media * (size_t)c->classes);
      mark = pk_hash_bytes(mark, corner->spacing, sizeof corner->spacing);
      for (int k = 1; k < c->classes; k++) {
        *varied = *varied || memcmp(corner->medium, corner->medium + 4 * k, media) != 0;
      }
    }
  }
  return mark;
}

/* --- Correcting ------------------------------------------------------------------------------- */

/* 1 + c of a corner for quadrants of two classes mixed by t. */
static picket_status factor_of(const pk_channel *c, const pk_channel_corner *corner,
                               const double complex *permittivity, int class, int other, double t,
                               double complex *factor) {
  const double complex *xx = permittivity, *yy = xx + c->media;
  pk_corner_site site;
  for (int q = 0; q < 4; q++) {
    int a = corner->medium[4 * class + q], b = corner->medium[4 * other + q];
    double complex mean = 0.5 * ((1 - t) * (xx[a] + yy[a]) + t * (xx[b] + yy[b]));
    site.permittivity[q] = 1 / mean; /* corner_patch.h is written for hy */
    site.spacing[q] = corner->spacing[q];
  }
  pk_corner_cure cure;
  picket_status status = pk_corner_cache_cure(c->cures, &site, &cure);
  if (status == PICKET_OK) {
    *factor *= 1 + cure.c;
  }
  return status;
}

/* Product over the corners at both ends of an edge. */
static picket_status factors_of(const pk_channel *c, int site, const double complex *permittivity,
                                int class, int other, double t, double complex *factor) {
  picket_status status = PICKET_OK;
  *factor = 1;
  for (int i = 0; site < c->first_z && status == PICKET_OK && i < 2; i++) {
    int at = c->corner_of[2 * (ptrdiff_t)site + i];
    if (at >= 0) {
      status = factor_of(c, &c->corner[at], permittivity, class, other, t, factor);
    }
  }
  return status;
}

picket_status pk_channel_class_factors(const pk_channel *c, int site,
                                       const double complex *permittivity, double complex *factor) {
  picket_status status = PICKET_OK;
  for (int k = 0; status == PICKET_OK && k < c->classes; k++) {
    status = factors_of(c, site, permittivity, k, k, 0, &factor[k]);
  }
  return status;
}

bool pk_channel_corner_at(const pk_channel *c, int site) {
  return site < c->first_z && c->corner_of[2 * (ptrdiff_t)site] >= 0;
}

picket_status pk_channel_matrix_factor(const pk_channel *c, int site,
                                       const double complex *permittivity, double complex *matrix) {
  int n = c->count;
  picket_status status = PICKET_OK;
  memset(matrix, 0, (size_t)(n * n) * sizeof *matrix);
  for (int i = 0; status == PICKET_OK && i < n; i++) {
    double complex value;
    status = factors_of(c, site, permittivity, 0, 1, c->share[i], &value);
    const double complex *q = c->eigenvector + (ptrdiff_t)i * n;
    for (int column = 0; column < n; column++) {
      for (int row = 0; row < n; row++) {
        matrix[column * n + row] += q[row] * value * conj(q[column]);
      }
    }
  }
  return status;
}
