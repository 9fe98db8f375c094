/* See sites.h: what each site holds, as a fingerprint. Fractions that differ by rounding only, as
 * those of two planes with other shapes elsewhere may, count as equal. */
#include <math.h>

#include "base/hash.h"
#include "section/section_private.h"

static const double ROUNDING = 1e12; /* parts in which fractions are told apart */

static uint64_t of_mixture(const pk_mixture *mixture) {
  uint64_t mark = PK_HASH_START;
  for (int i = 0; i < mixture->count; i++) {
    mark = pk_hash_bytes(mark, &mixture->medium[i], sizeof mixture->medium[i]);
    mark = pk_hash_number(mark, round(ROUNDING * mixture->fraction[i]) + 0.0);
  }
  for (int i = 0; i < 3; i++) {
    mark = pk_hash_number(mark, round(ROUNDING * mixture->facing[i]) + 0.0); /* -0 becomes 0 */
  }
  return mark;
}

static uint64_t of_corner(const pk_grid_corner *corner) {
  uint64_t mark = pk_hash_bytes(PK_HASH_START, corner->medium, sizeof corner->medium);
  return pk_hash_bytes(mark, corner->spacing, sizeof corner->spacing);
}

static void mark_corner(const pk_section *s, const pk_grid_corner *corner, uint64_t *x,
                        uint64_t *y) {
  uint64_t mark = of_corner(corner);
  int i = pk_line_index(&s->x, corner->line[0]), j = pk_line_index(&s->y, corner->line[1]);
  uint64_t *touched[4] = {
      &x[pk_interval_above(&s->x, i) * s->ny + j], &x[pk_interval_below(&s->x, i) * s->ny + j],
      &y[i * s->my + pk_interval_above(&s->y, j)], &y[i * s->my + pk_interval_below(&s->y, j)]};
  for (int q = 0; q < 4; q++) {
    *touched[q] = pk_hash_bytes(*touched[q], &mark, sizeof mark);
  }
}

int pk_section_site_count(const pk_section *s) {
  return s->mx * s->ny + s->nx * s->my + 2 * s->nx * s->ny;
}

void pk_section_marks(const pk_section *s, uint64_t *marks) {
  uint64_t *x = marks, *y = x + s->mx * s->ny, *z = y + s->nx * s->my, *xy = z + s->nx * s->ny;
  for (int p = 0; p < s->mx * s->ny; p++) {
    x[p] = of_mixture(&s->mixtures.list[s->mixture_x[p]]);
  }
  for (int p = 0; p < s->nx * s->my; p++) {
    y[p] = of_mixture(&s->mixtures.list[s->mixture_y[p]]);
  }
  for (int p = 0; p < s->nx * s->ny; p++) {
    z[p] = of_mixture(&s->mixtures.list[s->mixture_z[p]]);
    xy[p] = s->mixed[p] < 0 ? 0 : of_mixture(&s->mixtures.list[s->mixed[p]]);
  }
  for (int c = 0; c < s->corner_count; c++) {
    mark_corner(s, &s->corner[c], x, y);
  }
}
