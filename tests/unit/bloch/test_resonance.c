/* Modes with the media at their own frequency: λ(k0) = k0² holds, and slopes by Hellmann and
 * Feynman are the derivatives of ω(k). */
#include "bloch/resonance.h"

#include "unit/cells.h"
#include "unit/short_memory.h"

enum { NU = 12, NV = 15 };

/* Medium 2 is dispersive. */
static const double INDEX[] = {1.4, 2.2};
static const double B[] = {8.5}, C[] = {0.25};

static void add_dispersive(test_cell *c) {
  assert_int_equal(pk_materials_add_sellmeier(c->materials, nowhere, "s", 1, B, C), PICKET_OK);
}

/* A lattice without any symmetry; opened at k0 = 4. */
static test_cell lattice(pk_polarization polarization, double shift) {
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.36, 0.5, shift, 2, INDEX);
  add_dispersive(&c);
  cell_rect(&c, 2, 0.03, 0.01, 0.13, 0.17);
  cell_disc(&c, 1, -0.1, 0.1, 0.17);
  cell_lay_even(&c, NU, NV);
  cell_open(&c, polarization, 1, 4);
  return c;
}

static test_cell stack(pk_polarization polarization) {
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.36, 0, 0, 2, INDEX);
  add_dispersive(&c);
  c.cell.span_um = 1;
  cell_layer(&c, 2, -0.1, 0.05);
  cell_lay_even(&c, 24, 1);
  cell_open(&c, polarization, 1, 4);
  return c;
}

static test_cell example(int i) {
  static const double SHIFT[] = {0, 0.5, 0.25};
  return i < 6 ? lattice((pk_polarization)(i % 2), SHIFT[i / 2]) : stack((pk_polarization)(i % 2));
}

static pk_resonance near(test_cell *c, double kz, double k0, const double complex *reference) {
  pk_resonance resonance = {0};
  assert_int_equal(pk_resonance_near(c->solver, &c->media, pk_phase_at(&c->cell, kz, 0.2), k0,
                                     reference, &resonance),
                   PICKET_OK);
  assert_true(resonance.known);
  return resonance;
}

/* The media at the frequency found give a mode of that frequency: to 1e-12 of λ. */
static void the_frequency_is_the_one_of_its_media(void **state) {
  (void)state;
  for (int i = 0; i < 8; i++) {
    test_cell c = example(i);
    pk_phase phase = pk_phase_at(&c.cell, 0.63, 0.2);
    pk_resonance mode = near(&c, 0.63, 2.5, NULL);
    assert_int_equal(pk_media_set(&c.media, mode.k0, c.op), PICKET_OK);
    assert_true(c.media.dispersive);
    double square = mode.k0 * mode.k0;
    assert_true(pk_solver_residual(c.solver, phase, square, mode.field) < PK_RESIDUAL_LIMIT);
    pk_mode again;
    int found = 0;
    assert_int_equal(
        pk_solver_modes(c.solver, phase, square * 0.999, 1, mode.field, &again, &found), PICKET_OK);
    assert_near(creal(again.lambda), square, 1e-12 * square);
    pk_modes_clear(c.context, found, &again);
    /* A far start leads to the same mode if that is the nearest one. */
    pk_resonance far = near(&c, 0.63, 0.9 * mode.k0, mode.field);
    assert_near(far.k0, mode.k0, 1e-12 * mode.k0);
    pk_resonance_clear(c.context, &far);
    pk_resonance_clear(c.context, &mode);
    cell_close(&c);
  }
}

/* Central differences at 1e-4 of π/pitch: 1e-8 by curvature, 1e-10 by rounding. */
static void slopes_are_derivatives_of_the_bands(void **state) {
  (void)state;
  const double step = 1e-4;
  for (int i = 0; i < 8; i++) {
    test_cell c = example(i);
    pk_resonance mode = near(&c, 0.63, 2.5, NULL);
    double slope;
    assert_int_equal(pk_resonance_slope(&c.media, c.op, pk_phase_at(&c.cell, 0.63, 0.2), 0.36,
                                        c.cell.shift, &mode, &slope),
                     PICKET_OK);
    pk_resonance up = near(&c, 0.63 + step, mode.k0, mode.field);
    pk_resonance down = near(&c, 0.63 - step, mode.k0, mode.field);
    double difference = (up.k0 - down.k0) / (2 * step * PI / 0.36);
    assert_near(slope, difference, 1e-7);
    assert_true(fabs(slope) > 0.01 && fabs(slope) < 1); /* slower than light in vacuum */
    pk_resonance_clear(c.context, &mode);
    pk_resonance_clear(c.context, &up);
    pk_resonance_clear(c.context, &down);
    cell_close(&c);
  }
}

static void bands_are_level_at_the_zone_edge(void **state) {
  (void)state;
  for (int i = 0; i < 2; i++) {
    test_cell c = stack((pk_polarization)i);
    pk_phase phase = pk_phase_at(&c.cell, 1, 0.2);
    pk_resonance mode = near(&c, 1, 3, NULL);
    double slope;
    assert_int_equal(pk_resonance_slope(&c.media, c.op, phase, 0.36, 0, &mode, &slope), PICKET_OK);
    assert_near(slope, 0, 1e-10);
    pk_resonance_clear(c.context, &mode);
    cell_close(&c);
  }
}

