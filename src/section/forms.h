/* Power and energy of modes of a section, on the grid itself.
 *
 * The unconjugated product of two modes,
 *   P(a, b) = ½ ∫ [(E_a × h_b) + (E_b × h_a)]_z dx dy,
 * vanishes for modes of different β² (reciprocity; A. W. Snyder and J. D. Love, Optical Waveguide
 * Theory (1983), ch. 31); with absorbing layers the integral runs over the stretched plane. A
 * change of k0 and ε moves β by δβ = ∫ [δ(k0 ε)(E_t² - E_z²) + δk0 (h_t² - h_z²)] / (2 P(a, a)).
 * In a bend P is as it stands, and ∫ of an energy is over g dx dy, the volume per length of arc.
 * Both hold on the grid to rounding, because its curls are adjoint to each other. */
#ifndef PK_SECTION_FORMS_H
#define PK_SECTION_FORMS_H

#include "section/fields.h"

double complex pk_section_product(const pk_section *section, const pk_section_fields *a,
                                  const pk_section_fields *b);

/* ½ ∫ Re[(E_a* × h_b) + ...]: the power that crosses, without stretch and with conjugates. */
double complex pk_section_power(const pk_section *section, const pk_section_fields *a,
                                const pk_section_fields *b);

/* dβ/dk0, the group index.
 *   slope  [3][media] k0 dε/dk0, null without dispersion */
picket_status pk_section_group_index(pk_section *section, const pk_section_fields *mode,
                                     const double complex *slope, double complex *out);

/* ∂β/∂ε of each medium (all its entries together), [media]. */
picket_status pk_section_pulls(pk_section *section, double k0, const pk_section_fields *mode,
                               double complex *pulls);

/* What a mode looks like. Integrals run over the grid without stretch; those of a mirrored part
 * are of that part, so areas are those of the whole divided by the number of parts. */
typedef struct pk_section_looks {
  double ex_share;       /* ∫ε|E_x|² over ∫ε(|E_x|² + |E_y|²) */
  double effective_area; /* (∫S_z)² / ∫S_z², µm² */
  double ez_share;       /* ∫ε|E_z|² over ∫ε|E|² */
} pk_section_looks;

void pk_section_look(const pk_section *section, const pk_section_fields *mode,
                     pk_section_looks *out);

/* Share of each medium in the electric energy ∫ε|E|², [media], adding up to 1. A box that holds
 * several media gives each its part ε_m ∂⟨ε⟩/∂ε_m of its average. */
picket_status pk_section_confinement(pk_section *section, const pk_section_fields *mode,
                                     double *share);

#endif
