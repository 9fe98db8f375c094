/* A mode with absorption, followed from its lossless twin.
 *
 * The absorption is raised from 0 to 1 of its value in steps. Each step starts from the first-order
 * shift, Σ pull · i Im ε (the absorption of the media weighted with the field), and is corrected by
 * Newton steps in the complex b plane. A step is taken back and halved if the correction is not
 * small against the shift, for then another mode may have been caught. */
#include <math.h>

#include "slab/slab_private.h"

enum { NEWTON_LIMIT = 12, STEP_LIMIT = 4000 };

/* db/d(share) by the first-order formula, from a filled field. */
static double complex drift(const pk_stack *stack, const pk_field *field, double complex b) {
  double complex sum = 0;
  for (int i = 0; i < stack->count; i++) {
    const pk_slab_medium *medium = pk_stack_medium(stack, i);
    pk_slab_pull pull = pk_field_pull(stack, field, b, i);
    sum += I * (pull.normal * cimag(medium->normal) + pull.across * cimag(medium->across) +
                pull.along * cimag(medium->along));
  }
  return sum;
}

/* Newton from *b with the layers as they are; false if it does not settle. */
static bool settle(const pk_stack *stack, pk_field *field, double complex *b) {
  double complex at = *b;
  for (int i = 0; i < NEWTON_LIMIT; i++) {
    pk_field_solve(stack, at, field);
    at += field->step;
    if (!isfinite(creal(at)) || !isfinite(cimag(at))) {
      return false;
    }
    /* The step after one of 1e-9 would be 1e-18: it is already taken. */
    if (cabs(field->step) < 1e-9 * cabs(at)) {
      pk_field_solve(stack, at, field);
      *b = at + field->step;
      return true;
    }
  }
  return false;
}

picket_status pk_stack_follow(pk_stack *stack, pk_field *field, int order, double complex *b) {
  double share = 0, step = 1;
  double complex at = *b;
  for (int i = 0; share < 1 && i < STEP_LIMIT; i++) {
    double wanted = fmin(share + step, 1);
    pk_stack_absorb(stack, share);
    pk_field_solve(stack, at, field);
    double complex shift = drift(stack, field, at) * (wanted - share);
    double complex found = at + shift;
    pk_stack_absorb(stack, wanted);
    /* A quarter: a straight-line prediction that is off by more says little about the way. */
    if (settle(stack, field, &found) &&
        cabs(found - at - shift) <= 0.25 * cabs(shift) + 1e-12 * cabs(at)) {
      at = found;
      share = wanted;
      step *= 2;
    } else if ((step *= 0.5) < 1e-6) {
      break;
    }
  }
  if (share < 1) {
    return pk_fail(
        stack->context, PICKET_ERROR_NUMERIC,
        "slab: the mode of order %d was lost at %.3g of the absorption of the films; the "
        "stack may not guide it with absorption",
        order, share);
  }
  pk_field_solve(stack, at, field);
  *b = at;
  return PICKET_OK;
}
