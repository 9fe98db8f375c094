/* Laws of cells with corners, and values and bars that follow from them against results of a
 * boundary-integral method (reference cases of the project: digits as given there). */
#include "study/corner_law.h"

#include <picket/edges.h>
#include <picket/options.h>

#include "base/memory.h"
#include "study/study.h"
#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"
#include "unit/study/understood.h"

#define HEAD                                                                 \
  "format: 1\nname: corners\nlight: {polarization: hy}\nmaterials:\n"        \
  "  oxide: {constant: {index: 1.444}}\n  core: {constant: {index: 2.85}}\n" \
  "  bridge: {constant: {index: 2.2}}\ncell:\n  cladding: oxide\n"
#define TOOTH                                          \
  HEAD "  pitch_nm: 380\n  lateral: open\n  shapes:\n" \
       "    - rect: {fill: core, length_nm: 190, width_nm: 500}\n"
#define BRIDGED                                                      \
  HEAD "  pitch_nm: 300\n  lateral: open\n  shapes:\n"               \
       "    - rect: {fill: bridge, length_nm: 300, width_nm: 500}\n" \
       "    - rect: {fill: core, length_nm: 150, width_nm: 500}\n"
#define STRIP                                          \
  HEAD "  pitch_nm: 300\n  lateral: open\n  shapes:\n" \
       "    - rect: {fill: bridge, length_nm: 300, width_nm: 500}\n"
#define WEDGE TOOTH "    - polygon: {fill: bridge, corners_nm: [[-50, 300], [50, 300], [0, 400]]}\n"

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

static picket_status law_of(picket_context *in, const char *text, pk_polarization polarization,
                            pk_error_law *law) {
  understood u;
  pk_survey survey;
  pk_cell_grid base = {0};
  pk_lay_plan plan = {.reach = 4, .mirror = true, .zero_walls = true};
  picket_status status = understand(in, text, &u);
  if (status == PICKET_OK) {
    status = pk_survey_take(u.problem, polarization, &survey);
  }
  if (status == PICKET_OK) {
    status = pk_survey_lay(&survey, &plan, &base);
  }
  if (status == PICKET_OK) {
    status = pk_corner_law(&survey, &base, law);
    pk_cell_grid_clear(in, &base);
  }
  picket_problem_free(u.owner);
  return status;
}

static void laws_know_the_corners(void **state) {
  (void)state;
  pk_error_law law;
  assert_int_equal(law_of(context, TOOTH, PK_HY, &law), PICKET_OK);
  assert_true(law.corners && law.smooth && !law.no_bar);
  assert_int_equal(law.count, 3);
  double alpha = 0.5 * (4 - law.exponent[1]), in = 2.85 * 2.85, out = 1.444 * 1.444;
  const double quarter = 0.25 * 3.141592653589793238;
  assert_true(alpha > 0.5 && alpha < 1);
  assert_near(tan(3 * quarter * alpha) / in + tan(quarter * alpha) / out, 0, 1e-10);
  assert_int_equal(law_of(context, BRIDGED, PK_HY, &law), PICKET_OK);
  assert_true(law.corners && law.exponent[1] > 2 && law.exponent[1] < 3);
}

static void other_cells_keep_their_laws(void **state) {
  (void)state;
  pk_error_law law;
  const char *texts[] = {TOOTH, BRIDGED, STRIP};
  for (int i = 0; i < 3; i++) {
    assert_int_equal(law_of(context, texts[i], i < 2 ? PK_EY : PK_HY, &law), PICKET_OK);
    assert_true(!law.corners && law.smooth && !law.no_bar);
    assert_int_equal(law.count, 2);
    assert_near(law.exponent[1], 4, 0);
  }
}

static void corners_that_stay_have_no_bar(void **state) {
  (void)state;
  pk_error_law law;
  assert_int_equal(law_of(context, WEDGE, PK_HY, &law), PICKET_OK);
  assert_non_null(law.no_bar);
  assert_non_null(strstr(law.no_bar, "oblique"));
  assert_int_equal(law_of(context, WEDGE, PK_EY, &law), PICKET_OK);
  assert_null(law.no_bar);
}

