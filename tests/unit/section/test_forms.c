/* Power, energy and perturbation formulas hold on the grid itself. */
#include "section/forms.h"

#include "unit/section/plane.h"
#include "unit/short_memory.h"

/* A section without symmetry, three media, a slanted side. */
static plane crooked(picket_context *context, const double complex *index) {
  static const double SIDES[4][2] = {{-0.4, 0}, {0.35, 0}, {0.2, 0.3}, {-0.3, 0.3}};
  plane p = plane_in(context, index, 0);
  plane_stripe(&p, 2, -INFINITY, 0);
  assert_int_equal(pk_geometry_add_polygon(p.geometry, nowhere, 1, 4, SIDES), PICKET_OK);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_FREE, -1, 1.1, 0.4, 0.06, 0.2, 0, {0}}, &p.x);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, -1, 1, 0.3, 0.06, 0.2, 2, {0, 0.3}},
            &p.y);
  return p;
}

static plane crooked_plane(const double complex *index, double curvature) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  plane p = crooked(context, index);
  p.curvature = curvature;
  return p;
}

enum { MODES = 3 };

typedef struct solved {
  pk_section *section;
  pk_section_mode mode[MODES];
  pk_section_fields fields[MODES];
  double k0;
} solved;

static void solve(plane *p, double k0, solved *s) {
  int found = 0;
  s->k0 = k0;
  s->section = plane_section(p, 1, true);
  assert_int_equal(pk_section_modes(s->section, k0, 5.9 * k0 * k0, MODES, s->mode, &found),
                   PICKET_OK);
  assert_int_equal(found, MODES);
  for (int i = 0; i < MODES; i++) {
    assert_int_equal(pk_section_fields_take(s->section, k0, &s->mode[i], &s->fields[i]), PICKET_OK);
  }
}

static void solved_close(plane *p, solved *s) {
  for (int i = 0; i < MODES; i++) {
    pk_section_fields_clear(&s->fields[i]);
  }
  pk_section_modes_clear(p->context, MODES, s->mode);
  pk_section_free(s->section);
}

static const double complex CLEAR[PLANE_MEDIA] = {1, 2.4, 1.444};
static const double complex DIM[PLANE_MEDIA] = {1, 2.4 + 0.01 * I, 1.444 + 0.002 * I};

/* Straight, and a bend of 3.3 µm, whose g goes from 0.7 to 1.33 here. */
static const double CURVATURE[2] = {0, 0.3};

/* P(a, b) = δ_ab, with absorption too; without it the same holds for the power that flows. */
static void modes_are_orthogonal_in_power(void **state) {
  (void)state;
  for (int kind = 0; kind < 4; kind++) {
    bool lossy = kind % 2 == 1;
    plane p = crooked_plane(lossy ? DIM : CLEAR, CURVATURE[kind / 2]);
    solved s;
    solve(&p, 2 * PI / 1.2, &s);
    for (int a = 0; a < MODES; a++) {
      for (int b = 0; b < MODES; b++) {
        double complex product = pk_section_product(s.section, &s.fields[a], &s.fields[b]);
        double complex power = pk_section_power(s.section, &s.fields[a], &s.fields[b]);
        assert_near(cabs(product - (a == b)), 0, 1e-8);
        if (!lossy) {
          assert_near(cabs(power - (a == b)), 0, 1e-8);
        }
      }
    }
    solved_close(&p, &s);
    plane_close(&p);
  }
}

/* dβ/dk0 by the energy formula against a difference quotient of whole solves. */
static void group_index_of(double curvature) {
  const double k0 = 2 * PI / 1.2, step = 1e-4 * k0;
  double complex slope[3 * PLANE_MEDIA] = {0};
  for (int c = 0; c < 3; c++) { /* k0 dε/dk0 */
    slope[c * PLANE_MEDIA + 1] = 0.4;
    slope[c * PLANE_MEDIA + 2] = 0.03;
  }
  plane p = crooked_plane(DIM, curvature);
  solved s;
  solve(&p, k0, &s);
  double complex beta[2][MODES], group[MODES];
  for (int i = 0; i < MODES; i++) {
    assert_int_equal(pk_section_group_index(s.section, &s.fields[i], slope, &group[i]), PICKET_OK);
  }
  solved_close(&p, &s);
  for (int side = 0; side < 2; side++) {
    double k = k0 + (side == 0 ? -step : step);
    plane_media(&p, DIM);
    for (int m = 0; m < 3 * PLANE_MEDIA; m++) {
      p.permittivity[m] += slope[m] * (k - k0) / k0;
    }
    solve(&p, k, &s);
    for (int i = 0; i < MODES; i++) {
      beta[side][i] = s.mode[i].beta;
    }
    solved_close(&p, &s);
  }
  for (int i = 0; i < MODES; i++) {
    /* third derivative times the square of the step: 1e-8, more near cut-off */
    assert_near(cabs(group[i] - (beta[1][i] - beta[0][i]) / (2 * step)), 0, 1e-6);
  }
  plane_close(&p);
}

