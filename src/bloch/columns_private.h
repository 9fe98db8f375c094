/* The inside of a reduced cell, for the files columns*.c. Dense blocks are column-major, of order
 * `lines`. */
#ifndef PK_BLOCH_COLUMNS_PRIVATE_H
#define PK_BLOCH_COLUMNS_PRIVATE_H

#include "bloch/columns.h"

/* A sparse block of order n with at most PK_STRIP entries in a column: those of column c stand at
 * PK_STRIP c, …; row -1 marks an unused place, after the used ones. */
enum { PK_STRIP = 3 };
typedef struct pk_strip {
  int *row;
  double complex *value;
} pk_strip;

/* Columns 0 … intervals, with D the block of a column on itself, U that of row k and column k + 1,
 * L that of row k + 1 and column k. Strips point into a pk_column_blocks. */
typedef struct pk_chain {
  int intervals, lines;
  pk_strip *D;     /* [intervals + 1]; the ends take no part in merging */
  pk_strip *U, *L; /* [intervals] */
} pk_chain;

/* The blocks of a cell: interval j lies between the columns j and j + 1, the last one wraps. The
 * phase factors ξ of the wrap are left out. */
typedef struct pk_column_blocks {
  picket_context *context;
  int columns, lines;
  pk_strip *D, *U, *L; /* [columns] */
  int *rows;           /* storage of the strips */
  double complex *values;
  int *extra_rows; /* storage of strips beside a mirror between two columns: 6 */
  double complex *extra_values;
} pk_column_blocks;

picket_status pk_column_blocks_take(picket_context *context, const pk_operator *op, pk_phase phase,
                                    double k0, pk_column_blocks *out);
void pk_column_blocks_clear(pk_column_blocks *blocks); /* accepts zeros */

/* Equal to rounding; D of a neighbour gives the scale of rounding. */
bool pk_strip_equal(int n, pk_strip a, pk_strip b, pk_strip scale);
/* T(ξ)ᵀ = T(1/ξ). */
bool pk_column_blocks_symmetric(const pk_column_blocks *blocks);
/* The reflection j → sum - j that maps the cell onto itself; false if there is none. An even sum
 * has a column as its mirror. */
bool pk_column_blocks_mirror(const pk_column_blocks *blocks, int *sum);
/* The chain of a period from a column, or from a mirror to the next one. The latter is false when a
 * mirror between columns cannot be written with strips. */
void pk_chain_period(const pk_column_blocks *blocks, int from, pk_chain *chain);
bool pk_chain_half(const pk_column_blocks *blocks, int sum, pk_chain *chain);

/* A dense stretch: f₁ = S11 x₁ + S12 x₂, f₂ = S21 x₁ + S22 x₂. */
typedef struct pk_span {
  double complex *s11, *s12, *s21, *s22;
} pk_span;

/* Merges all intervals of a chain, end columns left out; `span` has four blocks. */
picket_status pk_chain_merge(picket_context *context, const pk_chain *chain, bool symmetric,
                             pk_span *span, pk_columns_facts *facts);

/* Takes two dense blocks into the growth. Forces are large when k0 is near a resonance of the span
 * between fixed ends; their rounding stays when the resonance has gone from a longer span. */
void pk_chain_watch(const pk_chain *chain, const double complex *a, const double complex *b,
                    pk_columns_facts *facts);

/* Blocks (1, 1) and (1, m - 1) of the inverse of the m - 1 inner columns of a stretch of m equal
 * intervals, all with D and between them U = L, tridiagonal; n² each. See columns_stretch.c. */
picket_status pk_stretch_inverse(picket_context *context, int n, pk_strip D, pk_strip U, int m,
                                 double complex *near, double complex *far);
bool pk_strip_is_tridiagonal(int n, pk_strip strip);

struct pk_columns {
  picket_context *context;
  pk_columns_facts facts;
  pk_phase phase;
  double k0;
  int n;         /* lines */
  pk_span whole; /* of a period; in a mirrored cell S11 = S22 and S12 = S21 are the same arrays */
  pk_strip D, U, L; /* of the column left over; of the interval `cut`; owned */
  int cut;          /* the column left over is cut + 1, or lies in the middle of interval `cut` */
  bool between;
};

/* dense += strip; dense = factor × strip; y = alpha strip x, rows of x and y. */
void pk_strip_add(int n, pk_strip strip, double complex *dense);
void pk_strip_times(int n, pk_strip strip, bool transposed, const double complex *x,
                    double complex *y);

/* T(ξ) on the column left over: D + S11 + S22 + ξ S12 + S21/ξ. */
void pk_columns_matrix(const pk_columns *columns, double complex xi, double complex *matrix);

/* A matrix Y Zᵀ. */
typedef struct pk_low_rank {
  int rank;
  double complex *Y, *Z; /* [n × rank], room for n × n */
} pk_low_rank;

/* The eigenpairs of the dense problem, see columns_spectrum.c. */
typedef struct pk_spectrum {
  picket_context *context;
  const pk_columns *columns;
  int n, order; /* lines; of the eigenproblem */
  double complex sigma;
  pk_low_rank forward, backward; /* of S12, S21; the latter may borrow */
  double complex *T;             /* [n²] factor of T(σ) */
  int *pivots;
  double complex *W;                    /* [n × order] T(σ)⁻¹ [Y Y'] */
  double complex *theta, *right, *left; /* [order], [order²]; left null if not needed */
} pk_spectrum;

/* All eigenpairs; on failure too `spectrum` is to be closed. */
picket_status pk_spectrum_solve(const pk_columns *columns, pk_spectrum *spectrum);
void pk_spectrum_close(pk_spectrum *spectrum);

/* Vectors on the column of eigenpair `index`, [n], of unit norm. The left one from the left
 * eigenvectors, which a symmetric cell has not. `work` holds [order]. */
void pk_spectrum_right(const pk_spectrum *spectrum, int index, double complex *work,
                       double complex *x);
void pk_spectrum_left(const pk_spectrum *spectrum, int index, double complex *work,
                      double complex *y);

#endif
