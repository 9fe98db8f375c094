/* What the correction of corners is for: values that converge as h²; and what it must leave alone.
 */
#include "unit/operator/samples.h"
#include "unit/short_memory.h"

static const double SILICON = 3.4757, OXIDE = 1.444;

static void open_on(test_cell *c, pk_polarization polarization, int m, bool corrected) {
  cell_open(c, polarization, m, 4);
  if (corrected) {
    assert_int_equal(pk_operator_correct_corners(c->op, c->cell.geometry), PICKET_OK);
    assert_int_equal(pk_media_set(&c->media, 4, c->op), PICKET_OK);
  }
}

/* Lowest frequencies² on the members 2, 4, 8 of a family. */
enum { LEVELS = 3, VALUES = 2 };

static void values_of(test_cell *c, pk_polarization polarization, bool corrected,
                      double values[LEVELS][VALUES]) {
  for (int level = 0; level < LEVELS; level++) {
    open_on(c, polarization, 2 << level, corrected);
    lowest(c, 0.6, 0.3, VALUES, values[level]);
    cell_shut(c);
  }
}

/* log2 of the ratio of successive differences: the order of the leading term. */
static double order_of(double values[LEVELS][VALUES], int i) {
  return log2(fabs((values[1][i] - values[0][i]) / (values[2][i] - values[1][i])));
}

/* A block of one medium, and one that stands on a floor of another under a third, where α is
 * smallest. */
static test_cell block(bool on_a_floor) {
  const double index[] = {on_a_floor ? 1 : OXIDE, SILICON, OXIDE};
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.4, 0.5, 0, 3, index);
  if (on_a_floor) {
    cell_rect(&c, 2, 0, -0.175, 0.4, 0.15);
  }
  cell_rect(&c, 1, 0, 0, 0.2, 0.2);
  cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 8});
  return c;
}

static void corrected_values_are_of_second_order(void **state) {
  (void)state;
  for (int floor = 0; floor < 2; floor++) {
    test_cell c = block(floor);
    double plain[LEVELS][VALUES], corrected[LEVELS][VALUES], ey[LEVELS][VALUES];
    values_of(&c, PK_HY, false, plain);
    values_of(&c, PK_HY, true, corrected);
    values_of(&c, PK_EY, true, ey);
    bool plain_is_worse = false;
    for (int i = 0; i < VALUES; i++) {
      /* A small h² next to h^(4 - 2α), 2.46 and 2.63 here, looks like more. */
      assert_true(order_of(corrected, i) > 1.9 && order_of(corrected, i) < 2.65);
      /* ey is regular at corners: its singular part begins with r^(2+α). */
      assert_true(order_of(ey, i) > 1.9 && order_of(ey, i) < 2.1);
      plain_is_worse = plain_is_worse || order_of(plain, i) < 1.8;
    }
    assert_true(plain_is_worse);
    cell_close(&c);
  }
}

/* No change to ey, to stacks and to cells without corners, to the last bit. */
static void nothing_else_changes(void **state) {
  (void)state;
  for (int k = 0; k < 3; k++) {
    test_cell c = k == 0 ? block(false)
                         : cell_of(k == 1 ? PK_LATERAL_UNIFORM : PK_LATERAL_PERIODIC, 0.6,
                                   k == 1 ? 0 : 0.8, 0, 3, SAMPLE_INDEX);
    if (k > 0) {
      k == 1 ? cell_layer(&c, 1, -0.2, 0.1) : cell_disc(&c, 1, 0, 0, 0.3);
      cell_lay(&c, &(pk_cell_grid_wish){.steps_per_pitch = 8});
    }
    pk_phase phase = pk_phase_at(&c.cell, 0.3, 0);
    double complex *values[2];
    size_t n = 0;
    for (int corrected = 0; corrected < 2; corrected++) {
      open_on(&c, k == 0 ? PK_EY : PK_HY, 1, corrected);
      n = (size_t)pk_operator_size(c.op);
      values[corrected] = dense_of(c.op, phase, 3);
      cell_shut(&c);
    }
    assert_memory_equal(values[0], values[1], n * n * sizeof *values[0]);
    free(values[0]);
    free(values[1]);
    cell_close(&c);
  }
}

/* Hermitian at real wavenumbers, real if the media are, and weights stay positive. */
static void corrected_operators_keep_their_symmetry(void **state) {
  (void)state;
  test_cell c = block(true);
  open_on(&c, PK_HY, 1, true);
  assert_true(pk_operator_is_real(c.op));
  size_t n = (size_t)pk_operator_size(c.op);
  double complex *values = dense_of(c.op, pk_phase_at(&c.cell, 0.4, 0.7), 0);
  for (size_t i = 0; i < n; i++) {
    for (size_t j = 0; j < n; j++) {
      assert_true(values[i * n + j] == conj(values[j * n + i]));
      assert_true(i == j || cabs(values[i * n + j]) == 0 || cabs(values[i * n + j]) > 1e-3);
    }
  }
  double lambda[2];
  lowest(&c, 0.4, 0.7, 2, lambda);
  assert_true(lambda[0] > 0);
  free(values);
  cell_close(&c);
}

