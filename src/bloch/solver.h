/* Eigenpairs of one operator: ω(k), the frequencies at a given Bloch phase.
 *
 *   A(ξ, χ) v = λ B v,  λ = k0² = (ω/c)²
 *
 * by shift-invert Lanczos/Arnoldi: with B^½ on both sides, Op = B^½ (A - σB)⁻¹ B^½ has the
 * eigenvalues 1/(λ - σ), and those nearest to the shift σ come first. At ξ, χ = ±1 a lossless cell
 * is solved in real arithmetic. Every pair is returned with its true relative residual |A v - λ B
 * v| / (|λ| |B v|) and none whose residual is above PK_RESIDUAL_LIMIT. */
#ifndef PK_BLOCH_SOLVER_H
#define PK_BLOCH_SOLVER_H

#include <complex.h>

#include "operator/operator.h"

/* The error of a Hermitian eigenvalue is of the order of the residual squared over the gap, so 1e-8
 * leaves it at rounding level. */
#define PK_RESIDUAL_LIMIT 1e-8

typedef struct pk_mode {
  double complex lambda;
  double complex *field; /* [n], vᵀ-conjugate B v = 1; owned */
  double residual;
} pk_mode;

typedef struct pk_solver pk_solver;

/* Workspaces and symbolic factors for an operator, which is borrowed. */
picket_status pk_solver_create(picket_context *context, pk_operator *op, pk_solver **out);
void pk_solver_free(pk_solver *solver); /* accepts null */
pk_operator *pk_solver_operator(const pk_solver *solver);
picket_context *pk_solver_context(const pk_solver *solver);

/* The modes nearest to the shift, by rising Re λ.
 *   wanted   how many to ask for; cut to n
 *   start    null, or a guess of the wanted field [n]
 *   modes    [wanted], fields made here: pk_modes_clear
 *   found    how many hold; fewer than wanted when some did not converge
 * PICKET_ERROR_NUMERIC when none converged or a residual is too large. */
picket_status pk_solver_modes(pk_solver *solver, pk_phase phase, double shift, int wanted,
                              const double complex *start, pk_mode *modes, int *found);

/* From now on look for every copy of a multiple eigenvalue (off at first): Arnoldi can miss copies,
 * and does in about one case of ten for twofold levels; costs about a quarter more solves. */
void pk_solver_want_every_copy(pk_solver *solver, bool wanted);

/* The factor of the last complex factorisation, for callers that know what was factored; see
 * wavenumber.c. Makes one of T = A(phase) - shift B. */
picket_status pk_solver_factor(pk_solver *solver, pk_phase phase, double complex shift,
                               pk_factor **out);

void pk_modes_clear(picket_context *context, int count, pk_mode *modes);

/* |A v - λ B v| / (|λ| |B v|). */
double pk_solver_residual(pk_solver *solver, pk_phase phase, double complex lambda,
                          const double complex *field);

#endif
