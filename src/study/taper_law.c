/* See taper_law.h. */
#include "study/taper_law.h"

#include <assert.h>
#include <math.h>

static const double PI = 3.141592653589793238;

double pk_taper_value(const pk_taper_change *change, int tooth, int teeth) {
  assert(0 <= tooth && tooth < teeth);
  if (tooth == 0 || tooth == teeth - 1) {
    return tooth == 0 ? change->from : change->to;
  }
  double t = (double)tooth / (teeth - 1);
  if (change->law == PICKET_TAPER_POWER) {
    t = pow(t, change->exponent);
  } else if (change->law == PICKET_TAPER_COSINE) {
    t = 0.5 * (1 - cos(PI * t));
  }
  return change->from + (change->to - change->from) * t;
}
