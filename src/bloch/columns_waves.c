/* From the vector of a wave on one column to its field on the cell.
 *
 * Cut the cell at the interval between the columns a and b = a + 1 that the column left over is at,
 * so that the phase ξ stands at the cut. T(ξ) and T(σ) then differ in the cut only, and T(ξ)v = 0
 * is T(σ) v = -(ξ - σ) U v_b      in the row of a,
 *            -(1 - ξ/σ) L v_a    in the row of b,   v_a before the cut,
 * with the right-hand side known from the reduced cell: one sparse factor serves all waves. With x
 * on b:  L v_a = (S22 + S21/ξ) x; with x in the middle of the interval, where both halves have
 * twice the stiffness:  2U v_b = (S11 + ξ S12) x,  2U v_a = (S22 + S21/ξ) x. The left vector solves
 * the transposed problem, Tᵀ with 1/ξ. */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/columns_private.h"
#include "dense/dense.h"

typedef struct lifting {
  picket_context *context;
  const pk_columns *columns;
  pk_solver *solver;
  const pk_operator *op;
  pk_factor *factor; /* of T(σ) */
  double complex sigma;
  int64_t n;
  double complex *values, *work; /* [nnz], [n] */
} lifting;

/* y = (A + factor B) x, or with both transposed. */
static void two_blocks_times(int n, bool transposed, const double complex *A,
                             const double complex *B, double complex factor,
                             const double complex *x, double complex *y) {
  if (transposed) {
    pk_dense_transposed_times(n, 1, n, 1, A, x, 0, y);
    pk_dense_transposed_times(n, 1, n, factor, B, x, 1, y);
  } else {
    pk_dense_times(n, 1, n, 1, A, x, 0, y);
    pk_dense_times(n, 1, n, factor, B, x, 1, y);
  }
}

/* low = U v_b for the row of a, high = L v_a for the row of b. */
static void forces(const pk_columns *c, bool transposed, double complex xi, const double complex *x,
                   double complex *low, double complex *high) {
  const pk_span *w = &c->whole;
  const double complex *s12 = transposed ? w->s21 : w->s12, *s21 = transposed ? w->s12 : w->s21;
  two_blocks_times(c->n, transposed, w->s22, s21, 1 / xi, x, high);
  if (!c->between) {
    pk_strip_times(c->n, transposed ? c->L : c->U, transposed, x, low);
    return;
  }
  two_blocks_times(c->n, transposed, w->s11, s12, xi, x, low);
  for (int i = 0; i < c->n; i++) {
    low[i] /= 2;
    high[i] /= 2;
  }
}

/* The field [n] of unit norm of T(ξ)v = 0, or of its transpose. */
static picket_status lift(lifting *l, bool transposed, double complex xi, const double complex *x,
                          double complex *v) {
  const pk_columns *c = l->columns;
  size_t n = (size_t)c->n, after = ((size_t)c->cut + 1) % (size_t)c->facts.columns;
  double complex sigma = transposed ? 1 / l->sigma : l->sigma;
  memset(l->work, 0, (size_t)l->n * sizeof *l->work);
  double complex *low = l->work + (size_t)c->cut * n, *high = l->work + after * n;
  forces(c, transposed, xi, x, low, high);
  /* T has its phase at the last interval: columns up to the cut belong to the next period. */
  for (size_t i = 0; i < n; i++) {
    low[i] *= -(xi - sigma) / sigma;
    high[i] *= after == 0 ? (xi - sigma) / (sigma * sigma) : (xi - sigma) / sigma;
  }
  picket_status status = transposed ? pk_factor_solve_transposed_complex(l->factor, l->work, v)
                                    : pk_factor_solve_complex(l->factor, l->work, v);
  if (status != PICKET_OK) {
    return status;
  }
  for (size_t i = 0; i < ((size_t)c->cut + 1) * n; i++) {
    v[i] *= sigma / xi;
  }
  double norm = pk_dense_norm((long)l->n, v);
  for (int64_t i = 0; i < l->n; i++) {
    v[i] /= norm;
  }
  return PICKET_OK;
}

