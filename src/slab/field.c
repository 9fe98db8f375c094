/* The field of a mode at the interfaces of its stack, its integrals, and what follows from them.
 *
 * Transfer over a film of p, q = q0 - ρb, thickness d, with κ = √(q/p), Z = pκ:
 *   ψ1 = cos κd ψ0 + (sin κd / Z) w0,   w1 = cos κd w0 - Z sin κd ψ0,
 * kept scaled by exp(-Re γd), γ = ±iκ, where the film is thick. Unit states run up from the
 * substrate (ψ, w) = (1, u_s) and down from the cover (1, -u_c); each is stable only while the
 * field grows, so they are joined at the interface where they agree best, which is where the field
 * is large. There the Wronskian D = ψ_up w_down - w_up ψ_down   has   dD/db = -N / a,   N = Σ ρ
 * ∫ψ², a the factor from the state down to the state up: Newton's step is a D / N.
 *
 * Integrals over a film from its end values: C = w²/p + qψ² is constant in it, and
 *   ∫ψ² = (C d - [ψw]) / 2q,   ∫w² = p (C d + [ψw]) / 2;
 * near q = 0 the first is summed as a series in κd instead.
 *
 * Stationary functionals (real or complex, without conjugation):
 *   TE  b ∫ψ² = ∫ (ε_y ψ² - ψ'²),   TM  b ∫ψ²/ε_x = ∫ (ψ² - w² ε_z)
 * whose derivatives with respect to ε and k0 are the pulls and the group index. See H. Kogelnik,
 * "Theory of optical waveguides" (1988), section on variational theorems. */
#include <float.h>
#include <math.h>

#include "base/memory.h"
#include "slab/slab_private.h"

typedef double complex complex_t;

/* The smallest decay constant that is told from zero: a mode exactly at cut-off fills its outer
 * medium, and with this value the integrals say so without overflow of their squares. */
static const double least_decay = 1e-100;

picket_status pk_field_create(picket_context *context, int count, pk_field *out) {
  pk_field field = {0};
  complex_t **arrays[] = {&field.psi_up, &field.w_up, &field.psi_down, &field.w_down,
                          &field.psi,    &field.w,    &field.even,     &field.odd};
  bool complete = true;
  for (size_t i = 0; complete && i < sizeof arrays / sizeof arrays[0]; i++) {
    *arrays[i] = PK_NEW(context, count, complex_t);
    complete = *arrays[i] != NULL;
  }
  field.growth_up = complete ? PK_NEW(context, count, double) : NULL;
  field.growth_down = field.growth_up ? PK_NEW(context, count, double) : NULL;
  if (!field.growth_down) {
    pk_field_free(context, &field);
    return PICKET_ERROR_MEMORY;
  }
  *out = field;
  return PICKET_OK;
}

void pk_field_free(picket_context *context, pk_field *field) {
  void *arrays[] = {field->psi_up,    field->w_up,       field->psi_down, field->w_down,
                    field->psi,       field->w,          field->even,     field->odd,
                    field->growth_up, field->growth_down};
  for (size_t i = 0; i < sizeof arrays / sizeof arrays[0]; i++) {
    pk_free(context, arrays[i]);
  }
  *field = (pk_field){0};
}

typedef struct {
  complex_t psi, w;
} pair;

/* The pair at the far end of a film, times exp(-*scale). `way` is 1 going up, -1 going down, which
 * only turns the sign of w. */
