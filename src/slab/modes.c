/* Guided modes of a film stack: root of each order without absorption (phase.c), the same followed
 * to full absorption (follow.c), field and group index (field.c). */
#include <assert.h>
#include <math.h>

#include "base/memory.h"
#include "slab/slab_private.h"

/* The mode whose lossless root is b; field is left filled for it. */
static picket_status finish(pk_stack *stack, pk_field *field, int order, double complex *b,
                            pk_slab_mode *mode) {
  picket_status status = PICKET_OK;
  if (pk_stack_absorbs(stack)) {
    status = pk_stack_follow(stack, field, order, b);
  } else {
    pk_field_solve(stack, *b, field);
  }
  if (status == PICKET_OK) {
    mode->order = order;
    mode->index = csqrt(*b);
    mode->group_index = pk_field_group_index(stack, field, *b);
  }
  pk_stack_absorb(stack, 0);
  return status;
}

picket_status pk_slab_modes(picket_context *context, const pk_slab *slab,
                            pk_slab_polarization polarization, double wavelength_um, int capacity,
                            pk_slab_mode *modes, int *count) {
  assert(wavelength_um > 0 && slab->film_count > 0 && capacity >= 0);
  pk_stack stack;
  pk_field field = {0};
  picket_status status = pk_stack_create(context, slab, polarization, wavelength_um, &stack);
  if (status != PICKET_OK) {
    return status;
  }
  int guided = pk_stack_guided(&stack);
  int stored = guided < capacity ? guided : capacity;
  double above = stack.ceiling;
  pk_slab_mode *found = PK_NEW(context, stored, pk_slab_mode);
  status = found ? pk_field_create(context, stack.count, &field) : PICKET_ERROR_MEMORY;
  for (int m = 0; status == PICKET_OK && m < stored; m++) {
    above = pk_stack_root(&stack, m, above);
    double complex b = above;
    status = finish(&stack, &field, m, &b, &found[m]);
  }
  if (status == PICKET_OK) {
    for (int m = 0; m < stored; m++) {
      modes[m] = found[m];
    }
    *count = guided;
  }
  pk_free(context, found);
  pk_field_free(context, &field);
  pk_stack_free(&stack);
  return status;
}

static picket_status one_mode(pk_stack *stack, pk_field *field, int order, pk_slab_mode *mode,
                              pk_slab_pull *pulls) {
  double complex b = pk_stack_root(stack, order, stack->ceiling);
  pk_slab_mode found;
  picket_status status = finish(stack, field, order, &b, &found);
  if (status != PICKET_OK) {
    return status;
  }
  *mode = found;
  pk_stack_absorb(stack, 1); /* the pulls of TM hold 1/ε_x with its absorption */
  for (int i = 0; pulls && i < stack->count; i++) {
    pulls[i] = pk_field_pull(stack, field, b, i);
  }
  return PICKET_OK;
}

picket_status pk_slab_mode_of_order(picket_context *context, const pk_slab *slab,
                                    pk_slab_polarization polarization, double wavelength_um,
                                    int order, pk_slab_mode *mode, pk_slab_pull *pulls,
                                    int *count) {
  assert(wavelength_um > 0 && slab->film_count > 0 && order >= 0);
  pk_stack stack;
  pk_field field = {0};
  picket_status status = pk_stack_create(context, slab, polarization, wavelength_um, &stack);
  if (status != PICKET_OK) {
    return status;
  }
  int guided = pk_stack_guided(&stack);
  if (count) {
    *count = guided;
  }
  status = pk_field_create(context, stack.count, &field);
  if (status == PICKET_OK && order >= guided) {
    status =
        pk_fail(context, PICKET_ERROR_NO_MODE,
                "slab: order is %d, but at %g nm the stack guides %d %s mode%s (order 0 to %d)",
                order, 1e3 * wavelength_um, guided, polarization == PK_SLAB_TE ? "te" : "tm",
                guided == 1 ? "" : "s", guided - 1);
  } else if (status == PICKET_OK) {
    status = one_mode(&stack, &field, order, mode, pulls);
  }
  pk_field_free(context, &field);
  pk_stack_free(&stack);
  return status;
}
