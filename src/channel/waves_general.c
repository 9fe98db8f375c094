/* Waves at a frequency of a channel without a mirror plane in z.
 *
 * With T(σ + s) = T0 + s T1 + s² A2, v = s e, the quadratic eigenproblem is the linear one
 *   -T0⁻¹ (T1 e + A2 v) = θ e,   e = θ v,   θ = 1/s   (F. Tisseur and K. Meerbergen, SIAM Rev. 43,
 * 235 (2001)), one solve with T(σ) per step. Vectors are refined by residual inverse iteration
 * (A. Neumaier, SIAM J. Numer. Anal. 22, 914 (1985)) with k from lᵀT(k)r = 0. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "channel/forms.h"
#include "eigen/eigen.h"

static const double PI = 3.141592653589793238;

static const double GOAL = 1e-11;
static const double STALLED = 1e-9;
enum { REFINEMENTS = 30, ROUNDS = 3 };
static const double TOLERANCE = 1e-9;

/* In parts of π/Λ. A shift on a good guess would make the matrix singular; one that is farther from
 * the wave than this is made anew for the left vector. */
static const double SHIFT_OFFSET = 1e-4;
static const double CLOSE = 1e-2;

typedef struct solve {
  picket_context *context;
  pk_channel *channel;
  int64_t n;
  double unit; /* π/Λ */
  double complex k0_square, sigma;
  double complex *work, *other; /* [n] each */
} solve;

/* y += factor × T'(σ) x */
static void add_slope(const solve *s, double complex factor, const double complex *x,
                      double complex *y) {
  pk_channel_curl_times(s->channel, s->sigma, PK_CURL_TURN, PK_CURL_WHOLE, factor, x, y);
  pk_channel_curl_times(s->channel, s->sigma, PK_CURL_WHOLE, PK_CURL_TURN, factor, x, y);
}

static picket_status apply(void *user, const double complex *x, double complex *y) {
  solve *s = user;
  memset(s->work, 0, (size_t)s->n * sizeof *s->work);
  add_slope(s, -1, x, s->work);
  pk_channel_curl_times(s->channel, s->sigma, PK_CURL_TURN, PK_CURL_TURN, -1, x + s->n, s->work);
  memcpy(y + s->n, x, (size_t)s->n * sizeof *x);
  return pk_channel_solve(s->channel, s->work, y);
}

static picket_status factor_at(solve *s, double complex k) {
  s->sigma = k + SHIFT_OFFSET * s->unit;
  return pk_channel_factor(s->channel, s->sigma, s->k0_square);
}

/* The root of lᵀT(k)r = 0 nearest to k: T is of second degree. */
static void take_value(const solve *s, pk_channel_mode *mode) {
  const pk_channel *c = s->channel;
  const double complex *l = mode->left, *r = mode->right;
  double complex a = pk_channel_curl_form(c, mode->k, PK_CURL_TURN, PK_CURL_TURN, l, r);
  double complex b = pk_channel_k_form(c, mode->k, l, r);
  double complex rest = pk_channel_form(c, mode->k, s->k0_square, l, r);
  double complex root = csqrt(b * b - 4 * a * rest);
  double complex denominator = creal(conj(b) * root) >= 0 ? b + root : b - root;
  mode->k += denominator == 0 ? 0 : -2 * rest / denominator;
}

/* x - T(σ)⁻¹ T(k) x, or with transposes; T(k) x stands in s->work. */
static picket_status improve(solve *s, bool transposed, double complex *x) {
  picket_status status = transposed ? pk_channel_solve_transposed(s->channel, s->work, s->other)
                                    : pk_channel_solve(s->channel, s->work, s->other);
  for (int64_t p = 0; status == PICKET_OK && p < s->n; p++) {
    x[p] -= s->other[p];
  }
  if (status == PICKET_OK) {
    pk_channel_scale(s->channel, x);
  }
  return status;
}

static picket_status refine_vector(solve *s, pk_channel_mode *mode, bool transposed,
                                   double *residual) {
  double complex *x = transposed ? mode->left : mode->right;
  double before = INFINITY;
  picket_status status = PICKET_OK;
  for (int step = 0; status == PICKET_OK && step <= REFINEMENTS; step++) {
    if (!transposed) {
      take_value(s, mode);
    }
    *residual = pk_channel_residual_of(s->channel, mode->k, s->k0_square, transposed, x, s->work);
    bool stalled = *residual<STALLED && * residual> 0.5 * before;
    if (*residual < GOAL || stalled || step == REFINEMENTS) {
      break;
    }
    before = *residual;
    status = improve(s, transposed, x);
  }
  return status;
}

