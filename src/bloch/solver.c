/* See solver.h. */
#include "bloch/solver.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "eigen/eigen.h"

/* Any fixed number: the same input gives the same digits. */
static const uint64_t START_SEED = 20220;

/* Modes with a larger residual get a step of inverse iteration. */
static const double PURIFY_ABOVE = 1e-10;

struct pk_solver {
  picket_context *context;
  pk_operator *op;
  int64_t n;
  bool every_copy;
  pk_factor *real_factor, *complex_factor; /* made when first needed */
  double *real_values, *real_work;         /* [nnz], [n] */
  double complex *values, *work;           /* [nnz], [2n] */
  double complex *root;                    /* [n] B^½ */
};

picket_status pk_solver_create(picket_context *context, pk_operator *op, pk_solver **out) {
  pk_solver *solver = PK_NEW(context, 1, pk_solver);
  if (!solver) {
    return PICKET_ERROR_MEMORY;
  }
  solver->context = pk_context_hold(context);
  solver->op = op;
  solver->n = pk_operator_size(op);
  int64_t entries = pk_operator_pattern(op)->start[solver->n];
  solver->real_values = PK_NEW(context, entries, double);
  solver->real_work = PK_NEW(context, solver->n, double);
  solver->values = PK_NEW(context, entries, double complex);
  solver->work = PK_NEW(context, 2 * solver->n, double complex);
  solver->root = PK_NEW(context, solver->n, double complex);
  if (!solver->real_values || !solver->real_work || !solver->values || !solver->work ||
      !solver->root) {
    pk_solver_free(solver);
    return PICKET_ERROR_MEMORY;
  }
  *out = solver;
  return PICKET_OK;
}

void pk_solver_free(pk_solver *solver) {
  if (!solver) {
    return;
  }
  picket_context *context = solver->context;
  pk_factor_free(solver->real_factor);
  pk_factor_free(solver->complex_factor);
  pk_free(context, solver->real_values);
  pk_free(context, solver->real_work);
  pk_free(context, solver->values);
  pk_free(context, solver->work);
  pk_free(context, solver->root);
  pk_free(context, solver);
  pk_context_release(context);
}

pk_operator *pk_solver_operator(const pk_solver *solver) {
  return solver->op;
}

void pk_solver_want_every_copy(pk_solver *solver, bool wanted) {
  solver->every_copy = wanted;
}

void pk_modes_clear(picket_context *context, int count, pk_mode *modes) {
  for (int i = 0; modes && i < count; i++) {
    pk_free(context, modes[i].field);
    modes[i].field = NULL;
  }
}

static void take_root(pk_solver *solver) {
  const double complex *mass = pk_operator_mass(solver->op);
  for (int64_t p = 0; p < solver->n; p++) {
    solver->root[p] = csqrt(mass[p]);
  }
}

static picket_status apply_real(void *user, const double *x, double *y) {
  pk_solver *solver = user;
  for (int64_t p = 0; p < solver->n; p++) {
    solver->real_work[p] = creal(solver->root[p]) * x[p];
  }
  picket_status status = pk_factor_solve_real(solver->real_factor, solver->real_work, y);
  for (int64_t p = 0; status == PICKET_OK && p < solver->n; p++) {
    y[p] *= creal(solver->root[p]);
  }
  return status;
}

static picket_status apply_complex(void *user, const double complex *x, double complex *y) {
  pk_solver *solver = user;
  for (int64_t p = 0; p < solver->n; p++) {
    solver->work[p] = solver->root[p] * x[p];
  }
  picket_status status = pk_factor_solve_complex(solver->complex_factor, solver->work, y);
  for (int64_t p = 0; status == PICKET_OK && p < solver->n; p++) {
    y[p] *= solver->root[p];
  }
  return status;
}

static picket_status need_factor(pk_solver *solver, pk_scalar scalar, pk_factor **factor) {
  return *factor
             ? PICKET_OK
             : pk_factor_create(solver->context, pk_operator_pattern(solver->op), scalar, factor);
}

picket_status pk_solver_factor(pk_solver *solver, pk_phase phase, double complex shift,
                               pk_factor **out) {
  picket_status status = need_factor(solver, PK_COMPLEX, &solver->complex_factor);
  if (status == PICKET_OK) {
    pk_operator_values(solver->op, phase, shift, solver->values);
    status = pk_factor_complex(solver->complex_factor, solver->values);
  }
  if (status == PICKET_OK) {
    *out = solver->complex_factor;
  }
  return status;
}

static picket_status factor_real(pk_solver *solver, pk_phase phase, double shift) {
  picket_status status = need_factor(solver, PK_REAL, &solver->real_factor);
  if (status == PICKET_OK) {
    pk_operator_values_real(solver->op, phase, shift, solver->real_values);
    status = pk_factor_real(solver->real_factor, solver->real_values);
  }
  return status;
}

