/* See taper_plane.h.
 *
 *   η = |∫h_a h_b*|² / (∫|h_a|² ∫|h_b|²)
 *
 * never exceeds 1 (Cauchy and Schwarz) and is 1 for equal shapes alone. Where E is everywhere the
 * same multiple of h, as in a plain guide in ey and nearly so where one medium fills the plane, it
 * is the overlap of section/overlap.h (A. W. Snyder and J. D. Love, Optical Waveguide Theory
 * (1983), ch. 20 and 31). Where the media of hy differ across the plane that one is no share: E
 * jumps at other places in a than in b, waves that go back count against those that go on, and it
 * exceeds 1 (a film of 2.8 in 1.444 that narrows from 450 to 420 nm at 1550 nm: 1.0007).
 *
 * What reflects is found from the power form q(F, G) = ∫(E_F h_G* + E_G* h_F), in which the waves
 * (E, h) and (E*, -h*) that a lossless guide carries forth and back are orthogonal: a + r a' = t b
 * has no part along b', so r = ∫(E_b h_a - E_a h_b) / ∫(E_a* h_b + E_b h_a*), which is exact where
 * nothing varies across.
 *
 * Between its places a field is a polynomial through the four nearest ones, none of which lies
 * beyond an interface: there h has a kink, and E may have a jump, of which the place on the
 * interface itself tells nothing. Products of two such polynomials are integrated exactly between
 * neighbouring places of both planes, so a plane has the overlap 1 with itself, and one with
 * another changes in second order with what they differ by. Beyond its ends a field is zero. */
#include "study/taper_plane.h"

#include <math.h>

#include "base/memory.h"

enum { STENCIL = 4, NODES = 4 };

/* Gauss and Legendre on (-1, 1): exact to degree 7, a product of two cubics has 6. */
static const double NODE[NODES] = {-0.861136311594052575, -0.339981043584856265,
                                   0.339981043584856265, 0.861136311594052575};
static const double WEIGHT[NODES] = {0.347854845137453857, 0.652145154862546143,
                                     0.652145154862546143, 0.347854845137453857};

/* Permittivities that differ by less than this part are of one medium. */
static const double SAME_MEDIUM = 1e-6;

picket_status pk_plane_create(picket_context *context, int count, pk_plane *out) {
  pk_plane plane = {.count = count};
  plane.x = PK_NEW(context, count, double);
  plane.e = PK_NEW(context, count, double complex);
  plane.h = PK_NEW(context, count, double complex);
  plane.interface = PK_NEW(context, count, bool);
  if (!plane.x || !plane.e || !plane.h || !plane.interface) {
    pk_plane_clear(context, &plane);
    return PICKET_ERROR_MEMORY;
  }
  *out = plane;
  return PICKET_OK;
}

void pk_plane_clear(picket_context *context, pk_plane *plane) {
  pk_free(context, plane->x);
  pk_free(context, plane->e);
  pk_free(context, plane->h);
  pk_free(context, plane->interface);
  *plane = (pk_plane){0};
}

static bool differ(double complex a, double complex b) {
  return cabs(a - b) > SAME_MEDIUM * cabs(a);
}

picket_status pk_plane_of_field(const picket_field *field, pk_plane *out) {
  bool ey = field->about.polarization == PICKET_EY;
  int low = 0, high = field->nx - 1;
  while (low < high && field->x[low] < field->about.x_from_um) {
    low++;
  }
  while (high > low && field->x[high] > field->about.x_to_um) {
    high--;
  }
  pk_plane plane = {0};
  picket_status status = pk_plane_create(field->context, high - low + 1, &plane);
  if (status != PICKET_OK) {
    return status;
  }
  plane.jumps = !ey;
  int64_t first = (int64_t)(field->nz - 1) * field->nx + low;
  for (int i = 0; i < plane.count; i++) {
    const double complex *medium = &field->permittivity[first + i];
    plane.x[i] = field->x[low + i];
    /* (z, x, y) is right-handed: x × y = z, y × x = -z. */
    plane.e[i] = ey ? field->y[first + i] : field->across[first + i];
    plane.h[i] = ey ? -field->across[first + i] : field->y[first + i];
    plane.interface[i] = i > 0 && i + 1 < plane.count && differ(medium[0], medium[-1]) &&
                         differ(medium[0], medium[1]);
  }
  *out = plane;
  return PICKET_OK;
}

