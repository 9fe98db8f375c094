/* Bloch phases: exact at the corners of the zone, on the unit circle everywhere. */
#include "unit/cells.h"

static const pk_cell PERIODIC = {
    .pitch_um = 0.3, .lateral = PK_LATERAL_PERIODIC, .span_um = 0.5, .shift = 0};

static void corners_of_the_zone_are_exact(void **state) {
  (void)state;
  static const double complex TURN[4] = {1, I, -1, -I};
  for (int z = -6; z <= 6; z++) {
    for (int x = -6; x <= 6; x++) {
      pk_phase phase = pk_phase_at(&PERIODIC, 0.5 * z, 0.5 * x);
      assert_true(phase.xi == TURN[(z + 8) % 4]);
      assert_true(phase.chi == TURN[(x + 8) % 4]);
      assert_true(phase.kx == 0);
    }
  }
}

static void other_places_are_plain_exponentials(void **state) {
  (void)state;
  pk_cell cell = PERIODIC;
  cell.shift = 0.25;
  for (int i = -20; i <= 20; i++) {
    double kz = 0.17 * i, kx = 0.31 * i + 0.1;
    pk_phase phase = pk_phase_at(&cell, kz, kx);
    assert_near(cabs(phase.xi - cexp(I * PI * kz)), 0, 1e-14);
    assert_near(cabs(phase.chi - cexp(I * PI * (0.25 * kz + kx))), 0, 1e-14);
    assert_near(cabs(phase.xi), 1, 4e-16);
  }
}

static void stacks_have_kx_and_open_cells_nothing(void **state) {
  (void)state;
  pk_cell cell = PERIODIC;
  cell.lateral = PK_LATERAL_UNIFORM;
  pk_phase phase = pk_phase_at(&cell, 0.3, 0.7);
  assert_near(phase.kx, 0.7 * PI / 0.5, 1e-15);
  assert_true(phase.chi == 1);
  cell.span_um = 0; /* not given: allowed as long as kx is zero */
  assert_true(pk_phase_at(&cell, 0.3, 0).kx == 0);
  cell.lateral = PK_LATERAL_OPEN;
  phase = pk_phase_at(&cell, 0.3, 0.7);
  assert_true(phase.kx == 0 && phase.chi == 1);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(corners_of_the_zone_are_exact),
      cmocka_unit_test(other_places_are_plain_exponentials),
      cmocka_unit_test(stacks_have_kx_and_open_cells_nothing),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
