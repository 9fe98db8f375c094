/* Derivatives against differences of full solves on the same family of grids, moved along with the
 * geometry: what is left is the rounding of the solves over the step. */
#include "study/derivative.h"

#include <complex.h>
#include <picket/derivative.h>
#include <picket/edges.h>
#include <picket/index.h>
#include <picket/options.h>
#include <stdio.h>

#include "bloch/resonance.h"
#include "bloch/wavenumber.h"
#include "io/vary.h"
#include "study/corner_law.h"
#include "study/look.h"
#include "study/slope.h"
#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/study/understood.h"

static const double PI = 3.141592653589793238;

/* Walls, so that no open side is laid anew when the accuracy or the mode changes; two teeth, so
 * that a position matters; materials that depend on temperature and on wavelength. */
#define CELL                                                                       \
  "format: 1\nlight: {wavelength_nm: 1500, polarization: %s}\ntemperature_c: 35\n" \
  "materials:\n"                                                                   \
  "  resin: {constant: {index: 1.5, dn_dt_per_k: -1.0e-4}}\n"                      \
  "  tooth: {constant: {index: 2.8, dn_dt_per_k: 1.8e-4}}\n"                       \
  "  glass: {sellmeier: {b: [0.6961663, 0.4079426, 0.8974794], c_um: [0.0684043, " \
  "0.1162414, 9.896161]}}\n"                                                       \
  "cell:\n  pitch_nm: 340\n  cladding: resin\n  lateral: electric\n"               \
  "  lateral_span_nm: 500\n  shapes:\n"                                            \
  "    - stripe: {fill: glass, across: x, from_nm: -.inf, to_nm: -175}\n"          \
  "    - rect: {fill: tooth, length_nm: 150, width_nm: 250, at_nm: [0, 25]%s}\n"

/* What is varied, and half the width of the narrower differences in its own unit: wide enough that
 * rounding stays below 1e-8 of the derivative; a second width takes the error of second order away.
 * What was seen is 3e-8 at most. */
typedef struct varied {
  const char *path;
  double width;
} varied;

static const varied VARIED[] = {{"cell.pitch_nm", 0.1},
                                {"cell.shapes.1.length_nm", 0.05},
                                {"cell.shapes.1.width_nm", 0.1},
                                {"cell.shapes.1.at_nm.1", 0.05},
                                {"cell.lateral_span_nm", 0.15},
                                {"materials.tooth.constant.index", 1e-3},
                                {"temperature_c", 5}};
enum { VARIATIONS = 7, MOST_GRIDS = 4 };
/* What the first family of a study is made of: the fourth where interfaces are curved. */
static const int M[MOST_GRIDS] = {2, 3, 4, 6};

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

/* `more` keys of the tooth. */
static understood cell_of(pk_polarization polarization, const char *more) {
  char text[2048];
  snprintf(text, sizeof text, CELL, polarization == PK_EY ? "ey" : "hy", more);
  return understand_good(context, text);
}

/* The problem with the value at a path moved. */
static pk_problem *moved(const understood *u, const char *path, double by) {
  pk_node *node = NULL;
  double value = 0;
  pk_problem *problem = NULL;
  assert_int_equal(pk_vary_value(u->owner->document, path, &node, &value), PICKET_OK);
  assert_int_equal(pk_vary_read(context, u->owner->document, node, value + by, &problem),
                   PICKET_OK);
  return problem;
}

/* A quantity of a problem on member m of the family of a base grid. */
typedef double (*quantity)(const pk_problem *problem, pk_polarization polarization,
                           const pk_cell_grid *base, int m, double guess);

/* Wavelength of the state at the zone edge nearest to a wavelength. */
static double edge_of(const pk_problem *problem, pk_polarization polarization,
                      const pk_cell_grid *base, int m, double guess) {
  pk_level level;
  pk_resonance resonance = {0};
  assert_int_equal(pk_level_open(problem, polarization, base, m, &level), PICKET_OK);
  assert_int_equal(pk_resonance_near(level.solver, &level.media, (pk_phase){-1, 1, 0},
                                     2 * PI / guess, NULL, &resonance),
                   PICKET_OK);
  double wavelength = 2 * PI / resonance.k0;
  pk_resonance_clear(context, &resonance);
  pk_level_close(&level);
  return wavelength;
}

