/* See wavenumber.h.
 *
 * Linearised with x = (v, ξv), the shift-inverted pencil needs one solve with T(σ) per step, and
 * its right-hand side only where the wrap-around couples: s = T(σ)⁻¹ (C₊ x₂ - C₋ x₁/σ),   w₁ = -(x₁
 * + s)/σ,   w₂ = -s,   w = θ x,  θ = 1/(ξ - σ). The eigenvector is then refined by residual inverse
 * iteration (A. Neumaier, SIAM J. Numer. Anal. 22, 914 (1985)) with ξ from the Rayleigh functional
 * lᵀ T(ξ) v = 0. */
#include "bloch/wavenumber.h"

#include <float.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "eigen/eigen.h"

enum {
  ROUGH_KRYLOV = 4, /* basis of the rough run; see first_pair */
  KRYLOV = 10,      /* basis for one mode whose guess may be rough */
  REFINEMENTS = 30, /* each gains the factor |ξ - σ| over the distance to the next wave */
  ROUNDS = 3        /* of right and left vector: the second settles all but a few waves */
};

/* Small enough that the second-order functional is at rounding level; see PK_RESIDUAL_LIMIT. On
 * fine grids rounding alone leaves more: a few DBL_EPSILON of |T v|'s terms, which is the other
 * goal. */
static const double RESIDUAL_GOAL = 1e-11;
static const double ROUNDINGS = 8;
/* A shift on a good guess would make the matrix singular; this far off, each refinement still gains
 * three digits. */
static const double SHIFT_OFFSET = 1e-4;

/* Below this a residual that no longer halves has met rounding. */
static const double STALLED = 1e-9;
static const uint64_t START_SEED = 20221;
/* Both residuals below this many goals: another round gains nothing that matters. */
static const double ROUND_ENOUGH = 10;

/* Relative tolerance of the rough run, and the distance from σ at which its wave is trusted. */
static const double ROUGH = 1e-3;
static const double NEXT_TO = 1e-2;

/* A shift this close to ξ (relative) needs no second factorisation for the left vector. */
static const double CLOSE = 2e-3;

/* A shift for a wave at ξ: towards the decaying side of a pair (ξ, 1/ξ), so that the wanted one
 * stays the nearer. */
static double complex off_centre(double complex xi) {
  return xi * (cabs(xi) <= 1 ? 1 - SHIFT_OFFSET : 1 + SHIFT_OFFSET);
}

typedef struct search {
  picket_context *context;
  pk_operator *op;
  pk_factor *factor;
  pk_phase phase; /* xi = σ */
  double k0;
  double goal; /* of the residuals */
  int64_t n;
  double complex *work, *other; /* [n] each */
} search;

static picket_status apply(void *user, const double complex *x, double complex *w) {
  search *s = user;
  const double complex *x1 = x, *x2 = x + s->n;
  double complex sigma = s->phase.xi, *w1 = w, *w2 = w + s->n;
  pk_operator_forward_times(s->op, s->phase.chi, x2, s->work);
  pk_operator_backward_times(s->op, s->phase.chi, x1, s->other);
  for (int64_t p = 0; p < s->n; p++) {
    s->work[p] -= s->other[p] / sigma;
  }
  picket_status status = pk_factor_solve_complex(s->factor, s->work, w2);
  for (int64_t p = 0; status == PICKET_OK && p < s->n; p++) {
    w1[p] = -(x1[p] + w2[p]) / sigma;
    w2[p] = -w2[p];
  }
  return status;
}

static void scale_to_unit(int64_t n, double complex *x) {
  double norm = pk_dense_norm((long)n, x);
  for (int64_t p = 0; p < n; p++) {
    x[p] /= norm;
  }
}

/* One run of Arnoldi; not found is an outcome. */
static picket_status run_arnoldi(search *s, const pk_eigen_request *request, double complex *vector,
                                 double complex *xi, bool *found) {
  double complex theta;
  int count = 0;
  picket_status status =
      pk_eigen_complex(s->context, request, apply, s, &theta, vector, &count, NULL);
  *found = status == PICKET_OK && count > 0;
  if (*found) {
    *xi = s->phase.xi + 1 / theta;
  }
  return status;
}

