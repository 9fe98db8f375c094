/* Modes of sections against closed forms, the analytic slab and published numbers. */
#include "section/modes.h"

#include "slab/slab.h"
#include "unit/section/plane.h"

/* A guide of metal walls a × b, filled with one medium: on a uniform grid of spacing h the
 * differences of a sine are exact with (2/h) sin(κh/2) in the place of κ, so β² is known to
 * rounding, and its limit is the closed form of every handbook,
 *   β² = k0² ε - (pπ/a)² - (qπ/b)²,   TE: p + q > 0, TM: p, q > 0. */
static void metal_walls_give_closed_forms(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.5, 1, 1};
  const double a = 1.0, b = 0.6, k0 = 2 * PI / 0.9;
  plane p = plane_of(index, 0);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, 0, a, 9, 0.125, 0.125, 0, {0}}, &p.x);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, 0, b, 9, 0.1, 0.1, 0, {0}}, &p.y);
  static const int ORDER[][2] = {{1, 0}, {0, 1}, {1, 1}, {1, 1}, {2, 0}};
  double known[5], values[5][4];
  const int m[4] = {2, 3, 4, 6};
  for (int g = 0; g < 4; g++) {
    double found[5];
    plane_indices(&p, m[g], true, k0, 1.5, 5, found);
    for (int i = 0; i < 5; i++) {
      double square = k0 * k0 * 2.25, limit = square;
      for (int d = 0; d < 2; d++) {
        double kappa = ORDER[i][d] * PI / (d == 0 ? a : b);
        double h = (d == 0 ? a / 8 : b / 6) / m[g];
        double shown = 2 / h * sin(0.5 * kappa * h);
        square -= shown * shown;
        limit -= kappa * kappa;
      }
      known[i] = sqrt(limit) / k0;
      values[i][g] = found[i];
      assert_near(found[i], sqrt(square) / k0, 1e-11); /* rounding of 1e3 unknowns */
    }
  }
  pk_error_law law = {.count = 3, .exponent = {2, 4, 6}, .smooth = 1};
  for (int i = 0; i < 5; i++) {
    picket_quantity q = pk_extrapolate(&law, 4, m, values[i]);
    assert_near(q.value, known[i], 1e-8); /* h⁸ of the coarsest step */
    assert_true(fabs(q.value - known[i]) <= q.uncertainty + 1e-12);
  }
  plane_close(&p);
}

/* Magnetic walls are the dual of electric ones: in a filled guide TE and TM change places. */
static void magnetic_walls_are_dual(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.5, 1, 1};
  double found[2][4];
  for (int k = 0; k < 2; k++) {
    pk_end end = k == 0 ? PK_END_ZERO : PK_END_FREE;
    plane p = plane_of(index, 0);
    lay_ruler(p.context, &(ruler){end, end, 0, 1, 9, 0.125, 0.125, 0, {0}}, &p.x);
    lay_ruler(p.context, &(ruler){end, end, 0, 0.6, 9, 0.1, 0.1, 0, {0}}, &p.y);
    plane_indices(&p, 2, true, 2 * PI / 0.9, 1.5, 4, found[k]);
    plane_close(&p);
  }
  for (int i = 0; i < 4; i++) {
    assert_near(found[0][i], found[1][i], 1e-11);
  }
}

static double slab_index(plane *p, pk_slab_polarization polarization, double wavelength) {
  pk_slab_film film = {pk_slab_isotropic(p->permittivity[1], 0), 0.22};
  film.medium.normal = p->permittivity[PLANE_MEDIA + 1];
  film.medium.along = p->permittivity[2 * PLANE_MEDIA + 1];
  pk_slab slab = {pk_slab_isotropic(p->permittivity[0], 0), 1, &film,
                  pk_slab_isotropic(p->permittivity[2], 0)};
  pk_slab_mode mode;
  assert_int_equal(
      pk_slab_mode_of_order(p->context, &slab, polarization, wavelength, 0, &mode, NULL, NULL),
      PICKET_OK);
  return creal(mode.index);
}

/* Stripes across y that do not change along a periodic x are a film stack. TE and TM sit in one
 * spectrum here; walls are far enough for 1e-10. */
static void check_stripes(double yy, double zz) {
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1.0};
  const double k0 = 2 * PI / 1.55;
  plane p = plane_of(index, 0.1);
  p.permittivity[PLANE_MEDIA + 1] *= yy;
  p.permittivity[2 * PLANE_MEDIA + 1] *= zz;
  plane_stripe(&p, 1, 0, 0.22);
  plane_stripe(&p, 2, 0.22, INFINITY);
  lay_ruler(p.context,
            &(ruler){PK_END_PERIODIC, PK_END_PERIODIC, -0.05, 0.05, 1, 0.05, 0.05, 0, {0}}, &p.x);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, -3, 2.2, 0.22, 0.03, 0.1, 2, {0, 0.22}},
            &p.y);
  const int m[4] = {4, 6, 8, 12};
  double values[2][4];
  for (int g = 0; g < 4; g++) {
    pk_axis thin = {0}, base = p.x;
    assert_int_equal(pk_axis_divide(p.context, &base, 1, &thin), PICKET_OK);
    pk_axis fine = {0}, kept = p.y;
    assert_int_equal(pk_axis_divide(p.context, &kept, m[g], &fine), PICKET_OK);
    p.x = thin;
    p.y = fine;
    double both[2];
    plane_indices(&p, 1, true, k0, 3.4757, 2, both);
    values[0][g] = both[0];
    values[1][g] = both[1];
    pk_axis_clear(p.context, &thin);
    pk_axis_clear(p.context, &fine);
    p.x = base;
    p.y = kept;
  }
  pk_error_law law = {.count = 3, .exponent = {2, 4, 6}, .smooth = 1};
  for (int t = 0; t < 2; t++) {
    picket_quantity q = pk_extrapolate(&law, 4, m, values[t]);
    assert_near(q.value, slab_index(&p, t == 0 ? PK_SLAB_TE : PK_SLAB_TM, 1.55), 1e-8);
  }
  plane_close(&p);
}