static double complex form_of(const test_cell *c, pk_phase phase, const double complex *l,
                              const double complex *r) {
  const pk_pattern *p = pk_operator_pattern(c->op);
  double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
  double complex *product = malloc((size_t)p->n * sizeof *product);
  assert_non_null(values);
  assert_non_null(product);
  pk_operator_values(c->op, phase, 0, values);
  pk_sparse_times_complex(p, values, r, product);
  double complex sum = 0;
  for (int64_t i = 0; i < p->n; i++) {
    sum += l[i] * product[i];
  }
  free(values);
  free(product);
  return sum;
}

/* Forms against differences, with l and r that live at one corner only, so that the change of the
 * correction is not drowned. Curvature and the rounding of the correction leave 1e-6 of the
 * largest. */
static void media_forms_know_the_correction(void **state) {
  (void)state;
  const double step = 1e-3;
  test_cell c = block(true);
  open_on(&c, PK_HY, 1, true);
  size_t n = (size_t)pk_operator_size(c.op);
  double complex *l = calloc(n, sizeof *l), *r = calloc(n, sizeof *r);
  assert_non_null(l);
  assert_non_null(r);
  int nv = pk_operator_lines(c.op, PK_V), iu = 0, iv = 0;
  double at = -1, length;
  for (iu = 0; fabs(at + 0.1) > 1e-9; iu++) {
    pk_operator_line(c.op, PK_U, iu, &at, &length);
  }
  for (at = 0; fabs(at + 0.1) > 1e-9; iv++) {
    pk_operator_line(c.op, PK_V, iv, &at, &length);
  }
  l[(iu - 1) * nv + iv - 1] = 1;
  r[(iu - 1) * nv + iv - 1] = 1 - 2 * I;
  pk_phase phase = pk_phase_at(&c.cell, 0.37, 0.61);
  const double complex base[3] = {2 + 0.1 * I, 11 + 0.5 * I, 3};
  double complex stiff[3], mass[3];
  assert_int_equal(pk_operator_load(c.op, base), PICKET_OK);
  assert_int_equal(pk_operator_media_forms(c.op, phase, l, r, stiff, mass), PICKET_OK);
  for (int m = 0; m < 3; m++) {
    double complex moved[3] = {base[0], base[1], base[2]}, sum[2];
    for (int side = 0; side < 2; side++) {
      moved[m] = base[m] + (side ? step : -step);
      assert_int_equal(pk_operator_load(c.op, moved), PICKET_OK);
      sum[side] = form_of(&c, phase, l, r);
    }
    double complex difference = (sum[1] - sum[0]) / (2 * step);
    assert_true(cabs(difference) > 1e-2);
    assert_true(cabs(difference - stiff[m]) < 2e-6 * largest(3, stiff));
  }
  free(l);
  free(r);
  cell_close(&c);
}

/* A cell turned over has the same frequencies: corners at the period and in lattices that are
 * shifted are found where they are. */
static void moving_the_cell_changes_nothing(void **state) {
  (void)state;
  double values[3][VALUES];
  for (int k = 0; k < 3; k++) {
    const double index[] = {OXIDE, SILICON};
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.4, 0.4, 0.5, 2, index);
    double z = k == 0 ? 0 : k == 1 ? 0.1 : 0.2, x = k == 0 ? 0 : k == 1 ? 0.1 : 0.2;
    cell_rect(&c, 1, z, x, 0.2, 0.2);
    cell_lay_even(&c, 8, 8);
    open_on(&c, PK_HY, 1, true);
    lowest(&c, 0.4, 0.7, VALUES, values[k]);
    cell_close(&c);
  }
  for (int i = 0; i < VALUES; i++) {
    assert_near(values[1][i], values[0][i], 1e-10 * values[0][i]);
    assert_near(values[2][i], values[0][i], 1e-10 * values[0][i]);
  }
}

static picket_status correct_and_load(test_cell *c) {
  const double complex media[3] = {1, 12, 2};
  pk_operator_plan plan = {PK_HY, c->cell.geometry, &c->base.u, &c->base.v, false, 0, 3};
  pk_operator *op = NULL;
  picket_status status = pk_operator_create(c->context, &plan, &op);
  if (status == PICKET_OK) {
    status = pk_operator_correct_corners(op, c->cell.geometry);
  }
  if (status == PICKET_OK) {
    status = pk_operator_load(op, media);
  }
  pk_operator_free(op);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    const double index[] = {1, SILICON, OXIDE};
    test_cell c = cell_in(context, PK_LATERAL_PERIODIC, 0.4, 0.4, 0, 3, index);
    cell_rect(&c, 1, 0, 0, 0.2, 0.2);
    cell_lay_even(&c, 8, 8);
    memory.fail_at = memory.asked + n;
    picket_status status = correct_and_load(&c);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(corrected_values_are_of_second_order),
      cmocka_unit_test(nothing_else_changes),
      cmocka_unit_test(corrected_operators_keep_their_symmetry),
      cmocka_unit_test(media_forms_know_the_correction),
      cmocka_unit_test(moving_the_cell_changes_nothing),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
