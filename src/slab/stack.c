/* Setting up a stack in reduced units; see slab_private.h for the equation. */
#include <math.h>

#include "base/memory.h"
#include "slab/slab_private.h"

pk_slab_medium pk_slab_isotropic(double complex permittivity, double complex slope) {
  return (pk_slab_medium){permittivity, permittivity, permittivity, slope, slope, slope};
}

const pk_slab_medium *pk_stack_medium(const pk_stack *stack, int i) {
  if (i == 0) {
    return &stack->slab->substrate;
  }
  return i + 1 == stack->count ? &stack->slab->cover : &stack->slab->films[i - 1].medium;
}

bool pk_stack_absorbs(const pk_stack *stack) {
  for (int i = 0; i < stack->count; i++) {
    const pk_slab_medium *medium = pk_stack_medium(stack, i);
    if (stack->polarization == PK_SLAB_TE
            ? cimag(medium->across) != 0
            : cimag(medium->normal) != 0 || cimag(medium->along) != 0) {
      return true;
    }
  }
  return false;
}

void pk_stack_absorb(pk_stack *stack, double share) {
  for (int i = 0; i < stack->count; i++) {
    const pk_slab_medium *medium = pk_stack_medium(stack, i);
    pk_layer *layer = &stack->layers[i];
    if (stack->polarization == PK_SLAB_TE) {
      layer->p = 1;
      layer->q0 = creal(medium->across) + I * (share * cimag(medium->across));
      layer->rho = 1;
    } else {
      layer->p = 1 / (creal(medium->along) + I * (share * cimag(medium->along)));
      layer->q0 = 1;
      layer->rho = 1 / (creal(medium->normal) + I * (share * cimag(medium->normal)));
    }
  }
}

/* Re ε of a medium that sets the highest index light can have in it. */
static double bound(const pk_stack *stack, int i) {
  const pk_slab_medium *medium = pk_stack_medium(stack, i);
  return creal(stack->polarization == PK_SLAB_TE ? medium->across : medium->normal);
}

static picket_status refuse_metal(const pk_stack *stack) {
  for (int i = 0; i < stack->count; i++) {
    const pk_slab_medium *medium = pk_stack_medium(stack, i);
    double least = stack->polarization == PK_SLAB_TE
                       ? creal(medium->across)
                       : fmin(creal(medium->normal), creal(medium->along));
    if (!(least > 0)) {
      return pk_fail(
          stack->context, PICKET_ERROR_UNSUPPORTED,
          "slab: layer %d of %d, counted from the substrate, has permittivity %g, must be "
          "above 0 (metals are not supported)",
          i + 1, stack->count, least);
    }
  }
  return PICKET_OK;
}

picket_status pk_stack_create(picket_context *context, const pk_slab *slab,
                              pk_slab_polarization polarization, double wavelength_um,
                              pk_stack *out) {
  pk_stack stack = {context, slab, polarization, slab->film_count + 2, NULL, 0, 0};
  picket_status status = refuse_metal(&stack);
  if (status != PICKET_OK) {
    return status;
  }
  stack.layers = PK_NEW(context, stack.count, pk_layer);
  if (!stack.layers) {
    return PICKET_ERROR_MEMORY;
  }
  const double k0 = 2 * 3.14159265358979323846 / wavelength_um;
  for (int i = 0; i < slab->film_count; i++) {
    stack.layers[i + 1].thickness = k0 * slab->films[i].thickness_um;
    stack.ceiling = fmax(stack.ceiling, bound(&stack, i + 1));
  }
  stack.floor = fmax(bound(&stack, 0), bound(&stack, stack.count - 1));
  pk_stack_absorb(&stack, 0);
  *out = stack;
  return PICKET_OK;
}

void pk_stack_free(pk_stack *stack) {
  pk_free(stack->context, stack->layers);
  stack->layers = NULL;
}
