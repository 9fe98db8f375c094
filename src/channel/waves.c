/* See modes.h: waves at a frequency. Two ways, by the symmetry of the cell. */
#include "channel/channel_private.h"

picket_status pk_channel_waves(pk_channel *c, double k0, double complex guess, int wanted,
                               const double complex *start, pk_channel_mode *modes, int *found) {
  return (c->mirrored ? pk_channel_waves_mirrored : pk_channel_waves_general)(c, k0, guess, wanted,
                                                                              start, modes, found);
}
