/* Second-order homogenisation of a stack of layers: S. M. Rytov, Sov. Phys. JETP 2, 466 (1956).
 *
 *   ε∥ = ⟨ε⟩,  1/ε⊥ = ⟨1/ε⟩                           (static limit)
 *   ε∥₂ = ε∥ + k0² ⟨P²⟩                               (field along the layers)
 *   ε⊥₂ = ε⊥ + k0² ⟨Q²⟩ ε∥ ε⊥³                        (field across them)
 *
 * ⟨·⟩ is the mean over a period; P and Q are the primitives of ε - ε∥ and 1/ε - 1/ε⊥ that have
 * zero mean. For two layers of shares f and 1 - f, P runs up and down in straight lines by
 * f (1 - f) Δε Λ, so ⟨P²⟩ is a twelfth of its square and Rytov's own formula comes out:
 * ε∥₂ = ε∥ + ⅓ [π (Λ/λ) f (1 - f) Δε]². */
#include "study/estimate.h"

/* ε or 1/ε of a layer. */
static double value(double permittivity, bool inverse) {
  return inverse ? 1 / permittivity : permittivity;
}

static double mean_of(int count, const double *boundaries, const double *permittivity,
                      bool inverse) {
  double sum = 0;
  for (int i = 0; i < count; i++) {
    sum += (boundaries[i + 1] - boundaries[i]) * value(permittivity[i], inverse);
  }
  return sum / (boundaries[count] - boundaries[0]);
}

/* ⟨P²⟩ - ⟨P⟩² of the primitive that starts at 0. P is linear in each layer, from p to q, so over
 * the layer the mean of P is (p + q)/2 and that of P² is (p² + pq + q²)/3. */
static double primitive_square(int count, const double *boundaries, const double *permittivity,
                               bool inverse, double mean) {
  double period = boundaries[count] - boundaries[0];
  double p = 0;
  double mean_p = 0;
  double mean_square = 0;
  for (int i = 0; i < count; i++) {
    double length = boundaries[i + 1] - boundaries[i];
    double q = p + (value(permittivity[i], inverse) - mean) * length;
    mean_p += length / period * (p + q) / 2;
    mean_square += length / period * (p * p + p * q + q * q) / 3;
    p = q;
  }
  return mean_square - mean_p * mean_p;
}

pk_rytov pk_rytov_average(int count, const double *boundaries, const double *permittivity,
                          double k0) {
  double along = mean_of(count, boundaries, permittivity, false);
  double inverse = mean_of(count, boundaries, permittivity, true);
  double across = 1 / inverse;
  double p2 = primitive_square(count, boundaries, permittivity, false, along);
  double q2 = primitive_square(count, boundaries, permittivity, true, inverse);
  pk_rytov average = {along + k0 * k0 * p2,
                      across + k0 * k0 * q2 * along * across * across * across};
  return average;
}
