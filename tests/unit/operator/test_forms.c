/* Bilinear forms against differences of the assembled values: any l and r, so that every entry of
 * the derivative counts. */
#include "unit/operator/samples.h"

/* lᵀ T r. */
static double complex form_of(const test_cell *c, pk_phase phase, double shift,
                              const double complex *l, const double complex *r) {
  const pk_pattern *p = pk_operator_pattern(c->op);
  double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
  double complex *product = malloc((size_t)p->n * sizeof *product);
  pk_operator_values(c->op, phase, shift, values);
  pk_sparse_times_complex(p, values, r, product);
  double complex sum = 0;
  for (int64_t i = 0; i < p->n; i++) {
    sum += l[i] * product[i];
  }
  free(values);
  free(product);
  return sum;
}

typedef struct pair {
  double complex *l, *r;
} pair;

static pair random_pair(const test_cell *c, uint64_t *seed) {
  int64_t n = pk_operator_size(c->op);
  pair x = {malloc((size_t)n * sizeof *x.l), malloc((size_t)n * sizeof *x.r)};
  random_vector(seed, n, x.l);
  random_vector(seed, n, x.r);
  return x;
}

static void pair_free(pair x) {
  free(x.l);
  free(x.r);
}

/* Errors of a central difference at 1e-4: 1e-8 by curvature, 1e-11 by rounding. */
static void media_forms_are_derivatives(void **state) {
  (void)state;
  const double step = 1e-4;
  uint64_t seed = 3;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    pair x = random_pair(&c, &seed);
    pk_phase phase = sample_phase(&c);
    phase.xi *= 0.8;
    double complex base[3] = {2 + 0.1 * I, 6 + 0.5 * I, 9}, stiff[3], mass[3];
    pk_operator_load(c.op, base);
    pk_operator_media_forms(c.op, phase, x.l, x.r, stiff, mass);
    double scale = cabs(form_of(&c, phase, 0, x.l, x.r));
    for (int m = 0; m < 3; m++) {
      double complex moved[3] = {base[0], base[1], base[2]}, sum[2], masses[2];
      for (int side = 0; side < 2; side++) {
        moved[m] = base[m] + (side ? step : -step);
        pk_operator_load(c.op, moved);
        sum[side] = form_of(&c, phase, 0, x.l, x.r);
        masses[side] = pk_operator_mass_form(c.op, x.l, x.r);
      }
      assert_true(cabs((sum[1] - sum[0]) / (2 * step) - stiff[m]) < 1e-7 * scale);
      assert_true(cabs((masses[1] - masses[0]) / (2 * step) - mass[m]) < 1e-9);
    }
    pair_free(x);
    cell_close(&c);
  }
}

static void phase_forms_are_derivatives(void **state) {
  (void)state;
  const double step = 1e-5;
  uint64_t seed = 4;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    pair x = random_pair(&c, &seed);
    pk_phase phase = sample_phase(&c);
    phase.xi *= 0.9;
    double scale = cabs(form_of(&c, phase, 0, x.l, x.r));
    for (int axis = 0; axis < 2; axis++) {
      double complex sum[2];
      for (int side = 0; side < 2; side++) {
        pk_phase moved = phase;
        *(axis == 0 ? &moved.xi : &moved.chi) *= cexp(I * (side ? step : -step));
        sum[side] = form_of(&c, moved, 0, x.l, x.r);
      }
      double complex form = I * pk_operator_phase_form(c.op, phase, axis == 0, axis == 1, x.l, x.r);
      assert_true(cabs((sum[1] - sum[0]) / (2 * step) - form) < 1e-9 * scale);
    }
    pair_free(x);
    cell_close(&c);
  }
}

/* T is linear in k0², so the mass form is a difference of any size. */
static void the_mass_form_is_the_part_of_the_frequency(void **state) {
  (void)state;
  uint64_t seed = 5;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    pair x = random_pair(&c, &seed);
    pk_phase phase = sample_phase(&c);
    double complex difference = form_of(&c, phase, 0, x.l, x.r) - form_of(&c, phase, 2.5, x.l, x.r);
    double scale = cabs(form_of(&c, phase, 0, x.l, x.r));
    assert_true(cabs(difference - 2.5 * pk_operator_mass_form(c.op, x.l, x.r)) < 1e-13 * scale);
    pair_free(x);
    cell_close(&c);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(media_forms_are_derivatives),
      cmocka_unit_test(phase_forms_are_derivatives),
      cmocka_unit_test(the_mass_form_is_the_part_of_the_frequency),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
