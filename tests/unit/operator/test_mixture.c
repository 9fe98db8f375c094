/* Averages of mixtures: laminates in closed form, the tensor under rotation, slopes by differences.
 */
#include "operator/mixture.h"

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

static const double complex PERMITTIVITY[] = {1.5 + 0.1 * I, 12, 4 - 0.2 * I};

/* 0.25 of medium 1 and 0.75 of medium 0 with the interface normal at an angle to u. */
static pk_mixture laminate(double angle) {
  double n[2] = {cos(angle), sin(angle)};
  return (pk_mixture){.count = 2,
                      .medium = {0, 1},
                      .fraction = {0.75, 0.25},
                      .facing = {n[0] * n[0], n[0] * n[1], n[1] * n[1]}};
}

static void assert_close(double complex value, double complex expected, double tolerance) {
  assert_near(creal(value), creal(expected), tolerance);
  assert_near(cimag(value), cimag(expected), tolerance);
}

/* Layers across u (normal along u). E_v is continuous, so D_v = ⟨ε⟩ E_v; D_u is, so E_u = ⟨1/ε⟩
 * D_u. A u difference of H drives D_v. */
static void laminates_average_as_layers_do(void **state) {
  (void)state;
  double complex mean = 0.75 * PERMITTIVITY[0] + 0.25 * PERMITTIVITY[1];
  double complex inverse = 0.75 / PERMITTIVITY[0] + 0.25 / PERMITTIVITY[1];
  pk_mixture across = laminate(0), along = laminate(acos(0.0));
  assert_close(pk_mixture_mean(&across, PERMITTIVITY), mean, 1e-15);
  assert_close(pk_mixture_mean_inverse(&across, PERMITTIVITY), inverse, 1e-15);
  assert_close(pk_mixture_weight(&across, PK_U, PERMITTIVITY), 1 / mean, 1e-15);
  assert_close(pk_mixture_weight(&across, PK_V, PERMITTIVITY), inverse, 1e-15);
  assert_close(pk_mixture_weight(&along, PK_U, PERMITTIVITY), inverse, 1e-15);
  assert_close(pk_mixture_weight(&along, PK_V, PERMITTIVITY), 1 / mean, 1e-15);
  assert_close(pk_mixture_mixed(&across, PERMITTIVITY), 0, 1e-15);
}

/* Trace and determinant of the tensor do not depend on the direction; and the weight vector turns
 * as a tensor: a gradient along the interface normal sees 1/⟨ε⟩. */
static void the_tensor_turns_with_the_interface(void **state) {
  (void)state;
  pk_mixture straight = laminate(0);
  double complex one = pk_mixture_weight(&straight, PK_U, PERMITTIVITY);
  double complex two = pk_mixture_weight(&straight, PK_V, PERMITTIVITY);
  for (int i = 0; i < 12; i++) {
    double angle = 0.3 * i, n[2] = {cos(angle), sin(angle)};
    pk_mixture turned = laminate(angle);
    double complex uu = pk_mixture_weight(&turned, PK_U, PERMITTIVITY);
    double complex vv = pk_mixture_weight(&turned, PK_V, PERMITTIVITY);
    double complex uv = pk_mixture_mixed(&turned, PERMITTIVITY);
    assert_close(uu + vv, one + two, 1e-15);
    assert_close(uu * vv - uv * uv, one * two, 1e-15);
    assert_close(uu * n[0] * n[0] + 2 * uv * n[0] * n[1] + vv * n[1] * n[1], one, 1e-15);
  }
}

static void slopes_are_derivatives(void **state) {
  (void)state;
  const double step = 1e-5;
  pk_mixture m = laminate(0.7);
  for (int i = 0; i < 2; i++) {
    double complex value[2][3];
    for (int side = 0; side < 2; side++) {
      double complex moved[3] = {PERMITTIVITY[0], PERMITTIVITY[1], PERMITTIVITY[2]};
      moved[m.medium[i]] += side ? step : -step;
      value[side][0] = pk_mixture_weight(&m, PK_U, moved);
      value[side][1] = pk_mixture_weight(&m, PK_V, moved);
      value[side][2] = pk_mixture_mixed(&m, moved);
    }
    double complex slope[3] = {pk_mixture_weight_slope(&m, PK_U, PERMITTIVITY, i),
                               pk_mixture_weight_slope(&m, PK_V, PERMITTIVITY, i),
                               pk_mixture_mixed_slope(&m, PERMITTIVITY, i)};
    for (int k = 0; k < 3; k++) { /* a central difference: 1e-10 by curvature, 1e-11 by rounding */
      assert_close((value[1][k] - value[0][k]) / (2 * step), slope[k], 1e-9);
    }
  }
}

static void pure_media_are_themselves(void **state) {
  (void)state;
  pk_mixture m = {.count = 1, .medium = {2}, .fraction = {1}};
  double complex e = PERMITTIVITY[2];
  for (int axis = 0; axis < 2; axis++) {
    assert_close(pk_mixture_weight(&m, (pk_axis_name)axis, PERMITTIVITY), 1 / e, 1e-16);
    assert_close(pk_mixture_weight_slope(&m, (pk_axis_name)axis, PERMITTIVITY, 0), -1 / (e * e),
                 1e-16);
  }
  assert_close(pk_mixture_mean(&m, PERMITTIVITY), e, 0);
  assert_close(pk_mixture_mixed(&m, PERMITTIVITY), 0, 0);
  assert_close(pk_mixture_mixed_slope(&m, PERMITTIVITY, 0), 0, 0);
}

enum { MANY = 1000 };

static picket_status take_many(picket_context *context, pk_mixtures *mixtures) {
  picket_status status = pk_mixtures_open(context, 3, mixtures);
  for (int i = 0; i < MANY && status == PICKET_OK; i++) {
    pk_box pure = {.count = 1, .medium = {i % 3}, .fraction = {1}};
    pk_box mixed = {.count = 2, .medium = {0, 2}, .fraction = {i / 1000.0, 1 - i / 1000.0}};
    int number;
    status = pk_mixtures_take(mixtures, &pure, &number);
    if (status == PICKET_OK) {
      assert_int_equal(number, i % 3);
      status = pk_mixtures_take(mixtures, &mixed, &number);
    }
    if (status == PICKET_OK) {
      assert_int_equal(number, 3 + i);
      assert_near(mixtures->list[number].fraction[0], i / 1000.0, 0);
    }
  }
  return status;
}

static void the_list_grows_or_says_that_it_cannot(void **state) {
  (void)state;
  for (long n = 2;; n++) {
    short_memory memory = {.fail_at = n};
    picket_context *context = short_memory_context(&memory);
    pk_mixtures mixtures = {0};
    picket_status status = take_many(context, &mixtures);
    bool failed = memory.asked >= n;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    pk_mixtures_close(&mixtures);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 4);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(laminates_average_as_layers_do),
      cmocka_unit_test(the_tensor_turns_with_the_interface),
      cmocka_unit_test(slopes_are_derivatives),
      cmocka_unit_test(pure_media_are_themselves),
      cmocka_unit_test(the_list_grows_or_says_that_it_cannot),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
