/* See mixture.h. The averages are those of operator.h:
 *   η = ⟨1/ε⟩ N + ⟨ε⟩⁻¹ (1 - N),
 * E = η D, and with H along y: D_z ∝ ∂x H, D_x ∝ -∂z H, so a z (u) difference is weighted by η_xx
 * (= η_vv), an x (v) difference by η_zz (= η_uu) and their product by -η_xz. */
#include "operator/mixture.h"

#include <string.h>

#include "base/memory.h"

picket_status pk_mixtures_open(picket_context *context, int media, pk_mixtures *out) {
  pk_mixtures mixtures = {.context = context, .pure = media, .count = media};
  mixtures.capacity = media + 64;
  mixtures.list = PK_NEW(context, mixtures.capacity, pk_mixture);
  if (!mixtures.list) {
    return PICKET_ERROR_MEMORY;
  }
  for (int m = 0; m < media; m++) {
    mixtures.list[m] = (pk_mixture){.count = 1, .medium = {m}, .fraction = {1}};
  }
  *out = mixtures;
  return PICKET_OK;
}

void pk_mixtures_close(pk_mixtures *mixtures) {
  if (mixtures->context) {
    pk_free(mixtures->context, mixtures->list);
  }
  memset(mixtures, 0, sizeof *mixtures);
}

picket_status pk_mixtures_take(pk_mixtures *mixtures, const pk_box *box, int *number) {
  if (box->count == 1) {
    *number = box->medium[0];
    return PICKET_OK;
  }
  if (mixtures->count == mixtures->capacity) {
    size_t wanted = 2 * (size_t)mixtures->capacity;
    pk_mixture *grown = pk_regrow(mixtures->context, mixtures->list, (size_t)mixtures->count,
                                  wanted, sizeof(pk_mixture));
    if (!grown) {
      return PICKET_ERROR_MEMORY;
    }
    mixtures->list = grown;
    mixtures->capacity = (int)wanted;
  }
  pk_mixture *mixture = &mixtures->list[mixtures->count];
  mixture->count = box->count;
  memcpy(mixture->medium, box->medium, sizeof mixture->medium);
  memcpy(mixture->fraction, box->fraction, sizeof mixture->fraction);
  memcpy(mixture->facing, box->facing, sizeof mixture->facing);
  *number = mixtures->count++;
  return PICKET_OK;
}

double complex pk_mixture_mean(const pk_mixture *mixture, const double complex *permittivity) {
  double complex sum = 0;
  for (int i = 0; i < mixture->count; i++) {
    sum += mixture->fraction[i] * permittivity[mixture->medium[i]];
  }
  return sum;
}

double complex pk_mixture_mean_inverse(const pk_mixture *mixture,
                                       const double complex *permittivity) {
  double complex sum = 0;
  for (int i = 0; i < mixture->count; i++) {
    sum += mixture->fraction[i] / permittivity[mixture->medium[i]];
  }
  return sum;
}

/* Share of the interface that faces across a difference along an axis: D is normal there. */
static double across_share(const pk_mixture *mixture, pk_axis_name along) {
  return mixture->facing[along == PK_U ? 2 : 0];
}

double complex pk_mixture_weight(const pk_mixture *mixture, pk_axis_name along,
                                 const double complex *permittivity) {
  if (mixture->count == 1) {
    return 1 / permittivity[mixture->medium[0]];
  }
  double share = across_share(mixture, along);
  return share * pk_mixture_mean_inverse(mixture, permittivity) +
         (1 - share) / pk_mixture_mean(mixture, permittivity);
}

double complex pk_mixture_mixed(const pk_mixture *mixture, const double complex *permittivity) {
  if (mixture->count == 1) {
    return 0;
  }
  return -mixture->facing[1] * (pk_mixture_mean_inverse(mixture, permittivity) -
                                1 / pk_mixture_mean(mixture, permittivity));
}

double complex pk_mixture_weight_slope(const pk_mixture *mixture, pk_axis_name along,
                                       const double complex *permittivity, int i) {
  double complex e = permittivity[mixture->medium[i]];
  if (mixture->count == 1) {
    return -1 / (e * e);
  }
  double share = across_share(mixture, along);
  double complex mean = pk_mixture_mean(mixture, permittivity);
  return -mixture->fraction[i] * (share / (e * e) + (1 - share) / (mean * mean));
}

double complex pk_mixture_mixed_slope(const pk_mixture *mixture, const double complex *permittivity,
                                      int i) {
  if (mixture->count == 1) {
    return 0;
  }
  double complex e = permittivity[mixture->medium[i]];
  double complex mean = pk_mixture_mean(mixture, permittivity);
  return mixture->facing[1] * mixture->fraction[i] * (1 / (e * e) - 1 / (mean * mean));
}