static void group_index_is_the_slope(void **state) {
  (void)state;
  group_index_of(CURVATURE[0]);
  group_index_of(CURVATURE[1]);
}

/* ∂β/∂ε against a difference quotient; the shares of the energy add up. */
static void pulls_and_shares_of(double curvature) {
  const double k0 = 2 * PI / 1.2, step = 1e-4;
  plane p = crooked_plane(CLEAR, curvature);
  solved s;
  solve(&p, k0, &s);
  double complex pulls[PLANE_MEDIA];
  double share[PLANE_MEDIA];
  assert_int_equal(pk_section_pulls(s.section, k0, &s.fields[0], pulls), PICKET_OK);
  assert_int_equal(pk_section_confinement(s.section, &s.fields[0], share), PICKET_OK);
  assert_near(share[0] + share[1] + share[2], 1, 1e-7);
  assert_true(share[1] > 0.7);
  solved_close(&p, &s);
  for (int m = 0; m < PLANE_MEDIA; m++) {
    double complex beta[2];
    for (int side = 0; side < 2; side++) {
      plane_media(&p, CLEAR);
      for (int c = 0; c < 3; c++) {
        p.permittivity[c * PLANE_MEDIA + m] += side == 0 ? -step : step;
      }
      solve(&p, k0, &s);
      beta[side] = s.mode[0].beta;
      solved_close(&p, &s);
    }
    assert_near(cabs(pulls[m] - (beta[1] - beta[0]) / (2 * step)), 0, 1e-7);
  }
  plane_close(&p);
}

static void pulls_and_shares(void **state) {
  (void)state;
  pulls_and_shares_of(CURVATURE[0]);
  pulls_and_shares_of(CURVATURE[1]);
}

/* A square rod has a pair of equal modes: both are found, orthogonal to each other, real. */
static void a_pair_comes_whole(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1};
  plane p = plane_of(index, 0);
  plane_rect(&p, 1, 0, 0, 0.34, 0.34);
  ruler r = {PK_END_ZERO, PK_END_ZERO, -0.8, 0.8, 0.17, 0.06, 0.15, 2, {-0.17, 0.17}};
  lay_ruler(p.context, &r, &p.x);
  lay_ruler(p.context, &r, &p.y);
  pk_section *section = plane_section(&p, 1, true);
  pk_section_mode modes[2];
  pk_section_fields fields[2];
  int found = 0;
  const double k0 = 2 * PI / 1.55;
  assert_int_equal(pk_section_modes(section, k0, 12.1 * k0 * k0, 2, modes, &found), PICKET_OK);
  assert_int_equal(found, 2);
  assert_near(creal(modes[0].beta - modes[1].beta) / k0, 0, 1e-9);
  for (int i = 0; i < 2; i++) {
    assert_int_equal(pk_section_fields_take(section, k0, &modes[i], &fields[i]), PICKET_OK);
    for (int64_t n = 0; n < pk_section_size(section); n++) {
      assert_true(cimag(modes[i].h[n]) == 0);
    }
  }
  assert_near(cabs(pk_section_product(section, &fields[0], &fields[1])), 0, 1e-8);
  assert_near(cabs(pk_section_product(section, &fields[1], &fields[1]) - 1), 0, 1e-8);
  for (int i = 0; i < 2; i++) {
    pk_section_fields_clear(&fields[i]);
  }
  pk_section_modes_clear(p.context, found, modes);
  pk_section_free(section);
  plane_close(&p);
}

enum { SET = 6 };

/* Power-orthonormal: |P(a, b) - δ_ab| of all modes of a guide with equal ones among them. */
static void check_set(plane *p, double half, double reach) {
  ruler r = {PK_END_ZERO, PK_END_ZERO, -half - reach, half + reach, half, 0.09,
             0.25,        2,           {-half, half}};
  lay_ruler(p->context, &r, &p->x);
  lay_ruler(p->context, &r, &p->y);
  pk_section *section = plane_section(p, 1, true);
  pk_section_mode modes[SET];
  pk_section_fields fields[SET];
  int found = 0;
  const double k0 = 2 * PI / 1.55;
  assert_int_equal(pk_section_modes(section, k0, 12.1 * k0 * k0, SET, modes, &found), PICKET_OK);
  assert_int_equal(found, SET);
  /* The lowest pair is equal on a grid that is the same along x and y. */
  assert_near(creal(modes[0].beta - modes[1].beta) / k0, 0, 1e-9);
  for (int i = 0; i < SET; i++) {
    assert_int_equal(pk_section_fields_take(section, k0, &modes[i], &fields[i]), PICKET_OK);
  }
  for (int a = 0; a < SET; a++) {
    for (int b = 0; b < SET; b++) {
      double complex product = pk_section_product(section, &fields[a], &fields[b]);
      assert_near(cabs(product - (a == b)), 0, 1e-8);
    }
  }
  for (int i = 0; i < SET; i++) {
    pk_section_fields_clear(&fields[i]);
  }
  pk_section_modes_clear(p->context, found, modes);
  pk_section_free(section);
  plane_close(p);
}

