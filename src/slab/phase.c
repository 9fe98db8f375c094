/* Lossless modes of a stack, found and counted by the Prüfer phase.
 *
 * Write ψ = r sin θ and w = pψ' = r cos θ. Then
 *   θ' = cos²θ / p + (q0 - ρ b) sin²θ,
 * so θ passes multiples of π only upwards (each pass is a zero of ψ) and θ at the cover falls
 * strictly as b grows. The substrate sets cot θ = u_s and the cover asks cot θ = -u_c, u = p γ > 0,
 * so Θ(b) = θ(cover) + arccot u_c - π falls with b, and mode m, with m zeros, is the one root of
 * Θ(b) = mπ. Bisection per order therefore misses none, even where cores far apart make roots that
 * differ by less than one rounding.
 *
 * The advance of θ over a film is in closed form. With κ = √(q/p), Z = √(pq), half turns of κd are
 * half turns of θ; for the rest r in [0, π) the angle δ between the two states has sine   ∝ sin r
 * (c²/Z + Z s²)          cosine ∝ cos r + sin r s c (1/Z - Z) and in an evanescent film, W =
 * √(-pq), t = tanh γd, sine   ∝ t (c²/W - W s²)              cosine ∝ 1 + t s c (1/W + W) with |δ|
 * < π because the transfer matrix has positive eigenvalues. Only tanh and falling
 * exponentials appear, so nothing overflows, and sin r / Z and t / W go smoothly through q = 0.
 *
 * F. V. Atkinson, "Discrete and Continuous Boundary Problems" (1964), chapter 8. */
#include <assert.h>
#include <math.h>

#include "slab/slab_private.h"

static const double pi = 3.14159265358979323846;

/* θ, its sine and its cosine; the last two up to a common sign. */
typedef struct {
  double theta, s, c;
} state;

static void advance(state *at, double half_turns, double sine, double cosine, double s, double c) {
  at->theta += half_turns * pi + atan2(sine, cosine);
  double size = hypot(s, c);
  /* Both vanish only if the growing part is lost to rounding: any direction is then as good. */
  at->s = size > 0 ? s / size : at->s;
  at->c = size > 0 ? c / size : at->c;
}

static void cross_oscillating(state *at, double p, double q, double d) {
  double turn = sqrt(q / p) * d;
  double half_turns = floor(turn / pi);
  double rest = fmax(turn - half_turns * pi, 0.0);
  /* sin r / Z = (d/p) sin r / κd; below 1e-8 the ratio is 1 to rounding. */
  double over = turn < 1e-8 ? d / p : sin(rest) * (d / p) / turn;
  double times = sqrt(p * q) * sin(rest);
  double s = at->s, c = at->c;
  advance(at, half_turns, c * c * over + s * s * times, cos(rest) + s * c * (over - times),
          s * cos(rest) + c * over, c * cos(rest) - s * times);
}

static void cross_evanescent(state *at, double p, double q, double d) {
  double decay = sqrt(-q / p) * d;
  double s = at->s, c = at->c;
  if (decay < 0.5) {
    double t = tanh(decay);
    double over = decay < 1e-8 ? d / p : t * (d / p) / decay;
    double times = sqrt(-p * q) * t;
    advance(at, 0, c * c * over - s * s * times, 1 + s * c * (over + times), s + c * over,
            c + s * times);
    return;
  }
  /* In growing and decaying parts: where nearly all decays, the direction left over is still that
   * of the growing part to full precision. This is what resolves cores far apart. */
  double w = sqrt(-p * q), fade = exp(-2 * decay);
  double growing = 0.5 * (s + c / w), decaying = 0.5 * fade * (s - c / w);
  double s1 = growing + decaying, c1 = w * (growing - decaying);
  advance(at, 0, s1 * c - c1 * s, s1 * s + c1 * c, s1, c1);
}

/* u = pγ of an outer medium; 0 at its cut-off. */
static double outer_slope(const pk_layer *layer, double b) {
  return sqrt(fmax(creal(layer->p) * (creal(layer->rho) * b - creal(layer->q0)), 0.0));
}

double pk_stack_phase(const pk_stack *stack, double b) {
  double u_substrate = outer_slope(&stack->layers[0], b);
  double u_cover = outer_slope(&stack->layers[stack->count - 1], b);
  double size = hypot(1.0, u_substrate);
  state at = {atan2(1.0, u_substrate), 1.0 / size, u_substrate / size};
  for (int i = 1; i + 1 < stack->count; i++) {
    const pk_layer *film = &stack->layers[i];
    double p = creal(film->p);
    double q = creal(film->q0) - creal(film->rho) * b;
    if (q >= 0) {
      cross_oscillating(&at, p, q, film->thickness);
    } else {
      cross_evanescent(&at, p, q, film->thickness);
    }
  }
  return at.theta + atan2(1.0, u_cover) - pi;
}

int pk_stack_guided(const pk_stack *stack) {
  if (!(stack->ceiling > stack->floor)) {
    return 0;
  }
  double count = ceil(pk_stack_phase(stack, stack->floor) / pi);
  /* More than can be told apart in b: the count is then only a bound. */
  const double most = 1e9;
  return count > 0 ? (int)fmin(count, most) : 0;
}

double pk_stack_root(const pk_stack *stack, int order, double above) {
  double low = stack->floor, high = above;
  assert(low <= high);
  /* Until no double lies between: some fifty halvings. */
  for (;;) {
    double middle = 0.5 * (low + high);
    if (!(middle > low && middle < high)) {
      return middle;
    }
    if (pk_stack_phase(stack, middle) > order * pi) {
      low = middle;
    } else {
      high = middle;
    }
  }
}
