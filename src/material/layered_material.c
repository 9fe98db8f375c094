/* A stack of thin layers across z as one anisotropic material: S. M. Rytov, Sov. Phys. JETP 2, 466
 * (1956), to second order in the pitch.
 *
 *   ε∥ = ⟨ε⟩,  1/ε⊥ = ⟨1/ε⟩
 *   ε∥₂ = ε∥ + k0² ⟨P²⟩                  for fields along the layers (x and y)
 *   ε⊥₂ = ε⊥ + k0² ⟨Q²⟩ ε∥ ε⊥³           for fields across them (z)
 *
 * with P and Q the primitives of ε - ε∥ and 1/ε - 1/ε⊥ over a period that have no mean. It is an
 * estimate: the error grows with the fourth power of pitch over wavelength. Slopes are differences
 * of the whole formula, the layers' own dispersion and k0² included. */

#include "base/memory.h"
#include "material/material_private.h"

/* Relative step in the wavelength and step in kelvin: smooth formulas, so differences are good to
 * the square of the step. */
#define WAVELENGTH_STEP 1e-4
#define KELVIN_STEP 1e-2

static const double TWO_PI = 6.283185307179586477;

typedef struct tensor {
  double complex along, across;
} tensor;

static double complex mean_of(int count, const double *length, const double complex *value) {
  double complex sum = 0;
  double period = 0;
  for (int i = 0; i < count; i++) {
    sum += length[i] * value[i];
    period += length[i];
  }
  return sum / period;
}

/* ⟨P²⟩ - ⟨P⟩² of the primitive that starts at 0. P is linear in each layer, from p to q, so over
 * the layer the mean of P is (p + q)/2 and that of P² is (p² + pq + q²)/3. */
static double complex primitive_square(int count, const double *length,
                                       const double complex *value) {
  double complex mean = mean_of(count, length, value), p = 0, first = 0, second = 0;
  double period = 0;
  for (int i = 0; i < count; i++) {
    double complex q = p + (value[i] - mean) * length[i];
    first += length[i] * (p + q) / 2;
    second += length[i] * (p * p + p * q + q * q) / 3;
    period += length[i];
    p = q;
  }
  first /= period;
  return second / period - first * first;
}

static tensor average(int count, const double *length, const double complex *permittivity,
                      double complex *inverse, double k0) {
  for (int i = 0; i < count; i++) {
    inverse[i] = 1 / permittivity[i];
  }
  double complex along = mean_of(count, length, permittivity);
  double complex across = 1 / mean_of(count, length, inverse);
  double complex p = primitive_square(count, length, permittivity);
  double complex q = primitive_square(count, length, inverse);
  return (tensor){along + k0 * k0 * p, across + k0 * k0 * q * along * across * across * across};
}

/* The tensor at a wavelength and temperature moved by a step of each layer's own slopes. */
static picket_status tensor_at(const pk_materials *materials, const pk_material *item,
                               double wavelength_um, double temperature_c, double stretch,
                               double kelvin, tensor *out) {
  int count = item->recipe.film_count;
  double complex *value = PK_NEW(materials->context, 2 * count, double complex);
  picket_status status = value ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; i < count && status == PICKET_OK; i++) {
    pk_medium layer;
    status = pk_materials_at(materials, item->recipe.film_material[i], wavelength_um, temperature_c,
                             &layer);
    if (status == PICKET_OK) { /* slope = k0 dε/dk0 */
      value[i] = layer.permittivity + stretch * layer.slope + kelvin * layer.temperature_slope;
    }
  }
  if (status == PICKET_OK) {
    *out = average(count, item->recipe.film_thickness_um, value, value + count,
                   TWO_PI / wavelength_um * (1 + stretch));
  }
  pk_free(materials->context, value);
  return status;
}

picket_status pk_layered_material_at(const pk_materials *materials, const pk_material *item,
                                     double wavelength_um, double temperature_c, pk_medium out[3]) {
  static const double stretch[5] = {0, WAVELENGTH_STEP, -WAVELENGTH_STEP, 0, 0};
  static const double kelvin[5] = {0, 0, 0, KELVIN_STEP, -KELVIN_STEP};
  tensor t[5];
  for (int i = 0; i < 5; i++) {
    picket_status status =
        tensor_at(materials, item, wavelength_um, temperature_c, stretch[i], kelvin[i], &t[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  out[0] = (pk_medium){t[0].along, (t[1].along - t[2].along) / (2 * WAVELENGTH_STEP),
                       (t[3].along - t[4].along) / (2 * KELVIN_STEP)};
  out[1] = out[0];
  out[2] = (pk_medium){t[0].across, (t[1].across - t[2].across) / (2 * WAVELENGTH_STEP),
                       (t[3].across - t[4].across) / (2 * KELVIN_STEP)};
  return PICKET_OK;
}
