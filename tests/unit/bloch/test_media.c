/* Media of an operator: only those in use count, frequencies are kept in the known range, and the
 * frequency form is the derivative of T. */
#include "unit/cells.h"
#include "unit/short_memory.h"

static const double INDEX[] = {1.444, 3.0};

/* Medium 2 is dispersive; medium 3 is a table from 1 to 2 µm. */
static test_cell painted(int second, int third) {
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.4, 0.5, 0, 2, INDEX);
  static const double B[] = {8.5}, C[] = {0.3};
  static const double WAVELENGTH[] = {1, 1.3, 1.7, 2}, N[] = {2.1, 2.05, 2.02, 2.0}, K[4] = {0};
  assert_int_equal(pk_materials_add_sellmeier(c.materials, nowhere, "s", 1, B, C), PICKET_OK);
  assert_int_equal(pk_materials_add_table(c.materials, nowhere, "t", 4, WAVELENGTH, N, K),
                   PICKET_OK);
  cell_rect(&c, second, -0.1, 0, 0.15, 0.3);
  cell_rect(&c, third, 0.1, 0.05, 0.1, 0.2);
  cell_lay_even(&c, 9, 7);
  return c;
}

static void unused_materials_do_not_limit(void **state) {
  (void)state;
  test_cell c = painted(1, 2);
  cell_open(&c, PK_EY, 1, 2 * PI / 5.0);
  assert_false(c.media.clamped);
  assert_true(c.media.dispersive);
  assert_true(c.media.used[2] && !c.media.used[3]);
  cell_close(&c);
  c = painted(1, 1);
  cell_open(&c, PK_EY, 1, 2 * PI / 5.0);
  assert_false(c.media.dispersive);
  cell_close(&c);
}

static void frequencies_are_moved_into_the_range(void **state) {
  (void)state;
  test_cell c = painted(2, 3);
  cell_open(&c, PK_HY, 1, 2 * PI / 5.0);
  assert_near(c.media.shortest_um, 1, 0);
  assert_near(c.media.longest_um, 2, 0);
  assert_true(c.media.clamped);
  assert_near(creal(c.media.permittivity[3]), 4.0, 1e-12);
  assert_true(c.media.slope[3] == 0 && c.media.slope[2] == 0);
  assert_int_equal(pk_media_set(&c.media, 2 * PI / 1.3, c.op), PICKET_OK);
  assert_false(c.media.clamped);
  assert_near(creal(c.media.permittivity[3]), 2.05 * 2.05, 1e-12);
  assert_true(cabs(c.media.slope[3]) > 0);
  cell_close(&c);
}

static double complex form_at(test_cell *c, double k0, pk_phase phase, const double complex *l,
                              const double complex *r) {
  assert_int_equal(pk_media_set(&c->media, k0, c->op), PICKET_OK);
  int64_t n = pk_operator_size(c->op);
  double complex *t = dense_of(c->op, phase, k0 * k0), sum = 0;
  for (int64_t i = 0; i < n; i++) {
    for (int64_t j = 0; j < n; j++) {
      sum += l[i] * t[i + j * n] * r[j];
    }
  }
  free(t);
  return sum;
}

/* Curvature leaves 1e-10 of a central difference at 1e-5, rounding 1e-10. */
static void the_frequency_form_is_a_derivative(void **state) {
  (void)state;
  const double k0 = 2 * PI / 1.5, step = 1e-5;
  uint64_t seed = 11;
  for (int polarization = 0; polarization < 2; polarization++) {
    test_cell c = painted(2, 3);
    cell_open(&c, (pk_polarization)polarization, 1, k0);
    pk_phase phase = {0.9 * cexp(0.7 * I), cexp(0.2 * I), 0};
    double complex l[63], r[63], form;
    random_vector(&seed, 63, l);
    random_vector(&seed, 63, r);
    assert_int_equal(pk_media_frequency_form(&c.media, c.op, phase, k0, l, r, &form), PICKET_OK);
    double complex up = form_at(&c, k0 + step, phase, l, r);
    double complex down = form_at(&c, k0 - step, phase, l, r);
    double scale = cabs(up);
    assert_true(cabs((up - down) / (2 * step) - form) < 1e-8 * scale);
    cell_close(&c);
  }
}

/* The cell has memory of its own; only the media run short. */
static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 2;; n++) {
    short_memory memory = {.fail_at = n};
    picket_context *context = short_memory_context(&memory);
    test_cell c = painted(2, 3);
    cell_open(&c, PK_HY, 1, 4);
    pk_media media = {0};
    picket_status status = pk_media_open(context, c.materials, 20, c.op, &media);
    if (status == PICKET_OK) {
      double complex x[63] = {1}, form;
      assert_int_equal(pk_media_set(&media, 4, c.op), PICKET_OK);
      status = pk_media_frequency_form(&media, c.op, (pk_phase){1, 1, 0}, 4, x, x, &form);
    }
    bool failed = memory.asked >= n;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    pk_media_close(&media);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    cell_close(&c);
    if (!failed) {
      assert_true(n > 4);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(unused_materials_do_not_limit),
      cmocka_unit_test(frequencies_are_moved_into_the_range),
      cmocka_unit_test(the_frequency_form_is_a_derivative),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
