/* Elimination of the columns of a chain.
 *
 * A span holds the forces on its two end columns (without their own blocks D). Two spans a, b that
 * meet in a column with the block D are joined by eliminating it, M = S22ᵃ + D + S11ᵇ:
 *   S11 = S11ᵃ - S12ᵃ M⁻¹ S21ᵃ    S12 = -S12ᵃ M⁻¹ S12ᵇ
 *   S21 = -S21ᵇ M⁻¹ S21ᵃ          S22 = S22ᵇ - S21ᵇ M⁻¹ S12ᵇ
 * A stretch of equal columns between equal intervals looks the same from both ends,
 *   S11 = S22 = E,  S12 = S21 = F,
 * and is doubled at the cost of one factorisation, one solve and one product:
 *   P = F (2E + D)⁻¹ F,  E → E - P,  F → -P.
 * The binary digits of the length of a stretch, the highest first, say when to double and when to
 * add one interval. What is not uniform is joined interval by interval, whose blocks are sparse.
 *
 * All products are BLAS-3; costs in units of n³ multiplications are given at each step. */
#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"
#include "dense/dense.h"

/* A stretch costs 5.3 to be joined, m single intervals 3 m. Doubling comes on top, the sum over
 * sines costs next to nothing. */
enum { SHORTEST_DOUBLED = 4, SHORTEST_SUMMED = 2 };

typedef struct merger {
  picket_context *context;
  const pk_chain *chain;
  int n, shortest; /* intervals of a stretch that is not joined interval by interval */
  size_t n2;
  bool symmetric;
  pk_span *acc;
  double complex *E, *F, *M, *X, *Y; /* [n2] */
  int *pivots;                       /* [n] */
} merger;

static void swap(double complex **a, double complex **b) {
  double complex *kept = *a;
  *a = *b;
  *b = kept;
}

static void set_strip(const merger *g, pk_strip strip, double complex *dense) {
  memset(dense, 0, g->n2 * sizeof *dense);
  pk_strip_add(g->n, strip, dense);
}

/* out = dense × strip. */
static void times_strip(const merger *g, const double complex *dense, pk_strip strip,
                        double complex factor, double complex *out) {
  memset(out, 0, g->n2 * sizeof *out);
  for (int c = 0; c < g->n; c++) {
    double complex *to = out + (size_t)c * (size_t)g->n;
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && strip.row[k] >= 0; k++) {
      const double complex *from = dense + (size_t)strip.row[k] * (size_t)g->n;
      double complex value = factor * strip.value[k];
      for (int i = 0; i < g->n; i++) {
        to[i] += value * from[i];
      }
    }
  }
}

/* out = -strip × dense. */
static void minus_strip_times(const merger *g, pk_strip strip, const double complex *dense,
                              double complex *out) {
  for (int c = 0; c < g->n; c++) {
    size_t at = (size_t)c * (size_t)g->n;
    pk_strip_times(g->n, strip, false, dense + at, out + at);
    for (int i = 0; i < g->n; i++) {
      out[at + (size_t)i] = -out[at + (size_t)i];
    }
  }
}

static void transpose(const merger *g, const double complex *from, double complex *to) {
  for (int c = 0; c < g->n; c++) {
    for (int r = 0; r < g->n; r++) {
      to[(size_t)c + (size_t)r * (size_t)g->n] = from[(size_t)r + (size_t)c * (size_t)g->n];
    }
  }
}

void pk_chain_watch(const pk_chain *chain, const double complex *a, const double complex *b,
                    pk_columns_facts *facts) {
  long entries = (long)PK_STRIP * chain->lines, n2 = (long)chain->lines * chain->lines;
  double scale =
      pk_dense_norm(entries, chain->D[1].value) + pk_dense_norm(entries, chain->U[0].value);
  double size = (pk_dense_norm(n2, a) + pk_dense_norm(n2, b)) / scale;
  facts->growth = size <= facts->growth ? facts->growth : size; /* NaN stays */
}

/* C = alpha A B + beta C, known to be symmetric if the cell is. */
static void product(const merger *g, double complex alpha, const double complex *a,
                    const double complex *b, double complex beta, double complex *c) {
  if (g->symmetric) {
    pk_dense_symmetric_times(g->n, alpha, a, b, beta, c);
  } else {
    pk_dense_times(g->n, g->n, g->n, alpha, a, b, beta, c);
  }
}

/* E, F of twice the stretch: 1/3 + 1 + 1/2. `first`: F is the strip U still. */
static picket_status double_stretch(merger *g, pk_strip D, pk_strip U, bool first) {
  for (size_t i = 0; i < g->n2; i++) {
    g->M[i] = 2 * g->E[i];
  }
  pk_strip_add(g->n, D, g->M);
  picket_status status = pk_dense_lu(g->context, g->n, g->M, g->pivots);
  if (status != PICKET_OK) {
    return status;
  }
  memcpy(g->X, g->F, g->n2 * sizeof *g->X);
  pk_dense_lu_solve(g->n, g->M, g->pivots, g->n, g->X);
  if (first) {
    minus_strip_times(g, U, g->X, g->F);
  } else {
    product(g, -1, g->F, g->X, 0, g->M);
    swap(&g->F, &g->M);
  }
  for (size_t i = 0; i < g->n2; i++) {
    g->E[i] += g->F[i];
  }
  return PICKET_OK;
}

