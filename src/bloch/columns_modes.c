/* The list of waves of a reduced cell from the eigenpairs of its dense problem: pairs ξ, 1/ξ, their
 * order, left and right vectors.
 *
 * With T(ξ)ᵀ = T(1/ξ) the left vector of ξ is the right vector of 1/ξ; in a mirrored cell ξ and 1/ξ
 * have the same vectors on the mirror. Among copies of one ξ left and right vectors are combined so
 * that lᵀT'(ξ)r = 0 for two different ones. */
#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"
#include "dense/dense.h"

/* ξ of a pair multiply to 1 up to the square root of rounding at least, at a band edge. */
static const double PAIRED = 1e-5;
/* ξ closer than this, relatively, are taken for copies. */
static const double COPIES = 1e-6;
/* Waves with |ln|ξ|| below this propagate as far as rounding can tell. */
static const double PROPAGATES = 1e-9;

/* ξ of the pair ξ + 1/ξ = μ that decays along +z, or has Im ξ >= 0. */
static double complex of_pair(double complex mu) {
  double complex half = mu / 2, root = csqrt((half - 1) * (half + 1));
  double complex xi = creal(conj(half) * root) >= 0 ? half + root : half - root; /* |ξ| >= 1 */
  bool propagates = fabs(log(cabs(xi))) < PROPAGATES;
  return propagates && cimag(xi) >= 0 ? xi : 1 / xi;
}

/* An eigenpair that is kept. */
typedef struct kept {
  double complex xi;
  int index, partner; /* of the eigenpair; of 1/ξ (the same one in a mirrored cell), -1 if none */
} kept;

static int by_change(const void *a, const void *b) {
  const kept *x = a, *y = b;
  /* Rounding must not say which of two propagating waves is first. */
  double dx = floor(fabs(log(cabs(x->xi))) / PAIRED), dy = floor(fabs(log(cabs(y->xi))) / PAIRED);
  if (dx != dy) {
    return dx < dy ? -1 : 1;
  }
  double ax = fabs(carg(x->xi)), ay = fabs(carg(y->xi));
  return ax < ay ? -1 : ax > ay ? 1 : x->index - y->index;
}

/* The member of a pair of computed values that stands first: ξ² = ξᵢ/ξⱼ makes both its members from
 * both values. */
static kept from_pair(const kept *a, const kept *b) {
  double complex xi = csqrt(a->xi / b->xi);
  xi = creal(conj(a->xi) * xi) >= 0 ? xi : -xi;
  bool propagates = fabs(log(cabs(xi))) < PROPAGATES;
  bool turned = propagates ? cimag(xi) < 0 : cabs(xi) > 1;
  return turned ? (kept){1 / xi, b->index, a->index} : (kept){xi, a->index, b->index};
}

/* Joins values into pairs with a product of 1, the nearest first; the list becomes one of pairs. */
static picket_status make_pairs(picket_context *context, double reach, kept *list, int *count) {
  int pairs = 0, left = *count;
  while (left > pairs) {
    int first = pairs, best = -1;
    double nearest = PAIRED;
    for (int j = first + 1; j < left; j++) {
      double off = cabs(list[first].xi * list[j].xi - 1);
      if (off < nearest) {
        nearest = off;
        best = j;
      }
    }
    if (best < 0 && fabs(log(cabs(list[first].xi))) > reach) {
      list[first] = list[--left]; /* its partner is out of reach, and so is it */
      continue;
    }
    if (best < 0) {
      return pk_fail(context, PICKET_ERROR_NUMERIC,
                     "the Bloch wave exp(ikΛ) = %g%+gi has no partner at its inverse",
                     creal(list[first].xi), cimag(list[first].xi));
    }
    kept pair = from_pair(&list[first], &list[best]);
    list[best] = list[--left];
    list[pairs++] = pair;
  }
  *count = pairs;
  return PICKET_OK;
}

static bool are_copies(const kept *a, const kept *b) {
  return cabs(a->xi - b->xi) < COPIES * cabs(a->xi);
}

/* Moves the copies of a value behind its first one. */
static void gather_copies(kept *list, int count) {
  for (int i = 0, next; i < count; i = next) {
    next = i + 1;
    for (int j = next; j < count; j++) {
      if (are_copies(&list[i], &list[j])) {
        kept copy = list[j];
        memmove(list + next + 1, list + next, (size_t)(j - next) * sizeof *list);
        list[next++] = copy;
      }
    }
  }
}