static pair cross_film(const pk_layer *film, complex_t b, pair from, int way, double *scale) {
  complex_t q = film->q0 - film->rho * b;
  complex_t decay = csqrt(-q / film->p) * film->thickness; /* γd = ∓iκd with Re >= 0 */
  complex_t w0 = way * from.w, psi, w;
  if (creal(decay) > 0.5) {
    /* In growing and decaying parts: where nearly all decays, the direction left over is still that
     * of the growing part to full precision. */
    complex_t impedance = film->p * decay / film->thickness, fade = cexp(-2 * decay);
    complex_t growing = 0.5 * (from.psi + w0 / impedance);
    complex_t decaying = 0.5 * fade * (from.psi - w0 / impedance);
    complex_t turn = cos(cimag(decay)) + I * sin(cimag(decay));
    *scale = creal(decay);
    psi = turn * (growing + decaying);
    w = turn * impedance * (growing - decaying);
  } else {
    /* sinh γd / γd = 1 + (γd)²/6 where the next term is below 1e-18. */
    complex_t ratio = cabs(decay) < 1e-4 ? 1 + decay * decay / 6 : csinh(decay) / decay;
    complex_t cosine = ccosh(decay);
    *scale = 0;
    psi = cosine * from.psi + ratio * film->thickness / film->p * w0;
    w = cosine * w0 - ratio * film->thickness * q * from.psi;
  }
  return (pair){psi, way * w};
}

/* Makes a state of unit length; returns the log of what it was. */
static double normalise(complex_t *psi, complex_t *w) {
  double size = hypot(cabs(*psi), cabs(*w));
  if (!(size > 0)) {
    /* Growth lost to rounding: the state is unknown, its length below rounding. */
    *psi = 1;
    *w = 0;
    return log(DBL_EPSILON);
  }
  *psi /= size;
  *w /= size;
  return log(size);
}

/* γ of an outer medium on the sheet that decays. */
static complex_t outer_decay(const pk_layer *layer, complex_t b) {
  complex_t decay = csqrt((layer->rho * b - layer->q0) / layer->p);
  return cabs(decay) < least_decay ? least_decay : decay;
}

static void shoot(const pk_stack *stack, complex_t b, pk_field *field) {
  const int last = stack->count - 2; /* interfaces 0 to last */
  const pk_layer *layers = stack->layers;
  double scale;
  field->psi_up[0] = 1;
  field->w_up[0] = layers[0].p * outer_decay(&layers[0], b);
  normalise(&field->psi_up[0], &field->w_up[0]);
  for (int j = 0; j < last; j++) {
    pair from = {field->psi_up[j], field->w_up[j]};
    pair to = cross_film(&layers[j + 1], b, from, 1, &scale);
    field->growth_up[j + 1] = scale + normalise(&to.psi, &to.w);
    field->psi_up[j + 1] = to.psi;
    field->w_up[j + 1] = to.w;
  }
  field->psi_down[last] = 1;
  field->w_down[last] = -layers[last + 1].p * outer_decay(&layers[last + 1], b);
  normalise(&field->psi_down[last], &field->w_down[last]);
  for (int j = last; j > 0; j--) {
    pair from = {field->psi_down[j], field->w_down[j]};
    pair to = cross_film(&layers[j], b, from, -1, &scale);
    field->growth_down[j - 1] = scale + normalise(&to.psi, &to.w);
    field->psi_down[j - 1] = to.psi;
    field->w_down[j - 1] = to.w;
  }
}

static complex_t wronskian(const pk_field *field, int j) {
  return field->psi_up[j] * field->w_down[j] - field->w_up[j] * field->psi_down[j];
}

/* Joins the two runs at the interface of best agreement, which is returned; *ratio is a. */
static int join(const pk_stack *stack, pk_field *field, complex_t *ratio) {
  const int interfaces = stack->count - 1;
  int meeting = 0;
  for (int j = 1; j < interfaces; j++) {
    if (cabs(wronskian(field, j)) < cabs(wronskian(field, meeting))) {
      meeting = j;
    }
  }
  *ratio = conj(field->psi_down[meeting]) * field->psi_up[meeting] +
           conj(field->w_down[meeting]) * field->w_up[meeting];
  double size = 0;
  for (int j = meeting; j >= 0; j--) {
    field->psi[j] = field->psi_up[j] * exp(size);
    field->w[j] = field->w_up[j] * exp(size);
    size -= field->growth_up[j];
  }
  size = -field->growth_down[meeting];
  for (int j = meeting + 1; j < interfaces; j++) {
    field->psi[j] = *ratio * field->psi_down[j] * exp(size);
    field->w[j] = *ratio * field->w_down[j] * exp(size);
    size -= field->growth_down[j];
  }
  return meeting;
}

