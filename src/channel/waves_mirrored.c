/* Waves at a frequency of a channel with a mirror plane in z.
 *
 * Harmonics low..high are symmetric about k_c = -(low + high) π/Λ: the reflection F, which takes
 * harmonic m to low + high - m and e_z to -e_z, takes T(k_c + κ) to T(k_c - κ). With
 *   T(k_c + κ) = A0 + κ A1 + κ² A2
 * A0 and A2 keep vectors even or odd under F, A1 exchanges them. A wave e = e₊ + κ e₋ then solves
 *   A0 e₊ + q (A1 e₋ + A2 e₊) = 0,   A1 e₊ + A0 e₋ + q A2 e₋ = 0,   q = κ²,
 * a linear eigenproblem (𝒜 + q ℬ) u = 0 for u = e₊ + e₋ of half the order of the usual
 * linearisation. q is an analytic function of the frequency where k has a square root: at an edge
 * q = 0, inside a stop band it is negative. One LU of T(k_c + κ0) solves with 𝒜 + κ0² ℬ:
 *   T(k_c + κ0) (u₊ + κ0 u₋) = g₊ + κ0 g₋. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "channel/forms.h"
#include "dense/dense.h"
#include "eigen/eigen.h"

static const double PI = 3.141592653589793238;

/* Residuals worth striving for; each refinement gains |q - q0| over the distance to the next, so of
 * several waves only the nearest gains for long (modes.c). */
static const double GOAL_ONE = 1e-11, GOAL_MANY = 1e-9;
static const double STALLED = 1e-9;
enum { REFINEMENTS = 30 };
/* Of the Ritz values; the values are made from the vectors, by the square. */
static const double TOLERANCE = 1e-10;
enum { BASIS_ONE = 10 }; /* Krylov vectors for a lone one */
/* Of a real matrix q is real or one of a conjugate pair. */
static const double REAL_ENOUGH = 1e-9;

/* Shifts κ0 in parts of π/Λ: so near to 0 the parts of u could not be told from each other; and
 * nearer to the real axis than this the shift is moved onto it, where factors are real. */
static const double LEAST_SHIFT = 0.02;
static const double NEARLY_REAL = 0.3;
/* A shift on a good guess would make the matrix singular. */
static const double SHIFT_OFFSET = 1e-4;
/* Of two waves of a pair that are as near to the guess as this (parts of π/Λ), the one that decays
 * along +z. */
static const double AS_NEAR = 1e-7;

typedef struct solve {
  picket_context *context;
  pk_channel *channel;
  int64_t n;
  double complex k0_square, centre, shift; /* k_c, κ0 */
  double goal, growth;                     /* of residuals: wanted; allowed in a step */
  double complex *work, *other;            /* [n] each */
} solve;

/* One vector in two parts. */
static void split(const solve *s, const double complex *u, double complex *even,
                  double complex *odd) {
  const pk_channel *c = s->channel;
  for (int site = 0; site < c->site_count; site++) {
    double sign = site >= c->first_z ? -1 : 1;
    int64_t at = (int64_t)site * c->count;
    for (int h = 0; h < c->count; h++) {
      double complex here = u[at + h], there = sign * u[at + c->count - 1 - h];
      even[at + h] = 0.5 * (here + there);
      odd[at + h] = 0.5 * (here - there);
    }
  }
}

/* u₊ + factor u₋ in the place of u. */
static void weigh(const solve *s, double complex factor, double complex *u) {
  const pk_channel *c = s->channel;
  for (int site = 0; site < c->site_count; site++) {
    double sign = site >= c->first_z ? -1 : 1;
    double complex *at = u + (int64_t)site * c->count;
    for (int h = 0; 2 * h < c->count; h++) {
      int mate = c->count - 1 - h;
      double complex a = at[h], b = at[mate];
      at[h] = 0.5 * (a + sign * b + factor * (a - sign * b));
      at[mate] = 0.5 * (b + sign * a + factor * (b - sign * a));
    }
  }
}

/* y += factor × A1 x, A2 x */
static void add_first(const solve *s, double complex factor, const double complex *x,
                      double complex *y) {
  pk_channel_curl_times(s->channel, s->centre, PK_CURL_TURN, PK_CURL_WHOLE, factor, x, y);
  pk_channel_curl_times(s->channel, s->centre, PK_CURL_WHOLE, PK_CURL_TURN, factor, x, y);
}

static void add_second(const solve *s, double complex factor, const double complex *x,
                       double complex *y) {
  pk_channel_curl_times(s->channel, s->centre, PK_CURL_TURN, PK_CURL_TURN, factor, x, y);
}

/* (𝒜 + κ0² ℬ)⁻¹ g; g is destroyed. */
static picket_status solve_shifted(solve *s, double complex *g, double complex *u) {
  weigh(s, s->shift, g);
  picket_status status = pk_channel_solve(s->channel, g, u);
  if (status == PICKET_OK) {
    weigh(s, 1 / s->shift, u);
  }
  return status;
}