/* A first pair: from a rough run if that shows a wave next to σ, where refinement is as fast as
 * Arnoldi, else from a run that separates neighbouring waves. */
static picket_status first_pair(search *s, const double complex *start, double complex *xi,
                                double complex *right) {
  double complex *vector = PK_NEW(s->context, 4 * s->n, double complex);
  if (!vector) {
    return PICKET_ERROR_MEMORY;
  }
  double complex *guess = vector + 2 * s->n;
  for (int64_t p = 0; start && p < s->n; p++) {
    guess[p] = start[p];
    guess[s->n + p] = s->phase.xi * start[p];
  }
  pk_eigen_request request = {.n = 2 * s->n,
                              .wanted = 1,
                              .basis = ROUGH_KRYLOV,
                              .restarts = 1,
                              .tolerance = ROUGH,
                              .seed = START_SEED,
                              .start = start ? guess : NULL};
  bool found;
  picket_status status = run_arnoldi(s, &request, vector, xi, &found);
  if (status == PICKET_OK && !(found && cabs(*xi / s->phase.xi - 1) < NEXT_TO)) {
    request.basis = KRYLOV;
    request.restarts = 0;
    request.tolerance = 1e-9;
    status = run_arnoldi(s, &request, vector, xi, &found);
  }
  if (status == PICKET_OK && !found) {
    status =
        pk_fail(s->context, PICKET_ERROR_NUMERIC, "no Bloch wave near exp(ikΛ) = %g%+gi converged",
                creal(s->phase.xi), cimag(s->phase.xi));
  }
  if (status == PICKET_OK) {
    memcpy(right, vector, (size_t)s->n * sizeof *right);
    scale_to_unit(s->n, right);
  }
  pk_free(s->context, vector);
  return status;
}

static double complex plain_dot(int64_t n, const double complex *l, const double complex *r) {
  double complex sum = 0;
  for (int64_t p = 0; p < n; p++) {
    sum += l[p] * r[p];
  }
  return sum;
}

/* The root of lᵀT(ξ)r = ξ a + b + c/ξ = 0 nearest to ξ. */
static double complex rayleigh(search *s, const double complex *left, const double complex *right,
                               double complex xi, double complex *values) {
  pk_phase phase = {xi, s->phase.chi, s->phase.kx};
  pk_operator_forward_times(s->op, s->phase.chi, right, s->work);
  double complex a = plain_dot(s->n, left, s->work);
  pk_operator_backward_times(s->op, s->phase.chi, right, s->work);
  double complex c = plain_dot(s->n, left, s->work);
  pk_operator_values(s->op, phase, s->k0 * s->k0, values);
  pk_sparse_times_complex(pk_operator_pattern(s->op), values, right, s->work);
  double complex rest = plain_dot(s->n, left, s->work); /* lᵀT(ξ)r at the old ξ */
  /* With ξ' = ξ(1 + δ): aξ δ + c/ξ (1/(1+δ) - 1) + rest = 0, a quadratic in δ without cancellation.
   */
  double complex A = a * xi, C = c / xi;
  double complex linear = A - C + rest;
  double complex root = csqrt(linear * linear - 4 * A * rest);
  double complex denominator = creal(conj(linear) * root) >= 0 ? linear + root : linear - root;
  return denominator == 0 ? xi : xi * (1 - 2 * rest / denominator);
}

/* |T(ξ)x| / (k0² |B x|) for the right vector, |T(ξ)ᵀx| for the left one; the numerator's vector is
 * left in s->other. */
static double residual_of(search *s, double complex xi, bool transposed, const double complex *x,
                          double complex *values) {
  pk_phase phase = {xi, s->phase.chi, s->phase.kx};
  const double complex *mass = pk_operator_mass(s->op);
  pk_operator_values(s->op, phase, s->k0 * s->k0, values);
  const pk_pattern *pattern = pk_operator_pattern(s->op);
  if (transposed) {
    pk_sparse_transposed_times_complex(pattern, values, x, s->other);
  } else {
    pk_sparse_times_complex(pattern, values, x, s->other);
  }
  double weight = 0;
  for (int64_t p = 0; p < s->n; p++) {
    double complex m = mass[p] * x[p];
    weight += creal(m) * creal(m) + cimag(m) * cimag(m); /* cabs would be slow */
  }
  return pk_dense_norm((long)s->n, s->other) / (s->k0 * s->k0 * sqrt(weight));
}