/* Bloch index, below the zone edge, of the wave nearest to an index. */
static double index_of(const pk_problem *problem, pk_polarization polarization,
                       const pk_cell_grid *base, int m, double guess) {
  pk_level level;
  pk_wave wave = {0};
  double k0 = 2 * PI / problem->light.wavelength_um[0], pitch = problem->cell.pitch_um;
  assert_int_equal(pk_level_open(problem, polarization, base, m, &level), PICKET_OK);
  assert_int_equal(pk_media_set(&level.media, k0, level.op), PICKET_OK);
  assert_int_equal(pk_wave_near(level.solver, (pk_phase){1, 1, 0}, k0, cexp(I * k0 * guess * pitch),
                                NULL, &wave),
                   PICKET_OK);
  double index = carg(wave.xi) / (k0 * pitch);
  pk_wave_clear(context, &wave);
  pk_level_close(&level);
  return index;
}

static double difference(const understood *u, pk_polarization polarization, const varied *v,
                         double times, const pk_cell_grid *base, int m, quantity q, double guess) {
  double value[2];
  for (int i = 0; i < 2; i++) {
    pk_problem *neighbour = moved(u, v->path, times * (i ? v->width : -v->width));
    pk_cell_grid grid;
    assert_int_equal(pk_cell_grid_move(context, base, &u->problem->cell, &neighbour->cell, &grid),
                     PICKET_OK);
    value[i] = q(neighbour, polarization, &grid, m, guess);
    pk_cell_grid_clear(context, &grid);
    pk_problem_free(neighbour);
  }
  return (value[1] - value[0]) / (2 * times * v->width);
}

/* The limit of differences on the grids of a study's first family. */
static double by_differences(const understood *u, pk_polarization polarization, const varied *v,
                             quantity q, double guess) {
  pk_survey survey;
  pk_cell_grid base;
  pk_error_law law;
  pk_lay_plan plan = {.reach = 1, .mirror = false, .zero_walls = true};
  assert_int_equal(pk_survey_take(u->problem, polarization, &survey), PICKET_OK);
  assert_int_equal(pk_survey_lay(&survey, &plan, &base), PICKET_OK);
  assert_int_equal(pk_corner_law(&survey, &base, &law), PICKET_OK);
  double slopes[MOST_GRIDS];
  int grids = pk_geometry_is_rectangular(u->problem->cell.geometry) ? 3 : 4;
  for (int g = 0; g < grids; g++) {
    double wide = difference(u, polarization, v, 2, &base, M[g], q, guess);
    double narrow = difference(u, polarization, v, 1, &base, M[g], q, guess);
    slopes[g] = narrow + (narrow - wide) / 3;
  }
  pk_cell_grid_clear(context, &base);
  return pk_extrapolate(&law, grids, M, slopes).value;
}

static void compare(const char *path, double found, double expected) {
  if (!(fabs(found - expected) <= 1e-7 * fabs(expected))) {
    fail_msg("%s: %.12g is not %.12g", path, found, expected);
  }
}

