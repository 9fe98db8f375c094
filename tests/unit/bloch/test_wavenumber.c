/* k(ω) on the matrices of ω(k): the two must agree on one grid. */
#include "bloch/wavenumber.h"

#include "bloch/resonance.h"
#include "unit/cells.h"
#include "unit/short_memory.h"

enum { NU = 12, NV = 15, CELLS = 50 };

static pk_wave wave_near(test_cell *c, pk_phase phase, double k0, double complex guess) {
  pk_wave wave = {0};
  assert_int_equal(pk_wave_near(c->solver, phase, k0, guess, NULL, &wave), PICKET_OK);
  assert_true(wave.residual <= PK_RESIDUAL_LIMIT);
  return wave;
}

/* |xᵀ T| / (k0² |B x|) for a left vector. */
static double left_residual(const test_cell *c, pk_phase phase, double k0, const pk_wave *wave) {
  const pk_pattern *p = pk_operator_pattern(c->op);
  double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
  double complex *product = malloc((size_t)p->n * sizeof *product);
  phase.xi = wave->xi;
  pk_operator_values(c->op, phase, k0 * k0, values);
  pk_sparse_transposed_times_complex(p, values, wave->left, product);
  double size = 0, weight = 0;
  for (int64_t i = 0; i < p->n; i++) {
    size += creal(product[i] * conj(product[i]));
    double m = cabs(pk_operator_mass(c->op)[i] * wave->left[i]);
    weight += m * m;
  }
  free(values);
  free(product);
  return sqrt(size / weight) / (k0 * k0);
}

/* Fifty random cells, both polarizations: the lowest two bands at a k inside the zone, then ξ at
 * those frequencies from a guess that is off by 0.2 % (other waves are farther). */
static void both_routes_agree_on_random_cells(void **state) {
  (void)state;
  uint64_t seed = 2022;
  for (int i = 0; i < CELLS; i++) {
    pk_lateral lateral = i % 2 ? PK_LATERAL_PERIODIC : PK_LATERAL_ELECTRIC;
    test_cell c = random_cell(lateral, &seed);
    double kz = random_in(&seed, 0.3, 0.8), kx = random_in(&seed, 0.1, 0.9);
    cell_lay_even(&c, NU, NV);
    for (int k = 0; k < 2; k++) {
      cell_open(&c, (pk_polarization)k, 1, 4);
      double lambda[2];
      lowest(&c, kz, kx, 2, lambda);
      pk_phase phase = pk_phase_at(&c.cell, kz, kx);
      for (int band = 0; band < 2; band++) {
        double k0 = sqrt(lambda[band]);
        pk_wave wave = wave_near(&c, phase, k0, phase.xi * (1 + 0.002 * I));
        assert_near(cabs(wave.xi - phase.xi), 0, 1e-10);
        assert_true(left_residual(&c, phase, k0, &wave) < PK_RESIDUAL_LIMIT);
        pk_wave_clear(c.context, &wave);
      }
      cell_shut(&c);
    }
    cell_close(&c);
  }
}

/* Waves come in pairs: without a lateral phase ξ and 1/ξ solve one equation. */
static void waves_come_in_pairs(void **state) {
  (void)state;
  uint64_t seed = 9;
  for (int k = 0; k < 4; k++) {
    test_cell c = random_cell(PK_LATERAL_ELECTRIC, &seed);
    cell_lay_even(&c, NU, NV);
    cell_open(&c, (pk_polarization)(k % 2), 1, 4);
    double lambda;
    lowest(&c, 0.6, 0, 1, &lambda);
    double complex lossy[4];
    for (int m = 0; m < 4; m++) {
      lossy[m] = c.media.permittivity[m] * (1 + 0.01 * m * I);
    }
    pk_operator_load(c.op, lossy);
    pk_phase phase = pk_phase_at(&c.cell, 0.6, 0);
    double k0 = sqrt(lambda);
    pk_wave wave = wave_near(&c, phase, k0, phase.xi * 0.99);
    pk_wave back = wave_near(&c, phase, k0, 1 / wave.xi * (1 + 0.01 * I));
    assert_true(fabs(cabs(wave.xi) - 1) > 1e-4); /* loss: the pair is not a conjugate one */
    assert_near(cabs(wave.xi * back.xi - 1), 0, 1e-10);
    pk_wave_clear(c.context, &wave);
    pk_wave_clear(c.context, &back);
    cell_close(&c);
  }
}

/* In the first gap of a single row with walls: ξ is negative and its pair 1/ξ; just outside it lies
 * on the circle. Edges are the two lowest frequencies at ξ = -1 (a narrow guide: one lateral mode).
 */
static void waves_in_a_gap_only_decay(void **state) {
  (void)state;
  const double index[] = {1.4, 3};
  for (int k = 0; k < 2; k++) {
    test_cell c = cell_of(PK_LATERAL_MAGNETIC, 0.3, 0.25, 0, 2, index);
    cell_rect(&c, 1, 0.03, 0.01, 0.13, 0.17);
    cell_lay_even(&c, NU, 10);
    if (k ==
        PK_EY) { /* a magnetic wall leaves ey free: both polarizations get the wall of slope zero */
      c.base.v.low = c.base.v.high = PK_END_FREE;
    }
    cell_open(&c, (pk_polarization)k, 1, 4);
    double edge[2], below, above;
    lowest(&c, 1, 0, 2, edge);
    below = sqrt(edge[0]);
    above = sqrt(edge[1]);
    assert_true(above > 1.02 * below);
    pk_phase phase = {-1, 1, 0};
    for (int i = 1; i < 6; i++) {
      double k0 = below + (above - below) * i / 6;
      pk_wave wave = wave_near(&c, phase, k0, -0.8);
      assert_true(creal(wave.xi) < 0);
      assert_near(cimag(wave.xi), 0, 1e-10);
      pk_wave pair = wave_near(&c, phase, k0, 1 / wave.xi + 0.01);
      assert_near(cabs(pair.xi * wave.xi - 1), 0, 1e-10);
      pk_wave_clear(c.context, &wave);
      pk_wave_clear(c.context, &pair);
    }
    pk_wave wave = wave_near(&c, phase, 0.97 * below, cexp(2.7 * I));
    assert_near(cabs(wave.xi), 1, 1e-10);
    pk_wave_clear(c.context, &wave);
    cell_close(&c);
  }
}

