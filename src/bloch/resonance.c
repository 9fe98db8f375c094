/* See resonance.h. */
#include "bloch/resonance.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

enum {
  NEWTON_STEPS = 20, /* quadratic: 3 or 4 do; more only while the frequency is moved into range */
  CANDIDATES = 3     /* modes asked for when one must be recognised */
};

/* Settled when a step moves k0 by less than rounding of the eigenvalue allows. */
static const double SETTLED = 1e-13;
static const double SETTLED_AT_LEAST = 1e-10;

/* The shift stays a little off the eigenvalue, so that the matrix is not singular. */
static const double SHIFT_OFFSET = 1e-6;

double pk_overlap(const pk_operator *op, const double complex *a, const double complex *b) {
  const double complex *mass = pk_operator_mass(op);
  double complex ab = 0;
  double aa = 0, bb = 0;
  for (int64_t p = 0; p < pk_operator_size(op); p++) {
    double m = cabs(mass[p]);
    ab += conj(a[p]) * m * b[p];
    aa += m * (creal(a[p]) * creal(a[p]) + cimag(a[p]) * cimag(a[p]));
    bb += m * (creal(b[p]) * creal(b[p]) + cimag(b[p]) * cimag(b[p]));
  }
  double size = cabs(ab);
  return size * size / (aa * bb);
}

static int choose(const pk_operator *op, const double complex *reference, double lambda_guess,
                  int found, const pk_mode *modes) {
  int best = 0;
  double best_score = -INFINITY;
  for (int i = 0; i < found; i++) {
    double score = reference ? pk_overlap(op, reference, modes[i].field)
                             : -fabs(creal(modes[i].lambda) - lambda_guess);
    if (score > best_score) {
      best = i;
      best_score = score;
    }
  }
  return best;
}

static double complex *conjugate_copy(picket_context *context, int64_t n, const double complex *x) {
  double complex *copy = PK_NEW(context, n, double complex);
  for (int64_t p = 0; copy && p < n; p++) {
    copy[p] = conj(x[p]);
  }
  return copy;
}

picket_status pk_mode_newton(const pk_media *media, const pk_operator *op, pk_phase phase,
                             double k0, const pk_mode *mode, double *next) {
  if (!media->dispersive) {
    *next = sqrt(creal(mode->lambda));
    return PICKET_OK;
  }
  double complex *left = conjugate_copy(media->context, pk_operator_size(op), mode->field);
  if (!left) {
    return PICKET_ERROR_MEMORY;
  }
  /* lᵀ(∂T/∂k0)r at λ = k0² is λ'(k0) - 2k0 for conj(r) B r = 1. */
  double complex slope;
  picket_status status = pk_media_frequency_form(media, op, phase, k0, left, mode->field, &slope);
  pk_free(media->context, left);
  if (status == PICKET_OK) {
    *next = k0 - (creal(mode->lambda) - k0 * k0) / creal(slope);
  }
  return status;
}

typedef struct tracked {
  double k0, step;
  double complex *field;
  double residual;
} tracked;

static picket_status track_once(pk_solver *solver, pk_media *media, pk_phase phase,
                                const double complex *reference, tracked *t) {
  picket_context *context = pk_solver_context(solver);
  pk_operator *op = pk_solver_operator(solver);
  picket_status status = pk_media_set(media, t->k0, op);
  if (status != PICKET_OK) {
    return status;
  }
  const double complex *known = t->field ? t->field : reference;
  pk_mode modes[CANDIDATES];
  int found = 0;
  double lambda = t->k0 * t->k0;
  status = pk_solver_modes(solver, phase, lambda * (1 - SHIFT_OFFSET), known ? CANDIDATES : 1,
                           known, modes, &found);
  if (status != PICKET_OK) {
    return status;
  }
  int chosen = choose(op, known, lambda, found, modes);
  double next = t->k0;
  status = pk_mode_newton(media, op, phase, t->k0, &modes[chosen], &next);
  if (status == PICKET_OK) {
    pk_free(context, t->field);
    t->field = modes[chosen].field;
    modes[chosen].field = NULL;
    t->residual = modes[chosen].residual;
    t->step = fabs(next - t->k0) / t->k0;
    t->k0 = next;
  }
  pk_modes_clear(context, found, modes);
  return status;
}

picket_status pk_resonance_near(pk_solver *solver, pk_media *media, pk_phase phase, double k0_guess,
                                const double complex *reference, pk_resonance *out) {
  tracked t = {.k0 = k0_guess, .step = INFINITY};
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < NEWTON_STEPS && t.step > SETTLED; i++) {
    double before = t.step;
    status = track_once(solver, media, phase, reference, &t);
    if (status == PICKET_OK && !media->dispersive && !media->clamped) {
      t.step = 0;
    }
    if (t.step < SETTLED_AT_LEAST && t.step > 0.1 * before) {
      break; /* rounding: no further gain */
    }
  }
  if (status == PICKET_OK && !(t.step <= SETTLED_AT_LEAST && isfinite(t.k0))) {
    status = pk_fail(pk_solver_context(solver), PICKET_ERROR_NUMERIC,
                     "the frequency of a mode near k0 = %g /µm did not settle: last step %.1e",
                     k0_guess, t.step);
  }
  if (status != PICKET_OK) {
    pk_free(pk_solver_context(solver), t.field);
    return status;
  }
  *out = (pk_resonance){t.k0, t.field, t.residual, !media->clamped};
  return PICKET_OK;
}

void pk_resonance_clear(picket_context *context, pk_resonance *resonance) {
  pk_free(context, resonance->field);
  memset(resonance, 0, sizeof *resonance);
}

picket_status pk_resonance_slope(const pk_media *media, const pk_operator *op, pk_phase phase,
                                 double pitch_um, double shift, const pk_resonance *resonance,
                                 double *dk0_dk) {
  double complex *left = conjugate_copy(media->context, pk_operator_size(op), resonance->field);
  if (!left) {
    return PICKET_ERROR_MEMORY;
  }
  double complex frequency;
  picket_status status =
      pk_media_frequency_form(media, op, phase, resonance->k0, left, resonance->field, &frequency);
  if (status == PICKET_OK) {
    double complex wavenumber =
        I * pitch_um * pk_operator_phase_form(op, phase, 1, shift, left, resonance->field);
    *dk0_dk = -creal(wavenumber / frequency);
  }
  pk_free(media->context, left);
  return status;
}
