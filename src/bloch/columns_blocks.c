/* The blocks of an operator by columns: T = ξ C₊ + K + ξ⁻¹ C₋ is block tridiagonal but for the
 * wrap, row j:  L_{j-1} x_{j-1} + D_j x_j + U_j x_{j+1} = 0. Found here: whether T(ξ)ᵀ = T(1/ξ),
 * which reflections map the cell onto itself, and the chain of columns that has to be eliminated.
 *
 * A mirror may lie in the middle of an interval. Then a column without mass is put there: with U =
 * L, [D  U; U  D'] = elimination of the middle from [D-U  2U  0; 2U  -4U  2U; 0  2U  D'-U], as a
 * spring is two springs of twice the stiffness in a row. */
#include <assert.h>
#include <math.h>

#include "base/memory.h"
#include "bloch/columns_private.h"

/* Lines at m equal parts of an interval have spacings that differ by the rounding of their
 * coordinate over the spacing, up to 1e-13. */
static const double SAME = 1e-12;

enum { EXTRA_STRIPS = 6 }; /* 2U, -4U, D-U at each of two mirrors */

static pk_strip strip_at(int *rows, double complex *values, int64_t place, int lines) {
  return (pk_strip){rows + place * PK_STRIP * lines, values + place * PK_STRIP * lines};
}

static picket_status reserve(pk_column_blocks *b) {
  picket_context *context = b->context;
  int64_t entries = (int64_t)PK_STRIP * b->lines, strips = 3 * (int64_t)b->columns;
  b->D = PK_NEW(context, b->columns, pk_strip);
  b->U = PK_NEW(context, b->columns, pk_strip);
  b->L = PK_NEW(context, b->columns, pk_strip);
  b->rows = PK_NEW(context, strips * entries, int);
  b->values = PK_NEW(context, strips * entries, double complex);
  b->extra_rows = PK_NEW(context, EXTRA_STRIPS * entries, int);
  b->extra_values = PK_NEW(context, EXTRA_STRIPS * entries, double complex);
  if (!b->D || !b->U || !b->L || !b->rows || !b->values || !b->extra_rows || !b->extra_values) {
    return PICKET_ERROR_MEMORY;
  }
  for (int64_t i = 0; i < strips * entries; i++) {
    b->rows[i] = -1;
  }
  for (int j = 0; j < b->columns; j++) {
    b->D[j] = strip_at(b->rows, b->values, 3 * (int64_t)j, b->lines);
    b->U[j] = strip_at(b->rows, b->values, 3 * (int64_t)j + 1, b->lines);
    b->L[j] = strip_at(b->rows, b->values, 3 * (int64_t)j + 2, b->lines);
  }
  return PICKET_OK;
}

/* False if the strip is full. */
static bool put(pk_strip strip, int column, int row, double complex value) {
  for (int k = PK_STRIP * column; k < PK_STRIP * (column + 1); k++) {
    if (strip.row[k] == row || strip.row[k] < 0) {
      strip.row[k] = row;
      strip.value[k] += value;
      return true;
    }
  }
  return false;
}

/* One entry into its block. At ξ = 1 it has the value `one`, at ξ = 2 `two`: which entries wrap is
 * seen from the two. */
static bool place(pk_column_blocks *b, int64_t row, int64_t column, double complex one,
                  double complex two) {
  int i = (int)(row / b->lines), j = (int)(column / b->lines);
  int steps = (i - j + b->columns) % b->columns;
  double factor = 1;
  pk_strip strip = b->D[j];
  if (steps == 1) {
    strip = b->L[j];
    factor = i == 0 ? 0.5 : 1;
  } else if (steps == b->columns - 1) {
    strip = b->U[i];
    factor = j == 0 ? 2 : 1;
  } else if (steps != 0) {
    return one == 0;
  }
  if (cabs(two - factor * one) > SAME * cabs(one)) {
    return false; /* it wraps otherwise than between the last and the first column */
  }
  return put(strip, (int)(column % b->lines), (int)(row % b->lines), one);
}

