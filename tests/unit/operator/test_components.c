/* Fields at nodes: plane waves and closed guides whose differences are known in closed form on the
 * grid, and the flux against the balance of power.h. */
#include "operator/components.h"

#include "unit/operator/samples.h"
#include "unit/short_memory.h"

enum { NU = 9, NV = 12 };
static const double PITCH = 0.6, SPAN = 0.8, INDEX = 2;

/* Numbers of order one after some hundred operations. */
static const double ROUNDING = 1e-12;

typedef double complex (*lateral_shape)(double x);

static double complex wave_x(double x) {
  return cexp(I * 0.61 * PI / SPAN * x);
}

static double complex sine(double x) {
  return sin(PI * (x / SPAN + 0.5));
}

static double complex cosine(double x) {
  return cos(PI * (x / SPAN + 0.5));
}

/* A cell of one medium on an even grid. */
static test_cell plain_cell(picket_context *context, pk_lateral lateral, double shift, pk_end end,
                            pk_polarization polarization) {
  test_cell c = cell_in(context, lateral, PITCH, SPAN, shift, 1, &INDEX);
  cell_lay_even(&c, NU, NV);
  c.base.v.low = c.base.v.high = end;
  cell_open(&c, polarization, 1, 4);
  return c;
}

static double complex *sampled(const test_cell *c, double complex k, lateral_shape shape) {
  double complex *u = malloc((size_t)pk_operator_size(c->op) * sizeof *u);
  int nv = pk_operator_lines(c->op, PK_V);
  for (int iu = 0; iu < pk_operator_lines(c->op, PK_U); iu++) {
    for (int iv = 0; iv < nv; iv++) {
      double z, x, length;
      pk_operator_line(c->op, PK_U, iu, &z, &length);
      pk_operator_line(c->op, PK_V, iv, &x, &length);
      u[iu * nv + iv] = cexp(I * k * z) * shape(x);
    }
  }
  return u;
}

/* What differences make of the lateral shape: (shape(x + h) - shape(x - h)) / 2h inside, one-sided
 * on a wall where the field vanishes, nothing on one where the slope does. */
static double complex slope(lateral_shape shape, pk_end end, double x, double h) {
  double half = 0.5 * SPAN, near = 1e-9;
  if (end != PK_END_PERIODIC && x < -half + near) {
    return end == PK_END_ZERO ? shape(x + h) / h : 0;
  }
  if (end != PK_END_PERIODIC && x > half - near) {
    return end == PK_END_ZERO ? -shape(x - h) / h : 0;
  }
  return (shape(x + h) - shape(x - h)) / (2 * h);
}

static void check_plain(pk_lateral lateral, double shift, pk_end end, lateral_shape shape) {
  for (int polarization = 0; polarization < 2; polarization++) {
    picket_context *context = NULL;
    assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
    test_cell c = plain_cell(context, lateral, shift, end, (pk_polarization)polarization);
    pk_phase phase = pk_phase_at(&c.cell, 0.37, 0.61);
    phase.kx = 0;
    double k = 0.37 * PI / PITCH, hz = PITCH / NU, hx = SPAN / NV;
    double weight = polarization == PK_HY ? 1 / (INDEX * INDEX) : 1;
    double complex *u = sampled(&c, k, shape);
    pk_components f;
    assert_int_equal(pk_components_take(c.context, c.op, c.cell.geometry, phase, k, u, &f),
                     PICKET_OK);
    assert_int_equal(f.nz, NU + 1);
    assert_int_equal(f.nx, NV + 1);
    for (int i = 0; i < f.nz * f.nx; i++) {
      double x = f.x[i % f.nx];
      bool wall = end == PK_END_ZERO && (i % f.nx == 0 || i % f.nx == NV);
      double complex along = wall ? 0 : weight * 2 * I * sin(0.5 * k * hz) / hz * shape(x);
      assert_near(f.z[i / f.nx], -0.5 * PITCH + i / f.nx * hz, ROUNDING);
      assert_near(cabs(f.u[i] - (wall ? 0 : shape(x))), 0, ROUNDING);
      assert_near(cabs(f.along[i] - along), 0, 10 * ROUNDING);
      assert_near(cabs(f.across[i] - weight * slope(shape, end, x, hx)), 0, 10 * ROUNDING);
      assert_near(cabs(f.permittivity[i] - INDEX * INDEX), 0, ROUNDING);
    }
    pk_components_clear(&f);
    pk_components_clear(&f);
    free(u);
    cell_close(&c);
  }
}