/* The residual that is worth striving for: see RESIDUAL_GOAL. */
static double residual_goal(const search *s, double complex *values) {
  const pk_pattern *pattern = pk_operator_pattern(s->op);
  const double complex *mass = pk_operator_mass(s->op);
  double largest = 0; /* entry of T over the one of k0² B */
  pk_operator_values(s->op, s->phase, s->k0 * s->k0, values);
  for (int64_t p = 0; p < s->n; p++) {
    for (int64_t e = pattern->start[p]; e < pattern->start[p + 1]; e++) {
      double entry = fabs(creal(values[e])) + fabs(cimag(values[e]));
      largest = fmax(largest, entry / (fabs(creal(mass[p])) * s->k0 * s->k0));
    }
  }
  return fmin(fmax(RESIDUAL_GOAL, ROUNDINGS * DBL_EPSILON * largest), 0.1 * PK_RESIDUAL_LIMIT);
}

/* x - T(σ)⁻¹ T(ξ) x for either vector, of unit norm; T(ξ)x stands in s->other. */
static picket_status improve(search *s, bool transposed, double complex *x) {
  picket_status status = transposed
                             ? pk_factor_solve_transposed_complex(s->factor, s->other, s->work)
                             : pk_factor_solve_complex(s->factor, s->other, s->work);
  for (int64_t p = 0; status == PICKET_OK && p < s->n; p++) {
    x[p] -= s->work[p];
  }
  if (status == PICKET_OK) {
    scale_to_unit(s->n, x);
  }
  return status;
}

static picket_status refine_right(search *s, double complex *values, pk_wave *wave) {
  picket_status status = PICKET_OK;
  double before = INFINITY;
  for (int step = 0; step < REFINEMENTS; step++) {
    wave->xi = rayleigh(s, wave->left, wave->right, wave->xi, values);
    wave->residual = residual_of(s, wave->xi, false, wave->right, values);
    bool stalled = wave->residual < STALLED && wave->residual > 0.5 * before;
    if (wave->residual < s->goal || stalled) {
      break;
    }
    before = wave->residual;
    status = improve(s, false, wave->right);
    if (status != PICKET_OK) {
      break;
    }
  }
  return status;
}

/* l ← T(σ)⁻ᵀ T'(σ)ᵀ l, of unit norm: nearly the left vector when σ is near ξ. (Iterating with B in
 * the place of T' would fail where the attenuation is largest: two frequencies meet there.) */
static picket_status inverse_step(search *s, double complex *left) {
  double complex sigma = s->phase.xi;
  pk_operator_backward_times(s->op, 1 / s->phase.chi, left, s->work);
  pk_operator_forward_times(s->op, 1 / s->phase.chi, left, s->other);
  double complex inverse = 1 / (sigma * sigma);
  for (int64_t p = 0; p < s->n; p++) {
    s->work[p] -= inverse * s->other[p];
  }
  picket_status status = pk_factor_solve_transposed_complex(s->factor, s->work, left);
  if (status == PICKET_OK) {
    scale_to_unit(s->n, left);
  }
  return status;
}

static void conjugate(int64_t n, const double complex *x, double complex *y) {
  for (int64_t p = 0; p < n; p++) {
    y[p] = conj(x[p]);
  }
}

/* The left vector by residual inverse iteration: each step gains the factor |ξ - σ| over the
 * distance to the next wave, so a shift that turned out to be far off is made anew near ξ. */
static picket_status find_left(search *s, pk_solver *solver, double complex *values, pk_wave *wave,
                               double *residual) {
  *residual = residual_of(s, wave->xi, true, wave->left, values);
  if (*residual < s->goal) {
    return PICKET_OK; /* a lossless wave that does not decay: conj(right) */
  }
  picket_status status = PICKET_OK;
  if (cabs(s->phase.xi / wave->xi - 1) > CLOSE) {
    s->phase.xi = off_centre(wave->xi);
    status = pk_solver_factor(solver, s->phase, s->k0 * s->k0, &s->factor);
  }
  for (int step = 0; status == PICKET_OK && step < 2; step++) {
    status = inverse_step(s, wave->left);
  }
  double before = INFINITY;
  for (int step = 0; status == PICKET_OK && step < REFINEMENTS; step++) {
    *residual = residual_of(s, wave->xi, true, wave->left, values);
    bool stalled = *residual<STALLED && * residual> 0.5 * before;
    if (*residual < s->goal || stalled) {
      break;
    }
    before = *residual;
    status = improve(s, true, wave->left);
  }
  return status;
}

