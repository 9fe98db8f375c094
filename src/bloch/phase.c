/* See phase.h. */
#include "bloch/phase.h"

#include <math.h>

static const double PI = 3.141592653589793238;

/* exp(iπ t), exact at whole and half numbers. */
static double complex half_turns(double t) {
  double reduced = t - 2 * floor(0.5 * t + 0.5); /* in [-1, 1) */
  double quarter = round(2 * reduced);
  if (fabs(2 * reduced - quarter) < 1e-12) {
    switch ((int)quarter) {
      case 0: return 1;
      case 1: return I;
      case -1: return -I;
      default: return -1;
    }
  }
  return cexp(I * PI * reduced);
}

pk_phase pk_phase_at(const pk_cell *cell, double kz, double kx) {
  pk_phase phase = {half_turns(kz), 1, 0};
  if (cell->lateral == PK_LATERAL_PERIODIC) {
    phase.chi = half_turns(kz * cell->shift + kx);
  } else if (cell->lateral == PK_LATERAL_UNIFORM && kx != 0) {
    phase.kx = kx * PI / cell->span_um;
  }
  return phase;
}
