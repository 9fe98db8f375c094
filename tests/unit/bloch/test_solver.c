/* Eigenpairs at a Bloch phase: everything that the physics says must not change the frequencies, to
 * rounding on one grid, and multiple levels with all their copies. */
#include "unit/cells.h"
#include "unit/short_memory.h"

enum { NU = 14, NV = 18, COUNT = 6, MOST_SHAPES = 4 };

/* Rounding in two solves: 3e-14 at most was seen. A disc that touches a grid line would give 1e-11,
 * since the length of its arc in a box there goes as the root of its distance. */
static const double SAME = 1e-12;

static const double INDEX[] = {1.2, 3.3, 2.1};

/* A lattice cell of rectangles and discs by hand, so that it can be moved, turned and repeated. */
typedef struct drawing {
  double pitch, span;
  double at[MOST_SHAPES][2], size[MOST_SHAPES][2]; /* size[1] == 0: a disc */
} drawing;

static const drawing RECTANGLES = {0.56,
                                   0.72,
                                   {{0.02, 0.01}, {0.2, -0.15}, {-0.21, 0.2}, {-0.1, -0.2}},
                                   {{0.25, 0.3}, {0.1, 0.21}, {0.13, 0.15}, {0.12, 0.17}}};
static const drawing ROUNDED = {0.56,
                                0.72,
                                {{0.02, 0.01}, {0.2, -0.15}, {-0.17, 0.2}, {-0.1, -0.2}},
                                {{0.25, 0.3}, {0.167, 0}, {0.231, 0}, {0.194, 0}}};

static void paint(test_cell *c, const drawing *d, double z, double x) {
  for (int i = 0; i < MOST_SHAPES; i++) {
    int medium = 1 + i % 2;
    /* Back into the cell. */
    double at_z = remainder(d->at[i][0] + z, c->cell.pitch_um);
    double at_x = remainder(d->at[i][1] + x, c->cell.span_um);
    if (d->size[i][1] > 0) {
      cell_rect(c, medium, at_z, at_x, d->size[i][0], d->size[i][1]);
    } else {
      cell_disc(c, medium, at_z, at_x, d->size[i][0]);
    }
  }
}

static test_cell draw(const drawing *d, pk_polarization polarization, int nu, int nv) {
  test_cell c = cell_of(PK_LATERAL_PERIODIC, d->pitch, d->span, 0, 3, INDEX);
  paint(&c, d, 0, 0);
  cell_lay_even(&c, nu, nv);
  cell_open(&c, polarization, 1, 4);
  return c;
}

static void solve(const drawing *d, pk_polarization polarization, double kz, double kx,
                  double *lambda) {
  test_cell c = draw(d, polarization, NU, NV);
  lowest(&c, kz, kx, COUNT, lambda);
  cell_close(&c);
}

static void assert_same(const double *a, const double *b, double factor) {
  for (int i = 0; i < COUNT; i++) {
    assert_near(factor * a[i], b[i], SAME * (1 + b[i]));
  }
}

/* The reference and four drawings that must have its frequencies. */
static void moved_and_mirrored_cells_sound_alike(void **state) {
  (void)state;
  for (int k = 0; k < 4; k++) {
    const drawing *original = k / 2 ? &ROUNDED : &RECTANGLES;
    pk_polarization polarization = (pk_polarization)(k % 2);
    double expected[COUNT], lambda[COUNT];
    solve(original, polarization, 0.37, 0.61, expected);
    drawing moved = *original, scaled = *original, swapped = *original;
    drawing flipped[2] = {*original, *original};
    scaled.pitch *= 2.5;
    scaled.span *= 2.5;
    swapped.pitch = original->span;
    swapped.span = original->pitch;
    for (int i = 0; i < MOST_SHAPES; i++) {
      moved.at[i][0] += 5 * original->pitch / NU;
      moved.at[i][1] -= 4 * original->span / NV;
      for (int a = 0; a < 2; a++) {
        scaled.at[i][a] *= 2.5;
        scaled.size[i][a] *= 2.5;
        flipped[a].at[i][a] *= -1;
        swapped.at[i][a] = original->at[i][1 - a];
        swapped.size[i][a] = original->size[i][1 - a];
      }
      if (original->size[i][1] == 0) { /* a disc has its diameter first */
        swapped.size[i][0] = original->size[i][0];
        swapped.size[i][1] = 0;
      }
    }
    solve(&moved, polarization, 0.37, 0.61, lambda);
    assert_same(lambda, expected, 1);
    solve(&scaled, polarization, 0.37, 0.61, lambda);
    assert_same(lambda, expected, 2.5 * 2.5);
    solve(&flipped[0], polarization, -0.37, 0.61, lambda);
    assert_same(lambda, expected, 1);
    solve(&flipped[1], polarization, 0.37, -0.61, lambda);
    assert_same(lambda, expected, 1);
    test_cell c = draw(&swapped, polarization, NV, NU);
    lowest(&c, 0.61, 0.37, COUNT, lambda);
    assert_same(lambda, expected, 1);
    cell_close(&c);
  }
}

