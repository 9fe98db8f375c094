/* See forms.h. Sums over sites with the areas between the neighbouring lines or half lines. */
#include "section/forms.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "section/section_private.h"

/* Relative step of permittivities for the slopes of averages, which are smooth and differ from
 * straight lines by the square of it. */
static const double STEP = 1e-4;

double complex pk_section_product(const pk_section *s, const pk_section_fields *a,
                                  const pk_section_fields *b) {
  double complex sum = 0;
  for (int i = 0; i < s->mx; i++) {
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      sum += s->x.length[i] * s->dual_y[j] * (a->ex[p] * b->hy[p] + b->ex[p] * a->hy[p]);
    }
  }
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      sum -= s->dual_x[i] * s->y.length[j] * (a->ey[p] * b->hx[p] + b->ey[p] * a->hx[p]);
    }
  }
  return 0.5 * sum;
}

static double interval_width(const pk_axis *axis, int i) {
  return axis->line[i + 1] - axis->line[i];
}

double complex pk_section_power(const pk_section *s, const pk_section_fields *a,
                                const pk_section_fields *b) {
  double complex sum = 0;
  for (int i = 0; i < s->mx; i++) {
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      sum += interval_width(&s->x, i) * s->width_y[j] *
             (conj(a->ex[p]) * b->hy[p] + b->ex[p] * conj(a->hy[p]));
    }
  }
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      sum -= s->width_x[i] * interval_width(&s->y, j) *
             (conj(a->ey[p]) * b->hx[p] + b->ey[p] * conj(a->hx[p]));
    }
  }
  return 0.5 * sum;
}

/* --- Energies --------------------------------------------------------------------------------- */

/* The weight that an energy is taken with: stretched areas and squares, or plain areas and
 * magnitudes. */
typedef struct measure {
  bool plain;
  double sign; /* of the z component */
} measure;

/* g at line or interval i of the x axis. */
static double complex line_metric(const pk_section *s, const measure *m, int i) {
  return m->plain ? pk_section_plain_metric(s, pk_section_line_at(s, PK_U, i)) : s->metric_line[i];
}

static double complex middle_metric(const pk_section *s, const measure *m, int i) {
  return m->plain ? pk_section_plain_metric(s, pk_section_middle_at(s, PK_U, i))
                  : s->metric_middle[i];
}

static double complex square(const measure *m, double complex u, double complex v) {
  return m->plain ? creal(u * conj(v)) : u * v;
}

/* h E at the ends of the half cells of a node: ½ (h₋ E₋ + h₊ E₊). */
static double complex node_ex(const pk_section *s, const measure *m, const pk_section_fields *f,
                              int i, int j) {
  double complex sum = 0;
  for (int side = 0; side < 2; side++) {
    int k = side == 0 ? pk_interval_below(&s->x, i) : pk_interval_above(&s->x, i);
    if (k >= 0) {
      double complex width = m->plain ? interval_width(&s->x, k) : s->x.length[k];
      sum += 0.5 * width * f->ex[k * s->ny + j];
    }
  }
  return sum;
}

static double complex node_ey(const pk_section *s, const measure *m, const pk_section_fields *f,
                              int i, int j) {
  double complex sum = 0;
  for (int side = 0; side < 2; side++) {
    int k = side == 0 ? pk_interval_below(&s->y, j) : pk_interval_above(&s->y, j);
    if (k >= 0) {
      double complex width = m->plain ? interval_width(&s->y, k) : s->y.length[k];
      sum += 0.5 * width * f->ey[i * s->my + k];
    }
  }
  return sum;
}

static double complex energy_x(const pk_section *s, const measure *m, const pk_sites *e,
                               const pk_section_fields *f) {
  double complex sum = 0;
  for (int i = 0; i < s->mx; i++) {
    double complex g = middle_metric(s, m, i);
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      double complex area =
          m->plain ? interval_width(&s->x, i) * s->width_y[j] : s->x.length[i] * s->dual_y[j];
      sum += g * area * e->x[p] * square(m, f->ex[p], f->ex[p]);
    }
  }
  return sum;
}

static double complex energy_y(const pk_section *s, const measure *m, const pk_sites *e,
                               const pk_section_fields *f) {
  double complex sum = 0;
  for (int i = 0; i < s->nx; i++) {
    double complex g = line_metric(s, m, i);
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      double complex area =
          m->plain ? s->width_x[i] * interval_width(&s->y, j) : s->dual_x[i] * s->y.length[j];
      sum += g * area * e->y[p] * square(m, f->ey[p], f->ey[p]);
    }
  }
  return sum;
}

