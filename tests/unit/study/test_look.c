/* The first look and what it prepares: answers must not depend on where open sides end and how
 * their layers absorb, and the power that a mode loses must be found where it went. */
#include "study/look.h"

#include <string.h>

#include "bloch/search.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

static const double PI = 3.141592653589793238;

/* 100 of 200 nm, 220 nm wide, silicon in silica; below, what `below` paints. */
#define ROW(polarization, below)                                                           \
  "format: 1\n"                                                                            \
  "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}, air: " \
  "{constant: {index: 1}}}\n"                                                              \
  "light: {wavelength_nm: 1550, polarization: " polarization                               \
  "}\n"                                                                                    \
  "cell: {pitch_nm: 200, cladding: oxide, shapes: [" below                                 \
  "{rect: {fill: core, length_nm: 100, width_nm: 220, at_nm: [0, 0]}}]}\n"

#define SILICON "{stripe: {fill: core, across: x, from_nm: -.inf, to_nm: -1110}},"

/* Radiates into both sides: from reference/open_cases.json, O14; and one between oxide and air. */
#define GRATING(material, above)                                                             \
  "format: 1\n"                                                                              \
  "materials: {core: " material                                                              \
  ", oxide: {constant: {index: 1.444}}, above: {constant: {index: " above                    \
  "}}}\n"                                                                                    \
  "light: {wavelength_nm: 1550, polarization: hy}\n"                                         \
  "cell: {pitch_nm: 550, cladding: above, shapes: [{stripe: {fill: oxide, across: x, "       \
  "from_nm: -.inf, to_nm: -250}}, {rect: {fill: core, length_nm: 275, width_nm: 500, at_nm:" \
  " [0, 0]}}]}\n"

typedef struct seen {
  picket_context *context;
  understood u;
  pk_look look;
} seen;

static seen look_at(const char *text, pk_polarization polarization) {
  seen s = {0};
  assert_int_equal(picket_context_create(NULL, &s.context), PICKET_OK);
  s.u = understand_good(s.context, text);
  assert_int_equal(pk_look_take(s.u.problem, polarization, 1.55, 1, 1e-6, &s.look), PICKET_OK);
  assert_int_equal(s.look.count, 1);
  return s;
}

static void look_away(seen *s) {
  pk_look_clear(&s->look);
  picket_problem_free(s->u.owner);
  picket_context_free(s->context);
}

/* The mode on grid m with the sides of `survey`, walls `reach` decay lengths off. */
static pk_character on_sides(seen *s, const pk_survey *survey, double reach, int m,
                             double complex *xi) {
  pk_cell_grid base;
  pk_level level;
  pk_wave wave = {0};
  pk_character character;
  bool same = false;
  pk_lay_plan plan = {.reach = reach, .mirror = false, .zero_walls = true};
  assert_int_equal(pk_survey_lay(survey, &plan, &base), PICKET_OK);
  assert_int_equal(pk_look_open(&s->look, &base, m, &level), PICKET_OK);
  assert_int_equal(pk_look_follow(&s->look, &level, &s->look.mode[0], &wave, &character, &same),
                   PICKET_OK);
  assert_true(same);
  *xi = wave.xi;
  pk_wave_clear(s->context, &wave);
  pk_level_close(&level);
  pk_cell_grid_clear(s->context, &base);
  return character;
}

/* Layers 1.5 times as thick or twice as strong; and as they are. */
enum { VARIATIONS = 3 };

static double complex index_varied(seen *s, const pk_survey *from, double reach, int variation) {
  pk_survey survey = *from;
  double complex xi;
  for (int side = 0; side < 2; side++) {
    survey.layer[side].thickness *= variation == 1 ? 1.5 : 1;
    survey.layer[side].strength *= variation == 2 ? 2 : 1;
  }
  return on_sides(s, &survey, reach, 2, &xi).k / s->look.k0;
}

/* With sides moved, the steps in them change, too: the index without its errors h² and h⁴. */
static double complex index_limit(seen *s, const pk_survey *survey, double reach) {
  double complex sum = 0, xi;
  for (int m = 2; m <= 4; m++) {
    double weight = 1;
    for (int other = 2; other <= 4; other++) {
      weight *= other == m ? 1 : 1.0 * m * m / (m * m - other * other);
    }
    sum += weight * on_sides(s, survey, reach, m, &xi).k / s->look.k0;
  }
  return sum;
}

/* Where the fields of a bound mode have died, nothing may matter: 1e-7 (layers, measured 1e-12 to
 * 4e-10: 1e-9). */
static void bound_modes_do_not_see_the_sides(void **state) {
  (void)state;
  const char *text[2] = {ROW("ey", ""), ROW("hy", "")};
  for (int p = 0; p < 2; p++) {
    seen s = look_at(text[p], (pk_polarization)p);
    pk_survey survey = s.look.survey;
    for (int side = 0; side < 2; side++) {
      assert_true(survey.layer[side].thickness == 0);
      survey.layer[side] = (pk_layer){0.6, 4};
    }
    const double reach = 9; /* exp(-2·9) = 1.5e-8 */
    double complex n = index_varied(&s, &survey, reach, 0);
    assert_near(cimag(n), 0, 1e-7);
    for (int v = 1; v < VARIATIONS; v++) {
      assert_near(cabs(index_varied(&s, &survey, reach, v) - n), 0, 1e-9);
    }
    double complex moved = index_limit(&s, &survey, 1.3 * reach);
    assert_near(cabs(moved - index_limit(&s, &survey, reach)), 0, 1e-7);
    look_away(&s);
  }
}