static picket_status fill(pk_column_blocks *b, const pk_operator *op, pk_phase phase, double k0) {
  const pk_pattern *pattern = pk_operator_pattern(op);
  double complex *one = PK_NEW(b->context, 2 * pattern->start[pattern->n], double complex);
  if (!one) {
    return PICKET_ERROR_MEMORY;
  }
  double complex *two = one + pattern->start[pattern->n];
  phase.xi = 1;
  pk_operator_values(op, phase, k0 * k0, one);
  phase.xi = 2;
  pk_operator_values(op, phase, k0 * k0, two);
  bool fits = true;
  for (int64_t c = 0; fits && c < pattern->n; c++) {
    for (int64_t s = pattern->start[c]; fits && s < pattern->start[c + 1]; s++) {
      fits = place(b, pattern->row[s], c, one[s], two[s]);
    }
  }
  pk_free(b->context, one);
  return fits ? PICKET_OK
              : pk_fail(b->context, PICKET_ERROR_UNSUPPORTED,
                        "all waves of a cell with a lateral shift are not computed, the shift must "
                        "be 0");
}

picket_status pk_column_blocks_take(picket_context *context, const pk_operator *op, pk_phase phase,
                                    double k0, pk_column_blocks *out) {
  pk_column_blocks b = {.context = context};
  b.columns = pk_operator_lines(op, PK_U);
  b.lines = pk_operator_lines(op, PK_V);
  assert(b.columns >= 3);
  picket_status status = reserve(&b);
  if (status == PICKET_OK) {
    status = fill(&b, op, phase, k0);
  }
  if (status != PICKET_OK) {
    pk_column_blocks_clear(&b);
    return status;
  }
  *out = b;
  return PICKET_OK;
}

void pk_column_blocks_clear(pk_column_blocks *b) {
  if (b->context) {
    pk_free(b->context, b->D);
    pk_free(b->context, b->U);
    pk_free(b->context, b->L);
    pk_free(b->context, b->rows);
    pk_free(b->context, b->values);
    pk_free(b->context, b->extra_rows);
    pk_free(b->context, b->extra_values);
  }
  *b = (pk_column_blocks){0};
}

/* The size of the entries of a column, to judge differences by. */
static double column_scale(pk_strip strip, int column) {
  double sum = 0;
  for (int k = PK_STRIP * column; k < PK_STRIP * (column + 1); k++) {
    sum += strip.row[k] < 0 ? 0 : cabs(strip.value[k]);
  }
  return sum;
}

static double complex entry_of(pk_strip strip, int row, int column) {
  for (int k = PK_STRIP * column; k < PK_STRIP * (column + 1); k++) {
    if (strip.row[k] == row) {
      return strip.value[k];
    }
  }
  return 0;
}

/* |a - b| of every entry of a, with b transposed if asked for. */
static bool covers(int n, pk_strip a, pk_strip b, bool transposed, pk_strip scale) {
  for (int c = 0; c < n; c++) {
    double limit = SAME * (column_scale(scale, c) + column_scale(a, c));
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && a.row[k] >= 0; k++) {
      double complex other = transposed ? entry_of(b, c, a.row[k]) : entry_of(b, a.row[k], c);
      if (!(cabs(a.value[k] - other) <= limit)) {
        return false;
      }
    }
  }
  return true;
}

bool pk_strip_equal(int n, pk_strip a, pk_strip b, pk_strip scale) {
  return a.value == b.value || (covers(n, a, b, false, scale) && covers(n, b, a, false, scale));
}

bool pk_column_blocks_symmetric(const pk_column_blocks *b) {
  for (int j = 0; j < b->columns; j++) {
    if (!covers(b->lines, b->D[j], b->D[j], true, b->D[j]) ||
        !covers(b->lines, b->U[j], b->L[j], true, b->D[j]) ||
        !covers(b->lines, b->L[j], b->U[j], true, b->D[j])) {
      return false;
    }
  }
  return true;
}