/* E_z, and the mixed term of oblique interfaces. */
static double complex energy_nodes(const pk_section *s, const measure *m, const pk_sites *e,
                                   const pk_section_fields *f, bool mixed) {
  double complex sum = 0;
  for (int i = 0; i < s->nx; i++) {
    double complex g = line_metric(s, m, i);
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      if (!mixed) {
        double complex area =
            m->plain ? s->width_x[i] * s->width_y[j] : s->dual_x[i] * s->dual_y[j];
        sum += g * area * e->z[p] * square(m, f->ez[p], f->ez[p]);
      } else if (s->mixed[p] >= 0) {
        sum += 2 * g * e->xy[p] * square(m, node_ex(s, m, f, i, j), node_ey(s, m, f, i, j));
      }
    }
  }
  return sum;
}

/* ∫ E·εE with the sign of the measure on the z part. */
static double complex energy(const pk_section *s, const measure *m, const pk_sites *e,
                             const pk_section_fields *f) {
  return energy_x(s, m, e, f) + energy_y(s, m, e, f) + energy_nodes(s, m, e, f, true) +
         m->sign * energy_nodes(s, m, e, f, false);
}

/* ∫ (h_t² - h_z²) over the stretched plane. */
static double complex magnetic(const pk_section *s, const pk_section_fields *f) {
  double complex sum = 0;
  for (int i = 0; i < s->mx; i++) {
    double complex width = s->metric_middle[i] * s->x.length[i];
    for (int j = 0; j < s->ny; j++) {
      int p = i * s->ny + j;
      sum += width * s->dual_y[j] * f->hy[p] * f->hy[p];
    }
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      sum -= width * s->y.length[j] * f->hz[p] * f->hz[p];
    }
  }
  for (int i = 0; i < s->nx; i++) {
    for (int j = 0; j < s->my; j++) {
      int p = i * s->my + j;
      sum += s->metric_line[i] * s->dual_x[i] * s->y.length[j] * f->hx[p] * f->hx[p];
    }
  }
  return sum;
}

/* --- Slopes of averages ----------------------------------------------------------------------- */

static void subtract(int count, double complex factor, double complex *a, const double complex *b) {
  for (int p = 0; p < count; p++) {
    a[p] = factor * (a[p] - b[p]);
  }
}

/* d(sites)/dt for permittivities ε + t δ, by a central difference. */
static picket_status sites_slope(pk_section *s, const double complex *direction, pk_sites *out) {
  picket_context *context = s->context;
  pk_sites high = {0}, low = {0};
  double complex *moved = PK_NEW(context, 3 * s->media, double complex);
  picket_status status = moved ? PICKET_OK : PICKET_ERROR_MEMORY;
  pk_sites *side[2] = {&high, &low};
  for (int k = 0; k < 2 && status == PICKET_OK; k++) {
    status = pk_sites_create(s, side[k]);
    for (int m = 0; m < 3 * s->media; m++) {
      moved[m] = s->permittivity[m] + (k == 0 ? STEP : -STEP) * direction[m];
    }
    if (status == PICKET_OK) {
      status = pk_sites_fill(s, moved, side[k]);
    }
  }
  if (status == PICKET_OK) {
    double complex factor = 0.5 / STEP;
    subtract(s->mx * s->ny, factor, high.x, low.x);
    subtract(s->nx * s->my, factor, high.y, low.y);
    subtract(s->nx * s->ny, factor, high.z, low.z);
    subtract(s->nx * s->ny, factor, high.xy, low.xy);
    *out = high;
  } else {
    pk_sites_free(s, &high);
  }
  pk_sites_free(s, &low);
  pk_free(context, moved);
  return status;
}

/* ∫ E·(dε)E for a direction of the permittivities. */
static picket_status energy_slope(pk_section *s, const measure *m, const pk_section_fields *f,
                                  const double complex *direction, double complex *out) {
  pk_sites slope;
  picket_status status = sites_slope(s, direction, &slope);
  if (status == PICKET_OK) {
    *out = energy(s, m, &slope, f);
    pk_sites_free(s, &slope);
  }
  return status;
}

static const measure RECIPROCAL = {false, -1}; /* E_t² - E_z², stretched */
static const measure PLAIN = {true, 1};