double pk_solver_residual(pk_solver *solver, pk_phase phase, double complex lambda,
                          const double complex *field) {
  const double complex *mass = pk_operator_mass(solver->op);
  double complex *r = solver->work;
  pk_operator_values(solver->op, phase, lambda, solver->values);
  pk_sparse_times_complex(pk_operator_pattern(solver->op), solver->values, field, r);
  double weight = 0;
  for (int64_t p = 0; p < solver->n; p++) {
    double complex m = mass[p] * field[p];
    weight += creal(m * conj(m)); /* cabs would take longer than the product */
  }
  double residual = pk_dense_norm((long)solver->n, r);
  return residual / (cabs(lambda) * sqrt(weight));
}

/* Scales to conj(v) |B| v = 1. */
static void normalise(pk_solver *solver, double complex *field) {
  const double complex *mass = pk_operator_mass(solver->op);
  double norm = 0;
  for (int64_t p = 0; p < solver->n; p++) {
    norm += sqrt(creal(mass[p] * conj(mass[p]))) * creal(field[p] * conj(field[p]));
  }
  double scale = 1 / sqrt(norm);
  for (int64_t p = 0; p < solver->n; p++) {
    field[p] *= scale;
  }
}

/* Turns an eigenvector y of Op into the field B^-½ y. */
static void finish_field(pk_solver *solver, double complex *field) {
  for (int64_t p = 0; p < solver->n; p++) {
    field[p] /= solver->root[p];
  }
  normalise(solver, field);
}

/* One step of inverse iteration, v ← (A - σB)⁻¹ B v with the factor at hand: takes out the rapidly
 * varying error that Arnoldi leaves in modes far from the shift, which A would magnify. */
static picket_status purify(pk_solver *solver, bool real, double complex *field) {
  const double complex *mass = pk_operator_mass(solver->op);
  picket_status status;
  if (real) {
    double *x = PK_NEW(solver->context, solver->n, double);
    if (!x) {
      return PICKET_ERROR_MEMORY;
    }
    for (int64_t p = 0; p < solver->n; p++) {
      solver->real_work[p] = creal(mass[p] * field[p]);
    }
    status = pk_factor_solve_real(solver->real_factor, solver->real_work, x);
    for (int64_t p = 0; status == PICKET_OK && p < solver->n; p++) {
      field[p] = x[p];
    }
    pk_free(solver->context, x);
  } else {
    for (int64_t p = 0; p < solver->n; p++) {
      solver->work[p] = mass[p] * field[p];
    }
    status = pk_factor_solve_complex(solver->complex_factor, solver->work, field);
  }
  if (status == PICKET_OK) {
    normalise(solver, field);
  }
  return status;
}

typedef struct run {
  pk_phase phase;
  double shift;
  int wanted;
  const double complex *start;
  bool real; /* real arithmetic */
} run;

static picket_status run_real(pk_solver *solver, const run *r, double complex *values,
                              double complex *vectors, int *found) {
  picket_context *context = solver->context;
  double *real_values = PK_NEW(context, r->wanted, double);
  double *real_vectors = PK_NEW(context, (int64_t)r->wanted * solver->n, double);
  double *start = r->start ? PK_NEW(context, solver->n, double) : NULL;
  picket_status status = PICKET_ERROR_MEMORY;
  if (real_values && real_vectors && (start || !r->start)) {
    for (int64_t p = 0; start && p < solver->n; p++) {
      start[p] = creal(solver->root[p] * r->start[p]);
    }
    pk_eigen_request request = {.n = solver->n,
                                .wanted = r->wanted,
                                .seed = START_SEED,
                                .start = start,
                                .every_copy = solver->every_copy};
    status = factor_real(solver, r->phase, r->shift);
    if (status == PICKET_OK) {
      status = pk_eigen_symmetric(context, &request, apply_real, solver, real_values, real_vectors,
                                  found, NULL);
    }
    for (int i = 0; status == PICKET_OK && i < *found; i++) {
      values[i] = real_values[i];
      for (int64_t p = 0; p < solver->n; p++) {
        vectors[i * solver->n + p] = real_vectors[i * solver->n + p];
      }
    }
  }
  pk_free(context, real_values);
  pk_free(context, real_vectors);
  pk_free(context, start);
  return status;
}

