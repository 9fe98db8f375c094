/* Permittivities at the sites of a section.
 *
 * Averages over the box of a site:
 *   ε_zz = ⟨ε⟩ over the cell around a node
 *   ε_xx = ⟨ε⟩ (1 - N_xx) + ⟨1/ε⟩⁻¹ N_xx  over the cell around E_x,  ε_yy likewise
 *   ε_xy = (⟨1/ε⟩⁻¹ - ⟨ε⟩) N_xy  over the cell around a node, where the interface is oblique
 * with N the mean of n nᵀ over the interface: tangential E and normal D are continuous
 * (A. Farjadpour et al., Opt. Lett. 31, 2972 (2006)). Where interfaces lie on grid lines N has no
 * part and the averages are plain ones. At a corner of four quadrants E is singular as r^(α-1),
 * minus the gradient of a potential with ∇·(ε∇φ) = 0: the four edges that meet there are multiplied
 * by 1 + c (corner_patch.h, with the reciprocals of the permittivities). */
#include <string.h>

#include "base/memory.h"
#include "section/section_private.h"

/* Curved and oblique interfaces are seen under a tent two cells wide along both axes, sampled on
 * this many parts along each: against the plain box of a cell the error of the index of a silicon
 * rod becomes a smooth a h² + b h⁴ (scatter of a h² 1 % instead of 60 %), which is what
 * extrapolation needs. More parts gain nothing. */
enum { PARTS = 8 };

int pk_line_index(const pk_axis *axis, int line) {
  if (axis->low == PK_END_PERIODIC) {
    return line == axis->intervals ? 0 : line;
  }
  int index = line - pk_axis_first_line(axis);
  return index >= 0 && index < pk_axis_unknowns(axis) ? index : -1;
}

int pk_interval_below(const pk_axis *axis, int index) {
  int line = index + pk_axis_first_line(axis);
  if (line == 0) {
    return axis->low == PK_END_PERIODIC ? axis->intervals - 1 : -1;
  }
  return line - 1;
}

int pk_interval_above(const pk_axis *axis, int index) {
  int line = index + pk_axis_first_line(axis);
  return line < axis->intervals ? line : -1;
}

picket_status pk_sites_create(const pk_section *s, pk_sites *out) {
  pk_sites sites = {0};
  sites.x = PK_NEW(s->context, s->mx * s->ny, double complex);
  sites.y = PK_NEW(s->context, s->nx * s->my, double complex);
  sites.z = PK_NEW(s->context, s->nx * s->ny, double complex);
  sites.xy = PK_NEW(s->context, s->nx * s->ny, double complex);
  if (!sites.x || !sites.y || !sites.z || !sites.xy) {
    pk_sites_free(s, &sites);
    return PICKET_ERROR_MEMORY;
  }
  *out = sites;
  return PICKET_OK;
}

void pk_sites_free(const pk_section *s, pk_sites *sites) {
  pk_free(s->context, sites->x);
  pk_free(s->context, sites->y);
  pk_free(s->context, sites->z);
  pk_free(s->context, sites->xy);
  memset(sites, 0, sizeof *sites);
}

/* --- Boxes ------------------------------------------------------------------------------------ */

typedef struct span {
  double low, high;
} span;

static span around_line(const pk_axis *axis, int index) {
  span s;
  double complex length;
  pk_axis_dual(axis, index + pk_axis_first_line(axis), &s.low, &s.high, &length);
  return s;
}

static span of_interval(const pk_axis *axis, int interval) {
  return (span){axis->line[interval], axis->line[interval + 1]};
}

static span doubled(span s) {
  double margin = 0.5 * (s.high - s.low);
  return (span){s.low - margin, s.high + margin};
}

static double part(span s, int i) {
  return s.low + (s.high - s.low) * i / PARTS;
}

static double tent_at(int i) {
  return i < PARTS / 2 ? 2 * i + 1 : 2 * (PARTS - i) - 1;
}

static void add_fractions(const pk_box *from, double weight, pk_box *to) {
  for (int i = 0; i < from->count; i++) {
    for (int k = 0; k < to->count; k++) {
      to->fraction[k] += to->medium[k] == from->medium[i] ? weight * from->fraction[i] : 0;
    }
  }
}

/* Puts fractions under a tent over the wide box in the place of the plain ones. */
static picket_status pitch_tent(const pk_geometry *geometry, span x, span y, pk_box *box) {
  picket_status status = PICKET_OK;
  memset(box->fraction, 0, sizeof box->fraction);
  const double total = 0.25 * PARTS * PARTS * PARTS * PARTS; /* (Σ tent)² = (PARTS²/2)² */
  for (int i = 0; i < PARTS; i++) {
    for (int j = 0; status == PICKET_OK && j < PARTS; j++) {
      double low[2] = {part(x, i), part(y, j)}, high[2] = {part(x, i + 1), part(y, j + 1)};
      pk_box piece;
      status = pk_geometry_box(geometry, low, high, &piece);
      if (status == PICKET_OK) {
        add_fractions(&piece, tent_at(i) * tent_at(j) / total, box);
      }
    }
  }
  return status;
}

