/* See branch.h. */
#include "study/branch.h"

#include <math.h>

static const double PI = 3.141592653589793238;

pk_branch pk_branch_of(double complex k, double pitch_um) {
  double half_turns = creal(k) * pitch_um / PI;
  pk_branch branch = {pitch_um, (int)fmax(1, round(half_turns)), -1};
  branch.side = half_turns > branch.boundary ? 1 : -1;
  return branch;
}

/* (k - K) Λ/π, without the whole turns by which spatial harmonics differ. */
static double complex distance_of(const pk_branch *branch, double complex k) {
  double complex distance = k * branch->pitch_um / PI - branch->boundary;
  return distance - 2 * round(0.5 * creal(distance));
}

double complex pk_branch_square(const pk_branch *branch, double complex k) {
  double complex distance = distance_of(branch, k);
  return distance * distance;
}

double complex pk_branch_product(const pk_branch *branch, double complex k, double complex dk_dk0) {
  return dk_dk0 * distance_of(branch, k);
}

void pk_branch_take_side(pk_branch *branch, double product) {
  if (product != 0 && !isnan(product)) {
    branch->side = product < 0 ? -1 : 1;
  }
}

/* The root that belongs to the branch: below or above K outside the stop band, decaying inside it.
 */
static double complex root_of(const pk_branch *branch, double complex s) {
  double complex root = csqrt(s); /* Re >= 0 */
  if (creal(s) < 0) {
    return cimag(root) < 0 ? -root : root;
  }
  return branch->side * root;
}

static double complex wavenumber_of(const pk_branch *branch, double complex s) {
  return (branch->boundary + root_of(branch, s)) * PI / branch->pitch_um;
}

void pk_branch_wavenumber(const pk_branch *branch, picket_quantity square_real,
                          picket_quantity square_imaginary, picket_quantity *k_real,
                          picket_quantity *k_imaginary) {
  double complex middle = wavenumber_of(branch, square_real.value + I * square_imaginary.value);
  double bar_real = 0, bar_imaginary = 0;
  for (int corner = 0; corner < 4; corner++) {
    double re = square_real.value + (corner & 1 ? 1 : -1) * square_real.uncertainty;
    double im = square_imaginary.value + (corner & 2 ? 1 : -1) * square_imaginary.uncertainty;
    double complex moved = wavenumber_of(branch, re + I * im) - middle;
    bar_real = fmax(bar_real, fabs(creal(moved)));
    bar_imaginary = fmax(bar_imaginary, fabs(cimag(moved)));
  }
  const char *note = square_real.note ? square_real.note : square_imaginary.note;
  if (isnan(square_real.uncertainty) || isnan(square_imaginary.uncertainty)) {
    bar_real = bar_imaginary = NAN; /* fmax would hide it */
  }
  *k_real = (picket_quantity){creal(middle), bar_real, note};
  *k_imaginary = (picket_quantity){cimag(middle), bar_imaginary, note};
}

picket_quantity pk_branch_group_index(const picket_quantity product[2],
                                      const picket_quantity square[2]) {
  double complex g = product[0].value + I * product[1].value;
  double complex s = square[0].value + I * square[1].value;
  double dg = product[0].uncertainty + product[1].uncertainty;
  double ds = square[0].uncertainty + square[1].uncertainty, size = cabs(s);
  if (!(creal(s) > 0)) {
    return (picket_quantity){NAN, NAN, "inside a stop band the wave does not propagate"};
  }
  double value = fabs(creal(g / csqrt(s)));
  double bar = dg / sqrt(size);
  bar += size > ds ? cabs(g) * (1 / sqrt(size - ds) - 1 / sqrt(size)) : INFINITY;
  if (isinf(bar)) {
    return (picket_quantity){value, NAN, "too near a band edge for an error bar"};
  }
  return (picket_quantity){value, bar, product[0].note};
}

double pk_branch_allowed(const pk_branch *branch, double square_real, double relative) {
  double root = sqrt(fabs(square_real));
  double k = square_real > 0 ? branch->boundary + branch->side * root : branch->boundary;
  return relative * k * (2 * root + relative * k);
}
