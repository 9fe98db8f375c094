/* Likeness to a family: one for its own standing waves, zero for those of other families. */
#include "bloch/family.h"

#include "unit/cells.h"

enum { NU = 12, NV = 9 };
static const double PITCH = 0.4, SPAN = 1.0, INDEX = 1.5;

static test_cell empty(void) {
  test_cell c = cell_of(PK_LATERAL_PERIODIC, PITCH, SPAN, 0, 1, &INDEX);
  cell_lay_even(&c, NU, NV);
  cell_open(&c, PK_EY, 1, 4);
  return c;
}

/* exp(-x²/w²) or x times that. */
static double lateral(double x, bool odd) {
  return (odd ? x : 1) * exp(-20 * x * x);
}

/* a(x) cos(harmonic π z/Λ + turn). */
static void standing(const test_cell *c, int harmonic, double turn, bool odd,
                     double complex *field) {
  for (int iu = 0; iu < NU; iu++) {
    for (int iv = 0; iv < NV; iv++) {
      double z, x, length;
      pk_operator_line(c->op, PK_U, iu, &z, &length);
      pk_operator_line(c->op, PK_V, iv, &x, &length);
      /* The first line is the low boundary, which is its own mirror image: odd functions vanish. */
      double a = odd && iv == 0 ? 0 : lateral(x, odd);
      field[iu * NV + iv] = a * cos(harmonic * PI * z / PITCH + turn);
    }
  }
}

static void likeness_tells_families_apart(void **state) {
  (void)state;
  test_cell c = empty();
  double complex field[NU * NV], shape[NV], work[NV];
  for (int harmonic = 1; harmonic <= 3; harmonic++) {
    for (int turn = 0; turn < 5; turn++) {
      standing(&c, harmonic, 0.4 * turn, false, field);
      pk_family_shape(c.op, PITCH, harmonic, field, shape);
      /* Sums over whole periods of the grid are exact. */
      assert_near(pk_family_likeness(c.op, PITCH, harmonic, shape, field, work), 1, 1e-13);
      standing(&c, harmonic, 0.4 * turn + 1, false, field);
      assert_near(pk_family_likeness(c.op, PITCH, harmonic, shape, field, work), 1, 1e-13);
      standing(&c, harmonic, 0.4 * turn, true, field);
      assert_near(pk_family_likeness(c.op, PITCH, harmonic, shape, field, work), 0, 1e-20);
      standing(&c, harmonic + 2, 0.4 * turn, false, field);
      assert_near(pk_family_likeness(c.op, PITCH, harmonic, shape, field, work), 0, 1e-20);
    }
  }
  cell_close(&c);
}

static void scale_and_phase_do_not_matter(void **state) {
  (void)state;
  test_cell c = empty();
  double complex field[NU * NV], shape[NV], work[NV];
  uint64_t seed = 5;
  standing(&c, 1, 0.3, false, field);
  pk_family_shape(c.op, PITCH, 1, field, shape);
  random_vector(&seed, NU * NV, field);
  double before = pk_family_likeness(c.op, PITCH, 1, shape, field, work);
  assert_true(before > 0 && before < 1);
  for (int i = 0; i < NU * NV; i++) {
    field[i] *= 3.7 * cexp(1.1 * I);
  }
  for (int i = 0; i < NV; i++) {
    shape[i] *= -0.2 * I;
  }
  assert_near(pk_family_likeness(c.op, PITCH, 1, shape, field, work), before, 1e-15);
  cell_close(&c);
}

/* A lateral shape with a phase of its own, as in an absorbing guide. */
static void complex_shapes_are_like_themselves(void **state) {
  (void)state;
  test_cell c = empty();
  double complex field[NU * NV], shape[NV], work[NV];
  standing(&c, 1, 0.3, false, field);
  for (int i = 0; i < NU * NV; i++) {
    field[i] *= cexp(0.7 * I * (i % NV));
  }
  pk_family_shape(c.op, PITCH, 1, field, shape);
  assert_near(pk_family_likeness(c.op, PITCH, 1, shape, field, work), 1, 1e-13);
  cell_close(&c);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(likeness_tells_families_apart),
      cmocka_unit_test(complex_shapes_are_like_themselves),
      cmocka_unit_test(scale_and_phase_do_not_matter),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