static picket_status box_of(const pk_geometry *geometry, span x, span y, pk_box *box) {
  double low[2] = {x.low, y.low}, high[2] = {x.high, y.high};
  return pk_geometry_box(geometry, low, high, box);
}

static picket_status take(pk_section *s, const pk_geometry *geometry, span x, span y, int *number,
                          bool *oblique) {
  pk_box box;
  span wide_x = doubled(x), wide_y = doubled(y);
  *oblique = false;
  picket_status status = box_of(geometry, wide_x, wide_y, &box);
  if (status == PICKET_OK && box.count > 1) {
    *oblique = box.oblique;
    status =
        box.oblique ? pitch_tent(geometry, wide_x, wide_y, &box) : box_of(geometry, x, y, &box);
  }
  return status == PICKET_OK ? pk_mixtures_take(&s->mixtures, &box, number) : status;
}

static picket_status average_nodes(pk_section *s, const pk_geometry *geometry) {
  picket_status status = PICKET_OK;
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; status == PICKET_OK && j < s->ny; j++) {
      int at = i * s->ny + j;
      bool oblique;
      status = take(s, geometry, around_line(&s->x, i), around_line(&s->y, j), &s->mixture_z[at],
                    &oblique);
      s->mixed[at] = oblique ? s->mixture_z[at] : -1;
    }
  }
  return status;
}

picket_status pk_section_average(pk_section *s, const pk_geometry *geometry) {
  bool oblique;
  picket_status status = average_nodes(s, geometry);
  for (int i = 0; i < s->mx; i++) {
    for (int j = 0; status == PICKET_OK && j < s->ny; j++) {
      status = take(s, geometry, of_interval(&s->x, i), around_line(&s->y, j),
                    &s->mixture_x[i * s->ny + j], &oblique);
    }
  }
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; status == PICKET_OK && j < s->my; j++) {
      status = take(s, geometry, around_line(&s->x, i), of_interval(&s->y, j),
                    &s->mixture_y[i * s->my + j], &oblique);
    }
  }
  return status;
}

/* --- Averages --------------------------------------------------------------------------------- */

static double complex along(const pk_mixture *mixture, double normal_share,
                            const double complex *permittivity) {
  double complex mean = pk_mixture_mean(mixture, permittivity);
  if (mixture->count == 1 || normal_share == 0) {
    return mean;
  }
  double complex normal = 1 / pk_mixture_mean_inverse(mixture, permittivity);
  return mean + normal_share * (normal - mean);
}

/* Of a medium with different entries xx and yy the mean of the two stands in the mixed term. */
static double complex mixed(const pk_mixture *mixture, const double complex *xx,
                            const double complex *yy) {
  double complex sum = 0;
  for (int i = 0; i < 2; i++) {
    const double complex *e = i == 0 ? xx : yy;
    sum += 1 / pk_mixture_mean_inverse(mixture, e) - pk_mixture_mean(mixture, e);
  }
  return 0.5 * mixture->facing[1] * sum;
}

/* Multiplies the four edges that meet at a corner. */
static picket_status cure_corner(pk_section *s, const pk_grid_corner *corner,
                                 const double complex *xx, const double complex *yy,
                                 pk_sites *sites) {
  pk_corner_site site;
  for (int q = 0; q < 4; q++) {
    site.permittivity[q] = 2 / (xx[corner->medium[q]] + yy[corner->medium[q]]);
    site.spacing[q] = corner->spacing[q];
  }
  pk_corner_cure cure;
  picket_status status = pk_corner_cache_cure(s->cures, &site, &cure);
  if (status != PICKET_OK) {
    return status;
  }
  int i = pk_line_index(&s->x, corner->line[0]), j = pk_line_index(&s->y, corner->line[1]);
  sites->x[pk_interval_above(&s->x, i) * s->ny + j] *= 1 + cure.c;
  sites->x[pk_interval_below(&s->x, i) * s->ny + j] *= 1 + cure.c;
  sites->y[i * s->my + pk_interval_above(&s->y, j)] *= 1 + cure.c;
  sites->y[i * s->my + pk_interval_below(&s->y, j)] *= 1 + cure.c;
  return PICKET_OK;
}

picket_status pk_sites_fill(pk_section *s, const double complex *permittivity, pk_sites *sites) {
  const double complex *xx = permittivity, *yy = xx + s->media, *zz = yy + s->media;
  for (int p = 0; p < s->mx * s->ny; p++) {
    const pk_mixture *mixture = &s->mixtures.list[s->mixture_x[p]];
    sites->x[p] = along(mixture, mixture->facing[0], xx);
  }
  for (int p = 0; p < s->nx * s->my; p++) {
    const pk_mixture *mixture = &s->mixtures.list[s->mixture_y[p]];
    sites->y[p] = along(mixture, mixture->facing[2], yy);
  }
  for (int p = 0; p < s->nx * s->ny; p++) {
    sites->z[p] = pk_mixture_mean(&s->mixtures.list[s->mixture_z[p]], zz);
    sites->xy[p] = s->mixed[p] < 0 ? 0 : mixed(&s->mixtures.list[s->mixed[p]], xx, yy);
  }
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < s->corner_count; i++) {
    status = cure_corner(s, &s->corner[i], xx, yy, sites);
  }
  return status;
}