/* Op = -(𝒜 + κ0² ℬ)⁻¹ ℬ, eigenvalues 1/(q - κ0²). */
static picket_status apply(void *user, const double complex *u, double complex *y) {
  solve *s = user;
  size_t bytes = (size_t)s->n * sizeof *u;
  memcpy(s->other, u, bytes);
  weigh(s, 0, s->other);
  for (int64_t p = 0; p < s->n; p++) {
    s->other[p] = u[p] - s->other[p]; /* the odd part */
  }
  memset(s->work, 0, bytes);
  add_first(s, -1, s->other, s->work);
  add_second(s, -1, u, s->work);
  return solve_shifted(s, s->work, y);
}

/* --- One pair --------------------------------------------------------------------------------- */

typedef struct pair {
  double complex q, kappa;
  double complex *even, *odd; /* [n] each: e₊ and e₋ */
} pair;

/* The root δ of a δ² + b δ + c that is nearest to 0. */
static double complex nearest_root(double complex a, double complex b, double complex c) {
  double complex root = csqrt(b * b - 4 * a * c);
  double complex denominator = creal(conj(b) * root) >= 0 ? b + root : b - root;
  return denominator == 0 ? 0 : -2 * c / denominator;
}

static double complex second_form(const solve *s, const double complex *x) {
  return pk_channel_curl_form(s->channel, s->centre, PK_CURL_TURN, PK_CURL_TURN, x, x);
}

static double complex zeroth_form(const solve *s, const double complex *x) {
  return pk_channel_form(s->channel, s->centre, s->k0_square, x, x);
}

/* q from the functional that is stationary at the solution, for a wave a + κ b:
 *   aᵀA0a + q (2 aᵀA1b + aᵀA2a + bᵀA0b) + q² bᵀA2b = 0,
 * with the stronger part as a: the other one has no weight at the edge. */
static void take_value(const solve *s, pair *w) {
  double even = pk_dense_norm((long)s->n, w->even);
  double odd = sqrt(cabs(w->q)) * pk_dense_norm((long)s->n, w->odd);
  const double complex *a = even >= odd ? w->even : w->odd;
  const double complex *b = even >= odd ? w->odd : w->even;
  double complex scale = even >= odd ? 1 : 1 / w->q; /* a + κ b for o + κ g, g = e₊/q */
  double complex c0 = zeroth_form(s, a), c2 = scale * scale * second_form(s, b);
  double complex c1 = scale * pk_channel_k_form(s->channel, s->centre, a, b) * 2;
  c1 = c1 + second_form(s, a) + scale * scale * zeroth_form(s, b);
  double complex delta = nearest_root(c2, c1 + 2 * c2 * w->q, c0 + w->q * (c1 + w->q * c2));
  w->q += delta;
}

/* e₊ + κ e₋, of unit norm. */
static void put_together(const solve *s, const pair *w, double complex *e) {
  for (int64_t p = 0; p < s->n; p++) {
    e[p] = w->even[p] + w->kappa * w->odd[p];
  }
  pk_channel_scale(s->channel, e);
}

/* κ with the sign that the guess asks for. */
static void take_root(const solve *s, double complex guess, pair *w) {
  double unit = PI / s->channel->pitch;
  double complex root = csqrt(w->q), wish = guess - s->centre;
  double lead = cabs(-root - wish) - cabs(root - wish);
  bool decays = fabs(lead) > AS_NEAR * unit ? lead > 0 : cimag(root) >= 0;
  w->kappa = decays ? root : -root;
}

/* u ← u - (𝒜 + κ0² ℬ)⁻¹ (𝒜 + q ℬ) u */
static picket_status improve(solve *s, pair *w) {
  size_t bytes = (size_t)s->n * sizeof *s->work;
  pk_channel *c = s->channel;
  memset(s->work, 0, bytes);
  for (int64_t p = 0; p < s->n; p++) {
    s->other[p] = w->even[p] + w->odd[p];
  }
  pk_channel_times(c, s->centre, s->k0_square, s->other, s->work);
  add_second(s, w->q, s->other, s->work);
  add_first(s, 1, w->even, s->work);
  add_first(s, w->q, w->odd, s->work);
  picket_status status = solve_shifted(s, s->work, s->other);
  if (status != PICKET_OK) {
    return status;
  }
  for (int64_t p = 0; p < s->n; p++) {
    s->other[p] = w->even[p] + w->odd[p] - s->other[p];
  }
  split(s, s->other, w->even, w->odd);
  return PICKET_OK;
}

