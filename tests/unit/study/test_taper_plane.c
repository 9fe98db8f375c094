/* Fields on a plane across a guide: closed forms of Gaussian beams and of a film's mode, on grids
 * that have nothing to do with each other. */
#include "study/taper_plane.h"

#include <math.h>

#include <picket/context.h>

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "base/memory.h"
#include "unit/short_memory.h"

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

/* A beam E = h = exp(-((x - at)/waist)²) on a grid of its own. */
static pk_plane beam(double waist, double at, double step) {
  pk_plane plane;
  int half = (int)ceil(6 * waist / step);
  assert_int_equal(pk_plane_create(context, 2 * half + 1, &plane), PICKET_OK);
  for (int i = 0; i < plane.count; i++) {
    double x = (i - half) * step, g = exp(-x * x / (waist * waist));
    plane.x[i] = at + x;
    plane.e[i] = 3 * g;
    plane.h[i] = (0.5 + 2 * I) * g; /* factors drop out */
  }
  return plane;
}

/* 2 w₁ w₂/(w₁² + w₂²) exp(-2d²/(w₁² + w₂²)). A cubic through four places of 1/20 waist is good to
 * (3/128)(1/20)⁴ × 12 = 2e-6 of the field there, and errors of both signs cancel in the integral.
 */
static void beams(void **state) {
  (void)state;
  static const double other[][2] = {{1, 0}, {1.3, 0}, {2, 0.7}, {0.6, -0.4}};
  pk_joint joint;
  pk_plane a = beam(1, 0, 0.05);
  for (int i = 0; i < 4; i++) {
    double w = other[i][0], d = other[i][1], sum = 1 + w * w, share = NAN;
    pk_plane b = beam(w, d, 0.0371 * w);
    assert_int_equal(pk_plane_meet(context, &a, &b, &joint), PICKET_OK);
    share = joint.share;
    assert_near(share, 2 * w / sum * exp(-2 * d * d / sum), 2e-6);
    double centroid, size;
    pk_plane_size(&b, &centroid, &size);
    assert_near(centroid, d, 1e-9);
    assert_near(size, 2 * w, 2e-6 * w);
    pk_plane_beam(&a, d, 2 * w, &share);
    assert_near(share, 2 * w / sum * exp(-2 * d * d / sum), 2e-6);
    pk_plane_clear(context, &b);
  }
  pk_plane_clear(context, &a);
}

/* The even mode of a film |x| < a with the field h (continuous) and E = h/ε (jumps): on the
 * interface nothing of either side is stored. */
static pk_plane film(int inside, int outside, double worth) {
  const double a = 0.25, k = 4, decay = 1.9, inner = 8, outer = 2;
  pk_plane plane;
  int count = 2 * outside + inside + 1;
  assert_int_equal(pk_plane_create(context, count, &plane), PICKET_OK);
  for (int i = 0; i < count; i++) {
    int from_end = i < outside ? outside - i : i - outside - inside;
    double x = from_end > 0 ? a + 5.0 * from_end / outside : a * (2.0 * (i - outside) / inside - 1);
    x = i < outside ? -x : x;
    bool in = fabs(x) < a * (1 - 1e-12);
    plane.interface[i] = i == outside || i == outside + inside;
    plane.x[i] = x;
    plane.h[i] = in ? cos(k * x) : cos(k * a) * exp(-decay * (fabs(x) - a));
    plane.e[i] = plane.interface[i] ? worth : creal(plane.h[i]) / (in ? inner : outer);
  }
  plane.jumps = true;
  return plane;
}

/* The same mode on two grids is the same mode: the share is below 1 by the square of what the
 * interpolation misses, (0.1)⁴ of the field. Its size from ∫x²h²/ε in closed form. */
static void a_film(void **state) {
  (void)state;
  pk_plane a = film(20, 60, 0.1), b = film(33, 140, 77);
  pk_joint joint;
  double share, centroid, size;
  assert_int_equal(pk_plane_meet(context, &a, &b, &joint), PICKET_OK);
  share = joint.share;
  assert_near(share, 1, 1e-7);
  pk_plane_size(&b, &centroid, &size);
  const double w = 0.25, k = 4, g = 1.9, q = 2 * g, c2 = cos(k * w) * cos(k * w);
  /* ∫cos² and ∫x² cos² over (0, w), ∫exp(-q(x - w)) x² from w. */
  double in0 = w / 2 + sin(2 * k * w) / (4 * k);
  double in2 = w * w * w / 6 + w * w * sin(2 * k * w) / (4 * k) + w * cos(2 * k * w) / (4 * k * k) -
               sin(2 * k * w) / (8 * k * k * k);
  double out0 = c2 / q, out2 = c2 * (w * w / q + 2 * w / (q * q) + 2 / (q * q * q));
  double wanted = 4 * sqrt((in2 / 8 + out2 / 2) / (in0 / 8 + out0 / 2));
  assert_near(centroid, 0, 1e-12);
  assert_near(size, wanted, 1e-5 * wanted);
  pk_plane_clear(context, &a);
  pk_plane_clear(context, &b);
}