static void stripes_are_a_slab(void **state) {
  (void)state;
  check_stripes(1, 1);
  check_stripes(1.2, 0.6); /* an anisotropic film: te sees xx, tm yy and zz */
}

/* A quarter of the wire of 450 × 220 nm, mirror planes at both axes. */
static plane quarter_wire(pk_end at_x, pk_end at_y, double reach) {
  const double complex index[PLANE_MEDIA] = {1.4440, 3.4757, 1};
  plane p = plane_of(index, 0);
  plane_rect(&p, 1, 0, 0, 0.45, 0.22);
  lay_growing(p.context,
              &(ruler){at_x, PK_END_ZERO, 0, 0.225 + reach, 0.225, 0.08, 0.25, 1, {0.225}}, 0.3,
              &p.x);
  lay_growing(p.context, &(ruler){at_y, PK_END_ZERO, 0, 0.11 + reach, 0.11, 0.08, 0.25, 1, {0.11}},
              0.3, &p.y);
  return p;
}

/* Si 450 × 220 nm (3.4757) in SiO2 (1.4440) at 1.55 µm: 2.3528329627 and 1.7330946868 from an
 * independent full-vector boundary-integral computation made for this project. With the corner
 * correction errors fall as (2, 4 - 2α), α = 0.77046 of Si in SiO2. */
static void check_wire(pk_end at_x, pk_end at_y, double reach, double known) {
  plane p = quarter_wire(at_x, at_y, reach);
  enum { GRIDS = 4 };
  const int m[GRIDS] = {2, 3, 4, 6};
  double values[GRIDS];
  for (int g = 0; g < GRIDS; g++) {
    plane_indices(&p, m[g], true, 2 * PI / 1.55, 3.4757, 1, &values[g]);
  }
  pk_section *finest = plane_section(&p, m[GRIDS - 1], true);
  assert_true(pk_section_size(finest) < 10000);
  pk_section_free(finest);
  pk_error_law law = {.count = 3, .exponent = {2, 4 - 2 * 0.77046, 4}, .smooth = 1, .corners = 1};
  picket_quantity q = pk_extrapolate(&law, GRIDS, m, values);
  assert_near(q.value, known, q.uncertainty);
  assert_near(q.value, known, 1e-5 * known);
  assert_true(q.uncertainty < 1e-4);
  plane_close(&p);
}

static void wire_has_its_known_indices(void **state) {
  (void)state;
  check_wire(PK_END_ZERO, PK_END_FREE, 1.2, 2.3528329627);
  check_wire(PK_END_FREE, PK_END_ZERO, 1.6, 1.7330946868);
}

/* What is left after a step of h² from two grids is other powers: with the correction much less. */
static void correction_restores_second_order(void **state) {
  (void)state;
  double left[2];
  for (int correct = 0; correct < 2; correct++) {
    plane p = quarter_wire(PK_END_ZERO, PK_END_FREE, 1.2);
    double value[2];
    for (int g = 0; g < 2; g++) {
      plane_indices(&p, 3 << g, correct == 1, 2 * PI / 1.55, 3.4757, 1, &value[g]);
    }
    left[correct] = fabs(value[1] + (value[1] - value[0]) / 3 - 2.3528329627);
    plane_close(&p);
  }
  assert_true(left[1] < 0.25 * left[0]);
  assert_true(left[0] < 5e-4);
}

/* A silicon-like glass rod in air: HE11, HE21 (with TM01) from the characteristic equation
 * (A. W. Snyder and J. D. Love, Optical Waveguide Theory, 1983, ch. 12), solved to all digits. */
static void rod_has_its_known_indices(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1, 1.5, 1};
  plane p = plane_of(index, 0);
  plane_disc(&p, 1, 1.2);
  ruler r = {PK_END_ZERO, PK_END_ZERO, 0, 2.6, 0.6, 0.2, 0.2, 1, {0.6}};
  lay_ruler(p.context, &r, &p.x);
  r.low = PK_END_FREE;
  lay_ruler(p.context, &r, &p.y);
  const int m[4] = {2, 3, 4, 6};
  double values[4];
  for (int g = 0; g < 4; g++) {
    plane_indices(&p, m[g], true, 2 * PI, 1.5, 1, &values[g]);
  }
  pk_error_law law = {.count = 2, .exponent = {2, 4}};
  picket_quantity q = pk_extrapolate(&law, 4, m, values);
  assert_near(q.value, 1.397132091541, q.uncertainty);
  assert_near(q.value, 1.397132091541, 2e-5); /* scatter of a curved interface at 33 nm */
  plane_close(&p);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(metal_walls_give_closed_forms),
      cmocka_unit_test(magnetic_walls_are_dual),
      cmocka_unit_test(stripes_are_a_slab),
      cmocka_unit_test(wire_has_its_known_indices),
      cmocka_unit_test(correction_restores_second_order),
      cmocka_unit_test(rod_has_its_known_indices),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
