/* LU factors of T(k) and solves with them; real factors act on real and imaginary part by
 * themselves, and not on a part that vanishes. */
#include "base/memory.h"
#include "channel/channel_private.h"

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

picket_status pk_channel_solve(pk_channel *c, const double complex *b, double complex *x) {
  return c->factored == PK_COMPLEX ? pk_factor_solve_complex(c->factor[PK_COMPLEX], b, x)
                                   : pk_factor_solve_parts(c->factor[PK_REAL], c->n, b, x, c->part);
}

picket_status pk_channel_solve_transposed(pk_channel *c, const double complex *b,
                                          double complex *x) {
  return c->factored == PK_COMPLEX ? pk_factor_solve_transposed_complex(c->factor[PK_COMPLEX], b, x)
                                   : pk_channel_solve(c, b, x); /* real ones are symmetric */
}

pk_factor_facts pk_channel_cost(const pk_channel *c) {
  return c->factor[c->factored] ? pk_factor_cost(c->factor[c->factored]) : (pk_factor_facts){0};
}