/* (1 - sin y / y) / y² summed for |y| <= 1: nine terms reach 1e-19. */
static complex_t sine_deficit(complex_t y) {
  complex_t sum = 0, term = 1.0 / 6;
  for (int k = 1; k <= 9; k++) {
    sum += term;
    term *= -y * y / ((2 * k + 2) * (2 * k + 3));
  }
  return sum;
}

static void integrate_film(const pk_layer *film, complex_t b, const complex_t psi[2],
                           const complex_t w[2], complex_t *even, complex_t *odd) {
  complex_t p = film->p, q = film->q0 - film->rho * b;
  double d = film->thickness;
  /* The end with the smaller field has the smaller rounding error of the constant C. */
  int end = cabs(psi[0]) + cabs(w[0]) < cabs(psi[1]) + cabs(w[1]) ? 0 : 1;
  complex_t c = w[end] * w[end] / p + q * psi[end] * psi[end];
  complex_t difference = psi[1] * w[1] - psi[0] * w[0];
  *odd = p * (c * d + difference) / 2;
  complex_t turn = csqrt(q / p) * d;
  if (cabs(turn) > 0.5) {
    *even = (c * d - difference) / (2 * q);
    return;
  }
  /* ψ = ψ0 cos κx + (w0 d/p) sin κx / κd; the mean squares of the two and of their product. */
  complex_t slope = w[0] * d / p, squared = turn * turn;
  complex_t sine_square = 2 * sine_deficit(2 * turn);
  complex_t half = cabs(turn) < 1e-8 ? 1 : csin(turn) / turn;
  *even = d * (psi[0] * psi[0] * (1 - squared * sine_square) + psi[0] * slope * half * half +
               slope * slope * sine_square);
}

static void integrate(const pk_stack *stack, complex_t b, pk_field *field) {
  const int last = stack->count - 1;
  for (int side = 0; side < 2; side++) {
    const pk_layer *outer = &stack->layers[side ? last : 0];
    complex_t psi = field->psi[side ? last - 1 : 0], w = field->w[side ? last - 1 : 0];
    complex_t twice = 2 * outer_decay(outer, b);
    field->even[side ? last : 0] = psi * psi / twice;
    field->odd[side ? last : 0] = w * w / twice;
  }
  for (int i = 1; i < last; i++) {
    integrate_film(&stack->layers[i], b, &field->psi[i - 1], &field->w[i - 1], &field->even[i],
                   &field->odd[i]);
  }
  field->norm = 0;
  for (int i = 0; i <= last; i++) {
    field->norm += stack->layers[i].rho * field->even[i];
  }
}

void pk_field_solve(const pk_stack *stack, complex_t b, pk_field *field) {
  complex_t ratio;
  shoot(stack, b, field);
  int meeting = join(stack, field, &ratio);
  integrate(stack, b, field);
  field->step = ratio * wronskian(field, meeting) / field->norm;
}

pk_slab_pull pk_field_pull(const pk_stack *stack, const pk_field *field, complex_t b, int i) {
  pk_slab_pull pull = {0, 0, 0};
  if (stack->polarization == PK_SLAB_TE) {
    pull.across = field->even[i] / field->norm;
  } else {
    complex_t rho = stack->layers[i].rho;
    pull.normal = b * rho * rho * field->even[i] / field->norm;
    pull.along = field->odd[i] / field->norm;
  }
  return pull;
}

complex_t pk_field_group_index(const pk_stack *stack, const pk_field *field, complex_t b) {
  complex_t sum = 0; /* n n_g = b + ½ k0 db/dk0 */
  for (int i = 0; i < stack->count; i++) {
    const pk_slab_medium *medium = pk_stack_medium(stack, i);
    pk_slab_pull pull = pk_field_pull(stack, field, b, i);
    sum += stack->layers[i].q0 * field->even[i] / field->norm;
    sum += 0.5 * (pull.normal * medium->normal_slope + pull.across * medium->across_slope +
                  pull.along * medium->along_slope);
  }
  return sum / csqrt(b);
}