static void wavenumbers_repeat_and_reverse(void **state) {
  (void)state;
  for (int k = 0; k < 2; k++) {
    test_cell c = draw(&ROUNDED, (pk_polarization)k, NU, NV);
    double expected[COUNT], lambda[COUNT];
    lowest(&c, 0.37, 0.61, COUNT, expected);
    lowest(&c, -0.37, -0.61, COUNT, lambda);
    assert_same(lambda, expected, 1);
    lowest(&c, 2.37, 0.61, COUNT, lambda);
    assert_same(lambda, expected, 1);
    lowest(&c, 0.37, -1.39, COUNT, lambda);
    assert_same(lambda, expected, 1);
    cell_close(&c);
  }
}

static int rising(const void *a, const void *b) {
  double x = *(const double *)a, y = *(const double *)b;
  return (x > y) - (x < y);
}

/* Two periods in one cell: the bands at kz (in π over two pitches) are those of one period at kz/2
 * and kz/2 + 1. */
static void a_doubled_cell_folds_the_bands(void **state) {
  (void)state;
  for (int k = 0; k < 2; k++) {
    test_cell two =
        cell_of(PK_LATERAL_PERIODIC, 2 * RECTANGLES.pitch, RECTANGLES.span, 0, 3, INDEX);
    paint(&two, &RECTANGLES, -0.5 * RECTANGLES.pitch, 0);
    paint(&two, &RECTANGLES, 0.5 * RECTANGLES.pitch, 0);
    cell_lay_even(&two, 2 * NU, NV);
    cell_open(&two, (pk_polarization)k, 1, 4);
    test_cell one = draw(&RECTANGLES, (pk_polarization)k, NU, NV);
    double folded[2 * COUNT], lambda[COUNT];
    lowest(&one, 0.2, 0.61, COUNT, folded);
    lowest(&one, 1.2, 0.61, COUNT, folded + COUNT);
    qsort(folded, 2 * COUNT, sizeof *folded, rising);
    lowest(&two, 0.4, 0.61, COUNT, lambda);
    assert_same(lambda, folded, 1);
    cell_close(&one);
    cell_close(&two);
  }
}

/* The same lattice, written with rows straight above each other in a cell of twice the height, or
 * with a lateral shift of half a pitch. kx counts in π over the lateral period. */
static void a_lateral_shift_is_another_name_for_a_larger_cell(void **state) {
  (void)state;
  const double pitch = 0.6, row = 0.4;
  for (int k = 0; k < 4; k++) {
    test_cell shifted = cell_of(PK_LATERAL_PERIODIC, pitch, row, 0.5, 3, INDEX);
    test_cell plain = cell_of(PK_LATERAL_PERIODIC, pitch, 2 * row, 0, 3, INDEX);
    for (int copy = 0; copy < 3; copy++) {
      test_cell *c = copy == 0 ? &shifted : &plain;
      double z = copy == 2 ? 0.5 * pitch : 0, x = copy == 1   ? -0.5 * row
                                                  : copy == 2 ? 0.5 * row
                                                              : 0;
      if (k / 2) {
        cell_disc(c, 1, z + 0.03, x + 0.02, 0.25);
      } else {
        cell_rect(c, 1, z + 0.03, x + 0.02, 0.2, 0.25);
      }
    }
    cell_lay_even(&shifted, 12, 9);
    cell_lay_even(&plain, 12, 18);
    cell_open(&shifted, (pk_polarization)(k % 2), 1, 4);
    cell_open(&plain, (pk_polarization)(k % 2), 1, 4);
    double folded[2 * COUNT], lambda[COUNT];
    lowest(&shifted, 0.37, 0.3, COUNT, folded);
    lowest(&shifted, 0.37, 1.3, COUNT, folded + COUNT);
    qsort(folded, 2 * COUNT, sizeof *folded, rising);
    lowest(&plain, 0.37, 0.6, COUNT, lambda);
    assert_same(lambda, folded, 1);
    cell_close(&shifted);
    cell_close(&plain);
  }
}

