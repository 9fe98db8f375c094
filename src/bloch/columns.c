/* A cell reduced to one column: see columns.h. A cell that is its own mirror image is reduced from
 * one mirror to the next; with the half H between them, and the second mirror's column eliminated,
 *   P = S12ᴴ (2 S22ᴴ + D)⁻¹ S21ᴴ,   S11 = S22 = S11ᴴ - P,   S12 = S21 = -P. */
#include "bloch/columns.h"

#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"
#include "dense/dense.h"

/* A column where the cell changes along the guide, so that no stretch is cut. */
static int break_of(const pk_column_blocks *b) {
  int n = b->columns;
  for (int j = 0; j < n; j++) {
    int before = (j - 1 + n) % n, after = (j + 1) % n;
    bool spacing = !pk_strip_equal(b->lines, b->U[before], b->U[j], b->D[j]);
    bool filling = !pk_strip_equal(b->lines, b->D[before], b->D[j], b->D[j]) &&
                   !pk_strip_equal(b->lines, b->D[j], b->D[after], b->D[j]);
    if (spacing || filling) {
      return j;
    }
  }
  return 0;
}

static picket_status reserve_chain(picket_context *context, int columns, pk_chain *chain) {
  chain->D = PK_NEW(context, columns + 1, pk_strip);
  chain->U = PK_NEW(context, columns, pk_strip);
  chain->L = PK_NEW(context, columns, pk_strip);
  return chain->D && chain->U && chain->L ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status reserve_span(pk_columns *c) {
  size_t n2 = (size_t)c->n * (size_t)c->n;
  c->whole.s11 = PK_NEW(c->context, n2, double complex);
  c->whole.s12 = PK_NEW(c->context, n2, double complex);
  c->whole.s21 = PK_NEW(c->context, n2, double complex);
  c->whole.s22 = PK_NEW(c->context, n2, double complex);
  bool all = c->whole.s11 && c->whole.s12 && c->whole.s21 && c->whole.s22;
  return all ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status copy_strip(picket_context *context, int n, pk_strip from, pk_strip *to) {
  size_t entries = (size_t)PK_STRIP * (size_t)n;
  to->row = pk_copy(context, from.row, entries, sizeof *from.row);
  to->value = pk_copy(context, from.value, entries, sizeof *from.value);
  return to->row && to->value ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static void free_strip(picket_context *context, pk_strip *strip) {
  pk_free(context, strip->row);
  pk_free(context, strip->value);
}

/* From the half between two mirrors to the whole cell: 1/3 + 1 + 1. */
static picket_status reflect(pk_columns *c, pk_strip D) {
  pk_span *w = &c->whole;
  size_t n2 = (size_t)c->n * (size_t)c->n;
  int *pivots = PK_NEW(c->context, c->n, int);
  if (!pivots) {
    return PICKET_ERROR_MEMORY;
  }
  for (size_t i = 0; i < n2; i++) {
    w->s22[i] *= 2;
  }
  pk_strip_add(c->n, D, w->s22);
  picket_status status = pk_dense_lu(c->context, c->n, w->s22, pivots);
  if (status == PICKET_OK) {
    pk_dense_lu_solve(c->n, w->s22, pivots, c->n, w->s21);
    pk_dense_times(c->n, c->n, c->n, -1, w->s12, w->s21, 0, w->s22);
    for (size_t i = 0; i < n2; i++) {
      w->s11[i] += w->s22[i];
    }
    pk_free(c->context, w->s12);
    pk_free(c->context, w->s21);
    w->s12 = w->s21 = w->s22;
    w->s22 = w->s11;
  }
  pk_free(c->context, pivots);
  return status;
}

/* The ways to cut a cell: at a mirror, at the other one, and at columns spread over the period. A
 * wave that vanishes on the cut, as every other band edge does on a mirror, is a resonance of the
 * cell between cuts, near which the reduced cell is of no use. */
enum { MIRROR_CUTS = 2, CUTS = 6 };
/* Forces this much above the blocks of the operator cost that many digits; then the next cut is
 * tried. Away from resonances they are about as large. */
static const double GROWTH = 1e3;

/* What to eliminate and which column is left over; false if there is no such cut. */
static bool choose(pk_columns *c, const pk_column_blocks *b, int cut, pk_chain *chain) {
  int sum = 0, n = b->columns;
  c->facts.symmetric = pk_column_blocks_symmetric(b);
  c->facts.mirrored = cut < MIRROR_CUTS;
  if (cut < MIRROR_CUTS) {
    if (!pk_column_blocks_mirror(b, &sum)) {
      return false;
    }
    sum = (sum + cut * n) % (2 * n);
    c->between = sum % 2 != 0;
    c->cut = (c->between ? sum / 2 : sum / 2 + n - 1) % n;
    return pk_chain_half(b, sum, chain);
  }
  int from = (break_of(b) + (cut - MIRROR_CUTS) * n / (CUTS - MIRROR_CUTS)) % n;
  pk_chain_period(b, from, chain);
  c->cut = (from + n - 1) % n;
  return true;
}

static picket_status reduce(pk_columns *c, const pk_column_blocks *b, pk_chain *chain) {
  const pk_strip kept[] = {chain->D[0], b->U[c->cut], b->L[c->cut]};
  pk_strip *own[] = {&c->D, &c->U, &c->L};
  picket_status status = reserve_span(c);
  for (int i = 0; status == PICKET_OK && i < 3; i++) {
    status = copy_strip(c->context, c->n, kept[i], own[i]);
  }
  if (status == PICKET_OK) {
    status = pk_chain_merge(c->context, chain, c->facts.symmetric, &c->whole, &c->facts);
  }
  if (status == PICKET_OK && c->facts.mirrored) {
    status = reflect(c, chain->D[chain->intervals]);
    if (status == PICKET_OK) {
      pk_chain_watch(chain, c->whole.s11, c->whole.s12, &c->facts);
    }
  }
  return status;
}

/* The cell reduced with one way to cut it; null in *out if there is no such cut. */
static picket_status try_cut(picket_context *context, const pk_column_blocks *b, pk_phase phase,
                             double k0, int cut, pk_chain *chain, pk_columns **out) {
  pk_columns *c = PK_NEW(context, 1, pk_columns);
  if (!c) {
    return PICKET_ERROR_MEMORY;
  }
  c->context = pk_context_hold(context);
  c->phase = phase;
  c->k0 = k0;
  c->n = b->lines;
  c->facts.lines = b->lines;
  c->facts.columns = b->columns;
  bool possible = choose(c, b, cut, chain);
  picket_status status = possible ? reduce(c, b, chain) : PICKET_OK;
  if (status == PICKET_OK && possible) {
    *out = c;
  } else {
    pk_columns_free(c);
  }
  return status;
}

/* The first cut that costs no digits, or the one that costs the fewest. */
static picket_status best_cut(picket_context *context, const pk_column_blocks *b, pk_phase phase,
                              double k0, pk_columns **out) {
  pk_chain chain = {0};
  pk_columns *best = NULL;
  picket_status status = reserve_chain(context, b->columns, &chain);
  for (int cut = 0; cut < CUTS && status != PICKET_ERROR_MEMORY; cut++) {
    pk_columns *c = NULL;
    status = try_cut(context, b, phase, k0, cut, &chain, &c);
    bool better = c && (!best || c->facts.growth < best->facts.growth);
    pk_columns_free(better ? best : c);
    best = better ? c : best;
    if (best && best->facts.growth < GROWTH) {
      break;
    }
  }
  pk_free(context, chain.D);
  pk_free(context, chain.U);
  pk_free(context, chain.L);
  if (status == PICKET_ERROR_MEMORY) {
    pk_columns_free(best);
    return status;
  }
  if (!best) {
    return status;
  }
  pk_message_clear(context); /* of cuts that failed */
  *out = best;
  return PICKET_OK;
}

picket_status pk_columns_reduce(picket_context *context, const pk_operator *op, pk_phase phase,
                                double k0, pk_columns **out) {
  pk_dense_warm_up();
  pk_column_blocks blocks;
  picket_status status = pk_column_blocks_take(context, op, phase, k0, &blocks);
  if (status == PICKET_OK) {
    status = best_cut(context, &blocks, phase, k0, out);
    pk_column_blocks_clear(&blocks);
  }
  return status;
}

void pk_columns_free(pk_columns *c) {
  if (!c) {
    return;
  }
  picket_context *context = c->context;
  pk_free(context, c->whole.s21 == c->whole.s12 ? NULL : c->whole.s21);
  pk_free(context, c->whole.s22 == c->whole.s11 ? NULL : c->whole.s22);
  pk_free(context, c->whole.s11);
  pk_free(context, c->whole.s12);
  free_strip(context, &c->D);
  free_strip(context, &c->U);
  free_strip(context, &c->L);
  pk_free(context, c);
  pk_context_release(context);
}

pk_columns_facts pk_columns_cost(const pk_columns *columns) {
  return columns->facts;
}

void pk_columns_matrix(const pk_columns *c, double complex xi, double complex *matrix) {
  const pk_span *w = &c->whole;
  size_t n2 = (size_t)c->n * (size_t)c->n;
  double complex inverse = 1 / xi;
  for (size_t i = 0; i < n2; i++) {
    matrix[i] = w->s11[i] + w->s22[i] + xi * w->s12[i] + inverse * w->s21[i];
  }
  pk_strip_add(c->n, c->D, matrix);
}
