/* See media.h. */
#include "bloch/media.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

static const double TWO_PI = 6.283185307179586477;

picket_status pk_media_open(picket_context *context, const pk_materials *materials,
                            double temperature_c, const pk_operator *op, pk_media *out) {
  pk_media media = {.context = context, .materials = materials, .temperature_c = temperature_c};
  media.count = pk_materials_count(materials);
  media.used = PK_NEW(context, media.count, bool);
  media.permittivity = PK_NEW(context, media.count, double complex);
  media.slope = PK_NEW(context, media.count, double complex);
  if (!media.used || !media.permittivity || !media.slope) {
    pk_media_close(&media);
    return PICKET_ERROR_MEMORY;
  }
  for (int m = 0; m < media.count; m++) {
    media.used[m] = pk_operator_uses(op, m);
    media.permittivity[m] = 1;
  }
  pk_material_range known = pk_materials_common_range(materials, media.used);
  media.shortest_um = known.shortest_um;
  media.longest_um = known.longest_um;
  *out = media;
  return PICKET_OK;
}

void pk_media_close(pk_media *media) {
  if (media->context) {
    pk_free(media->context, media->used);
    pk_free(media->context, media->permittivity);
    pk_free(media->context, media->slope);
  }
  memset(media, 0, sizeof *media);
}

picket_status pk_media_set(pk_media *media, double k0, pk_operator *op) {
  double wavelength = TWO_PI / k0;
  double known = fmin(fmax(wavelength, media->shortest_um), media->longest_um);
  media->clamped = known != wavelength;
  media->dispersive = false;
  for (int m = 0; m < media->count; m++) {
    if (!media->used[m]) {
      continue;
    }
    pk_medium at;
    picket_status status = pk_materials_at(media->materials, m, known, media->temperature_c, &at);
    if (status != PICKET_OK) {
      return status;
    }
    media->permittivity[m] = at.permittivity;
    media->slope[m] = media->clamped ? 0 : at.slope;
    media->dispersive = media->dispersive || at.slope != 0;
  }
  return pk_operator_load(op, media->permittivity);
}

picket_status pk_media_frequency_form(const pk_media *media, const pk_operator *op, pk_phase phase,
                                      double k0, const double complex *l, const double complex *r,
                                      double complex *out) {
  double complex sum = -2 * k0 * pk_operator_mass_form(op, l, r);
  if (media->dispersive) {
    double complex *stiff = PK_NEW(media->context, 2 * media->count, double complex);
    if (!stiff) {
      return PICKET_ERROR_MEMORY;
    }
    double complex *mass = stiff + media->count;
    picket_status status = pk_operator_media_forms(op, phase, l, r, stiff, mass);
    for (int m = 0; status == PICKET_OK && m < media->count; m++) {
      sum += (stiff[m] - k0 * k0 * mass[m]) * media->slope[m] / k0;
    }
    pk_free(media->context, stiff);
    if (status != PICKET_OK) {
      return status;
    }
  }
  *out = sum;
  return PICKET_OK;
}