picket_status pk_section_group_index(pk_section *s, const pk_section_fields *f,
                                     const double complex *slope, double complex *out) {
  double complex sum = energy(s, &RECIPROCAL, &s->sites, f) + magnetic(s, f);
  if (slope) {
    double complex dispersion;
    picket_status status = energy_slope(s, &RECIPROCAL, f, slope, &dispersion);
    if (status != PICKET_OK) {
      return status;
    }
    sum += dispersion;
  }
  *out = sum / (2 * pk_section_product(s, f, f));
  return PICKET_OK;
}

/* Unit direction of one medium: its own permittivity, so that the step is relative. */
static void direction_of(const pk_section *s, int medium, double complex *direction) {
  memset(direction, 0, (size_t)(3 * s->media) * sizeof *direction);
  for (int c = 0; c < 3; c++) {
    direction[c * s->media + medium] = s->permittivity[c * s->media + medium];
  }
}

picket_status pk_section_pulls(pk_section *s, double k0, const pk_section_fields *f,
                               double complex *pulls) {
  double complex *direction = PK_NEW(s->context, 3 * s->media, double complex);
  picket_status status = direction ? PICKET_OK : PICKET_ERROR_MEMORY;
  double complex power = pk_section_product(s, f, f);
  for (int m = 0; m < s->media && status == PICKET_OK; m++) {
    direction_of(s, m, direction);
    double complex change = 0;
    if (pk_section_uses(s, m)) {
      status = energy_slope(s, &RECIPROCAL, f, direction, &change);
    }
    pulls[m] = k0 * change / (2 * power * s->permittivity[m]);
  }
  pk_free(s->context, direction);
  return status;
}

picket_status pk_section_confinement(pk_section *s, const pk_section_fields *f, double *share) {
  double complex *direction = PK_NEW(s->context, 3 * s->media, double complex);
  picket_status status = direction ? PICKET_OK : PICKET_ERROR_MEMORY;
  double total = creal(energy(s, &PLAIN, &s->sites, f));
  for (int m = 0; m < s->media && status == PICKET_OK; m++) {
    direction_of(s, m, direction);
    double complex part = 0;
    if (pk_section_uses(s, m)) {
      status = energy_slope(s, &PLAIN, f, direction, &part);
    }
    share[m] = creal(part) / total;
  }
  pk_free(s->context, direction);
  return status;
}

/* --- Looks ------------------------------------------------------------------------------------ */

/* Values along one direction at both ends of an interval, electric walls counting as zero. */
static double flow_x(const pk_section *s, const pk_section_fields *f, int i, int j) {
  return j < 0 ? 0 : creal(f->ex[i * s->ny + j] * conj(f->hy[i * s->ny + j]));
}

static double flow_y(const pk_section *s, const pk_section_fields *f, int i, int j) {
  return i < 0 ? 0 : -creal(f->ey[i * s->my + j] * conj(f->hx[i * s->my + j]));
}

/* S_z in the middle of a cell: E_x h_y comes from the two lines above and below, E_y h_x from those
 * beside it; both products are continuous there. */
static double flow_at(const pk_section *s, const pk_section_fields *f, int i, int j) {
  return 0.5 *
         (flow_x(s, f, i, pk_line_index(&s->y, j)) + flow_x(s, f, i, pk_line_index(&s->y, j + 1)) +
          flow_y(s, f, pk_line_index(&s->x, i), j) + flow_y(s, f, pk_line_index(&s->x, i + 1), j));
}

static double effective_area(const pk_section *s, const pk_section_fields *f) {
  double sum = 0, squares = 0;
  for (int i = 0; i < s->mx; i++) {
    for (int j = 0; j < s->my; j++) {
      double area = interval_width(&s->x, i) * interval_width(&s->y, j);
      double flow = flow_at(s, f, i, j);
      sum += area * flow;
      squares += area * flow * flow;
    }
  }
  return sum * sum / squares;
}

void pk_section_look(const pk_section *s, const pk_section_fields *f, pk_section_looks *out) {
  double x = creal(energy_x(s, &PLAIN, &s->sites, f));
  double y = creal(energy_y(s, &PLAIN, &s->sites, f));
  double z = creal(energy_nodes(s, &PLAIN, &s->sites, f, false));
  out->ex_share = x / (x + y);
  out->ez_share = z / (x + y + z);
  out->effective_area = effective_area(s, f);
}
