/* See trace.h.
 *
 * With n the Bloch index and n_g the group index, dn/dλ = (n - n_g)/λ; inside a stop band n is
 * proportional to λ, which is the same with n_g = 0. For a mode between two wavelengths,
 *
 *   n(λ₂) - n(λ₁) ≈ ½ (s₁ + s₂) (λ₂ - λ₁),   s = dn/dλ at either end,
 *
 * with an error of third order; and by the mean value theorem the left side is (λ₂ - λ₁) times a
 * slope that occurs in between, so it misses the right side by at most ½ |s₁ - s₂| |λ₂ - λ₁| if the
 * slope is monotonic. Twice that (and what the bars allow) is the limit beyond which two modes are
 * not taken for one. Pairs are made from the best fit downwards. Where fits differ by less than the
 * bars, the same number of lateral nodes decides. */
#include "study/trace.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"

/* Indices closer than this are one where no bar is known, relative. */
static const double RESOLUTION = 1e-6;

typedef struct pair {
  int from, to; /* modes of either point */
  double misfit;
} pair;

/* dn/dλ, NaN where it is unknown. */
static double slope_of(const picket_bloch_mode *mode, double wavelength_um) {
  double group = mode->regime == PICKET_REGIME_STOP_BAND ? 0 : mode->group_index.value;
  return (mode->bloch_index.value - group) / wavelength_um;
}

static double bar_of(const picket_bloch_mode *mode) {
  double least = RESOLUTION * fabs(mode->bloch_index.value);
  return isnan(mode->bloch_index.uncertainty) ? least : fmax(least, mode->bloch_index.uncertainty);
}

/* How badly two modes fit each other; false if they cannot be one. */
static bool fit(const picket_index_point *p1, const picket_bloch_mode *m1,
                const picket_index_point *p2, const picket_bloch_mode *m2, double *misfit) {
  double step = p2->wavelength_um - p1->wavelength_um;
  double s1 = slope_of(m1, p1->wavelength_um), s2 = slope_of(m2, p2->wavelength_um);
  s1 = isnan(s1) ? s2 : s1;
  s2 = isnan(s2) ? s1 : s2;
  double middle = isnan(s1) ? 0 : 0.5 * (s1 + s2), spread = isnan(s1) ? 0 : fabs(s1 - s2);
  double bars = bar_of(m1) + bar_of(m2);
  double distance = fabs(m2->bloch_index.value - m1->bloch_index.value - middle * step);
  *misfit = distance + (m1->order == m2->order ? 0 : bars);
  return distance <= spread * fabs(step) + bars; /* false for NaN */
}

static int by_misfit(const void *a, const void *b) {
  const pair *x = a, *y = b;
  if (x->misfit != y->misfit) {
    return x->misfit < y->misfit ? -1 : 1;
  }
  return x->from != y->from ? x->from - y->from : x->to - y->to;
}

static int by_order(const void *a, const void *b) {
  const picket_bloch_mode *x = a, *y = b;
  return x->order - y->order;
}

static int fitting_pairs(const picket_index_point *known, const picket_index_point *next,
                         pair *pairs) {
  int count = 0;
  for (int i = 0; i < known->mode_count; i++) {
    for (int j = 0; j < next->mode_count; j++) {
      pair p = {i, j, 0};
      if (fit(known, &known->modes[i], next, &next->modes[j], &p.misfit)) {
        pairs[count++] = p;
      }
    }
  }
  qsort(pairs, (size_t)count, sizeof *pairs, by_misfit);
  return count;
}

static bool is_taken(const int *label, int count, int order) {
  for (int i = 0; i < count; i++) {
    if (label[i] == order) {
      return true;
    }
  }
  return false;
}

/* Modes that continue none keep their own order, or get the lowest one that is free. */
static void label_newcomers(const picket_index_point *next, int *label) {
  for (int j = 0; j < next->mode_count; j++) {
    int own = next->modes[j].order;
    if (label[j] < 0 && !is_taken(label, next->mode_count, own)) {
      label[j] = own;
    }
  }
  for (int j = 0; j < next->mode_count; j++) {
    int order = 0;
    while (label[j] < 0 && is_taken(label, next->mode_count, order)) {
      order++;
    }
    label[j] = label[j] < 0 ? order : label[j];
  }
}

/* Orders of the modes of `next`, [mode_count]; those of `known` (null: none yet) are labels
 * already.
 */
static void label_next(const picket_index_point *known, const picket_index_point *next, pair *pairs,
                       int *label) {
  for (int j = 0; j < next->mode_count; j++) {
    label[j] = -1;
  }
  int count = known ? fitting_pairs(known, next, pairs) : 0;
  for (int p = 0; p < count; p++) {
    int order = known->modes[pairs[p].from].order;
    if (label[pairs[p].to] < 0 && !is_taken(label, next->mode_count, order)) {
      label[pairs[p].to] = order;
    }
  }
  label_newcomers(next, label);
}

static void put_labels(picket_index_point *point, const int *label) {
  picket_bloch_mode *modes = (picket_bloch_mode *)point->modes;
  for (int j = 0; j < point->mode_count; j++) {
    modes[j].order = label[j];
  }
  qsort(modes, (size_t)point->mode_count, sizeof *modes, by_order);
}

picket_status pk_trace(picket_context *context, int count, picket_index_point *points) {
  const picket_index_point *known = NULL;
  picket_status status = PICKET_OK;
  for (int p = count - 1; p >= 0 && status == PICKET_OK; p--) {
    picket_index_point *next = &points[p];
    if (next->mode_count == 0) {
      continue;
    }
    int *label = PK_NEW(context, next->mode_count, int);
    pair *pairs = PK_NEW(context, (known ? known->mode_count : 0) * next->mode_count, pair);
    status = label && pairs ? PICKET_OK : PICKET_ERROR_MEMORY;
    if (status == PICKET_OK) {
      label_next(known, next, pairs, label);
      put_labels(next, label);
    }
    pk_free(context, label);
    pk_free(context, pairs);
    known = next;
  }
  return status;
}