/* --- Values between the places -----------------------------------------------------------------
 */

/* A plane that is walked through by rising x. */
typedef struct walker {
  const pk_plane *plane;
  int interval; /* the place is between places `interval` and the next */
} walker;

/* Moves on to the interval of x; false outside the plane. */
static bool walk(walker *w, double x) {
  const pk_plane *p = w->plane;
  if (x < p->x[0] || x > p->x[p->count - 1]) {
    return false;
  }
  while (w->interval + 2 < p->count && x > p->x[w->interval + 1]) {
    w->interval++;
  }
  return true;
}

/* The places that a value in an interval is taken from: [first, first + count). */
static int stencil(const pk_plane *p, int interval, bool skip_interfaces, int *first) {
  int low = interval, high = interval + 1;
  while (low > 0 && !p->interface[low] && interval - low < STENCIL) {
    low--;
  }
  while (high + 1 < p->count && !p->interface[high] && high - interval < STENCIL) {
    high++;
  }
  if (skip_interfaces && high - low > 1) {
    low += p->interface[low];
    high -= p->interface[high];
  }
  int centred = interval - STENCIL / 2 + 1;
  *first = centred < low ? low : centred;
  if (*first + STENCIL > high + 1) {
    *first = high + 1 - STENCIL < low ? low : high + 1 - STENCIL;
  }
  return high + 1 - *first < STENCIL ? high + 1 - *first : STENCIL;
}

/* Lagrange. */
static double complex between(const pk_plane *p, const double complex *values, int first, int count,
                              double x) {
  double complex sum = 0;
  for (int i = first; i < first + count; i++) {
    double factor = 1;
    for (int k = first; k < first + count; k++) {
      factor *= k == i ? 1 : (x - p->x[k]) / (p->x[i] - p->x[k]);
    }
    sum += factor * values[i];
  }
  return sum;
}

static void values_at(const walker *w, double x, double complex *e, double complex *h) {
  int first = 0;
  int count = stencil(w->plane, w->interval, false, &first);
  *h = between(w->plane, w->plane->h, first, count, x);
  if (w->plane->jumps) {
    count = stencil(w->plane, w->interval, true, &first);
  }
  *e = between(w->plane, w->plane->e, first, count, x);
}

/* --- Two planes --------------------------------------------------------------------------------
 */

/* Places of both planes in one list, rising; returns how many. */
static int merge(const pk_plane *a, const pk_plane *b, double *x) {
  int i = 0, k = 0, count = 0;
  while (i < a->count || k < b->count) {
    bool of_a = k == b->count || (i < a->count && a->x[i] <= b->x[k]);
    double next = of_a ? a->x[i++] : b->x[k++];
    if (count == 0 || next > x[count - 1]) {
      x[count++] = next;
    }
  }
  return count;
}

typedef struct products {
  double complex aa, ab, ba, bb; /* ∫E_a h_a*, ∫E_a h_b*, … */
  double complex shape;          /* ∫h_a h_b* */
  double shape_a, shape_b;       /* ∫|h_a|², ∫|h_b|² */
  double complex differ;         /* ∫(E_b h_a - E_a h_b) */
} products;

static void add_place(products *sum, double dx, double complex ea, double complex ha,
                      double complex eb, double complex hb) {
  sum->aa += dx * ea * conj(ha);
  sum->ab += dx * ea * conj(hb);
  sum->ba += dx * eb * conj(ha);
  sum->bb += dx * eb * conj(hb);
  sum->shape += dx * ha * conj(hb);
  sum->shape_a += dx * creal(ha * conj(ha));
  sum->shape_b += dx * creal(hb * conj(hb));
  sum->differ += dx * (eb * ha - ea * hb);
}

static void add_interval(walker *a, walker *b, double low, double high, products *sum) {
  for (int n = 0; n < NODES; n++) {
    double x = 0.5 * (low + high + NODE[n] * (high - low)), dx = 0.5 * WEIGHT[n] * (high - low);
    double complex ea = 0, ha = 0, eb = 0, hb = 0;
    if (walk(a, x)) {
      values_at(a, x, &ea, &ha);
    }
    if (walk(b, x)) {
      values_at(b, x, &eb, &hb);
    }
    add_place(sum, dx, ea, ha, eb, hb);
  }
}