/* A plane has everything in common with itself, and as much with another as that with it. */
static void equal_and_mutual(void **state) {
  (void)state;
  pk_plane a = film(12, 30, 0), b = beam(0.4, 0.1, 0.03);
  double share;
  pk_joint joint, other;
  assert_int_equal(pk_plane_meet(context, &a, &a, &joint), PICKET_OK);
  share = joint.share;
  assert_near(share, 1, 1e-14);
  assert_near(joint.reflection, 0, 1e-28);
  assert_int_equal(pk_plane_meet(context, &a, &b, &joint), PICKET_OK);
  share = joint.share;
  assert_int_equal(pk_plane_meet(context, &b, &a, &other), PICKET_OK);
  assert_near(joint.reflection, other.reflection, 1e-14);
  assert_near(share, other.share, 1e-14);
  assert_true(share > 0 && share < 1);
  pk_plane_clear(context, &a);
  pk_plane_clear(context, &b);
}

/* One place: nothing varies across. No power: no number. Fields that do not meet share nothing. */
static void limits(void **state) {
  (void)state;
  pk_plane point = {0}, wall = {0}, a = beam(1, 0, 0.1), b = beam(1, 50, 0.1);
  pk_joint joint;
  double share, centroid, size;
  assert_int_equal(pk_plane_create(context, 1, &point), PICKET_OK);
  assert_int_equal(pk_plane_create(context, 1, &wall), PICKET_OK);
  assert_int_equal(pk_plane_meet(context, &point, &wall, &joint), PICKET_OK);
  assert_true(isnan(joint.share));
  /* Plane waves with h = nE: Fresnel's ((2 - 3)/(2 + 3))². */
  point.e[0] = 1;
  point.h[0] = 2;
  wall.e[0] = 0.3 * I;
  wall.h[0] = 0.9 * I;
  assert_int_equal(pk_plane_meet(context, &point, &wall, &joint), PICKET_OK);
  assert_near(joint.share, 1, 1e-15);
  assert_near(joint.reflection, 0.04, 1e-15);
  assert_int_equal(pk_plane_meet(context, &point, &a, &joint), PICKET_OK);
  share = joint.share;
  assert_true(isnan(share));
  pk_plane_size(&point, &centroid, &size);
  assert_true(isnan(size));
  assert_int_equal(pk_plane_meet(context, &a, &b, &joint), PICKET_OK);
  share = joint.share;
  assert_near(share, 0, 1e-300);
  for (int i = 0; i < b.count; i++) {
    b.e[i] = 0;
  }
  assert_int_equal(pk_plane_meet(context, &a, &b, &joint), PICKET_OK);
  share = joint.share;
  assert_true(isnan(share));
  pk_plane_size(&b, &centroid, &size);
  assert_true(isnan(size) && isnan(centroid));
  pk_plane_beam(&b, 0, 1, &share);
  assert_true(isnan(share));
  pk_plane_clear(context, &point);
  pk_plane_clear(context, &wall);
  pk_plane_clear(context, &a);
  pk_plane_clear(context, &b);
  pk_plane_clear(context, &b); /* zeros */
}

static void memory_runs_out(void **state) {
  (void)state;
  for (long at = 2; at <= 5; at++) { /* the first is the context's */
    short_memory memory = {.fail_at = at};
    picket_context *own = short_memory_context(&memory);
    pk_plane plane = {0};
    if (own) {
      assert_int_equal(pk_plane_create(own, 10, &plane), PICKET_ERROR_MEMORY);
      assert_null(plane.x);
    }
    picket_context_free(own);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(beams),
      cmocka_unit_test(a_film),
      cmocka_unit_test(equal_and_mutual),
      cmocka_unit_test(limits),
      cmocka_unit_test(memory_runs_out),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