/* Leaky and radiating modes: the complex index within 1 % of the loss (layers, measured: 0.4 %). */
static void losses_do_not_see_the_layers(void **state) {
  (void)state;
  const char *text[3] = {ROW("ey", SILICON), ROW("hy", SILICON),
                         GRATING("{constant: {index: 2.85}}", "1.444")};
  for (int t = 0; t < 3; t++) {
    seen s = look_at(text[t], t == 0 ? PK_EY : PK_HY);
    const pk_survey *survey = &s.look.survey;
    assert_true(survey->layer[0].thickness > 0);
    const double reach = 6;
    double complex n = index_varied(&s, survey, reach, 0);
    assert_true(cimag(n) > 1e-8);
    for (int v = 1; v < VARIATIONS; v++) {
      double complex varied = index_varied(&s, survey, reach, v);
      assert_near(cabs(varied - n), 0, 0.01 * cimag(n));
    }
    n = index_limit(&s, survey, reach);
    double complex moved = index_limit(&s, survey, 1.3 * reach);
    assert_near(cimag(moved), cimag(n), 0.01 * cimag(n));
    assert_near(creal(moved), creal(n), 1e-5); /* what is left of the grid's error */
    look_away(&s);
  }
}

/* What flows in less what flows out a pitch later, |ξ|² of it, has left through the sides or heated
 * the media. The balance is one of the discrete equations: it closes to the accuracy of the wave.
 */
static void lost_power_is_found(void **state) {
  (void)state;
  const char *text[5] = {GRATING("{constant: {index: 2.85}}", "1.444"),
                         GRATING("{constant: {index: 2.85}}", "1"), ROW("hy", SILICON),
                         ROW("ey", SILICON),
                         GRATING("{constant: {index: 2.85, extinction: 0.002}}", "1.444")};
  for (int t = 0; t < 5; t++) {
    seen s = look_at(text[t], t == 3 ? PK_EY : PK_HY);
    double complex xi;
    pk_character c = on_sides(&s, &s.look.survey, 6, 2, &xi);
    const pk_power *p = &c.power;
    double lost = p->forward * (1 - creal(xi * conj(xi)));
    double radiated = p->radiated[0] + p->radiated[1];
    assert_true(p->forward > 0 && lost > 0);
    assert_near(radiated + p->absorbed, lost, 1e-8 * lost);
    if (t == 0) {
      assert_near(p->radiated[0], p->radiated[1], 1e-6 * radiated);
    }
    if (t == 4) {
      assert_true(p->absorbed > 0.1 * lost && radiated > 0.1 * lost);
    } else {
      assert_near(p->absorbed, 0, 1e-6 * lost);
    }
    look_away(&s);
  }
}

/* Two modes between oxide and air, from reference/open_cases.json, O13. */
static const char LOOSE[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 2.85}}, oxide: {constant: {index: 1.444}}, air: "
    "{constant: {index: 1}}}\n"
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "cell: {pitch_nm: 260, cladding: air, shapes: [{stripe: {fill: oxide, across: x, from_nm: "
    "-.inf, to_nm: -250}}, {rect: {fill: core, length_nm: 156, width_nm: 500, at_nm: [0, "
    "0]}}]}\n";

/* A second mode that reaches 1.3 µm into the oxide, farther than the layers of a first look are
 * off. */
static void loosely_bound_modes_are_found(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, LOOSE);
  for (int wanted = 1; wanted <= 4; wanted++) {
    pk_look look;
    assert_int_equal(pk_look_take(u.problem, PK_EY, 1.55, wanted, 1e-4, &look), PICKET_OK);
    assert_int_equal(look.count, wanted < 2 ? wanted : 2); /* there are no more */
    static const double EXACT[2] = {2.1729703844441355, 1.4562399785709652};
    for (int i = 0; i < look.count; i++) {
      assert_int_equal(look.mode[i].order, i);
      assert_true(look.mode[i].character.layer_share < PK_LAYER_SHARE_SURE);
      /* As exact as sixteen steps to a pitch are. */
      assert_near(creal(look.mode[i].character.k) * 1.55 / (2 * PI), EXACT[i], 2e-3);
    }
    pk_look_clear(&look);
  }
  picket_problem_free(u.owner);
  picket_context_free(context);
}

/* The steps grow, for a look makes hundreds of allocations. */
static void allocations_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n += 1 + n / 2) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    understood u = understand_good(context, LOOSE);
    pk_look look = {0};
    long living = memory.living;
    memory.fail_at = memory.asked + n;
    picket_status status = pk_look_take(u.problem, PK_EY, 1.55, 2, 1e-4, &look);
    bool met = memory.asked >= memory.fail_at;
    assert_int_equal(status, met ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_true(!met || memory.living == living);
    pk_look_clear(&look);
    picket_problem_free(u.owner);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (!met) {
      assert_true(n > 100);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(bound_modes_do_not_see_the_sides),
      cmocka_unit_test(losses_do_not_see_the_layers),
      cmocka_unit_test(lost_power_is_found),
      cmocka_unit_test(loosely_bound_modes_are_found),
      cmocka_unit_test(allocations_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
