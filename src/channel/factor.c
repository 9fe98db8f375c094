/* LU factors of T(k) and solves with them; real factors act on real and imaginary part by
 * themselves, and not on a part that vanishes. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

/* A part this much smaller than the other is the rounding of a vector that should be real, such as
 * a restart of Arnoldi in complex arithmetic leaves. */
static const double ROUNDING = 1e-13;

void pk_channel_drop_factors(pk_channel *c) {
  for (int i = 0; i < 2; i++) {
    pk_factor_free(c->factor[i]);
    c->factor[i] = NULL;
  }
  pk_free(c->context, c->values);
  pk_free(c->context, c->real_values);
  pk_free(c->context, c->part);
  c->values = NULL;
  c->real_values = NULL;
  c->part = NULL;
}

/* Memory and ordering of the factor of one kind, once. */
static picket_status prepare(pk_channel *c, pk_scalar scalar) {
  if (c->factor[scalar]) {
    return PICKET_OK;
  }
  int64_t entries = c->pattern.start[c->n];
  if (scalar == PK_COMPLEX && !c->values) {
    c->values = PK_NEW(c->context, entries, double complex);
  }
  if (scalar == PK_REAL && !c->real_values) {
    c->real_values = PK_NEW(c->context, entries, double);
  }
  if (scalar == PK_REAL && !c->part) {
    c->part = PK_NEW(c->context, 2 * c->n, double);
  }
  bool ready = scalar == PK_COMPLEX ? c->values != NULL : c->real_values && c->part;
  return ready ? pk_factor_create(c->context, &c->pattern, scalar, &c->factor[scalar])
               : PICKET_ERROR_MEMORY;
}

picket_status pk_channel_factor(pk_channel *c, double complex k, double complex k0_square) {
  c->factored = c->is_real && cimag(k) == 0 && cimag(k0_square) == 0 ? PK_REAL : PK_COMPLEX;
  picket_status status = prepare(c, c->factored);
  if (status != PICKET_OK) {
    return status;
  }
  if (c->factored == PK_REAL) {
    pk_channel_values_real(c, creal(k), creal(k0_square), c->real_values);
    return pk_factor_real(c->factor[PK_REAL], c->real_values);
  }
  pk_channel_values(c, k, k0_square, c->values);
  return pk_factor_complex(c->factor[PK_COMPLEX], c->values);
}

/* Largest entry of a part, 0 real, 1 imaginary. */
static double size_of(const pk_channel *c, int part, const double *b) {
  double most = 0;
  for (int64_t p = 0; p < c->n; p++) {
    most = fmax(most, fabs(b[2 * p + part]));
  }
  return most;
}

static picket_status solve_part(pk_channel *c, int part, bool vanishes, const double *b,
                                double *x) {
  double *in = c->part, *out = c->part + c->n;
  picket_status status = PICKET_OK;
  if (vanishes) {
    memset(out, 0, (size_t)c->n * sizeof *out);
  } else {
    for (int64_t p = 0; p < c->n; p++) {
      in[p] = b[2 * p + part];
    }
    status = pk_factor_solve_real(c->factor[PK_REAL], in, out);
  }
  for (int64_t p = 0; status == PICKET_OK && p < c->n; p++) {
    x[2 * p + part] = out[p];
  }
  return status;
}

picket_status pk_channel_solve(pk_channel *c, const double complex *b, double complex *x) {
  if (c->factored == PK_COMPLEX) {
    return pk_factor_solve_complex(c->factor[PK_COMPLEX], b, x);
  }
  const double *parts = (const double *)b;
  double size[2] = {size_of(c, 0, parts), size_of(c, 1, parts)};
  picket_status status = PICKET_OK;
  for (int part = 0; status == PICKET_OK && part < 2; part++) {
    bool vanishes = size[part] <= ROUNDING * size[1 - part];
    status = solve_part(c, part, vanishes, parts, (double *)x);
  }
  return status;
}

picket_status pk_channel_solve_transposed(pk_channel *c, const double complex *b,
                                          double complex *x) {
  return c->factored == PK_COMPLEX ? pk_factor_solve_transposed_complex(c->factor[PK_COMPLEX], b, x)
                                   : pk_channel_solve(c, b, x); /* real ones are symmetric */
}

pk_factor_facts pk_channel_cost(const pk_channel *c) {
  return c->factor[c->factored] ? pk_factor_cost(c->factor[c->factored]) : (pk_factor_facts){0};
}
