/* All Bloch waves of a cell at one frequency.
 *
 * The unknowns of a grid line across the guide (a column, [lines] of them) couple to the two
 * neighbouring columns only. Eliminating all columns but one leaves the forces on both ends of the
 * cell as functions of the two end columns,
 *   f₁ = S11 x₁ + S12 x₂,   f₂ = S21 x₁ + S22 x₂,
 * and with x₂ = ξ x₁ the dense palindromic problem
 *   (ξ S12 + D + S11 + S22 + ξ⁻¹ S21) x = 0,
 * whose solutions are all Bloch waves of the discrete cell, the evanescent ones too. A wave that
 * changes by more than 1e12 in a period cannot be told from none in double precision.
 *
 * When T(ξ)ᵀ = T(1/ξ) (no lateral phase, or one of ±1) or when the cell is its own mirror image
 * along the guide, waves come in pairs ξ, 1/ξ. One of a pair is computed; the other is its inverse
 * exactly. */
#ifndef PK_BLOCH_COLUMNS_H
#define PK_BLOCH_COLUMNS_H

#include "bloch/solver.h"
#include "bloch/wavenumber.h"

/* Waves that change by more than exp(3) = 26 dB in a period carry nothing past a few periods. */
#define PK_COLUMNS_REACH 3.0
/* A larger |ln|ξ|| is cut to this: the relative error of ξ grows as the larger of |ξ| and 1/|ξ|. */
#define PK_COLUMNS_FARTHEST 10.0

/* A cell that was reduced to one column. Borrows the operator for pk_columns_waves only. */
typedef struct pk_columns pk_columns;

/* What the reduction met, for the log and benchmarks. */
typedef struct pk_columns_facts {
  int lines;      /* unknowns of a column */
  int columns;    /* of the cell */
  int stretches;  /* runs of equal columns merged by doubling */
  int singles;    /* columns merged one by one */
  bool mirrored;  /* the cell is its own mirror image along the guide: half of it was reduced */
  bool symmetric; /* T(ξ)ᵀ = T(1/ξ) */
  double growth;  /* largest forces met, over the blocks of the operator: digits lost */
} pk_columns_facts;

/* Reduces a cell with loaded media at k0 and the lateral phase of `phase` (its xi is not used).
 * PICKET_ERROR_UNSUPPORTED when columns couple beyond their neighbours: a lateral shift.
 * PICKET_ERROR_NUMERIC when k0 hits a resonance of a part of the cell to rounding, however it is
 * cut. */
picket_status pk_columns_reduce(picket_context *context, const pk_operator *op, pk_phase phase,
                                double k0, pk_columns **out);
void pk_columns_free(pk_columns *columns); /* accepts null */
pk_columns_facts pk_columns_cost(const pk_columns *columns);

typedef struct pk_column_mode {
  double complex xi;
  double complex *right,
      *left;       /* [lines] on the column that is left over; borrowed from the list */
  double residual; /* |T(ξ) right| over the summed norms of its three terms */
  int partner;     /* place of 1/ξ in the list, or -1 */
} pk_column_mode;

/* Waves with |ln|ξ|| <= reach, those that change least first. Of a pair the one that decays along
 * +z stands first; of two that propagate, the one with Im ξ > 0. */
typedef struct pk_column_modes {
  picket_context *context;
  int count;
  pk_column_mode *mode;
  double complex *vectors;
} pk_column_modes;

picket_status pk_columns_modes(const pk_columns *columns, double reach, pk_column_modes *out);
void pk_column_modes_clear(pk_column_modes *modes); /* accepts zeros */

/* The waves of the list from `first` on, on the whole cell, with true residuals: one sparse factor
 * and two solves for each. A wave whose residual is above PK_RESIDUAL_LIMIT is polished by
 * pk_wave_near. The solver's operator, its media and k0 must be those of the reduction.
 *   waves  [count], made here: pk_wave_clear */
picket_status pk_columns_waves(const pk_columns *columns, pk_solver *solver,
                               const pk_column_modes *modes, int first, int count, pk_wave *waves);

#endif
