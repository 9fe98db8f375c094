/* See outflow.h.
 *
 * With ∇×E = i k0 h and ∇×h = -i k0 εE in the coordinates of section.h, Re ∇·(E × h*) = 0 where ε
 * is real. Summed over the sites up to line i of the x axis the differences leave one product at
 * the edge, of line i with the interval above it:
 *
 *   2 Im β Re Σ (E_x h_y* - E_y h_x*) dx dy = Re Σ_j [E_y(i) g h_z*(i+½) - g E_z(i) h_y*(i+½)] dy
 */
#include "section/outflow.h"

#include "section/section_private.h"

/* Re Σ (E_x h_y* - E_y h_x*) over the lines up to `last` and the intervals below it. */
static double carried(const pk_section *s, const pk_section_fields *f, int last) {
  double sum = 0;
  int first_line = pk_axis_first_line(&s->x);
  for (int i = 0; i < last + first_line; i++) {
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      sum += creal(s->x.length[i] * s->dual_y[j] * f->ex[p] * conj(f->hy[p]));
    }
  }
  for (int i = 0; i <= last; i++) {
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      sum -= creal(s->dual_x[i] * s->y.length[j] * f->ey[p] * conj(f->hx[p]));
    }
  }
  return sum;
}

/* Re Σ (E_y h_z* - E_z h_y*) g between line `last` and the interval above it. */
static double leaving(const pk_section *s, const pk_section_fields *f, int last) {
  double sum = 0;
  int above = last + pk_axis_first_line(&s->x);
  for (int j = 0; j < s->my; j++) {
    double complex h = s->metric_middle[above] * f->hz[above * s->my + j];
    sum += creal(s->y.length[j] * f->ey[last * s->my + j] * conj(h));
  }
  for (int j = 0; j < s->ny; j++) {
    double complex e = s->metric_line[last] * f->ez[last * s->ny + j];
    sum -= creal(s->dual_y[j] * e * conj(f->hy[above * s->ny + j]));
  }
  return sum;
}

double pk_section_outflow(const pk_section *s, const pk_section_fields *f, double x) {
  int last = 0;
  while (last + 1 < s->nx && pk_section_line_at(s, PK_U, last + 1) <= x) {
    last++;
  }
  return leaving(s, f, last) / (2 * carried(s, f, last));
}
