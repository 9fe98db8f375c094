/* See trace.h.
 *
 * Fields tell: the modes of a guide are orthogonal, so at most one mode of the next wavelength
 * holds more than half of a mode of this one, |⟨a, b⟩|² > ½. Pairs are made from the best overlap
 * downwards. Where overlaps do not decide (at a point in the middle of two modes that repel each
 * other, or without a lateral direction) the index does, which goes on as its slope says.
 *
 * With n the Bloch index and n_g the group index, dn/dλ = (n - n_g)/λ; inside a stop band n is
 * proportional to λ, which is the same with n_g = 0. For a mode between two wavelengths,
 *
 *   n(λ₂) - n(λ₁) ≈ ½ (s₁ + s₂) (λ₂ - λ₁),   s = dn/dλ at either end,
 *
 * with an error of third order; and by the mean value theorem the left side is (λ₂ - λ₁) times a
 * slope that occurs in between, so it misses the right side by at most ½ |s₁ - s₂| |λ₂ - λ₁| if the
 * slope is monotonic. Twice that (and what the bars allow) is the limit beyond which two modes are
 * not taken for one. Where fits differ by less than the bars, the same number of lateral nodes
 * decides. */
#include "study/trace.h"

#include <math.h>

#include "base/memory.h"

/* Indices closer than this are one where no bar is known, relative. */
static const double RESOLUTION = 1e-6;

/* Overlaps that differ by less do not decide: profiles see the main harmonic, without weights. */
static const double NEARLY = 0.1;
/* Two modes in the middle of repelling each other share half of what they were, and a little less
 * by profiles. */
static const double SHARED = 0.3;

typedef struct pair {
  int from, to;   /* modes of either point */
  double overlap; /* 1 for all where it is not known */
  double misfit;
} pair;

/* A point with the profiles of its modes, null if there are none. */
typedef struct traced {
  const picket_index_point *point;
  const pk_profile *profile;
} traced;

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

static double overlap_of(const traced *known, int i, const traced *next, int j) {
  return known->profile && next->profile ? pk_profile_overlap(&known->profile[i], &next->profile[j])
                                         : NAN;
}

/* Pairs that may be one mode. */
static int possible_pairs(const traced *known, const traced *next, pair *pairs) {
  int count = 0;
  for (int i = 0; i < known->point->mode_count; i++) {
    for (int j = 0; j < next->point->mode_count; j++) {
      pair p = {i, j, overlap_of(known, i, next, j), 0};
      bool fits = fit(known->point, &known->point->modes[i], next->point, &next->point->modes[j],
                      &p.misfit);
      bool held = isnan(p.overlap) ? fits : p.overlap > 0.5 || (p.overlap > SHARED && fits);
      p.overlap = isnan(p.overlap) ? 1 : p.overlap;
      if (held && !isnan(p.misfit)) {
        pairs[count++] = p;
      }
    }
  }
  return count;
}

/* The pair to make next; -1 if none is left. Pairs with from < 0 are gone. */
static int best_pair(const pair *pairs, int count) {
  double highest = 0;
  for (int p = 0; p < count; p++) {
    highest = pairs[p].from >= 0 ? fmax(highest, pairs[p].overlap) : highest;
  }
  int best = -1;
  for (int p = 0; p < count; p++) {
    bool near = pairs[p].from >= 0 && pairs[p].overlap > highest - NEARLY;
    if (near && (best < 0 || pairs[p].misfit < pairs[best].misfit)) {
      best = p;
    }
  }
  return best;
}

static void drop_rivals(pair *pairs, int count, pair made) {
  for (int p = 0; p < count; p++) {
    if (pairs[p].from == made.from || pairs[p].to == made.to) {
      pairs[p].from = -1;
    }
  }
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

/* Orders of the modes of `next`, [mode_count]; those of `known` (without a point: none yet) are
 * labels already. */
static void label_next(const traced *known, const traced *next, pair *pairs, int *label) {
  for (int j = 0; j < next->point->mode_count; j++) {
    label[j] = -1;
  }
  int count = known->point ? possible_pairs(known, next, pairs) : 0;
  for (int p = best_pair(pairs, count); p >= 0; p = best_pair(pairs, count)) {
    pair made = pairs[p];
    label[made.to] = known->point->modes[made.from].order;
    drop_rivals(pairs, count, made);
  }
  label_newcomers(next->point, label);
}

/* Gives a point its labels and sorts its modes by them, with their profiles. */
static void put_labels(picket_index_point *point, pk_profile *profile, const int *label) {
  picket_bloch_mode *modes = (picket_bloch_mode *)point->modes;
  for (int j = 0; j < point->mode_count; j++) {
    modes[j].order = label[j];
  }
  for (int j = 1; j < point->mode_count; j++) {
    for (int i = j; i > 0 && modes[i - 1].order > modes[i].order; i--) {
      picket_bloch_mode mode = modes[i];
      modes[i] = modes[i - 1];
      modes[i - 1] = mode;
      if (profile) {
        pk_profile moved = profile[i];
        profile[i] = profile[i - 1];
        profile[i - 1] = moved;
      }
    }
  }
}

picket_status pk_trace(picket_context *context, int count, picket_index_point *points,
                       pk_profile *const *profile) {
  traced known = {NULL, NULL};
  picket_status status = PICKET_OK;
  for (int p = count - 1; p >= 0 && status == PICKET_OK; p--) {
    traced next = {&points[p], profile[p]};
    int modes = points[p].mode_count;
    if (modes == 0) {
      continue;
    }
    int *label = PK_NEW(context, modes, int);
    pair *pairs = PK_NEW(context, (known.point ? known.point->mode_count : 0) * modes, pair);
    status = label && pairs ? PICKET_OK : PICKET_ERROR_MEMORY;
    if (status == PICKET_OK) {
      label_next(&known, &next, pairs, label);
      put_labels(&points[p], profile[p], label);
    }
    pk_free(context, label);
    pk_free(context, pairs);
    known = next;
  }
  return status;
}
