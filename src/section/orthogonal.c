/* See orthogonal.h.
 *
 * Modes of one level, h_1 … h_g, have the complex symmetric matrix of products P. In a real section
 * the level is spanned by real h, found as the g strongest combinations of their real and imaginary
 * parts; among real forward modes P is positive. So pivoted Gram-Schmidt in P succeeds there; with
 * losses a pivot can vanish (x + iy of a round guide), and then the sum with another vector is
 * taken, whose product does not. */
#include "section/orthogonal.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "section/forms.h"
#include "section/section_private.h"

/* Levels closer than this are one: pairs that a symmetry makes equal come out equal to about 1e-11,
 * while splits of geometry differ by more than the error of the grid. */
static const double SAME_LEVEL = 1e-9;

/* A pivot below this part of the norm counts as vanishing. */
static const double WEAK = 1e-3;

static picket_status product_of(pk_section *s, double k0, const pk_section_mode *a,
                                const pk_section_mode *b, double complex *out) {
  pk_section_fields fa = {0}, fb = {0};
  picket_status status = pk_section_fields_take(s, k0, a, &fa);
  if (status == PICKET_OK) {
    status = pk_section_fields_take(s, k0, b, &fb);
  }
  if (status == PICKET_OK) {
    *out = pk_section_product(s, &fa, &fb);
  }
  pk_section_fields_clear(&fa);
  pk_section_fields_clear(&fb);
  return status;
}

static void add(int64_t n, double complex factor, const double complex *x, double complex *y) {
  for (int64_t p = 0; p < n; p++) {
    y[p] += factor * x[p];
  }
}

static void scale(int64_t n, double complex factor, double complex *x) {
  for (int64_t p = 0; p < n; p++) {
    x[p] *= factor;
  }
}

/* Turns the phase so that Σ h² is real and positive: a vector that is real up to a phase becomes
 * real. */
static void make_real(int64_t n, double complex *h, bool drop) {
  double complex sum = 0;
  double largest = 0, sign = 1;
  for (int64_t p = 0; p < n; p++) {
    sum += h[p] * h[p];
  }
  if (cabs(sum) > 0) {
    scale(n, 1 / csqrt(sum / cabs(sum)), h);
  }
  for (int64_t p = 0; p < n; p++) {
    h[p] = drop ? creal(h[p]) : h[p];
    if (fabs(creal(h[p])) > largest * (1 + 1e-6)) { /* ties go to the first */
      largest = fabs(creal(h[p]));
      sign = creal(h[p]) < 0 ? -1 : 1;
    }
  }
  scale(n, sign, h);
}

/* Real vectors that span a level of a real section: the real and imaginary parts of its complex
 * ones, the strongest first, each without its share in those before it. */
static picket_status real_span(pk_section *s, int count, pk_section_mode *modes) {
  int64_t n = s->n;
  double complex *part = PK_NEW(s->context, 2 * count * n, double complex);
  if (!part) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < count; i++) {
    make_real(n, modes[i].h, false);
    for (int64_t p = 0; p < n; p++) {
      part[2 * i * n + p] = creal(modes[i].h[p]);
      part[(2 * i + 1) * n + p] = cimag(modes[i].h[p]);
    }
  }
  for (int k = 0; k < count; k++) {
    int best = 0;
    double norm = 0;
    for (int i = 0; i < 2 * count; i++) {
      double size = pk_dense_norm((long)n, part + i * n);
      if (size > norm * (1 + 1e-6)) {
        best = i;
        norm = size;
      }
    }
    memcpy(modes[k].h, part + best * n, (size_t)n * sizeof *part);
    scale(n, 1 / norm, modes[k].h);
    for (int i = 0; i < 2 * count; i++) {
      add(n, -pk_dense_dot((long)n, modes[k].h, part + i * n), modes[k].h, part + i * n);
    }
  }
  pk_free(s->context, part);
  return PICKET_OK;
}

/* Makes modes[k] one whose product with itself does not vanish, from those at k and above. */
static picket_status choose_pivot(pk_section *s, double k0, int k, int count,
                                  pk_section_mode *modes) {
  double complex self = 0;
  picket_status status = product_of(s, k0, &modes[k], &modes[k], &self);
  for (int i = k + 1; status == PICKET_OK && i < count && cabs(self) < WEAK; i++) {
    add(s->n, 1, modes[i].h, modes[k].h); /* i stays: the span does not change */
    status = product_of(s, k0, &modes[k], &modes[k], &self);
  }
  return status;
}

static picket_status orthogonalise_level(pk_section *s, double k0, int count,
                                         pk_section_mode *modes) {
  picket_status status = s->is_real && count > 1 ? real_span(s, count, modes) : PICKET_OK;
  for (int k = 0; status == PICKET_OK && k < count; k++) {
    status = choose_pivot(s, k0, k, count, modes);
    if (count == 1) {
      make_real(s->n, modes[k].h, s->is_real);
    }
    double complex self = 0;
    if (status == PICKET_OK) {
      status = product_of(s, k0, &modes[k], &modes[k], &self);
    }
    if (status == PICKET_OK && self != 0 && fabs(cimag(modes[k].beta)) < creal(modes[k].beta)) {
      scale(s->n, 1 / csqrt(self), modes[k].h);
    }
    for (int i = k + 1; status == PICKET_OK && i < count; i++) {
      double complex cross = 0;
      status = product_of(s, k0, &modes[k], &modes[i], &cross);
      add(s->n, -cross, modes[k].h, modes[i].h);
      scale(s->n, 1 / pk_dense_norm((long)s->n, modes[i].h), modes[i].h);
    }
  }
  return status;
}

picket_status pk_section_orthogonalise(pk_section *s, double k0, int count,
                                       pk_section_mode *modes) {
  picket_status status = PICKET_OK;
  for (int first = 0; status == PICKET_OK && first < count;) {
    int last = first + 1;
    double complex level = modes[first].beta_square;
    while (last < count && cabs(modes[last].beta_square - level) < SAME_LEVEL * cabs(level)) {
      last++;
    }
    status = orthogonalise_level(s, k0, last - first, modes + first);
    first = last;
  }
  return status;
}