static picket_status refine(solve *s, double complex guess, pair *w, pk_channel_mode *mode) {
  picket_status status = PICKET_OK;
  double before = INFINITY;
  for (int step = 0; step <= REFINEMENTS; step++) {
    take_value(s, w);
    take_root(s, guess, w);
    put_together(s, w, mode->right);
    mode->k = s->centre + w->kappa;
    mode->residual =
        pk_channel_residual_of(s->channel, mode->k, s->k0_square, false, mode->right, s->work);
    bool stalled = mode->residual > before * (mode->residual < STALLED ? 0.5 : s->growth);
    if (mode->residual < s->goal || stalled || step == REFINEMENTS) {
      break;
    }
    before = mode->residual;
    status = improve(s, w);
    if (status != PICKET_OK) {
      return status;
    }
  }
  mode->left = mode->right;
  mode->k0_square = s->k0_square;
  return pk_channel_judge(s->channel, mode);
}

static picket_status take_mode(solve *s, double complex guess, double complex q,
                               const double complex *u, pk_channel_mode *mode) {
  pair w = {.q = q};
  w.even = PK_NEW(s->context, s->n, double complex);
  w.odd = PK_NEW(s->context, s->n, double complex);
  mode->right = PK_NEW(s->context, s->n, double complex);
  mode->left = mode->right;
  picket_status status = PICKET_ERROR_MEMORY;
  if (w.even && w.odd && mode->right) {
    memcpy(s->other, u, (size_t)s->n * sizeof *u);
    pk_channel_scale(s->channel, s->other);
    if (fabs(cimag(q)) < REAL_ENOUGH * cabs(q)) {
      pk_channel_make_real(s->channel, s->other);
    }
    split(s, s->other, w.even, w.odd);
    status = refine(s, guess, &w, mode);
  }
  pk_free(s->context, w.even);
  pk_free(s->context, w.odd);
  return status;
}

/* --- The iteration ---------------------------------------------------------------------------- */

static double complex shift_for(const solve *s, double complex guess) {
  double unit = PI / s->channel->pitch;
  double complex kappa = (guess - s->centre) * (1 + SHIFT_OFFSET);
  if (s->channel->is_real && fabs(cimag(kappa)) < NEARLY_REAL * unit) {
    kappa = cabs(kappa);
  }
  return cabs(kappa) < LEAST_SHIFT * unit ? LEAST_SHIFT * unit : kappa;
}

static picket_status run_arnoldi(solve *s, int wanted, const double complex *start,
                                 double complex *values, double complex *vectors, int *found) {
  double complex *first = PK_NEW(s->context, s->n, double complex);
  if (!first) {
    return PICKET_ERROR_MEMORY;
  }
  pk_channel_start(s->channel, start, first);
  if (start) {
    weigh(s, 1 / s->shift, first);
  }
  pk_eigen_request request = {.n = s->n,
                              .wanted = wanted,
                              .basis = wanted > 1 ? 0 : BASIS_ONE,
                              .tolerance = TOLERANCE,
                              .start = first};
  picket_status status =
      pk_eigen_complex(s->context, &request, apply, s, values, vectors, found, NULL);
  if (status == PICKET_OK && *found == 0) {
    double complex k = s->centre + s->shift;
    status =
        pk_fail(s->context, PICKET_ERROR_NUMERIC,
                "no Bloch wave of the channel near k = %g%+gi /µm converged", creal(k), cimag(k));
  }
  pk_free(s->context, first);
  return status;
}

static picket_status run(solve *s, double complex guess, int wanted, const double complex *start,
                         pk_channel_mode *modes, int *found) {
  double complex *values = PK_NEW(s->context, wanted, double complex);
  double complex *vectors = PK_NEW(s->context, wanted * s->n, double complex);
  int count = 0;
  picket_status status = PICKET_ERROR_MEMORY;
  if (values && vectors) {
    status = pk_channel_factor(s->channel, s->centre + s->shift, s->k0_square);
  }
  if (status == PICKET_OK) {
    status = run_arnoldi(s, wanted, start, values, vectors, &count);
  }
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    double complex q = s->shift * s->shift + 1 / values[i];
    status = take_mode(s, guess, q, vectors + i * s->n, &modes[i]);
  }
  pk_free(s->context, values);
  pk_free(s->context, vectors);
  *found = count;
  return status;
}

picket_status pk_channel_waves_mirrored(pk_channel *c, const pk_channel_wave_work *ground,
                                        double complex guess, int wanted,
                                        const double complex *start, pk_channel_mode *modes,
                                        int *found) {
  solve s = {.context = c->context,
             .channel = c,
             .n = c->n,
             .k0_square = ground->k0_square,
             .work = ground->work,
             .other = ground->other};
  s.centre = -PI * (2 * c->low + c->count - 1) / c->pitch;
  s.shift = shift_for(&s, guess);
  s.goal = wanted > 1 ? GOAL_MANY : GOAL_ONE;
  s.growth = wanted > 1 ? 1 : INFINITY;
  return run(&s, guess, wanted, start, modes, found);
}