/* Right vector, then left vector (conj(right) is one for lossless waves that do not decay), then ξ
 * from both. For a decaying wave the first ξ comes from a wrong left vector and may be good to the
 * residual only, which then bounds the left one: a second round has the true left vector and gains
 * the square. */
static picket_status refine(search *s, pk_solver *solver, double complex *values, pk_wave *wave) {
  conjugate(s->n, wave->right, wave->left);
  picket_status status = PICKET_OK;
  for (int round = 0; status == PICKET_OK && round < ROUNDS; round++) {
    double left = INFINITY;
    status = refine_right(s, values, wave);
    if (round == 0) {
      conjugate(s->n, wave->right, wave->left);
    }
    if (status == PICKET_OK) {
      status = find_left(s, solver, values, wave, &left);
    }
    if (status == PICKET_OK) {
      wave->xi = rayleigh(s, wave->left, wave->right, wave->xi, values);
      wave->residual = fmax(left, residual_of(s, wave->xi, false, wave->right, values));
      if (wave->residual < ROUND_ENOUGH * s->goal) {
        break;
      }
    }
  }
  if (status == PICKET_OK && !(wave->residual <= PK_RESIDUAL_LIMIT)) {
    status = pk_fail(s->context, PICKET_ERROR_NUMERIC,
                     "a Bloch wave has a residual of %.1e, allowed %.1e", wave->residual,
                     PK_RESIDUAL_LIMIT);
  }
  return status;
}

void pk_wave_clear(picket_context *context, pk_wave *wave) {
  pk_free(context, wave->right);
  pk_free(context, wave->left);
  memset(wave, 0, sizeof *wave);
}

picket_status pk_wave_near(pk_solver *solver, pk_phase phase, double k0, double complex xi_guess,
                           const double complex *start, pk_wave *out) {
  search s = {.op = pk_solver_operator(solver), .phase = phase, .k0 = k0};
  s.context = pk_solver_context(solver);
  s.n = pk_operator_size(s.op);
  s.phase.xi = off_centre(xi_guess);
  int64_t entries = pk_operator_pattern(s.op)->start[s.n];
  double complex *values = PK_NEW(s.context, entries, double complex);
  pk_wave wave = {.right = PK_NEW(s.context, s.n, double complex),
                  .left = PK_NEW(s.context, s.n, double complex)};
  s.work = PK_NEW(s.context, s.n, double complex);
  s.other = PK_NEW(s.context, s.n, double complex);
  picket_status status = PICKET_ERROR_MEMORY;
  if (values && wave.right && wave.left && s.work && s.other) {
    status = pk_solver_factor(solver, s.phase, k0 * k0, &s.factor);
  }
  if (status == PICKET_OK) {
    s.goal = residual_goal(&s, values);
    status = first_pair(&s, start, &wave.xi, wave.right);
  }
  if (status == PICKET_OK) {
    status = refine(&s, solver, values, &wave);
  }
  pk_free(s.context, values);
  pk_free(s.context, s.work);
  pk_free(s.context, s.other);
  if (status == PICKET_OK) {
    *out = wave;
  } else {
    pk_wave_clear(s.context, &wave);
  }
  return status;
}

picket_status pk_wave_slope(const pk_media *media, const pk_operator *op, pk_phase phase, double k0,
                            double pitch_um, double shift, const pk_wave *wave,
                            double complex *dk_dk0) {
  phase.xi = wave->xi;
  double complex frequency;
  picket_status status =
      pk_media_frequency_form(media, op, phase, k0, wave->left, wave->right, &frequency);
  if (status == PICKET_OK) {
    double complex wavenumber =
        I * pitch_um * pk_operator_phase_form(op, phase, 1, shift, wave->left, wave->right);
    *dk_dk0 = -frequency / wavenumber;
  }
  return status;
}