/* Laterally even modes on half a cell are modes of the whole cell. (Not so to rounding for hy and
 * curved shapes, whose averaging boxes end at the plane.) */
static void half_a_symmetric_cell_has_its_even_modes(void **state) {
  (void)state;
  for (int k = 0; k < 3; k++) {
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.5, 0.8, 0, 3, INDEX);
    if (k / 2) {
      cell_disc(&c, 1, 0.1, 0, 0.33);
    } else {
      cell_rect(&c, 1, 0.1, 0, 0.2, 0.35);
    }
    cell_lay_even(&c, 10, 16);
    cell_open(&c, (pk_polarization)(k % 2), 1, 4);
    double all[MOST_MODES], even[3];
    lowest(&c, 0.37, 0, MOST_MODES, all);
    cell_shut(&c);
    pk_axis_clear(c.context, &c.base.v);
    c.base.v = even_axis(c.context, 0, 0.4, 8, PK_END_FREE);
    cell_open(&c, (pk_polarization)(k % 2), 1, 4);
    lowest(&c, 0.37, 0, 3, even);
    for (int i = 0; i < 3; i++) {
      double nearest = INFINITY;
      for (int j = 0; j < MOST_MODES; j++) {
        nearest = fmin(nearest, fabs(all[j] - even[i]));
      }
      assert_near(nearest, 0, SAME * (1 + even[i]));
    }
    cell_close(&c);
  }
}

/* Square lattice of rods: twofold levels at Γ (third and fourth band) and M (ey and hy: second and
 * third), a/λ from a cylinder multipole computation (E and H tables of the open case
 * "crystal-square-rods": ε 8.9, r 0.2a). On a square grid the copies agree to rounding; a grid of
 * 20 is within 1 %. */
static void multiple_levels_have_all_their_copies(void **state) {
  (void)state;
  const double index[] = {1, sqrt(8.9)};
  static const struct {
    pk_polarization polarization;
    double k;
    int first;
    double value;
  } LEVELS[] = {{PK_EY, 0, 2, 0.62780191},
                {PK_EY, 1, 1, 0.54883078},
                {PK_HY, 0, 2, 0.82352824},
                {PK_HY, 1, 1, 0.60189890}};
  for (int i = 0; i < 4; i++) {
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 1, 1, 0, 2, index);
    cell_disc(&c, 1, 0, 0, 0.4);
    cell_lay_even(&c, 20, 20);
    cell_open(&c, LEVELS[i].polarization, 1, 4);
    pk_solver_want_every_copy(c.solver, true);
    double lambda[5];
    lowest(&c, LEVELS[i].k, LEVELS[i].k, 5, lambda);
    int first = LEVELS[i].first;
    assert_near(lambda[first], lambda[first + 1], SAME * lambda[first]);
    assert_true(lambda[first] - lambda[first - 1] > 1e-3 &&
                lambda[first + 2] > lambda[first] + 1e-3);
    double frequency = sqrt(lambda[first]) / (2 * PI);
    assert_near(frequency, LEVELS[i].value, 0.01 * LEVELS[i].value);
    cell_close(&c);
  }
}

/* Real arithmetic at the zone corner against complex arithmetic next to it: at the edge the bands
 * are level, so 1e-8 of a zone moves λ by less than 1e-14. */
static void real_and_complex_arithmetic_agree(void **state) {
  (void)state;
  for (int k = 0; k < 2; k++) {
    test_cell c = draw(&ROUNDED, (pk_polarization)k, NU, NV);
    double real[COUNT], complex_route[COUNT];
    lowest(&c, 1, 0, COUNT, real);
    lowest(&c, 1 - 1e-8, 0, COUNT, complex_route);
    assert_same(complex_route, real, 1);
    cell_close(&c);
  }
}

