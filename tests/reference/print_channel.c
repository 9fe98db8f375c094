/* Prints modes of a row of teeth at one Bloch wavenumber, for test_channel.py:
 *
 *   pitch VALUE, tooth VALUE     µm
 *   k VALUE                      1/µm
 *   line FAMILY AXIS NUMBER AT   grid lines of a quarter (axis 0: x), the last one an electric wall
 *   mode FAMILY VALUE            (ω/c)² of the mode nearest to the guess; family 0: E_x even at
 * both planes (te-like), 1: E_y even at both (tm-like) */
#include <stdio.h>

#include "unit/channel/guide.h"

enum { HARMONICS = 9 }; /* errors fall as the third power */

static void print_lines(const pk_axis *axis, int family, int name) {
  for (int i = 0; i <= axis->intervals; i++) {
    printf("line %d %d %d %.17g\n", family, name, i, axis->line[i]);
  }
}

int main(void) {
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1};
  const double pitch = 0.3, tooth = 0.15, k = 0.7 * PI / pitch;
  printf("pitch %.17g\ntooth %.17g\nk %.17g\n", pitch, tooth, k);
  for (int family = 0; family < 2; family++) {
    guide g = guide_of_teeth(index, pitch, tooth, family == 0 ? PK_END_ZERO : PK_END_FREE,
                             family == 0 ? PK_END_FREE : PK_END_ZERO, 0.8);
    pk_channel *channel = guide_channel_at(&g, 1, -HARMONICS - 1, HARMONICS, false, NAN);
    pk_channel_mode mode = guide_mode_at_k(channel, k, k / (family == 0 ? 1.68 : 1.54));
    print_lines(&g.plane[0].x, family, 0);
    print_lines(&g.plane[0].y, family, 1);
    printf("mode %d %.17g\n", family, creal(mode.k0_square));
    pk_channel_modes_clear(g.plane[0].context, 1, &mode);
    pk_channel_free(channel);
    guide_close(&g);
  }
  return 0;
}
