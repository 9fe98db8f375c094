/* See modes.h: modes at a real k.
 *
 * With A = Cᵀ W C, A e = λ M e, λ = k0². Gradients, a third of all vectors, have λ = 0, and no
 * shift σ > 0 is far from them; the operator of the iteration is
 *
 *   Op = 1 + σ (A - σM)⁻¹ M,   eigenvalues λ/(λ - σ),
 *
 * which takes them to 0. */
#include "channel/modes.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "channel/forms.h"
#include "eigen/eigen.h"

/* Vectors with a larger residual get steps of inverse iteration, each of which gains the distance
 * to the shift over that to the next mode. Of several modes only the nearest would gain for long:
 * the rest turn into it after a step or two, so they are left as soon as they are good enough. */
static const double GOAL_ONE = 1e-11, GOAL_MANY = 1e-9;
enum { REFINEMENTS = 30 };
/* Below this a residual that no longer halves has met rounding. */
static const double STALLED = 1e-9;
/* Of the Ritz values; the values are made from the vectors, by the square. */
static const double TOLERANCE = 1e-10;
enum { BASIS_ONE = 10 }; /* Krylov vectors for a lone one */

typedef struct solve {
  picket_context *context;
  pk_channel *channel;
  int64_t n;
  double k, shift;
  double goal, growth;  /* of residuals: wanted; allowed in a step */
  double complex *work; /* [n] */
} solve;

static picket_status apply(void *user, const double complex *x, double complex *y) {
  solve *s = user;
  memset(s->work, 0, (size_t)s->n * sizeof *s->work);
  pk_channel_mass_times(s->channel, s->channel->block, false, s->shift, x, s->work);
  picket_status status = pk_channel_solve(s->channel, s->work, y);
  for (int64_t p = 0; status == PICKET_OK && p < s->n; p++) {
    y[p] += x[p];
  }
  return status;
}

/* x ← T⁻¹ M x or T⁻ᵀ Mᵀ x, of unit norm. */
static picket_status inverse_step(solve *s, bool transposed, double complex *x) {
  memset(s->work, 0, (size_t)s->n * sizeof *s->work);
  pk_channel_mass_times(s->channel, s->channel->block, transposed, 1, x, s->work);
  picket_status status = transposed ? pk_channel_solve_transposed(s->channel, s->work, x)
                                    : pk_channel_solve(s->channel, s->work, x);
  if (status == PICKET_OK) {
    pk_channel_scale(s->channel, x);
  }
  return status;
}

static void take_value(const solve *s, pk_channel_mode *mode) {
  double complex curls =
      pk_channel_curl_form(s->channel, s->k, PK_CURL_WHOLE, PK_CURL_WHOLE, mode->left, mode->right);
  mode->k0_square = curls / pk_channel_mass_form(s->channel, mode->left, mode->right);
}

static picket_status refine_vector(solve *s, pk_channel_mode *mode, bool transposed,
                                   double *residual) {
  double complex *x = transposed ? mode->left : mode->right;
  double before = INFINITY;
  picket_status status = PICKET_OK;
  for (int step = 0; status == PICKET_OK && step <= REFINEMENTS; step++) {
    take_value(s, mode);
    *residual = pk_channel_residual_of(s->channel, s->k, mode->k0_square, transposed, x, s->work);
    bool stalled = *residual > before * (*residual < STALLED ? 0.5 : s->growth);
    if (*residual < s->goal || stalled || step == REFINEMENTS) {
      break;
    }
    before = *residual;
    status = inverse_step(s, transposed, x);
  }
  return status;
}