static void modes_are_orthonormal_and_their_residuals_true(void **state) {
  (void)state;
  for (int k = 0; k < 4; k++) {
    test_cell c = draw(&ROUNDED, (pk_polarization)(k % 2), NU, NV);
    pk_phase phase = pk_phase_at(&c.cell, k / 2 ? 1 : 0.37, k / 2 ? 1 : 0.61);
    pk_mode modes[COUNT];
    int found = 0;
    assert_int_equal(pk_solver_modes(c.solver, phase, -1, COUNT, NULL, modes, &found), PICKET_OK);
    assert_int_equal(found, COUNT);
    const double complex *mass = pk_operator_mass(c.op);
    for (int i = 0; i < COUNT; i++) {
      for (int j = 0; j <= i; j++) {
        double complex dot = 0;
        for (int p = 0; p < NU * NV; p++) {
          dot += conj(modes[i].field[p]) * mass[p] * modes[j].field[p];
        }
        assert_near(cabs(dot), i == j, 1e-9); /* residuals of 1e-10 over gaps of order 1 */
      }
      double residual = pk_solver_residual(c.solver, phase, modes[i].lambda, modes[i].field);
      assert_near(residual, modes[i].residual, 1e-12);
      assert_true(residual < PK_RESIDUAL_LIMIT);
      assert_true(i == 0 || creal(modes[i].lambda) >= creal(modes[i - 1].lambda));
    }
    /* A field as a start gives the same levels. */
    pk_mode again[COUNT];
    assert_int_equal(pk_solver_modes(c.solver, phase, -1, COUNT, modes[2].field, again, &found),
                     PICKET_OK);
    assert_int_equal(found, COUNT);
    for (int i = 0; i < COUNT; i++) {
      assert_near(creal(again[i].lambda), creal(modes[i].lambda),
                  SAME * (1 + creal(again[i].lambda)));
    }
    pk_modes_clear(c.context, COUNT, modes);
    pk_modes_clear(c.context, COUNT, again);
    cell_close(&c);
  }
}

/* All of one absorbing medium: λ ε is real and known; and all modes of a tiny operator can be had.
 */
static void absorbing_cells_have_complex_levels(void **state) {
  (void)state;
  double index = 1.5;
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.5, 0, 0, 1, &index);
  cell_lay_even(&c, 7, 1);
  cell_open(&c, PK_EY, 1, 4);
  double complex permittivity = 2 + 0.5 * I;
  pk_operator_load(c.op, &permittivity);
  pk_mode modes[MOST_MODES];
  int found = 0;
  pk_phase phase = pk_phase_at(&c.cell, 0.3, 0);
  assert_int_equal(pk_solver_modes(c.solver, phase, 0.1, MOST_MODES, NULL, modes, &found),
                   PICKET_OK);
  assert_int_equal(found, 7); /* cut to the size of the operator */
  double h = 0.5 / 7, sum = 0, expected = 0;
  for (int i = 0; i < 7; i++) {
    double s = sin(0.5 * (0.3 + 2 * i) * PI / 7);
    expected += 4 * s * s / (h * h);
    sum += creal(modes[i].lambda * permittivity);
    assert_near(cimag(modes[i].lambda * permittivity), 0, 1e-9);
  }
  assert_near(sum, expected, 1e-10 * expected);
  pk_modes_clear(c.context, found, modes);
  cell_close(&c);
}

static picket_status solve_all(test_cell *c) {
  pk_solver *solver = NULL;
  pk_mode modes[2];
  int found = 0;
  picket_status status = pk_solver_create(c->context, c->op, &solver);
  for (int k = 0; k < 2 && status == PICKET_OK; k++) {
    double complex start[64] = {1};
    status =
        pk_solver_modes(solver, pk_phase_at(&c->cell, k ? 0.4 : 1, 0), -1, 2, start, modes, &found);
    pk_modes_clear(c->context, status == PICKET_OK ? found : 0, modes);
  }
  pk_solver_free(solver);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    test_cell c = cell_in(context, PK_LATERAL_PERIODIC, 0.5, 0.5, 0, 3, INDEX);
    cell_rect(&c, 1, 0, 0, 0.2, 0.2);
    cell_lay_even(&c, 8, 8);
    cell_open(&c, PK_EY, 1, 4);
    memory.fail_at = memory.asked + n;
    picket_status status = solve_all(&c);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 20);
      break;
    }
  }
  pk_solver_free(NULL);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(moved_and_mirrored_cells_sound_alike),
      cmocka_unit_test(wavenumbers_repeat_and_reverse),
      cmocka_unit_test(a_doubled_cell_folds_the_bands),
      cmocka_unit_test(a_lateral_shift_is_another_name_for_a_larger_cell),
      cmocka_unit_test(half_a_symmetric_cell_has_its_even_modes),
      cmocka_unit_test(multiple_levels_have_all_their_copies),
      cmocka_unit_test(real_and_complex_arithmetic_agree),
      cmocka_unit_test(modes_are_orthonormal_and_their_residuals_true),
      cmocka_unit_test(absorbing_cells_have_complex_levels),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
