/* The surrogate: a quadratic is found again, and cubic terms stay out of what they can stay out of.
 */
#include "study/quadratic.h"

#include "unit/near.h"

enum { MOST_AXES = 8 };

/* A quadratic whose coefficients are all different, and a cubic term. */
static double known(int axes, const double *t, double cubic) {
  double sum = 3;
  for (int i = 0; i < axes; i++) {
    sum += (1 + 0.3 * i) * t[i];
    for (int j = i; j < axes; j++) {
      sum += (0.1 * (i + 1) - 0.07 * j) * t[i] * t[j];
    }
  }
  return sum + cubic * t[0] * t[0] * t[axes - 1];
}

static void fit(int axes, double cubic, pk_quadratic *out) {
  double node[MOST_AXES], t[MOST_AXES], value[PK_DESIGN_POINTS];
  for (int i = 0; i < axes; i++) {
    node[i] = 1 + 0.1 * i;
  }
  for (int p = 0; p < pk_design_count(axes); p++) {
    pk_design_point(axes, node, p, t);
    value[p] = known(axes, t, cubic);
  }
  pk_quadratic_fit(axes, node, value, out);
}

static void finds_a_quadratic_again(void **state) {
  (void)state;
  for (int axes = 1; axes <= MOST_AXES; axes++) {
    pk_quadratic q;
    fit(axes, 0, &q);
    double t[MOST_AXES];
    for (int n = 0; n < 20; n++) {
      for (int i = 0; i < axes; i++) {
        t[i] = 3 * sin(n + 1.7 * i);
      }
      assert_near(pk_quadratic_at(&q, t), known(axes, t, 0),
                  1e-12); /* rounding of some 100 terms */
    }
    assert_near(q.linear[axes - 1], 1 + 0.3 * (axes - 1), 1e-13);
  }
}

/* With two points for a pair, t_i² t_j does not enter q_ij. */
static void cubic_terms_stay_out(void **state) {
  (void)state;
  pk_quadratic plain, bent;
  for (int axes = 2; axes <= PK_DESIGN_TWIN_AXES; axes++) {
    fit(axes, 0, &plain);
    fit(axes, 0.5, &bent);
    assert_near(bent.square[0][axes - 1], plain.square[0][axes - 1], 1e-13);
  }
}

/* All points differ, and stay within the nodes. */
static void points_differ(void **state) {
  (void)state;
  for (int axes = 1; axes <= MOST_AXES; axes++) {
    double node[MOST_AXES] = {1, 1, 1, 1, 1, 1, 1, 1}, a[MOST_AXES], b[MOST_AXES];
    for (int p = 0; p < pk_design_count(axes); p++) {
      pk_design_point(axes, node, p, a);
      for (int q = 0; q < p; q++) {
        pk_design_point(axes, node, q, b);
        double off = 0;
        for (int i = 0; i < axes; i++) {
          off = fmax(off, fabs(a[i] - b[i]));
          assert_true(fabs(a[i]) <= 1);
        }
        assert_true(off >= 1);
      }
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(finds_a_quadratic_again),
      cmocka_unit_test(cubic_terms_stay_out),
      cmocka_unit_test(points_differ),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