/* l ← T(σ)⁻ᵀ T'(σ)ᵀ l: nearly the left vector where σ is near k. */
static picket_status inverse_step(solve *s, double complex *left) {
  memset(s->work, 0, (size_t)s->n * sizeof *s->work);
  add_slope(s, 1, left, s->work); /* T' is symmetric */
  picket_status status = pk_channel_solve_transposed(s->channel, s->work, left);
  if (status == PICKET_OK) {
    pk_channel_scale(s->channel, left);
  }
  return status;
}

/* conj(right) is one for lossless waves that do not decay. */
static picket_status find_left(solve *s, pk_channel_mode *mode, double *residual) {
  *residual = pk_channel_residual_of(s->channel, mode->k, s->k0_square, true, mode->left, s->work);
  if (*residual < STALLED) {
    return PICKET_OK;
  }
  picket_status status = PICKET_OK;
  if (cabs(mode->k - s->sigma) > CLOSE * s->unit) {
    status = factor_at(s, mode->k);
  }
  for (int step = 0; status == PICKET_OK && step < 2; step++) {
    status = inverse_step(s, mode->left);
  }
  return status == PICKET_OK ? refine_vector(s, mode, true, residual) : status;
}

static void conjugate(int64_t n, const double complex *x, double complex *y) {
  for (int64_t p = 0; p < n; p++) {
    y[p] = conj(x[p]);
  }
}

/* k from a wrong left vector is good to the residual only, and bounds both: a second round has the
 * true one and gains the square. */
static picket_status refine(solve *s, pk_channel_mode *mode) {
  picket_status status = pk_channel_guess_left(s->channel, mode);
  mode->k0_square = s->k0_square;
  for (int round = 0; status == PICKET_OK && round < ROUNDS; round++) {
    double right = INFINITY, left = INFINITY;
    status = refine_vector(s, mode, false, &right);
    if (round == 0) {
      conjugate(s->n, mode->right, mode->left);
    }
    if (status == PICKET_OK) {
      status = find_left(s, mode, &left);
    }
    if (status == PICKET_OK) {
      take_value(s, mode);
      right =
          pk_channel_residual_of(s->channel, mode->k, s->k0_square, false, mode->right, s->work);
      mode->residual = fmax(right, left);
      if (mode->residual < 10 * GOAL) {
        break;
      }
    }
  }
  return status == PICKET_OK ? pk_channel_judge(s->channel, mode) : status;
}

static picket_status take_mode(solve *s, double complex k, const double complex *vector,
                               pk_channel_mode *mode) {
  mode->k = k;
  mode->right = pk_copy(s->context, vector, (size_t)s->n, sizeof *vector);
  if (!mode->right) {
    return PICKET_ERROR_MEMORY;
  }
  pk_channel_scale(s->channel, mode->right);
  return refine(s, mode);
}

static picket_status run_arnoldi(solve *s, int wanted, const double complex *start,
                                 double complex *values, double complex *vectors, int *found) {
  double complex *first = PK_NEW(s->context, 2 * s->n, double complex);
  if (!first) {
    return PICKET_ERROR_MEMORY;
  }
  pk_channel_start(s->channel, start, first);
  pk_eigen_request request = {
      .n = 2 * s->n, .wanted = wanted, .tolerance = TOLERANCE, .start = first};
  picket_status status =
      pk_eigen_complex(s->context, &request, apply, s, values, vectors, found, NULL);
  if (status == PICKET_OK && *found == 0) {
    status = pk_fail(s->context, PICKET_ERROR_NUMERIC,
                     "no Bloch wave of the channel near k = %g%+gi /µm converged", creal(s->sigma),
                     cimag(s->sigma));
  }
  pk_free(s->context, first);
  return status;
}

static picket_status run(solve *s, double complex guess, int wanted, const double complex *start,
                         pk_channel_mode *modes, int *found) {
  double complex *values = PK_NEW(s->context, wanted, double complex);
  double complex *vectors = PK_NEW(s->context, 2 * wanted * s->n, double complex);
  int count = 0;
  picket_status status = values && vectors ? factor_at(s, guess) : PICKET_ERROR_MEMORY;
  double complex sigma = s->sigma;
  if (status == PICKET_OK) {
    status = run_arnoldi(s, wanted, start, values, vectors, &count);
  }
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = take_mode(s, sigma + 1 / values[i], vectors + 2 * i * s->n, &modes[i]);
  }
  pk_free(s->context, values);
  pk_free(s->context, vectors);
  *found = count;
  return status;
}

picket_status pk_channel_waves_general(pk_channel *c, const pk_channel_wave_work *ground,
                                       double complex guess, int wanted,
                                       const double complex *start, pk_channel_mode *modes,
                                       int *found) {
  solve s = {.context = c->context,
             .channel = c,
             .n = c->n,
             .k0_square = ground->k0_square,
             .work = ground->work,
             .other = ground->other};
  s.unit = PI / c->pitch;
  return run(&s, guess, wanted, start, modes, found);
}
