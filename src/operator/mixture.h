/* Averaging boxes of a grid: what mixture of media each site of the operator holds.
 *
 * Most sites hold one medium; the mixtures of the others are kept once each in a list, and a site
 * keeps the number of its mixture. */
#ifndef PK_OPERATOR_MIXTURE_H
#define PK_OPERATOR_MIXTURE_H

#include <complex.h>

#include "geometry/geometry.h"

typedef struct pk_mixture {
  int count;
  int medium[PK_BOX_MEDIA];
  double fraction[PK_BOX_MEDIA];
  double facing[3]; /* uu, uv, vv of the mean n nᵀ over the interface; zero for one medium */
} pk_mixture;

typedef struct pk_mixtures {
  picket_context *context;
  int pure; /* mixtures 0 to pure - 1 are the pure media */
  int count, capacity;
  pk_mixture *list;
} pk_mixtures;

picket_status pk_mixtures_open(picket_context *context, int media, pk_mixtures *out);
void pk_mixtures_close(pk_mixtures *mixtures);

/* The number of the mixture in a box, adding it if it is not pure. */
picket_status pk_mixtures_take(pk_mixtures *mixtures, const pk_box *box, int *number);

/* ⟨ε⟩ and ⟨1/ε⟩ of a mixture. */
double complex pk_mixture_mean(const pk_mixture *mixture, const double complex *permittivity);
double complex pk_mixture_mean_inverse(const pk_mixture *mixture,
                                       const double complex *permittivity);

/* The weight of a u difference (along = PK_U), of a v difference (PK_V), or of the mixed term:
 * entries of the tensor that multiplies gradients, uu: η_vv, vv: η_uu, uv: -η_uv. */
double complex pk_mixture_weight(const pk_mixture *mixture, pk_axis_name along,
                                 const double complex *permittivity);
double complex pk_mixture_mixed(const pk_mixture *mixture, const double complex *permittivity);

/* Derivatives of the three with respect to the permittivity of the medium number i of the mixture.
 */
double complex pk_mixture_weight_slope(const pk_mixture *mixture, pk_axis_name along,
                                       const double complex *permittivity, int i);
double complex pk_mixture_mixed_slope(const pk_mixture *mixture, const double complex *permittivity,
                                      int i);

#endif
