/* Modes of a stack of films, by the exact dispersion relation.
 *
 * x is normal to the films, z the direction of propagation, exp(i(βz - ωt)), n = β/k0 the index.
 *   TE (E along y):  ψ'' + (k0² ε_y - β²) ψ = 0, ψ = E_y, p = 1
 *   TM (H along y):  (p ψ')' + (k0² - β²/ε_x) ψ = 0, ψ = H_y, p = 1/ε_z
 * with ψ and pψ' continuous and ψ decaying into substrate and cover. See H. Kogelnik, "Theory of
 * optical waveguides", in Guided-Wave Optoelectronics (1988). */
#ifndef PK_SLAB_SLAB_H
#define PK_SLAB_SLAB_H

#include <complex.h>

#include "base/context.h"

/* Relative permittivity at one frequency along x (normal to the films), y (out of plane) and z
 * (propagation), and its slope k0 dε/dk0. An isotropic medium has three equal entries. */
typedef struct pk_slab_medium {
  double complex normal, across, along;
  double complex normal_slope, across_slope, along_slope;
} pk_slab_medium;

typedef struct pk_slab_film {
  pk_slab_medium medium;
  double thickness_um; /* above 0 */
} pk_slab_film;

typedef struct pk_slab {
  pk_slab_medium substrate;  /* x below all films */
  int film_count;            /* at least 1 */
  const pk_slab_film *films; /* from substrate to cover */
  pk_slab_medium cover;
} pk_slab;

typedef enum pk_slab_polarization { PK_SLAB_TE, PK_SLAB_TM } pk_slab_polarization;

typedef struct pk_slab_mode {
  int order; /* number of zeros of ψ */
  double complex index;
  double complex group_index; /* n + k0 dn/dk0, with material dispersion, analytic */
} pk_slab_mode;

/* All guided modes by falling index, to 1e-12 in the index for lossless films: every order is found
 * because the Prüfer phase counts them. Films with absorption are followed from their lossless
 * twin by Newton steps in the complex plane.
 *   wavelength_um  above 0
 *   capacity       modes that fit in `modes`; more guided modes than that are counted, not stored
 *   count          receives the number of guided modes (0 is an outcome, not an error)
 * PICKET_ERROR_NUMERIC if a lossy mode cannot be followed, PICKET_ERROR_UNSUPPORTED for a metal
 * film or surrounding (Re ε <= 0). */
picket_status pk_slab_modes(picket_context *context, const pk_slab *slab,
                            pk_slab_polarization polarization, double wavelength_um, int capacity,
                            pk_slab_mode *modes, int *count);

/* What one medium does to a mode: the change of n² per change of each entry of its permittivity. By
 * the stationary functional these are shares of the field's energy, exact to first order, so any
 * small change of the media (heat, absorption, a tuned index) moves n² by the sum of pull times
 * change. */
typedef struct pk_slab_pull {
  double complex normal, across, along;
} pk_slab_pull;

/* The one mode of an order, 0 or more.
 *   mode    receives it
 *   pulls   null, or receives film_count + 2 entries: substrate, films, cover
 *   count   null, or receives the number of guided modes of the lossless twin
 * PICKET_ERROR_NO_MODE if the order is cut off (`count` is then filled all the same). */
picket_status pk_slab_mode_of_order(picket_context *context, const pk_slab *slab,
                                    pk_slab_polarization polarization, double wavelength_um,
                                    int order, pk_slab_mode *mode, pk_slab_pull *pulls, int *count);

/* An isotropic medium. */
pk_slab_medium pk_slab_isotropic(double complex permittivity, double complex slope);

#endif