/* Without dispersion a resonance is a plain eigenvalue. */
static void without_dispersion_nothing_is_iterated(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.36, 0.5, 0, 2, INDEX);
  cell_rect(&c, 1, 0.03, 0.01, 0.13, 0.17);
  cell_lay_even(&c, NU, NV);
  cell_open(&c, PK_EY, 1, 4);
  double lambda;
  lowest(&c, 0.63, 0.2, 1, &lambda);
  pk_resonance mode = near(&c, 0.63, 1.02 * sqrt(lambda), NULL);
  assert_near(mode.k0, sqrt(lambda), 1e-12);
  pk_resonance_clear(c.context, &mode);
  cell_close(&c);
}

/* From a guess nearer to the second mode, the likeness to the first decides. */
static void the_reference_decides_which_mode(void **state) {
  (void)state;
  test_cell c = lattice(PK_EY, 0);
  pk_mode modes[2];
  int found = 0;
  pk_phase phase = pk_phase_at(&c.cell, 0.63, 0.2);
  assert_int_equal(pk_solver_modes(c.solver, phase, 0, 2, NULL, modes, &found), PICKET_OK);
  assert_int_equal(found, 2);
  double first = sqrt(creal(modes[0].lambda)), second = sqrt(creal(modes[1].lambda));
  pk_resonance mode = near(&c, 0.63, 0.2 * first + 0.8 * second, modes[0].field);
  assert_true(pk_overlap(c.op, mode.field, modes[0].field) > 0.9);
  assert_true(fabs(mode.k0 - first) < fabs(mode.k0 - second));
  pk_resonance_clear(c.context, &mode);
  mode = near(&c, 0.63, 0.2 * first + 0.8 * second, NULL);
  assert_true(pk_overlap(c.op, mode.field, modes[1].field) > 0.9);
  pk_resonance_clear(c.context, &mode);
  pk_modes_clear(c.context, found, modes);
  cell_close(&c);
}

/* A table that ends below the frequency: the mode is found with the media at the end of the table
 * and marked. */
static void modes_outside_the_known_range_are_marked(void **state) {
  (void)state;
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.36, 0, 0, 2, INDEX);
  static const double WAVELENGTH[] = {0.4, 0.5, 0.6, 0.7}, N[] = {2.2, 2.1, 2.05, 2.02}, K[4] = {0};
  assert_int_equal(pk_materials_add_table(c.materials, nowhere, "t", 4, WAVELENGTH, N, K),
                   PICKET_OK);
  cell_layer(&c, 2, -0.1, 0.05);
  cell_lay_even(&c, 24, 1);
  cell_open(&c, PK_EY, 1, 4);
  pk_resonance mode;
  assert_int_equal(
      pk_resonance_near(c.solver, &c.media, pk_phase_at(&c.cell, 1, 0), 4, NULL, &mode), PICKET_OK);
  assert_false(mode.known);
  assert_true(2 * PI / mode.k0 > 0.7);
  assert_near(creal(c.media.permittivity[2]), 2.02 * 2.02, 1e-12);
  pk_resonance_clear(c.context, &mode);
  cell_close(&c);
}

static void overlaps_lie_between_none_and_one(void **state) {
  (void)state;
  test_cell c = lattice(PK_EY, 0);
  pk_mode modes[3];
  int found = 0;
  assert_int_equal(
      pk_solver_modes(c.solver, pk_phase_at(&c.cell, 0.63, 0.2), 0, 3, NULL, modes, &found),
      PICKET_OK);
  for (int i = 0; i < found; i++) {
    for (int j = 0; j < found; j++) {
      assert_near(pk_overlap(c.op, modes[i].field, modes[j].field), i == j, 1e-12);
    }
  }
  for (int64_t p = 0; p < pk_operator_size(c.op); p++) {
    modes[0].field[p] = 3 * I * modes[1].field[p] + 4 * modes[2].field[p];
  }
  assert_near(pk_overlap(c.op, modes[0].field, modes[1].field), 9.0 / 25, 1e-12);
  pk_modes_clear(c.context, found, modes);
  cell_close(&c);
}

static picket_status near_and_slope(test_cell *c) {
  pk_solver *solver = NULL;
  pk_resonance mode = {0};
  pk_phase phase = pk_phase_at(&c->cell, 0.63, 0.2);
  double slope;
  picket_status status = pk_solver_create(c->context, c->op, &solver);
  if (status == PICKET_OK) {
    status = pk_resonance_near(solver, &c->media, phase, 3, NULL, &mode);
    assert_true((status == PICKET_OK) == (mode.field != NULL));
  }
  if (status == PICKET_OK) {
    status = pk_resonance_slope(&c->media, c->op, phase, 0.36, 0, &mode, &slope);
  }
  pk_resonance_clear(c->context, &mode);
  pk_solver_free(solver);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    test_cell c = cell_in(context, PK_LATERAL_ELECTRIC, 0.36, 0.4, 0, 2, INDEX);
    add_dispersive(&c);
    cell_rect(&c, 2, 0, 0, 0.2, 0.2);
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
      cmocka_unit_test(the_frequency_is_the_one_of_its_media),
      cmocka_unit_test(slopes_are_derivatives_of_the_bands),
      cmocka_unit_test(bands_are_level_at_the_zone_edge),
      cmocka_unit_test(without_dispersion_nothing_is_iterated),
      cmocka_unit_test(the_reference_decides_which_mode),
      cmocka_unit_test(modes_outside_the_known_range_are_marked),
      cmocka_unit_test(overlaps_lie_between_none_and_one),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
