/* Exponents of corners against closed forms: each sector's solution is elementary, so a wedge has
 * one equation per symmetry, and two media in turns (a chequered corner) an inverse sine. */
#include "operator/corner_exponent.h"

#include "unit/near.h"

static const double PI = 3.141592653589793238;

static pk_sectors quadrants(double complex a, double complex b, double complex c,
                            double complex d) {
  double quarter = PI / 2;
  return (pk_sectors){4, {quarter, quarter, quarter, quarter}, {a, b, c, d}};
}

static uint64_t seed = 11;

static double random_in(double low, double high) {
  seed = seed * 6364136223846793005u + 1442695040888963407u;
  return low + (high - low) * ((double)(seed >> 11) / 9007199254740992.0);
}

/* tan(3απ/4) η_in = -η_out tan(απ/4), α < 1; the digits are those of the project's notes. */
static void right_angles_of_two_media(void **state) {
  (void)state;
  const double index[][3] = {{3.4757, 1.444, 0.77046}, {3.4757, 1, 0.72157}, {2, 1.444, 0.89942}};
  for (int i = 0; i < 3; i++) {
    double in = index[i][0] * index[i][0], out = index[i][1] * index[i][1];
    pk_sectors s = quadrants(in, out, out, out);
    double complex alpha[PK_CORNER_EXPONENTS];
    assert_int_equal(pk_corner_exponents(&s, alpha), 2);
    double a = creal(alpha[0]);
    assert_near(a, index[i][2], 5e-6);
    assert_near(tan(0.75 * PI * a) / in + tan(0.25 * PI * a) / out, 0, 1e-12);
    assert_near(creal(alpha[1]), 2 - a, 1e-12);
  }
}

static void three_media(void **state) {
  (void)state;
  pk_sectors s = quadrants(3.4757 * 3.4757, 1, 1.444 * 1.444, 1.444 * 1.444);
  double complex alpha[PK_CORNER_EXPONENTS];
  assert_int_equal(pk_corner_exponents(&s, alpha), 2);
  assert_near(creal(alpha[0]), 0.6862, 5e-5); /* the project's notes */
}

/* Solutions even about the middle of the wedge: η₁ tan(αθ/2) = -η₂ tan(α(2π - θ)/2); odd ones with
 * the media exchanged. Every root must be of one kind, and every kind of root below 2 be found. */
static void wedges_of_any_angle(void **state) {
  (void)state;
  for (int trial = 0; trial < 40; trial++) {
    double angle = random_in(0.2, 2 * PI - 0.2), e[2] = {random_in(1, 13), random_in(1, 13)};
    pk_sectors s = {2, {angle, 2 * PI - angle}, {e[0], e[1]}};
    double complex alpha[PK_CORNER_EXPONENTS];
    int found = pk_corner_exponents(&s, alpha), kinds = 0;
    for (int i = 0; i < found; i++) {
      double x = creal(alpha[i]) * angle / 2, y = creal(alpha[i]) * (2 * PI - angle) / 2;
      double even = sin(x) * cos(y) / e[0] + cos(x) * sin(y) / e[1];
      double odd = sin(x) * cos(y) / e[1] + cos(x) * sin(y) / e[0];
      assert_near(fmin(fabs(even), fabs(odd)), 0, 1e-9);
    }
    for (int kind = 0; kind < 2; kind++) { /* sign changes of the same two functions */
      double before = 0;
      for (double a = 1e-4; a < 2; a += 1e-4) {
        double x = a * angle / 2, y = a * (2 * PI - angle) / 2;
        double value = sin(x) * cos(y) / e[kind] + cos(x) * sin(y) / e[1 - kind];
        kinds += value * before < 0;
        before = value;
      }
    }
    assert_int_equal(found, kinds);
  }
}

/* Quadrants a, b, a, b: one turn is two half turns with trace -2: sin(απ/2) = 2/√(2 + a/b + b/a).
 */
static void chequered_corners(void **state) {
  (void)state;
  for (double a = 1.1; a < 200; a *= 1.7) {
    pk_sectors s = quadrants(a, 1, a, 1);
    double complex alpha[PK_CORNER_EXPONENTS];
    assert_int_equal(pk_corner_exponents(&s, alpha), 2);
    assert_near(creal(alpha[0]), 2 / PI * asin(2 / sqrt(2 + a + 1 / a)), 1e-12);
  }
}

/* No corner: linear functions, twice. */
static void straight_interfaces_have_a_double_exponent(void **state) {
  (void)state;
  pk_sectors cases[] = {quadrants(2, 2, 2, 2),
                        quadrants(9, 9, 2, 2),
                        quadrants(2.5, 7, 7, 2.5),
                        {2, {PI, PI}, {1, 12}},
                        {3, {1, PI - 1, PI}, {4, 4, 4}}};
  for (int i = 0; i < 5; i++) {
    double complex alpha[PK_CORNER_EXPONENTS];
    assert_int_equal(pk_corner_exponents(&cases[i], alpha), 2);
    assert_near(creal(alpha[0]), 1, 1e-7); /* a double root is known to half the digits */
    assert_near(creal(alpha[1]), 1, 1e-7);
  }
}

