/* See family.h. Integrals over z and x are sums with the dual lengths of the grid. */
#include "bloch/family.h"

#include <string.h>

static const double PI = 3.141592653589793238;

void pk_family_shape(const pk_operator *op, double pitch_um, int harmonic,
                     const double complex *field, double complex *out) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  memset(out, 0, (size_t)nv * sizeof *out);
  for (int iu = 0; iu < nu; iu++) {
    double z, length;
    pk_operator_line(op, PK_U, iu, &z, &length);
    double complex wave = length * cexp(-I * (harmonic * PI * z / pitch_um));
    for (int iv = 0; iv < nv; iv++) {
      out[iv] += wave * field[(int64_t)iu * nv + iv];
    }
  }
}

double pk_family_likeness(const pk_operator *op, double pitch_um, int harmonic,
                          const double complex *shape, const double complex *field,
                          double complex *work) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  pk_family_shape(op, pitch_um, harmonic, field, work);
  double complex ab = 0;
  double aa = 0, ff = 0;
  for (int iv = 0; iv < nv; iv++) {
    double x, width;
    pk_operator_line(op, PK_V, iv, &x, &width);
    ab += width * conj(shape[iv]) * work[iv];
    aa += width * creal(shape[iv] * conj(shape[iv]));
    for (int iu = 0; iu < nu; iu++) {
      double z, length;
      pk_operator_line(op, PK_U, iu, &z, &length);
      double complex f = field[(int64_t)iu * nv + iv];
      ff += width * length * creal(f * conj(f));
    }
  }
  return creal(ab * conj(ab)) / (aa * ff * 0.5 * pitch_um);
}