static void plane_waves_are_exact(void **state) {
  (void)state;
  check_plain(PK_LATERAL_PERIODIC, 0, PK_END_PERIODIC, wave_x);
  check_plain(PK_LATERAL_PERIODIC, 1.0 / 3, PK_END_PERIODIC, wave_x);
}

static void closed_guides_are_exact(void **state) {
  (void)state;
  check_plain(PK_LATERAL_ELECTRIC, 0, PK_END_ZERO, sine);
  check_plain(PK_LATERAL_ELECTRIC, 0, PK_END_FREE, cosine);
}

/* Both count the same power in different places; they differ by what the residual of the mode
 * (1e-10 and less) leaves. */
static void flux_is_the_forward_power(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    if (c.cell.shift == 0) {
      pk_phase phase = sample_phase(&c);
      pk_power_window window = pk_power_window_of(c.op);
      pk_mode modes[2];
      int found = 0;
      assert_int_equal(pk_solver_modes(c.solver, phase, -0.3, 2, NULL, modes, &found), PICKET_OK);
      for (int m = 0; m < found; m++) {
        double k0 = sqrt(creal(modes[m].lambda));
        pk_power power = pk_power_balance(c.op, phase, k0, window, modes[m].field);
        double flux = pk_components_flux(c.op, phase, window, modes[m].field);
        assert_true(fabs(flux) > 1e-3);
        assert_near(flux / power.forward, 1, 1e-8);
      }
      pk_modes_clear(c.context, found, modes);
    }
    cell_close(&c);
  }
}

/* Lines on an interface see half of either medium (even spacing), and so does hy's η across it. */
static void interfaces_are_averaged(void **state) {
  (void)state;
  static const double index[2] = {1.5, 3};
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.6, 0, 0, 2, index);
  cell_layer(&c, 1, -0.1, 0.2);
  cell_lay_even(&c, 6, 1);
  cell_open(&c, PK_HY, 1, 4);
  double complex u[6] = {1, 1, 1, 1, 1, 1};
  pk_components f;
  pk_phase phase = {1, 1, 0};
  assert_int_equal(pk_components_take(c.context, c.op, c.cell.geometry, phase, 0, u, &f),
                   PICKET_OK);
  assert_int_equal(f.nx, 1);
  static const double expected[7] = {2.25, 2.25, 5.625, 9, 9, 5.625, 2.25};
  for (int i = 0; i < 7; i++) {
    assert_near(creal(f.permittivity[i]), expected[i], ROUNDING);
    assert_near(cabs(f.along[i]) + cabs(f.across[i]), 0, ROUNDING);
  }
  pk_components_clear(&f);
  cell_close(&c);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {0};
    test_cell c =
        plain_cell(short_memory_context(&memory), PK_LATERAL_PERIODIC, 0, PK_END_PERIODIC, PK_HY);
    double complex *u = sampled(&c, 1, wave_x);
    pk_components f = {0};
    long before = memory.living;
    memory.fail_at = memory.asked + n;
    picket_status status =
        pk_components_take(c.context, c.op, c.cell.geometry, pk_phase_at(&c.cell, 0, 0), 0, u, &f);
    if (status != PICKET_OK) {
      assert_int_equal(status, PICKET_ERROR_MEMORY);
      assert_null(f.u);
      assert_int_equal(memory.living, before);
    }
    pk_components_clear(&f);
    free(u);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (status == PICKET_OK) {
      assert_true(n > 6);
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(plane_waves_are_exact),     cmocka_unit_test(closed_guides_are_exact),
      cmocka_unit_test(flux_is_the_forward_power), cmocka_unit_test(interfaces_are_averaged),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