static bool reflects(const pk_column_blocks *b, int sum) {
  int n = b->columns;
  for (int j = 0; j < n; j++) {
    int image = (sum - j + 2 * n) % n, before = (image - 1 + n) % n;
    if (!pk_strip_equal(b->lines, b->D[j], b->D[image], b->D[j]) ||
        !pk_strip_equal(b->lines, b->U[j], b->L[before], b->D[j])) {
      return false;
    }
  }
  return true;
}

bool pk_column_blocks_mirror(const pk_column_blocks *b, int *sum) {
  for (int s = 0; s < b->columns; s++) {
    if (reflects(b, s)) {
      /* Either of the two mirrors can be the end; a column is better than a place between two. */
      *sum = s % 2 != 0 && (s + b->columns) % 2 == 0 ? s + b->columns : s;
      return true;
    }
  }
  return false;
}

static void take_columns(const pk_column_blocks *b, int from, pk_chain *chain) {
  chain->lines = b->lines;
  for (int k = 0; k <= chain->intervals; k++) {
    int j = (from + k) % b->columns;
    chain->D[k] = b->D[j];
    if (k < chain->intervals) {
      chain->U[k] = b->U[j];
      chain->L[k] = b->L[j];
    }
  }
}

void pk_chain_period(const pk_column_blocks *b, int from, pk_chain *chain) {
  chain->intervals = b->columns;
  take_columns(b, from, chain);
}

/* to += factor × from; false when an entry has no room. */
static bool accumulate(int n, double factor, pk_strip from, pk_strip to) {
  for (int c = 0; c < n; c++) {
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && from.row[k] >= 0; k++) {
      if (!put(to, c, from.row[k], factor * from.value[k])) {
        return false;
      }
    }
  }
  return true;
}

static pk_strip extra_strip(const pk_column_blocks *b, int which) {
  pk_strip strip = strip_at(b->extra_rows, b->extra_values, which, b->lines);
  for (int i = 0; i < PK_STRIP * b->lines; i++) {
    strip.row[i] = -1;
    strip.value[i] = 0;
  }
  return strip;
}

/* Puts a column into the middle of an end interval of a chain, whose end column it becomes. */
static bool halve_end(const pk_column_blocks *b, pk_chain *chain, int end, int next, int interval) {
  int first = end == 0 ? 0 : 3, n = b->lines;
  pk_strip twice = extra_strip(b, first), middle = extra_strip(b, first + 1);
  pk_strip beside = extra_strip(b, first + 2);
  bool fits = accumulate(n, 2, chain->U[interval], twice) &&
              accumulate(n, -4, chain->U[interval], middle) &&
              accumulate(n, 1, chain->D[next], beside) &&
              accumulate(n, -1, chain->U[interval], beside);
  chain->U[interval] = chain->L[interval] = twice;
  chain->D[end] = middle;
  chain->D[next] = beside;
  return fits;
}

bool pk_chain_half(const pk_column_blocks *b, int sum, pk_chain *chain) {
  /* The columns strictly between the mirrors at sum/2 and (sum + columns)/2. */
  int first = sum / 2 + 1, last = (sum + b->columns + 1) / 2 - 1;
  chain->intervals = last - first + 2;
  take_columns(b, first - 1, chain);
  int K = chain->intervals;
  return (sum % 2 == 0 || halve_end(b, chain, 0, 1, 0)) &&
         ((sum + b->columns) % 2 == 0 || halve_end(b, chain, K, K - 1, K - 1));
}

void pk_strip_add(int n, pk_strip strip, double complex *dense) {
  for (int c = 0; c < n; c++) {
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && strip.row[k] >= 0; k++) {
      dense[strip.row[k] + (int64_t)c * n] += strip.value[k];
    }
  }
}

void pk_strip_times(int n, pk_strip strip, bool transposed, const double complex *x,
                    double complex *y) {
  for (int c = 0; c < n; c++) {
    y[c] = 0;
  }
  for (int c = 0; c < n; c++) {
    for (int k = PK_STRIP * c; k < PK_STRIP * (c + 1) && strip.row[k] >= 0; k++) {
      int r = strip.row[k];
      y[transposed ? c : r] += strip.value[k] * x[transposed ? r : c];
    }
  }
}