static void sets_with_pairs_are_orthonormal(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1};
  plane square = plane_of(index, 0);
  plane_rect(&square, 1, 0, 0, 0.7, 0.7);
  check_set(&square, 0.35, 0.6);
  plane round = plane_of(index, 0);
  plane_disc(&round, 1, 0.8);
  check_set(&round, 0.4, 0.6);
}

/* E_x alone in a guide of electric walls: TE01, E_x = sin(πy/b): ex_share 1, and the effective area
 * (∫sin²)²/∫sin⁴ = (ab/2)² / (3ab/8) = 2ab/3. */
static void looks_of_a_sine(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.5, 1, 1};
  plane p = plane_of(index, 0);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, 0, 0.5, 9, 0.1, 0.1, 0, {0}}, &p.x);
  lay_ruler(p.context, &(ruler){PK_END_ZERO, PK_END_ZERO, 0, 1, 9, 0.025, 0.025, 0, {0}}, &p.y);
  pk_section *section = plane_section(&p, 1, true);
  pk_section_mode mode;
  pk_section_fields fields;
  pk_section_looks looks;
  int found = 0;
  const double k0 = 2 * PI / 0.9;
  assert_int_equal(pk_section_modes(section, k0, 2.26 * k0 * k0, 1, &mode, &found), PICKET_OK);
  assert_int_equal(pk_section_fields_take(section, k0, &mode, &fields), PICKET_OK);
  pk_section_look(section, &fields, &looks);
  assert_near(looks.ex_share, 1, 1e-10);
  assert_near(looks.ez_share, 0, 1e-10);
  assert_near(looks.effective_area, 2 * 0.5 / 3, 1e-3); /* h² of 40 steps */
  pk_section_fields_clear(&fields);
  pk_section_modes_clear(p.context, found, &mode);
  pk_section_free(section);
  plane_close(&p);
}

static picket_status all_of_it(picket_context *context, const pk_geometry *geometry,
                               const pk_axis *x, const pk_axis *y, const double complex *e) {
  pk_section *section = NULL;
  pk_section_mode modes[2] = {{0}};
  pk_section_fields fields = {0};
  int found = 0;
  double complex group;
  double share[PLANE_MEDIA];
  pk_section_plan plan = {geometry, x, y, PLANE_MEDIA, true, 0};
  picket_status status = pk_section_create(context, &plan, &section);
  if (status == PICKET_OK) {
    status = pk_section_load(section, e);
  }
  if (status == PICKET_OK) {
    status = pk_section_modes(section, 5, 12 * 25, 2, modes, &found);
  }
  if (status == PICKET_OK) {
    status = pk_section_fields_take(section, 5, &modes[0], &fields);
  }
  if (status == PICKET_OK) {
    status = pk_section_group_index(section, &fields, e, &group);
  }
  if (status == PICKET_OK) {
    status = pk_section_confinement(section, &fields, share);
  }
  pk_section_fields_clear(&fields);
  pk_section_modes_clear(context, found, modes);
  pk_section_free(section);
  return status;
}

/* Each allocation fails once: out of memory, and nothing is left behind. */
static void short_of_memory(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1};
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status == PICKET_ERROR_MEMORY && n < 5000; n++) {
    short_memory memory = {0};
    picket_context *context = short_memory_context(&memory);
    plane p = plane_in(context, index, 0);
    plane_rect(&p, 1, 0, 0, 0.3, 0.2);
    lay_ruler(context,
              &(ruler){PK_END_ZERO, PK_END_FREE, -0.3, 0.3, 9, 0.15, 0.15, 2, {-0.15, 0.15}}, &p.x);
    lay_ruler(context, &(ruler){PK_END_ZERO, PK_END_FREE, -0.3, 0.3, 9, 0.1, 0.1, 2, {-0.1, 0.1}},
              &p.y);
    long before = memory.living;
    memory.fail_at = memory.asked + n;
    status = all_of_it(context, p.geometry, &p.x, &p.y, p.permittivity);
    assert_true(status == PICKET_OK || status == PICKET_ERROR_MEMORY);
    assert_int_equal(memory.living, before + (status == PICKET_OK ? 0 : 0));
    memory.fail_at = 0;
    plane_close(&p);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(modes_are_orthogonal_in_power),
      cmocka_unit_test(group_index_is_the_slope),
      cmocka_unit_test(pulls_and_shares),
      cmocka_unit_test(a_pair_comes_whole),
      cmocka_unit_test(sets_with_pairs_are_orthonormal),
      cmocka_unit_test(looks_of_a_sine),
      cmocka_unit_test(short_of_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