/* Right angles: α and 2 - α, whatever the media, so only one exponent lies below 1. */
static void exponents_of_quadrants_come_in_pairs(void **state) {
  (void)state;
  for (int trial = 0; trial < 100; trial++) {
    double loss = trial % 2 ? 1 : 0;
    double complex e[4];
    for (int q = 0; q < 4; q++) {
      e[q] = random_in(1, 13) + I * loss * random_in(0, 2);
    }
    pk_sectors s = quadrants(e[0], e[1], e[2], e[3]);
    double complex alpha[PK_CORNER_EXPONENTS];
    assert_int_equal(pk_corner_exponents(&s, alpha), 2);
    assert_true(creal(alpha[0]) <= 1 + 1e-7);
    assert_true(cabs(alpha[0] + alpha[1] - 2) < 1e-9);
    for (int i = 0; i < 2; i++) {
      assert_true(cabs(pk_corner_mismatch(&s, alpha[i])) < 1e-11);
    }
  }
}

static double complex solution(const pk_sectors *s, double complex alpha, const double complex *a,
                               const double complex *b, int q, double angle, double complex *flux) {
  double complex c = ccos(alpha * angle), n = csin(alpha * angle);
  *flux = (b[q] * c - a[q] * n) / s->permittivity[q];
  return a[q] * c + b[q] * n;
}

static void shapes_are_continuous_all_the_way_around(void **state) {
  (void)state;
  for (int trial = 0; trial < 60; trial++) {
    pk_sectors s = {.count = 2 + trial % 7};
    double sum = 0;
    for (int q = 0; q < s.count; q++) {
      s.angle[q] = random_in(0.2, 1);
      sum += s.angle[q];
      s.permittivity[q] = random_in(1, 13) + I * (trial % 2) * random_in(0, 1);
    }
    for (int q = 0; q < s.count; q++) {
      s.angle[q] *= 2 * PI / sum;
    }
    double complex alpha[PK_CORNER_EXPONENTS], a[PK_SECTORS], b[PK_SECTORS];
    int found = pk_corner_exponents(&s, alpha);
    assert_true(found >= 2);
    for (int i = 0; i < found; i++) {
      pk_corner_shape(&s, alpha[i], 0, a, b);
      double largest = 0;
      for (int q = 0; q < s.count; q++) {
        double complex flux[2];
        int next = (q + 1) % s.count;
        double complex end = solution(&s, alpha[i], a, b, q, s.angle[q], &flux[0]);
        double complex start = solution(&s, alpha[i], a, b, next, 0, &flux[1]);
        assert_true(cabs(end - start) < 1e-6 && cabs(flux[0] - flux[1]) < 1e-6);
        largest = fmax(largest, cabs(a[q]) * cabs(a[q]) + cabs(b[q]) * cabs(b[q]));
      }
      assert_near(largest, 1, 1e-12);
    }
  }
}

/* Two independent solutions at a double exponent. */
static void double_exponents_have_two_shapes(void **state) {
  (void)state;
  pk_sectors s = quadrants(9, 9, 2, 2);
  double complex alpha[PK_CORNER_EXPONENTS], a[2][PK_SECTORS], b[2][PK_SECTORS];
  assert_int_equal(pk_corner_exponents(&s, alpha), 2);
  for (int which = 0; which < 2; which++) {
    pk_corner_shape(&s, alpha[0], which, a[which], b[which]);
  }
  assert_true(cabs(a[0][0] * b[1][0] - a[1][0] * b[0][0]) > 0.01);
}

/* α is analytic in ε: its derivative along a complex direction is that along a real one. */
static void complex_media_continue_real_ones(void **state) {
  (void)state;
  const double step = 1e-4;
  double complex moved[2][2], plain[PK_CORNER_EXPONENTS];
  for (int direction = 0; direction < 2; direction++) {
    for (int side = 0; side < 2; side++) {
      double complex change = (side ? step : -step) * (direction ? I : 1);
      pk_sectors s = quadrants(12 + change, 2, 2, 1);
      double complex alpha[PK_CORNER_EXPONENTS];
      assert_int_equal(pk_corner_exponents(&s, alpha), 2);
      moved[direction][side] = alpha[0];
    }
  }
  double complex along = moved[0][1] - moved[0][0], across = (moved[1][1] - moved[1][0]) / I;
  assert_true(cabs(along) > 1e-7);
  assert_true(cabs(along - across) < 1e-4 * cabs(along));
  pk_sectors lossy = quadrants(12 + 3 * I, 2, 2, 1), gainy = quadrants(12 - 3 * I, 2, 2, 1);
  double complex mirrored[PK_CORNER_EXPONENTS];
  assert_int_equal(pk_corner_exponents(&lossy, plain), 2);
  assert_int_equal(pk_corner_exponents(&gainy, mirrored), 2);
  assert_true(cabs(plain[0] - conj(mirrored[0])) < 1e-12);
}

static void metals_are_declined(void **state) {
  (void)state;
  double complex alpha[PK_CORNER_EXPONENTS] = {42};
  pk_sectors s = quadrants(-10 + I, 2, 2, 2);
  assert_int_equal(pk_corner_exponents(&s, alpha), -1);
  s = quadrants(0, 2, 2, 2);
  assert_int_equal(pk_corner_exponents(&s, alpha), -1);
  s = quadrants(NAN, 2, 2, 2);
  assert_int_equal(pk_corner_exponents(&s, alpha), -1);
  assert_true(alpha[0] == 42);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(right_angles_of_two_media),
      cmocka_unit_test(three_media),
      cmocka_unit_test(wedges_of_any_angle),
      cmocka_unit_test(chequered_corners),
      cmocka_unit_test(straight_interfaces_have_a_double_exponent),
      cmocka_unit_test(exponents_of_quadrants_come_in_pairs),
      cmocka_unit_test(shapes_are_continuous_all_the_way_around),
      cmocka_unit_test(double_exponents_have_two_shapes),
      cmocka_unit_test(complex_media_continue_real_ones),
      cmocka_unit_test(metals_are_declined),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
