/* See profile.h. Place p lies at from + (p + ½)/P of the way to the end; between grid lines the
 * shape is taken as straight. The largest value of a profile becomes PK_PROFILE_UNIT, so rounding
 * moves an overlap by about 1e-5. */
#include "study/profile.h"

#include <math.h>

#include "base/memory.h"

/* The shape at x; zero beyond the lines at either end. */
static double complex value_at(const pk_operator *op, const double complex *shape, double x) {
  int count = pk_operator_lines(op, PK_V);
  double low = 0, high = 0, length;
  for (int i = 0; i + 1 < count; i++) {
    pk_operator_line(op, PK_V, i, &low, &length);
    pk_operator_line(op, PK_V, i + 1, &high, &length);
    if (x >= low && x < high) {
      double part = (x - low) / (high - low);
      return (1 - part) * shape[i] + part * shape[i + 1];
    }
  }
  return 0;
}

static void sample(const pk_operator *op, const pk_character_request *request,
                   const double complex *shape, pk_profile *profile) {
  double from = 1.5 * request->structure[0] - 0.5 * request->structure[1];
  double width = 2 * (request->structure[1] - request->structure[0]);
  double complex value[PK_PROFILE_PLACES], largest = 0;
  for (int p = 0; p < PK_PROFILE_PLACES; p++) {
    value[p] = value_at(op, shape, from + width * (p + 0.5) / PK_PROFILE_PLACES);
    largest = cabs(value[p]) > cabs(largest) ? value[p] : largest;
  }
  profile->known = largest != 0;
  for (int p = 0; p < PK_PROFILE_PLACES && profile->known; p++) {
    double complex part = PK_PROFILE_UNIT * (value[p] / largest);
    profile->real[p] = (int)lround(creal(part));
    profile->imaginary[p] = (int)lround(cimag(part));
  }
}

picket_status pk_profile_take(picket_context *context, const pk_operator *op,
                              const pk_character_request *request, double complex k,
                              const double complex *u, pk_profile *out) {
  pk_profile profile = {0};
  if (pk_operator_lines(op, PK_V) > 1) {
    double complex *shape = PK_NEW(context, pk_operator_lines(op, PK_V), double complex);
    if (!shape) {
      return PICKET_ERROR_MEMORY;
    }
    pk_harmonic_shape(op, k, u, shape);
    sample(op, request, shape, &profile);
    pk_free(context, shape);
  }
  *out = profile;
  return PICKET_OK;
}

double pk_profile_overlap(const pk_profile *a, const pk_profile *b) {
  if (!a->known || !b->known) {
    return NAN;
  }
  double complex product = 0;
  double size_a = 0, size_b = 0;
  for (int p = 0; p < PK_PROFILE_PLACES; p++) {
    double complex va = a->real[p] + I * a->imaginary[p], vb = b->real[p] + I * b->imaginary[p];
    product += conj(va) * vb;
    size_a += creal(va * conj(va));
    size_b += creal(vb * conj(vb));
  }
  return creal(product * conj(product)) / (size_a * size_b);
}
