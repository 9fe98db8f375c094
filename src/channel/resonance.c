/* See modes.h: one mode at a real k, with the media taken at its own frequency. Newton steps on
 * f(k0) = λ(k0) - k0² with the exact derivative. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"
#include "channel/forms.h"

enum {
  NEWTON_STEPS = 20, /* quadratic: 3 or 4 do; more only while the frequency is moved into range */
  CANDIDATES = 3     /* modes asked for when one must be recognised */
};

/* Settled when a step moves k0 by less than rounding of the eigenvalue allows. */
static const double SETTLED = 1e-13;
static const double SETTLED_AT_LEAST = 1e-10;

/* The shift stays a little off the eigenvalue, so that the matrix is not singular. */
static const double SHIFT_OFFSET = 1e-6;

typedef struct tracked {
  double k0, step;
  pk_channel_mode mode;
} tracked;

static int choose(const pk_channel *c, const double complex *reference, double guess, int found,
                  const pk_channel_mode *modes) {
  int best = 0;
  double best_score = -INFINITY;
  for (int i = 0; i < found; i++) {
    double score = reference ? pk_channel_overlap(c, reference, modes[i].right)
                             : -fabs(creal(modes[i].k0_square) - guess);
    if (score > best_score) {
      best = i;
      best_score = score;
    }
  }
  return best;
}

static picket_status newton(pk_channel *c, const pk_channel_media *media,
                            const pk_channel_mode *mode, double k0, double *next) {
  if (!media->dispersive) {
    *next = sqrt(creal(mode->k0_square));
    return PICKET_OK;
  }
  double complex form;
  picket_status status = pk_channel_k0_form(c, k0, media->slope, mode->left, mode->right, &form);
  if (status == PICKET_OK) {
    double complex slope = form / pk_channel_mass_form(c, mode->left, mode->right);
    *next = k0 - (creal(mode->k0_square) - k0 * k0) / creal(slope);
  }
  return status;
}

static picket_status track_once(pk_channel *c, pk_channel_media *media, double k,
                                const double complex *reference, tracked *t) {
  picket_status status = pk_channel_media_set(media, t->k0, c);
  if (status != PICKET_OK) {
    return status;
  }
  const double complex *known = t->mode.right ? t->mode.right : reference;
  pk_channel_mode modes[CANDIDATES] = {{0}};
  int found = 0;
  double guess = t->k0 * t->k0;
  status = pk_channel_modes_at_k(c, k, guess * (1 - SHIFT_OFFSET), known ? CANDIDATES : 1, known,
                                 modes, &found);
  if (status != PICKET_OK) {
    return status;
  }
  int chosen = choose(c, known, guess, found, modes);
  double next = t->k0;
  status = newton(c, media, &modes[chosen], t->k0, &next);
  if (status == PICKET_OK) {
    pk_channel_modes_clear(c->context, 1, &t->mode);
    t->mode = modes[chosen];
    modes[chosen] = (pk_channel_mode){0};
    t->step = fabs(next - t->k0) / t->k0;
    t->k0 = next;
  }
  pk_channel_modes_clear(c->context, found, modes);
  return status;
}

picket_status pk_channel_mode_near_k0(pk_channel *c, pk_channel_media *media, double k,
                                      double k0_guess, const double complex *reference,
                                      pk_channel_mode *out, bool *known) {
  tracked t = {.k0 = k0_guess, .step = INFINITY};
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < NEWTON_STEPS && t.step > SETTLED; i++) {
    double before = t.step;
    status = track_once(c, media, k, reference, &t);
    if (status == PICKET_OK && !media->dispersive && !media->clamped) {
      t.step = 0;
    }
    if (t.step < SETTLED_AT_LEAST && t.step > 0.1 * before) {
      break; /* rounding: no further gain */
    }
  }
  if (status == PICKET_OK && !(t.step <= SETTLED_AT_LEAST && isfinite(t.k0))) {
    status = pk_fail(c->context, PICKET_ERROR_NUMERIC,
                     "the frequency of a mode near k0 = %g /µm did not settle: last step %.1e",
                     k0_guess, t.step);
  }
  if (status != PICKET_OK) {
    pk_channel_modes_clear(c->context, 1, &t.mode);
    return status;
  }
  *out = t.mode;
  if (known) {
    *known = !media->clamped;
  }
  return PICKET_OK;
}