/* Nothing varies across: the planes are numbers. */
static bool is_point(const pk_plane *plane) {
  return plane->count == 1;
}

static picket_status add_all(picket_context *context, const pk_plane *a, const pk_plane *b,
                             products *sum) {
  double *x = PK_NEW(context, (size_t)a->count + (size_t)b->count, double);
  if (!x) {
    return PICKET_ERROR_MEMORY;
  }
  walker on_a = {a, 0}, on_b = {b, 0};
  int count = merge(a, b, x);
  for (int i = 0; i + 1 < count; i++) {
    add_interval(&on_a, &on_b, x[i], x[i + 1], sum);
  }
  pk_free(context, x);
  return PICKET_OK;
}

picket_status pk_plane_meet(picket_context *context, const pk_plane *a, const pk_plane *b,
                            pk_joint *out) {
  products sum = {0};
  picket_status status = PICKET_OK;
  if (is_point(a) && is_point(b)) {
    add_place(&sum, 1, a->e[0], a->h[0], b->e[0], b->h[0]);
  } else if (!is_point(a) && !is_point(b)) {
    status = add_all(context, a, b, &sum);
  }
  if (status == PICKET_OK) {
    double both = cabs(sum.aa * sum.bb), together = cabs(conj(sum.ab) + sum.ba);
    double r = together > 0 ? cabs(sum.differ) / together : NAN;
    double shapes = sum.shape_a * sum.shape_b, alike = cabs(sum.shape);
    out->share = both > 0 ? fmin(1, alike * alike / shapes) : NAN; /* 1 but for rounding */
    out->reflection = both > 0 ? r * r : NAN;
  }
  return status;
}

/* --- One plane ---------------------------------------------------------------------------------
 */

/* ∫ x^power Re E h* for powers 0 to 2, about `origin`. */
static void moments(const pk_plane *plane, double origin, double out[3]) {
  walker w = {plane, 0};
  out[0] = out[1] = out[2] = 0;
  for (int i = 0; i + 1 < plane->count; i++) {
    double half = 0.5 * (plane->x[i + 1] - plane->x[i]);
    for (int n = 0; n < NODES; n++) {
      double x = plane->x[i] + half * (1 + NODE[n]), power = 0;
      double complex e = 0, h = 0;
      walk(&w, x);
      values_at(&w, x, &e, &h);
      power = half * WEIGHT[n] * creal(e * conj(h));
      out[0] += power;
      out[1] += power * (x - origin);
      out[2] += power * (x - origin) * (x - origin);
    }
  }
}

void pk_plane_size(const pk_plane *plane, double *centroid, double *size) {
  double m[3];
  *centroid = *size = NAN;
  if (is_point(plane)) {
    return;
  }
  moments(plane, 0, m);
  if (!(m[0] > 0)) {
    return;
  }
  *centroid = m[1] / m[0];
  moments(plane, *centroid, m);
  *size = m[2] > 0 ? 4 * sqrt(m[2] / m[0]) : NAN;
}

void pk_plane_beam(const pk_plane *plane, double centre, double diameter, double *share) {
  static const double SQRT_HALF_PI = 1.253314137315500251; /* ∫exp(-2x²/w²) dx over w */
  double complex power = 0, with_e = 0, with_h = 0;
  walker w = {plane, 0};
  for (int i = 0; i + 1 < plane->count; i++) {
    double half = 0.5 * (plane->x[i + 1] - plane->x[i]);
    for (int n = 0; n < NODES; n++) {
      double x = plane->x[i] + half * (1 + NODE[n]), dx = half * WEIGHT[n];
      double away = 2 * (x - centre) / diameter, g = exp(-away * away);
      double complex e = 0, h = 0;
      walk(&w, x);
      values_at(&w, x, &e, &h);
      power += dx * e * conj(h);
      with_e += dx * e * g;
      with_h += dx * g * conj(h);
    }
  }
  double both = cabs(power) * SQRT_HALF_PI * 0.5 * diameter;
  *share = both > 0 ? cabs(with_e * with_h) / both : NAN;
}