static double complex wavenumber_at(test_cell *c, pk_phase phase, double k0, double complex guess) {
  assert_int_equal(pk_media_set(&c->media, k0, c->op), PICKET_OK);
  pk_wave wave = wave_near(c, phase, k0, guess);
  double complex k = -I * clog(wave.xi) / c->cell.pitch_um;
  pk_wave_clear(c->context, &wave);
  return k;
}

/* dk/dk0 by perturbation against central differences, with dispersive and absorbing media, for a
 * propagating and a decaying wave. Differences at 1e-4 are off by 1e-7 (curvature). */
static void slopes_are_derivatives(void **state) {
  (void)state;
  const double index[] = {1.4, 3}, step = 1e-4;
  static const double B[] = {8.5}, C[] = {0.25};
  for (int k = 0; k < 4; k++) {
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.3, 0.4, 0, 2, index);
    assert_int_equal(pk_materials_add_sellmeier(c.materials, nowhere, "s", 1, B, C), PICKET_OK);
    assert_int_equal(pk_materials_add_constant(c.materials, nowhere, "a", 2, 0.01, 0), PICKET_OK);
    cell_rect(&c, 2, 0.03, 0.01, 0.13, 0.17);
    cell_rect(&c, 3, -0.1, 0.1, 0.1, 0.1);
    cell_lay_even(&c, NU, NV);
    double k0 = k / 2 ? 5.5 : 3.0;
    cell_open(&c, (pk_polarization)(k % 2), 1, k0);
    pk_phase phase = {1, cexp(0.3 * I), 0};
    pk_wave wave = wave_near(&c, phase, k0, k / 2 ? -0.8 + 0.1 * I : cexp(I * k0 * 0.3 * 2));
    double complex slope;
    assert_int_equal(pk_wave_slope(&c.media, c.op, phase, k0, 0.3, 0, &wave, &slope), PICKET_OK);
    double complex up = wavenumber_at(&c, phase, k0 + step, wave.xi * (1 + 1e-3 * I));
    double complex down = wavenumber_at(&c, phase, k0 - step, wave.xi * (1 + 1e-3 * I));
    assert_near(cabs((up - down) / (2 * step) - slope), 0, 3e-7 * cabs(slope));
    pk_wave_clear(c.context, &wave);
    cell_close(&c);
  }
}

/* A start vector and a guess on the spot change nothing. */
static void a_start_does_not_change_the_wave(void **state) {
  (void)state;
  uint64_t seed = 31;
  test_cell c = random_cell(PK_LATERAL_ELECTRIC, &seed);
  cell_lay_even(&c, NU, NV);
  cell_open(&c, PK_HY, 1, 4);
  double lambda;
  lowest(&c, 0.5, 0, 1, &lambda);
  pk_phase phase = pk_phase_at(&c.cell, 0.5, 0);
  pk_wave wave = wave_near(&c, phase, sqrt(lambda), phase.xi * 1.01), again = {0};
  assert_int_equal(
      pk_wave_near(c.solver, phase, sqrt(lambda), phase.xi * (1 + 0.003 * I), wave.right, &again),
      PICKET_OK);
  assert_near(cabs(again.xi - wave.xi), 0, 1e-11);
  double complex dot = 0;
  for (int64_t i = 0; i < pk_operator_size(c.op); i++) {
    dot += conj(wave.right[i]) * again.right[i];
  }
  assert_near(cabs(dot), 1, 1e-9); /* both of unit norm */
  pk_wave_clear(c.context, &wave);
  pk_wave_clear(c.context, &again);
  pk_wave_clear(c.context, &again);
  cell_close(&c);
}

static picket_status near_and_slope(test_cell *c) {
  pk_solver *solver = NULL;
  pk_wave wave = {0};
  double complex slope;
  pk_phase phase = {1, 1, 0};
  picket_status status = pk_solver_create(c->context, c->op, &solver);
  if (status == PICKET_OK) {
    status = pk_wave_near(solver, phase, 3, cexp(I), NULL, &wave);
    assert_true((status == PICKET_OK) == (wave.right != NULL));
  }
  if (status == PICKET_OK) {
    status = pk_wave_slope(&c->media, c->op, phase, 3, 0.3, 0, &wave, &slope);
  }
  pk_wave_clear(c->context, &wave);
  pk_solver_free(solver);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  const double index[] = {1.4, 3};
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    test_cell c = cell_in(context, PK_LATERAL_ELECTRIC, 0.3, 0.4, 0, 2, index);
    cell_rect(&c, 1, 0, 0, 0.2, 0.2);
    cell_lay_even(&c, 7, 7);
    cell_open(&c, PK_EY, 1, 3);
    memory.fail_at = memory.asked + n;
    picket_status status = near_and_slope(&c);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 12);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(both_routes_agree_on_random_cells),
      cmocka_unit_test(waves_come_in_pairs),
      cmocka_unit_test(waves_in_a_gap_only_decay),
      cmocka_unit_test(slopes_are_derivatives),
      cmocka_unit_test(a_start_does_not_change_the_wave),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