/* |T(ξ)v| / (k0² |B v|), or of Tᵀ. */
static double residual_of(lifting *l, bool transposed, const double complex *v) {
  const pk_pattern *pattern = pk_operator_pattern(l->op);
  const double complex *mass = pk_operator_mass(l->op);
  if (transposed) {
    pk_sparse_transposed_times_complex(pattern, l->values, v, l->work);
  } else {
    pk_sparse_times_complex(pattern, l->values, v, l->work);
  }
  double above = pk_dense_norm((long)l->n, l->work), k0 = l->columns->k0;
  for (int64_t i = 0; i < l->n; i++) {
    l->work[i] = mass[i] * v[i];
  }
  return above / (k0 * k0 * pk_dense_norm((long)l->n, l->work));
}

/* One wave; `rough` says that its residuals ask for polishing. */
static picket_status make_wave(lifting *l, const pk_column_mode *mode, pk_wave *wave, bool *rough) {
  wave->xi = mode->xi;
  wave->right = PK_NEW(l->context, l->n, double complex);
  wave->left = PK_NEW(l->context, l->n, double complex);
  if (!wave->right || !wave->left) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = lift(l, false, mode->xi, mode->right, wave->right);
  if (status == PICKET_OK) {
    status = lift(l, true, 1 / mode->xi, mode->left, wave->left);
  }
  if (status == PICKET_OK) {
    pk_phase phase = l->columns->phase;
    phase.xi = mode->xi;
    pk_operator_values(l->op, phase, l->columns->k0 * l->columns->k0, l->values);
    wave->residual = residual_of(l, false, wave->right);
    *rough = !(fmax(wave->residual, residual_of(l, true, wave->left)) <= PK_RESIDUAL_LIMIT);
  }
  return status;
}

static picket_status polish(lifting *l, pk_wave *wave) {
  pk_phase phase = l->columns->phase;
  pk_wave better;
  picket_status status =
      pk_wave_near(l->solver, phase, l->columns->k0, wave->xi, wave->right, &better);
  if (status == PICKET_OK) {
    pk_wave_clear(l->context, wave);
    *wave = better;
  }
  return status;
}

/* A shift away from all waves of the list, so that T(σ) is well conditioned. */
static double complex shift_for(const pk_column_modes *modes) {
  enum { CANDIDATES = 24 };
  double complex best = 1;
  double widest = -1;
  for (int k = 0; k < CANDIDATES; k++) {
    /* Away from the axes, where the waves of lossless cells crowd; just off the unit circle. */
    double complex sigma = 1.15 * cexp(I * (0.1 + 6.283185307179586477 * k / CANDIDATES));
    double nearest = INFINITY;
    for (int i = 0; i < modes->count; i++) {
      nearest = fmin(nearest, cabs(modes->mode[i].xi - sigma));
    }
    if (nearest > widest) {
      widest = nearest;
      best = sigma;
    }
  }
  return best;
}

static picket_status open_lifting(lifting *l, const pk_column_modes *modes) {
  l->n = pk_operator_size(l->op);
  l->values = PK_NEW(l->context, pk_operator_pattern(l->op)->start[l->n], double complex);
  l->work = PK_NEW(l->context, l->n, double complex);
  if (!l->values || !l->work) {
    return PICKET_ERROR_MEMORY;
  }
  pk_phase phase = l->columns->phase;
  phase.xi = l->sigma = shift_for(modes);
  return pk_solver_factor(l->solver, phase, l->columns->k0 * l->columns->k0, &l->factor);
}

picket_status pk_columns_waves(const pk_columns *columns, pk_solver *solver,
                               const pk_column_modes *modes, int first, int count, pk_wave *waves) {
  assert(first >= 0 && count > 0 && first + count <= modes->count);
  lifting l = {.context = columns->context, .columns = columns, .solver = solver};
  l.op = pk_solver_operator(solver);
  pk_wave *made = PK_NEW(l.context, count, pk_wave);
  bool *rough = PK_NEW(l.context, count, bool);
  picket_status status = made && rough ? open_lifting(&l, modes) : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = make_wave(&l, &modes->mode[first + i], &made[i], &rough[i]);
  }
  /* Polishing factors anew, so it comes last. */
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = rough[i] ? polish(&l, &made[i]) : PICKET_OK;
  }
  if (status == PICKET_OK) {
    memcpy(waves, made, (size_t)count * sizeof *waves);
  }
  for (int i = 0; made && status != PICKET_OK && i < count; i++) {
    pk_wave_clear(l.context, &made[i]);
  }
  pk_free(l.context, made);
  pk_free(l.context, rough);
  pk_free(l.context, l.values);
  pk_free(l.context, l.work);
  return status;
}
