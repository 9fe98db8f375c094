/* See media.h. */
#include "channel/media.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

static const double TWO_PI = 6.283185307179586477;

picket_status pk_channel_media_open(picket_context *context, const pk_materials *materials,
                                    double temperature_c, const pk_channel *channel,
                                    pk_channel_media *out) {
  pk_channel_media media = {
      .context = context, .materials = materials, .temperature_c = temperature_c};
  media.count = pk_materials_count(materials);
  media.used = PK_NEW(context, media.count, bool);
  media.permittivity = PK_NEW(context, 3 * media.count, double complex);
  media.slope = PK_NEW(context, 3 * media.count, double complex);
  if (!media.used || !media.permittivity || !media.slope) {
    pk_channel_media_close(&media);
    return PICKET_ERROR_MEMORY;
  }
  for (int m = 0; m < media.count; m++) {
    media.used[m] = pk_channel_uses(channel, m);
    for (int c = 0; c < 3; c++) {
      media.permittivity[c * media.count + m] = 1;
    }
  }
  pk_material_range known = pk_materials_common_range(materials, media.used);
  media.shortest_um = known.shortest_um;
  media.longest_um = known.longest_um;
  *out = media;
  return PICKET_OK;
}

void pk_channel_media_close(pk_channel_media *media) {
  if (media->context) {
    pk_free(media->context, media->used);
    pk_free(media->context, media->permittivity);
    pk_free(media->context, media->slope);
  }
  memset(media, 0, sizeof *media);
}

picket_status pk_channel_media_set(pk_channel_media *media, double k0, pk_channel *channel) {
  double wavelength = TWO_PI / k0;
  double known = fmin(fmax(wavelength, media->shortest_um), media->longest_um);
  media->clamped = known != wavelength;
  media->dispersive = false;
  for (int m = 0; m < media->count; m++) {
    if (!media->used[m]) {
      continue;
    }
    pk_medium at[3];
    picket_status status =
        pk_materials_tensor_at(media->materials, m, known, media->temperature_c, at);
    if (status != PICKET_OK) {
      return status;
    }
    for (int c = 0; c < 3; c++) {
      media->permittivity[c * media->count + m] = at[c].permittivity;
      media->slope[c * media->count + m] = media->clamped ? 0 : at[c].slope;
      media->dispersive = media->dispersive || at[c].slope != 0;
    }
  }
  return pk_channel_load(channel, media->permittivity);
}