/* E, F of a stretch longer by one interval: 1/3 + 1 + 1. */
static picket_status lengthen_stretch(merger *g, pk_strip D, pk_strip U) {
  memcpy(g->M, g->E, g->n2 * sizeof *g->M);
  pk_strip_add(g->n, D, g->M);
  picket_status status = pk_dense_lu(g->context, g->n, g->M, g->pivots);
  if (status != PICKET_OK) {
    return status;
  }
  set_strip(g, U, g->X);
  pk_dense_lu_solve(g->n, g->M, g->pivots, g->n, g->X);
  minus_strip_times(g, U, g->X, g->E);
  pk_dense_times(g->n, g->n, g->n, -1, g->F, g->X, 0, g->M);
  swap(&g->F, &g->M);
  return PICKET_OK;
}

/* The same from the sum over sines. */
static picket_status sum_stretch(merger *g, pk_strip D, pk_strip U, int length) {
  picket_status status = pk_stretch_inverse(g->context, g->n, D, U, length, g->M, g->Y);
  if (status == PICKET_OK) {
    times_strip(g, g->M, U, 1, g->X);
    minus_strip_times(g, U, g->X, g->E);
    times_strip(g, g->Y, U, 1, g->X);
    minus_strip_times(g, U, g->X, g->F);
  }
  return status;
}

/* E, F of `length` intervals from interval `from` on. */
static picket_status make_stretch(merger *g, int from, int length) {
  pk_strip U = g->chain->U[from], D = g->chain->D[from + 1];
  if (g->shortest == SHORTEST_SUMMED) {
    return sum_stretch(g, D, U, length);
  }
  memset(g->E, 0, g->n2 * sizeof *g->E);
  set_strip(g, U, g->F);
  int bit = 1;
  while (2 * bit <= length) {
    bit *= 2;
  }
  picket_status status = PICKET_OK;
  for (bit /= 2; status == PICKET_OK && bit > 0; bit /= 2) {
    status = double_stretch(g, D, U, 4 * bit > length && 2 * bit <= length);
    if (status == PICKET_OK && (length & bit) != 0) {
      status = lengthen_stretch(g, D, U);
    }
  }
  return status;
}

/* Joins the stretch E, F behind the accumulated span: 1/3 + 2 + 2 with symmetry. */
static picket_status join_stretch(merger *g, pk_strip D) {
  pk_span *a = g->acc;
  int n = g->n;
  for (size_t i = 0; i < g->n2; i++) {
    g->M[i] = a->s22[i] + g->E[i];
  }
  pk_strip_add(n, D, g->M);
  picket_status status = pk_dense_lu(g->context, n, g->M, g->pivots);
  if (status != PICKET_OK) {
    return status;
  }
  memcpy(g->X, a->s21, g->n2 * sizeof *g->X);
  pk_dense_lu_solve(n, g->M, g->pivots, n, g->X);
  memcpy(g->Y, g->F, g->n2 * sizeof *g->Y);
  pk_dense_lu_solve(n, g->M, g->pivots, n, g->Y);
  product(g, -1, a->s12, g->X, 1, a->s11);
  pk_dense_times(n, n, n, -1, a->s12, g->Y, 0, g->M);
  swap(&a->s12, &g->M);
  if (g->symmetric) {
    transpose(g, a->s12, a->s21);
  } else {
    pk_dense_times(n, n, n, -1, g->F, g->X, 0, a->s21);
  }
  memcpy(a->s22, g->E, g->n2 * sizeof *g->E);
  product(g, -1, g->F, g->Y, 1, a->s22);
  return PICKET_OK;
}

/* Joins one interval behind the accumulated span, U from its end column to the new one: 1 + 2, and
 * 1 more without symmetry. */
static picket_status join_interval(merger *g, pk_strip D, pk_strip U, pk_strip L) {
  pk_span *a = g->acc;
  int n = g->n;
  memcpy(g->M, a->s22, g->n2 * sizeof *g->M);
  pk_strip_add(n, D, g->M);
  picket_status status = pk_dense_inverse(g->context, n, g->M);
  if (status != PICKET_OK) {
    return status;
  }
  pk_dense_times(n, n, n, 1, a->s12, g->M, 0, g->X);
  product(g, -1, g->X, a->s21, 1, a->s11);
  times_strip(g, g->X, U, -1, a->s12);
  if (g->symmetric) {
    transpose(g, a->s12, a->s21);
  } else {
    pk_dense_times(n, n, n, 1, g->M, a->s21, 0, g->X);
    minus_strip_times(g, L, g->X, a->s21);
  }
  times_strip(g, g->M, U, 1, g->X);
  minus_strip_times(g, L, g->X, a->s22);
  return PICKET_OK;
}

/* Lateral neighbours couple and nothing wraps. */
static bool is_tridiagonal(const pk_chain *c) {
  for (int k = 0; k < c->intervals; k++) {
    if (!pk_strip_is_tridiagonal(c->lines, c->D[k]) ||
        !pk_strip_is_tridiagonal(c->lines, c->U[k])) {
      return false;
    }
  }
  return true;
}