/* The eigenpairs within reach: single values, or one of each pair. */
static picket_status keep(const pk_spectrum *s, double reach, kept *list, int *count) {
  bool mirrored = s->columns->facts.mirrored, paired = s->columns->facts.symmetric && !mirrored;
  /* Partners of values at the limit must not be cut off. */
  double limit = paired ? reach + PAIRED : reach;
  int found = 0;
  for (int i = 0; i < s->order; i++) {
    if (s->theta[i] == 0) {
      continue;
    }
    double complex sigma = s->sigma, xi = sigma + 1 / s->theta[i];
    if (mirrored) {
      xi = of_pair(sigma + 1 / sigma + 1 / s->theta[i]);
    }
    if (xi != 0 && fabs(log(cabs(xi))) <= limit) {
      list[found++] = (kept){xi, i, mirrored ? i : -1};
    }
  }
  picket_status status = paired ? make_pairs(s->context, reach, list, &found) : PICKET_OK;
  if (status == PICKET_OK) {
    int inside = 0;
    for (int i = 0; i < found; i++) {
      if (fabs(log(cabs(list[i].xi))) <= reach) {
        list[inside++] = list[i];
      }
    }
    qsort(list, (size_t)inside, sizeof *list, by_change);
    gather_copies(list, inside);
    *count = inside;
  }
  return status;
}

static void scale_to_unit(int n, double complex *x) {
  double norm = pk_dense_norm(n, x);
  for (int i = 0; i < n; i++) {
    x[i] /= norm;
  }
}

/* Right and left vectors of the kept pairs, one after the other in `vectors`. */
static void take_vectors(const pk_spectrum *s, const kept *list, int count, double complex *work,
                         double complex *vectors) {
  for (int i = 0; i < count; i++) {
    double complex *x = vectors + 2 * (size_t)i * (size_t)s->n, *y = x + s->n;
    pk_spectrum_right(s, list[i].index, work, x);
    if (!s->columns->facts.symmetric) {
      pk_spectrum_left(s, list[i].index, work, y);
    } else {
      pk_spectrum_right(s, list[i].partner, work, y);
    }
  }
}

/* y = T'(ξ)x up to a factor: ξ S12 - S21/ξ, or in a mirrored cell S12, the slope in μ. */
static void slope_times(const pk_columns *c, double complex xi, const double complex *x,
                        double complex *y) {
  if (c->facts.mirrored) {
    pk_dense_times(c->n, 1, c->n, 1, c->whole.s12, x, 0, y);
  } else {
    pk_dense_times(c->n, 1, c->n, xi, c->whole.s12, x, 0, y);
    pk_dense_times(c->n, 1, c->n, -1 / xi, c->whole.s21, x, 1, y);
  }
}

/* L → L G⁻ᵀ with G = LᵀT'R for the copies from `first` on, so that the new G is 1. */
static picket_status separate(const pk_spectrum *s, const kept *list, int first, int copies,
                              double complex *vectors) {
  size_t n = (size_t)s->n, size = (size_t)copies;
  double complex *G = PK_NEW(s->context, size * (size + 2 * n), double complex);
  int *pivots = PK_NEW(s->context, size, int);
  picket_status status = G && pivots ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    double complex *left = G + size * size, *slope = left + size * n;
    for (size_t j = 0; j < size; j++) {
      const double complex *x = vectors + 2 * ((size_t)first + j) * n;
      slope_times(s->columns, list[first].xi, x, slope + j * n);
      for (size_t i = 0; i < n; i++) {
        left[j + i * size] = x[n + i]; /* Lᵀ, [copies × n] */
      }
    }
    pk_dense_times(copies, copies, s->n, 1, left, slope, 0, G);
    /* A defective wave, at a band edge, has G = 0: its vectors stay as they are. */
    if (pk_dense_lu(s->context, copies, G, pivots) != PICKET_OK) {
      pk_message_clear(s->context);
    } else {
      pk_dense_lu_solve(copies, G, pivots, s->n, left);
      for (size_t j = 0; j < size; j++) {
        double complex *y = vectors + 2 * ((size_t)first + j) * n + n;
        for (size_t i = 0; i < n; i++) {
          y[i] = left[j + i * size];
        }
        scale_to_unit(s->n, y);
      }
    }
  }
  pk_free(s->context, G);
  pk_free(s->context, pivots);
  return status;
}

static picket_status separate_copies(const pk_spectrum *s, const kept *list, int count,
                                     double complex *vectors) {
  picket_status status = PICKET_OK;
  for (int i = 0, next; status == PICKET_OK && i < count; i = next) {
    next = i + 1;
    while (next < count && are_copies(&list[i], &list[next])) {
      next++;
    }
    if (next - i > 1) {
      status = separate(s, list, i, next - i, vectors);
    }
  }
  return status;
}

/* The terms of T(ξ)x = (A₀ + ξ S12 + S21/ξ)x without the phases, [n] each. */
typedef struct terms {
  int n;
  double complex *rest, *forward, *backward;
} terms;

static void take_terms(const pk_columns *c, const double complex *A0, const double complex *x,
                       terms *t) {
  pk_dense_times(t->n, 1, t->n, 1, A0, x, 0, t->rest);
  pk_dense_times(t->n, 1, t->n, 1, c->whole.s12, x, 0, t->forward);
  pk_dense_times(t->n, 1, t->n, 1, c->whole.s21, x, 0, t->backward);
}

/* The root of yᵀT(ξ)x = 0 next to ξ, of second order in the errors of both vectors, so that what
 * was dropped from S12 and S21 does not count. */