static void values_that_obey_the_law_give_the_limit(void **state) {
  (void)state;
  const pk_error_law law = {.count = 3, .exponent = {2, 2.46, 4}, .smooth = 1, .corners = 1};
  const int m[] = {2, 3, 4, 6};
  double values[4];
  for (int i = 0; i < 4; i++) {
    values[i] = 1.5 + 0.1 * pow(m[i], -2) + 0.02 * pow(m[i], -2.46) - 0.01 * pow(m[i], -4);
  }
  picket_quantity q = pk_extrapolate(&law, 4, m, values);
  assert_near(q.value, 1.5, 1e-12);
  /* Not below 0.6 % of the step, and not above what leaving out a term can do. */
  assert_true(q.uncertainty >= 0.0059 * fabs(values[3] - 1.5) && q.uncertainty < 1e-3);
  q = pk_extrapolate(&law, 3, m, values);
  assert_true(fabs(q.value - 1.5) < q.uncertainty);
  assert_true(q.uncertainty >= 0.0199 * fabs(values[2] - q.value));
}

/* The two-cure bar vanishes where terms cancel; the share of the step does not. */
static void chance_does_not_make_a_bar(void **state) {
  (void)state;
  const pk_error_law law = {.count = 3, .exponent = {2, 2.46, 4}, .smooth = 1, .corners = 1};
  const int m[] = {2, 3, 4, 6};
  double values[4];
  for (int i = 0; i < 4; i++) {
    values[i] = 1.5 + 0.1 * pow(m[i], -2);
  }
  for (int count = 3; count <= 4; count++) {
    picket_quantity q = pk_extrapolate(&law, count, m, values);
    double share = count == 3 ? 0.02 : 0.006;
    assert_near(q.uncertainty, share * fabs(values[count - 1] - 1.5), 1e-12);
  }
}

static void check_edges(const char *text, double accuracy, double goal, double short_nm,
                        double long_nm) {
  understood u = understand_good(context, text);
  picket_options options;
  picket_options_init(&options);
  options.accuracy = accuracy;
  picket_result *result = NULL;
  assert_int_equal(pk_study_edges(u.problem, &options, &result), PICKET_OK);
  assert_int_equal(result->count, 1);
  const picket_stop_band *band = &result->edges[0].bands[0];
  const picket_quantity q[2] = {band->short_um, band->long_um};
  const double exact[2] = {1e-3 * short_nm, 1e-3 * long_nm};
  for (int i = 0; i < 2; i++) {
    assert_null(q[i].note);
    assert_near(q[i].value, exact[i], q[i].uncertainty);
    assert_near(q[i].value, exact[i], goal * exact[i]);
    assert_true(q[i].uncertainty < accuracy * exact[i]);
  }
  pk_result_free(result);
  picket_problem_free(u.owner);
}

/* Cases O10 and O12. */
static void edges_agree_with_boundary_integrals(void **state) {
  (void)state;
  check_edges(TOOTH, 1e-4, 5e-6, 1284.118529358188, 1554.7483453623079);
  check_edges(TOOTH, 1e-5, 2e-7, 1284.118529358188, 1554.7483453623079);
  check_edges(BRIDGED, 1e-4, 5e-6, 1279.4477392447918, 1411.7246583715042);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *short_context = short_memory_context(&memory);
    understood u = understand_good(short_context, TOOTH);
    pk_survey survey;
    pk_cell_grid base = {0};
    pk_lay_plan plan = {.reach = 4, .mirror = true, .zero_walls = true};
    assert_int_equal(pk_survey_take(u.problem, PK_HY, &survey), PICKET_OK);
    assert_int_equal(pk_survey_lay(&survey, &plan, &base), PICKET_OK);
    long held = memory.living;
    memory.fail_at = memory.asked + n;
    pk_error_law law = {.count = 42};
    picket_status status = pk_corner_law(&survey, &base, &law);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_true(failed == (law.count == 42));
    assert_int_equal(memory.living, held);
    memory.fail_at = 0;
    pk_cell_grid_clear(short_context, &base);
    picket_problem_free(u.owner);
    picket_context_free(short_context);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(laws_know_the_corners),
      cmocka_unit_test(other_cells_keep_their_laws),
      cmocka_unit_test(corners_that_stay_have_no_bar),
      cmocka_unit_test(values_that_obey_the_law_give_the_limit),
      cmocka_unit_test(chance_does_not_make_a_bar),
      cmocka_unit_test(edges_agree_with_boundary_integrals),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