/* Intervals from interval i on that form one stretch. */
static int stretch_length(const pk_chain *c, int i) {
  int n = c->lines, end = i + 1;
  if (!pk_strip_equal(n, c->U[i], c->L[i], c->D[i])) {
    return 1;
  }
  while (end < c->intervals && pk_strip_equal(n, c->U[i], c->U[end], c->D[end]) &&
         pk_strip_equal(n, c->U[i], c->L[end], c->D[end]) &&
         pk_strip_equal(n, c->D[i + 1], c->D[end], c->D[end])) {
    end++;
  }
  return end - i;
}

/* Starts the span with intervals of the chain that are one stretch, or a single one. */
static picket_status start_span(merger *g, int from, int length, pk_columns_facts *facts) {
  pk_span *a = g->acc;
  size_t bytes = g->n2 * sizeof *a->s11;
  if (length == 1) {
    set_strip(g, g->chain->U[from], a->s12);
    set_strip(g, g->chain->L[from], a->s21);
    facts->singles++;
    return PICKET_OK;
  }
  picket_status status = make_stretch(g, from, length);
  if (status == PICKET_OK) {
    memcpy(a->s11, g->E, bytes);
    memcpy(a->s22, g->E, bytes);
    memcpy(a->s12, g->F, bytes);
    memcpy(a->s21, g->F, bytes);
    facts->stretches++;
    pk_chain_watch(g->chain, g->E, g->F, facts);
  }
  return status;
}

/* Joins the intervals of one run; seen from the accumulated span they go up the chain or down. */
static picket_status join_run(merger *g, int from, int length, bool up, pk_columns_facts *facts) {
  const pk_chain *c = g->chain;
  picket_status status = PICKET_OK;
  if (length >= g->shortest) {
    facts->stretches++;
    status = make_stretch(g, from, length);
    if (status == PICKET_OK) {
      pk_chain_watch(g->chain, g->E, g->F, facts);
      status = join_stretch(g, c->D[up ? from : from + length]);
      pk_chain_watch(g->chain, g->acc->s11, g->acc->s22, facts);
    }
    return status;
  }
  for (int k = 0; status == PICKET_OK && k < length; k++) {
    int i = up ? from + k : from + length - 1 - k;
    facts->singles++;
    status = up ? join_interval(g, c->D[i], c->U[i], c->L[i])
                : join_interval(g, c->D[i + 1], c->L[i], c->U[i]);
    pk_chain_watch(g->chain, g->acc->s11, g->acc->s22, facts);
  }
  return status;
}

/* The span seen from its other end. */
static void turn(pk_span *span) {
  swap(&span->s11, &span->s22);
  swap(&span->s12, &span->s21);
}

/* From the longest run to the end of the chain, then to its beginning. Run r begins at start[r]. */
static picket_status merge_runs(merger *g, int runs, const int *start, pk_columns_facts *facts) {
  int seed = 0;
  for (int r = 1; r < runs; r++) {
    if (start[r + 1] - start[r] > start[seed + 1] - start[seed]) {
      seed = r;
    }
  }
  picket_status status = start_span(g, start[seed], start[seed + 1] - start[seed], facts);
  for (int r = seed + 1; status == PICKET_OK && r < runs; r++) {
    status = join_run(g, start[r], start[r + 1] - start[r], true, facts);
  }
  turn(g->acc);
  for (int r = seed - 1; status == PICKET_OK && r >= 0; r--) {
    status = join_run(g, start[r], start[r + 1] - start[r], false, facts);
  }
  turn(g->acc);
  return status;
}

picket_status pk_chain_merge(picket_context *context, const pk_chain *chain, bool symmetric,
                             pk_span *span, pk_columns_facts *facts) {
  merger g = {.context = context, .chain = chain, .n = chain->lines, .symmetric = symmetric};
  g.n2 = (size_t)g.n * (size_t)g.n;
  g.acc = span;
  double complex **blocks[] = {&g.E, &g.F, &g.M, &g.X, &g.Y};
  picket_status status = PICKET_OK;
  for (int i = 0; i < 5; i++) {
    *blocks[i] = PK_NEW(context, g.n2, double complex);
    status = *blocks[i] ? status : PICKET_ERROR_MEMORY;
  }
  g.pivots = PK_NEW(context, g.n, int);
  g.shortest = is_tridiagonal(chain) ? SHORTEST_SUMMED : SHORTEST_DOUBLED;
  int *start = PK_NEW(context, chain->intervals + 1, int);
  if (status == PICKET_OK && g.pivots && start) {
    int runs = 0;
    for (int i = 0; i < chain->intervals; runs++) {
      start[runs] = i;
      i += stretch_length(chain, i);
      start[runs + 1] = i;
    }
    status = merge_runs(&g, runs, start, facts);
  } else {
    status = PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < 5; i++) {
    pk_free(context, *blocks[i]);
  }
  pk_free(context, g.pivots);
  pk_free(context, start);
  return status;
}
