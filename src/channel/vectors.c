/* Small work on vectors of unknowns. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "channel/forms.h"
#include "dense/dense.h"

void pk_channel_scale(const pk_channel *c, double complex *e) {
  double norm = 0, largest = -1;
  double complex turn = 1;
  for (int64_t p = 0; p < c->n; p++) {
    double size = creal(e[p]) * creal(e[p]) + cimag(e[p]) * cimag(e[p]);
    norm += size;
    if (size > largest) {
      largest = size;
      turn = e[p];
    }
  }
  double complex factor = conj(turn) / (sqrt(largest) * sqrt(norm));
  for (int64_t p = 0; p < c->n; p++) {
    e[p] *= factor;
  }
}

void pk_channel_make_real(const pk_channel *c, double complex *e) {
  for (int64_t p = 0; c->factored == PK_REAL && p < c->n; p++) {
    e[p] = creal(e[p]);
  }
}

void pk_channel_start(const pk_channel *c, const double complex *guess, double complex *out) {
  if (guess) {
    memcpy(out, guess, (size_t)c->n * sizeof *out);
    return;
  }
  uint64_t seed = 30625; /* any fixed number: the same input gives the same digits */
  for (int64_t p = 0; p < c->n; p++) {
    seed = seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407); /* D. E. Knuth's */
    out[p] = (double)(seed >> 11) / 9007199254740992.0 - 0.5;
  }
}

double pk_channel_residual_of(const pk_channel *c, double complex k, double complex k0_square,
                              bool transposed, const double complex *e, double complex *work) {
  memset(work, 0, (size_t)c->n * sizeof *work);
  pk_channel_mass_times(c, c->block, transposed, k0_square, e, work);
  double size = pk_dense_norm((long)c->n, work);
  (transposed ? pk_channel_transposed_times : pk_channel_times)(c, k, k0_square, e, work);
  return pk_dense_norm((long)c->n, work) / size;
}

double pk_channel_residual(const pk_channel *c, const pk_channel_mode *mode) {
  double complex *work = PK_NEW(c->context, c->n, double complex);
  if (!work) {
    return NAN;
  }
  double worst = pk_channel_residual_of(c, mode->k, mode->k0_square, false, mode->right, work);
  if (mode->left != mode->right) {
    double left = pk_channel_residual_of(c, mode->k, mode->k0_square, true, mode->left, work);
    worst = fmax(worst, left);
  }
  pk_free(c->context, work);
  return worst;
}

picket_status pk_channel_guess_left(const pk_channel *c, pk_channel_mode *mode) {
  if (c->mirrored) {
    mode->left = mode->right;
    return PICKET_OK;
  }
  mode->left = PK_NEW(c->context, c->n, double complex);
  for (int64_t p = 0; mode->left && p < c->n; p++) {
    mode->left[p] = conj(mode->right[p]);
  }
  return mode->left ? PICKET_OK : PICKET_ERROR_MEMORY;
}

picket_status pk_channel_judge(const pk_channel *c, const pk_channel_mode *mode) {
  if (mode->residual <= PK_CHANNEL_RESIDUAL) {
    return PICKET_OK;
  }
  return pk_fail(c->context, PICKET_ERROR_NUMERIC,
                 "a Bloch mode of the channel has a residual of %.1e, allowed %.1e", mode->residual,
                 PK_CHANNEL_RESIDUAL);
}

void pk_channel_modes_clear(picket_context *context, int count, pk_channel_mode *modes) {
  for (int i = 0; modes && i < count; i++) {
    if (modes[i].left != modes[i].right) {
      pk_free(context, modes[i].left);
    }
    pk_free(context, modes[i].right);
    modes[i].left = modes[i].right = NULL;
  }
}