static void edges_agree_with_full_solves(void **state) {
  (void)state;
  for (int p = 0; p < 2; p++) {
    understood u = cell_of((pk_polarization)p, "");
    picket_result *edges = NULL;
    picket_edges_answer at;
    assert_int_equal(picket_edges_find(u.owner, NULL, &edges), PICKET_OK);
    assert_int_equal(picket_edges_get(edges, 0, &at), PICKET_OK);
    for (int i = 0; i < VARIATIONS; i++) {
      picket_result *result = NULL;
      picket_edge_derivatives answer;
      assert_int_equal(picket_edge_derivatives_find(u.owner, VARIED[i].path, NULL, &result),
                       PICKET_OK);
      assert_int_equal(picket_edge_derivatives_count(result), 1);
      assert_int_equal(picket_edge_derivatives_get(result, 0, &answer), PICKET_OK);
      compare(
          VARIED[i].path, answer.bands[0].long_um.value,
          by_differences(&u, (pk_polarization)p, &VARIED[i], edge_of, at.bands[0].long_um.value));
      compare(
          VARIED[i].path, answer.bands[0].short_um.value,
          by_differences(&u, (pk_polarization)p, &VARIED[i], edge_of, at.bands[0].short_um.value));
      picket_result_free(result);
    }
    picket_result_free(edges);
    picket_problem_free(u.owner);
  }
}

/* Rounded corners, whose arcs move through the cells of the grid. A sharp corner has no derivative:
 * its radius cannot be less. */
static void a_rounding_agrees_with_full_solves(void **state) {
  (void)state;
  static const varied rounding = {"cell.shapes.1.corner_radius_nm", 0.05};
  for (int p = 0; p < 2; p++) {
    understood u = cell_of((pk_polarization)p, ", corner_radius_nm: 60");
    picket_options options;
    picket_options_init(&options);
    options.accuracy = 1e-3;
    picket_result *edges = NULL, *result = NULL;
    picket_edges_answer at;
    picket_edge_derivatives answer;
    assert_int_equal(picket_edges_find(u.owner, &options, &edges), PICKET_OK);
    assert_int_equal(picket_edges_get(edges, 0, &at), PICKET_OK);
    assert_int_equal(picket_edge_derivatives_find(u.owner, rounding.path, NULL, &result),
                     PICKET_OK);
    assert_int_equal(picket_edge_derivatives_get(result, 0, &answer), PICKET_OK);
    compare(rounding.path, answer.bands[0].long_um.value,
            by_differences(&u, (pk_polarization)p, &rounding, edge_of, at.bands[0].long_um.value));
    compare(rounding.path, answer.bands[0].short_um.value,
            by_differences(&u, (pk_polarization)p, &rounding, edge_of, at.bands[0].short_um.value));
    picket_result_free(result);
    picket_result_free(edges);
    picket_problem_free(u.owner);
  }
  understood u = cell_of(PK_EY, ", corner_radius_nm: 0");
  picket_result *result = NULL;
  assert_int_equal(picket_edge_derivatives_find(u.owner, rounding.path, NULL, &result),
                   PICKET_ERROR_INPUT);
  assert_null(result);
  assert_non_null(strstr(picket_context_message(context), "corner_radius_nm is -"));
  picket_problem_free(u.owner);
}

static void indices_agree_with_full_solves(void **state) {
  (void)state;
  for (int p = 0; p < 2; p++) {
    understood u = cell_of((pk_polarization)p, "");
    picket_result *index = NULL;
    picket_index_answer at;
    assert_int_equal(picket_index_find(u.owner, NULL, &index), PICKET_OK);
    assert_int_equal(picket_index_get(index, 0, &at), PICKET_OK);
    double guess = at.points[0].modes[0].bloch_index.value;
    const varied wavelength = {"light.wavelength_nm", 0.4};
    for (int i = 0; i <= VARIATIONS; i++) {
      const varied *v = i < VARIATIONS ? &VARIED[i] : &wavelength;
      picket_result *result = NULL;
      picket_index_derivatives answer;
      assert_int_equal(picket_index_derivatives_find(u.owner, v->path, NULL, &result), PICKET_OK);
      assert_int_equal(picket_index_derivatives_get(result, 0, &answer), PICKET_OK);
      compare(v->path, answer.points[0].bloch_index.value,
              by_differences(&u, (pk_polarization)p, v, index_of, guess));
      picket_result_free(result);
    }
    picket_result_free(index);
    picket_problem_free(u.owner);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(edges_agree_with_full_solves),
      cmocka_unit_test(a_rounding_agrees_with_full_solves),
      cmocka_unit_test(indices_agree_with_full_solves),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