/* Of a lossless channel conj(right) is a left vector. */
static picket_status refine(solve *s, pk_channel_mode *mode) {
  picket_status status = pk_channel_guess_left(s->channel, mode);
  double right = INFINITY, left = 0;
  mode->k = s->k;
  if (status == PICKET_OK) {
    status = refine_vector(s, mode, false, &right);
  }
  for (int64_t p = 0; status == PICKET_OK && mode->left != mode->right && p < s->n; p++) {
    mode->left[p] = conj(mode->right[p]);
  }
  if (status == PICKET_OK && mode->left != mode->right) {
    status = refine_vector(s, mode, true, &left);
  }
  if (status == PICKET_OK) {
    take_value(s, mode);
    mode->residual = fmax(right, left);
    status = pk_channel_judge(s->channel, mode);
  }
  return status;
}

static void sort_modes(int count, pk_channel_mode *modes) {
  for (int i = 1; i < count; i++) {
    for (int k = i; k > 0 && creal(modes[k].k0_square) < creal(modes[k - 1].k0_square); k--) {
      pk_channel_mode swap = modes[k];
      modes[k] = modes[k - 1];
      modes[k - 1] = swap;
    }
  }
}

static picket_status run_arnoldi(solve *s, int wanted, const double complex *start,
                                 double complex *values, double complex *vectors, int *found) {
  double complex *first = PK_NEW(s->context, s->n, double complex);
  if (!first) {
    return PICKET_ERROR_MEMORY;
  }
  pk_channel_start(s->channel, start, first);
  pk_eigen_request request = {.n = s->n,
                              .wanted = wanted,
                              .basis = wanted > 1 ? 0 : BASIS_ONE,
                              .tolerance = TOLERANCE,
                              .start = first};
  picket_status status =
      pk_eigen_complex(s->context, &request, apply, s, values, vectors, found, NULL);
  if (status == PICKET_OK && *found == 0) {
    status = pk_fail(s->context, PICKET_ERROR_NUMERIC,
                     "no Bloch mode of the channel near k0² = %g /µm² converged", s->shift);
  }
  pk_free(s->context, first);
  return status;
}

static picket_status take_modes(solve *s, int count, const double complex *vectors,
                                pk_channel_mode *modes) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    modes[i].right = pk_copy(s->context, vectors + i * s->n, (size_t)s->n, sizeof *vectors);
    status = modes[i].right ? PICKET_OK : PICKET_ERROR_MEMORY;
    if (status == PICKET_OK) {
      pk_channel_scale(s->channel, modes[i].right);
      pk_channel_make_real(s->channel, modes[i].right);
      status = refine(s, &modes[i]);
    }
  }
  return status;
}

picket_status pk_channel_modes_at_k(pk_channel *c, double k, double shift, int wanted,
                                    const double complex *start, pk_channel_mode *modes,
                                    int *found) {
  solve s = {.context = c->context, .channel = c, .n = c->n, .k = k, .shift = shift};
  wanted = wanted > c->n ? (int)c->n : wanted;
  s.goal = wanted > 1 ? GOAL_MANY : GOAL_ONE;
  s.growth = wanted > 1 ? 1 : INFINITY;
  int count = 0;
  double complex *values = PK_NEW(c->context, wanted, double complex);
  double complex *vectors = PK_NEW(c->context, wanted * c->n, double complex);
  pk_channel_mode *fresh = PK_NEW(c->context, wanted, pk_channel_mode);
  s.work = PK_NEW(c->context, c->n, double complex);
  picket_status status = PICKET_ERROR_MEMORY;
  if (values && vectors && fresh && s.work) {
    status = pk_channel_factor(c, k, shift);
  }
  if (status == PICKET_OK) {
    status = run_arnoldi(&s, wanted, start, values, vectors, &count);
  }
  if (status == PICKET_OK) {
    status = take_modes(&s, count, vectors, fresh);
  }
  if (status == PICKET_OK) {
    sort_modes(count, fresh);
    memcpy(modes, fresh, (size_t)count * sizeof *modes);
    *found = count;
  } else {
    pk_channel_modes_clear(c->context, count, fresh);
  }
  pk_free(c->context, values);
  pk_free(c->context, vectors);
  pk_free(c->context, fresh);
  pk_free(c->context, s.work);
  return status;
}
