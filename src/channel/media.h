/* The media of a channel at a frequency, from the materials of the problem at its temperature. */
#ifndef PK_CHANNEL_MEDIA_H
#define PK_CHANNEL_MEDIA_H

#include "channel/channel.h"
#include "material/material.h"

typedef struct pk_channel_media {
  picket_context *context;
  const pk_materials *materials; /* borrowed */
  double temperature_c;
  int count;
  bool *used;                     /* [count] */
  double shortest_um, longest_um; /* wavelengths at which every used material is known */
  bool dispersive;                /* after a set: any slope is not zero */
  bool clamped;                   /* after a set: the frequency was moved into the known range */
  double complex *permittivity;   /* [3][count], 1 where not used */
  double complex *slope;          /* [3][count] k0 dε/dk0 */
} pk_channel_media;

/* Media number m is material number m. */
picket_status pk_channel_media_open(picket_context *context, const pk_materials *materials,
                                    double temperature_c, const pk_channel *channel,
                                    pk_channel_media *out);
void pk_channel_media_close(pk_channel_media *media); /* accepts zeros */

/* Evaluates the media at k0 (1/µm) and loads them into the channel. A frequency outside the known
 * range is moved to its end and marked `clamped`: an iteration may pass there, a result may not. */
picket_status pk_channel_media_set(pk_channel_media *media, double k0, pk_channel *channel);

#endif
