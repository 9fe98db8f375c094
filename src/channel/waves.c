/* See modes.h: waves at a frequency. Two ways, by the symmetry of the cell; what is common to both
 * is here. */
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

static void sort_by_distance(double complex guess, int count, pk_channel_mode *modes) {
  for (int i = 1; i < count; i++) {
    for (int k = i; k > 0 && cabs(modes[k].k - guess) < cabs(modes[k - 1].k - guess); k--) {
      pk_channel_mode swap = modes[k];
      modes[k] = modes[k - 1];
      modes[k - 1] = swap;
    }
  }
}

picket_status pk_channel_waves(pk_channel *c, double k0, double complex guess, int wanted,
                               const double complex *start, pk_channel_mode *modes, int *found) {
  wanted = wanted > c->n ? (int)c->n : wanted;
  int count = 0;
  pk_channel_mode *fresh = PK_NEW(c->context, wanted, pk_channel_mode);
  pk_channel_wave_work work = {.k0_square = k0 * k0,
                               .work = PK_NEW(c->context, c->n, double complex),
                               .other = PK_NEW(c->context, c->n, double complex)};
  picket_status status = PICKET_ERROR_MEMORY;
  if (fresh && work.work && work.other) {
    status = (c->mirrored ? pk_channel_waves_mirrored : pk_channel_waves_general)(
        c, &work, guess, wanted, start, fresh, &count);
  }
  if (status == PICKET_OK) {
    sort_by_distance(guess, count, fresh);
    memcpy(modes, fresh, (size_t)count * sizeof *modes);
    *found = count;
  } else {
    pk_channel_modes_clear(c->context, count, fresh);
  }
  pk_free(c->context, fresh);
  pk_free(c->context, work.work);
  pk_free(c->context, work.other);
  return status;
}
