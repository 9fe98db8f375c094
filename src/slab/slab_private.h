/* The inside of the slab room: a stack in reduced units.
 *
 * With X = k0 x and b = n² both polarizations are one equation,
 *   (p ψ')' + (q0 - ρ b) ψ = 0,   w = p ψ',   ψ and w continuous,
 * where TE has p = 1, q0 = ε_y, ρ = 1 and TM has p = 1/ε_z, q0 = 1, ρ = 1/ε_x. */
#ifndef PK_SLAB_SLAB_PRIVATE_H
#define PK_SLAB_SLAB_PRIVATE_H

#include "slab/slab.h"

typedef struct pk_layer {
  double complex p, q0, rho;
  double thickness; /* k0 d; 0 for the outer media */
} pk_layer;

typedef struct pk_stack {
  picket_context *context;
  const pk_slab *slab; /* borrowed */
  pk_slab_polarization polarization;
  int count;        /* of layers: films and two outer media */
  pk_layer *layers; /* [count], substrate first; without absorption until pk_stack_absorb */
  double floor;     /* guided: floor < b < ceiling */
  double ceiling;
} pk_stack;

picket_status pk_stack_create(picket_context *context, const pk_slab *slab,
                              pk_slab_polarization polarization, double wavelength_um,
                              pk_stack *out);
void pk_stack_free(pk_stack *stack);

/* Sets the layers to the media with `share` (0 to 1) of their absorption. */
void pk_stack_absorb(pk_stack *stack, double share);

/* Medium i of the stack, from substrate (0) to cover (count - 1). */
const pk_slab_medium *pk_stack_medium(const pk_stack *stack, int i);

/* True if any entry that acts on this polarization is complex. */
bool pk_stack_absorbs(const pk_stack *stack);

/* The Prüfer phase Θ(b) of the lossless stack: falling in b, and mode m has Θ = mπ. */
double pk_stack_phase(const pk_stack *stack, double b);

/* The number of guided modes of the lossless stack. */
int pk_stack_guided(const pk_stack *stack);

/* b of lossless mode `order`, which is known to lie below `above`. */
double pk_stack_root(const pk_stack *stack, int order, double above);

/* The field of a mode at the interfaces, and its integrals. */
typedef struct pk_field {
  double complex *psi_up, *w_up; /* [count - 1] unit vectors, integrated up from the substrate */
  double complex *psi_down, *w_down; /* [count - 1] the same, down from the cover */
  double *growth_up, *growth_down;   /* [count - 1] log of the growth from the interface before */
  double complex *psi, *w;           /* [count - 1] the two joined, 1 at the meeting interface */
  double complex *even, *odd;        /* [count] ∫ψ² and ∫w² over each medium */
  double complex norm;               /* Σ ρ ∫ψ² */
  double complex step;               /* Newton's correction of b */
} pk_field;

picket_status pk_field_create(picket_context *context, int count, pk_field *out);
void pk_field_free(picket_context *context, pk_field *field);

/* Fills a field for a value of b. */
void pk_field_solve(const pk_stack *stack, double complex b, pk_field *field);

/* Pull of medium i on b, from a filled field. */
pk_slab_pull pk_field_pull(const pk_stack *stack, const pk_field *field, double complex b, int i);

/* n_g, from a filled field. */
double complex pk_field_group_index(const pk_stack *stack, const pk_field *field, double complex b);

/* Follows mode b of the lossless stack to full absorption; field is filled for the result.
 * PICKET_ERROR_NUMERIC if it is lost on the way. */
picket_status pk_stack_follow(pk_stack *stack, pk_field *field, int order, double complex *b);

#endif