static picket_status run_complex(pk_solver *solver, const run *r, double complex *values,
                                 double complex *vectors, int *found) {
  picket_context *context = solver->context;
  double complex *start = r->start ? PK_NEW(context, solver->n, double complex) : NULL;
  if (r->start && !start) {
    return PICKET_ERROR_MEMORY;
  }
  for (int64_t p = 0; start && p < solver->n; p++) {
    start[p] = solver->root[p] * r->start[p];
  }
  pk_eigen_request request = {.n = solver->n,
                              .wanted = r->wanted,
                              .seed = START_SEED,
                              .start = start,
                              .every_copy = solver->every_copy};
  pk_factor *factor;
  picket_status status = pk_solver_factor(solver, r->phase, r->shift, &factor);
  if (status == PICKET_OK) {
    status =
        pk_eigen_complex(context, &request, apply_complex, solver, values, vectors, found, NULL);
  }
  pk_free(context, start);
  return status;
}

static void sort_modes(int count, pk_mode *modes) {
  for (int i = 1; i < count; i++) {
    pk_mode moved = modes[i];
    int at = i;
    while (at > 0 && creal(modes[at - 1].lambda) > creal(moved.lambda)) {
      modes[at] = modes[at - 1];
      at--;
    }
    modes[at] = moved;
  }
}

/* The residual that a mode is judged by. At the zone centre λ = 0 is exact and has no relative
 * residual: there it is taken relative to the shift. */
static double judged_residual(pk_solver *solver, const run *r, pk_mode *mode) {
  mode->residual = pk_solver_residual(solver, r->phase, mode->lambda, mode->field);
  double size = cabs(mode->lambda);
  return mode->residual * size / (size + fabs(r->shift));
}

static picket_status judge(pk_solver *solver, const run *r, pk_mode *mode) {
  double residual = judged_residual(solver, r, mode);
  if (residual > PURIFY_ABOVE) {
    picket_status status = purify(solver, r->real, mode->field);
    if (status != PICKET_OK) {
      return status;
    }
    residual = judged_residual(solver, r, mode);
  }
  if (!(residual <= PK_RESIDUAL_LIMIT)) {
    return pk_fail(solver->context, PICKET_ERROR_NUMERIC,
                   "an eigenpair has a residual of %.1e, allowed %.1e", residual,
                   PK_RESIDUAL_LIMIT);
  }
  return PICKET_OK;
}

/* Eigenvalues of Op become λ, eigenvectors fields; each residual is taken and judged. */
static picket_status collect(pk_solver *solver, const run *r, int found,
                             const double complex *values, const double complex *vectors,
                             pk_mode *modes) {
  bool hermitian = pk_operator_is_real(solver->op);
  for (int i = 0; i < found; i++) {
    modes[i].field = pk_copy(solver->context, vectors + i * solver->n, (size_t)solver->n,
                             sizeof(double complex));
    if (!modes[i].field) {
      return PICKET_ERROR_MEMORY;
    }
    finish_field(solver, modes[i].field);
    modes[i].lambda = r->shift + 1 / values[i];
    if (hermitian) {
      modes[i].lambda = creal(modes[i].lambda);
    }
    picket_status status = judge(solver, r, &modes[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  sort_modes(found, modes);
  return PICKET_OK;
}

static bool is_real_phase(pk_phase phase) {
  return cimag(phase.xi) == 0 && cimag(phase.chi) == 0 && fabs(creal(phase.xi)) == 1 &&
         fabs(creal(phase.chi)) == 1;
}

picket_status pk_solver_modes(pk_solver *solver, pk_phase phase, double shift, int wanted,
                              const double complex *start, pk_mode *modes, int *found) {
  picket_context *context = solver->context;
  bool real = pk_operator_is_real(solver->op) && is_real_phase(phase);
  run r = {phase, shift, wanted < solver->n ? wanted : (int)solver->n, start, real};
  double complex *values = PK_NEW(context, r.wanted, double complex);
  double complex *vectors = PK_NEW(context, r.wanted * solver->n, double complex);
  int converged = 0;
  picket_status status = PICKET_ERROR_MEMORY;
  if (values && vectors) {
    take_root(solver);
    status = real ? run_real(solver, &r, values, vectors, &converged)
                  : run_complex(solver, &r, values, vectors, &converged);
  }
  if (status == PICKET_OK && converged == 0) {
    status = pk_fail(context, PICKET_ERROR_NUMERIC, "no eigenvalue near %g /µm² converged", shift);
  }
  if (status == PICKET_OK) {
    memset(modes, 0, (size_t)r.wanted * sizeof *modes);
    status = collect(solver, &r, converged, values, vectors, modes);
    if (status != PICKET_OK) {
      pk_modes_clear(context, converged, modes);
    }
  }
  if (status == PICKET_OK) {
    *found = converged;
  }
  pk_free(context, values);
  pk_free(context, vectors);
  return status;
}

picket_context *pk_solver_context(const pk_solver *solver) {
  return solver->context;
}