static double complex improve(const terms *t, const double complex *y, double complex xi) {
  double complex A = 0, C = 0, rest = 0;
  for (int i = 0; i < t->n; i++) {
    A += xi * y[i] * t->forward[i];
    C += y[i] * t->backward[i] / xi;
    rest += y[i] * t->rest[i];
  }
  rest += A + C;
  /* ξ(1 + δ): A δ + C (1/(1 + δ) - 1) + rest = 0. */
  double complex linear = A - C + rest, root = csqrt(linear * linear - 4 * A * rest);
  double complex denominator = creal(conj(linear) * root) >= 0 ? linear + root : linear - root;
  double complex delta = denominator == 0 ? 0 : -2 * rest / denominator;
  return cabs(delta) < COPIES ? xi * (1 + delta) : xi; /* else y belongs to a defective wave */
}

/* |T(ξ)x| over the summed norms of its terms. */
static double residual_of(const terms *t, double complex xi) {
  double size = pk_dense_norm(t->n, t->rest) + cabs(xi) * pk_dense_norm(t->n, t->forward) +
                pk_dense_norm(t->n, t->backward) / cabs(xi);
  double sum = 0;
  for (int i = 0; i < t->n; i++) {
    double off = cabs(t->rest[i] + xi * t->forward[i] + t->backward[i] / xi);
    sum += off * off;
  }
  return sqrt(sum) / size;
}

/* A wave, or a pair of two, from the vectors x, y of its first member. */
static void fill_modes(const pk_columns *c, const kept *from, const double complex *A0, terms *t,
                       double complex *x, double complex *y, int place, pk_column_mode *mode) {
  take_terms(c, A0, x, t);
  double complex xi = improve(t, y, from->xi);
  /* At a band edge the functional is flat: the computed pair fits better. */
  xi = residual_of(t, xi) <= residual_of(t, from->xi) ? xi : from->xi;
  mode[0] = (pk_column_mode){xi, x, y, residual_of(t, xi), -1};
  if (from->partner >= 0) {
    double complex *right = c->facts.symmetric ? y : x, *left = c->facts.symmetric ? x : y;
    take_terms(c, A0, right, t);
    mode[0].partner = place + 1;
    mode[1] = (pk_column_mode){1 / xi, right, left, residual_of(t, 1 / xi), place};
  }
}

/* The list for the caller: both members of each pair. */
static picket_status list_modes(const pk_spectrum *s, const kept *list, int count,
                                pk_column_modes *out) {
  const pk_columns *c = s->columns;
  size_t n = (size_t)s->n;
  int members = count > 0 && list[0].partner >= 0 ? 2 : 1;
  out->mode = PK_NEW(s->context, (size_t)members * (size_t)count, pk_column_mode);
  double complex *A0 = PK_NEW(s->context, n * (n + 3), double complex);
  picket_status status = out->mode && A0 ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    terms t = {s->n, A0 + n * n, A0 + n * (n + 1), A0 + n * (n + 2)};
    pk_columns_matrix(c, 1, A0);
    for (size_t i = 0; i < n * n; i++) {
      A0[i] -= c->whole.s12[i] + c->whole.s21[i];
    }
    for (int i = 0; i < count; i++) {
      double complex *x = out->vectors + 2 * (size_t)i * n;
      int place = members * i;
      fill_modes(c, &list[i], A0, &t, x, x + n, place, out->mode + place);
    }
    out->count = members * count;
  }
  pk_free(s->context, A0);
  return status;
}

static picket_status take_modes(const pk_spectrum *s, double reach, pk_column_modes *out) {
  size_t n = (size_t)s->n;
  int count = 0;
  kept *list = PK_NEW(s->context, s->order, kept);
  double complex *work = PK_NEW(s->context, s->order, double complex);
  picket_status status = list && work ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = keep(s, reach, list, &count);
  }
  if (status == PICKET_OK) {
    out->vectors = PK_NEW(s->context, 2 * n * (size_t)count, double complex);
    status = out->vectors ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    take_vectors(s, list, count, work, out->vectors);
    status = separate_copies(s, list, count, out->vectors);
  }
  if (status == PICKET_OK) {
    status = list_modes(s, list, count, out);
  }
  pk_free(s->context, list);
  pk_free(s->context, work);
  return status;
}

picket_status pk_columns_modes(const pk_columns *columns, double reach, pk_column_modes *out) {
  assert(reach > 0);
  pk_spectrum s;
  pk_column_modes modes = {.context = columns->context};
  picket_status status = pk_spectrum_solve(columns, &s);
  if (status == PICKET_OK) {
    status = take_modes(&s, fmin(reach, PK_COLUMNS_FARTHEST), &modes);
  }
  pk_spectrum_close(&s);
  if (status == PICKET_OK) {
    *out = modes;
  } else {
    pk_column_modes_clear(&modes);
  }
  return status;
}

void pk_column_modes_clear(pk_column_modes *modes) {
  if (modes->context) {
    pk_free(modes->context, modes->mode);
    pk_free(modes->context, modes->vectors);
  }
  *modes = (pk_column_modes){0};
}
