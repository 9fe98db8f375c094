/* The study of sections: closed forms, mirror planes that change nothing, and what it does with the
 * rest. */
#include <complex.h>
#include <picket/modes.h>

#include "study/study.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

static const double PI = 3.141592653589793238;

#define MATERIALS                                           \
  "format: 1\n"                                             \
  "materials:\n"                                            \
  "  core: {constant: {index: 2.0}}\n"                      \
  "  speck: {constant: {index: 1.444001}}\n"                \
  "  lossy: {constant: {index: 1.5, extinction: 0.0001}}\n" \
  "  oxide: {constant: {index: 1.444}}\n"                   \
  "light: {wavelength_nm: 1550}\n"
#define SECTION(cladding, more, shapes) \
  "section: {cladding: " cladding ", " more "shapes: [" shapes "]}\n"
#define WIRE(at) "{rect: {fill: core, width_nm: 1600, height_nm: 400, at_nm: " at "}}"

static picket_context *context;
static picket_options options;

static int set_up(void **state) {
  (void)state;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static picket_result *study(const char *text, double count) {
  picket_result *result = NULL;
  understood u = understand_good(context, text);
  picket_options chosen = options;
  chosen.count = count;
  if (pk_study_modes(u.problem, &chosen, &result) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  picket_problem_free(u.owner);
  assert_int_equal(result->count, 1);
  return result;
}

static const picket_section_mode *mode_of(const picket_result *r, int i) {
  assert_true(i < r->modes->points[0].mode_count);
  return &r->modes->points[0].modes[i];
}

static void check_near(picket_quantity a, picket_quantity b) {
  assert_near(a.value, b.value, a.uncertainty + b.uncertainty);
}

/* β² = k0²(n + iκ)² - (π/a)² between metal walls: index and loss in closed form. */
static void absorption_in_a_metal_guide(void **state) {
  (void)state;
  picket_result *r = study(MATERIALS SECTION("lossy", "span_nm: [1000, 400], ",
                                             "{rect: {fill: lossy, width_nm: 9, height_nm: 9}}"),
                           1);
  const double k0 = 2 * PI / 1.55;
  double complex n = 1.5 + 1e-4 * I;
  double complex beta = csqrt(k0 * k0 * n * n - PI * PI);
  const picket_section_mode *mode = mode_of(r, 0);
  assert_near(mode->index.value, creal(beta) / k0, mode->index.uncertainty);
  /* 20 log10(e) dB per neper, 1e4 µm per cm */
  assert_near(mode->loss_db_per_cm.value, 8.685889638065035e4 * cimag(beta),
              mode->loss_db_per_cm.uncertainty);
  assert_true(mode->loss_db_per_cm.uncertainty < 1e-3 * mode->loss_db_per_cm.value);
  assert_near(mode->confinement[0].share, 1, 1e-6);
  assert_string_equal(mode->confinement[0].material, "lossy");
  pk_result_free(r);
}

/* Two planes, a plane away from 0, and no plane at all (a speck that is almost the cladding). */
static void mirror_planes_change_nothing(void **state) {
  (void)state;
  picket_result *whole =
      study(MATERIALS SECTION("oxide", "",
                              WIRE("[0, 0]") ", {rect: {fill: speck, width_nm: 100, height_nm: "
                                             "100, at_nm: [750, 300]}}"),
            3);
  picket_result *quarter = study(MATERIALS SECTION("oxide", "", WIRE("[0, 0]")), 3);
  picket_result *away = study(MATERIALS SECTION("oxide", "", WIRE("[530, -210]")), 3);
  for (int i = 0; i < 3; i++) {
    const picket_section_mode *a = mode_of(whole, i), *b = mode_of(quarter, i);
    const picket_section_mode *c = mode_of(away, i);
    check_near(a->index, b->index);
    check_near(a->group_index, b->group_index);
    check_near(a->effective_area_um2, b->effective_area_um2);
    assert_near(a->ex_share, b->ex_share, 0.01);
    assert_int_equal(a->nodes_x, b->nodes_x);
    assert_int_equal(a->nodes_y, b->nodes_y);
    assert_near(c->index.value, b->index.value, 1e-8); /* the same grid, moved */
    assert_int_equal(b->order, i);
    assert_int_equal(c->nodes_x, b->nodes_x);
  }
  assert_int_equal(mode_of(quarter, 0)->nodes_x, 0);
  pk_result_free(whole);
  pk_result_free(quarter);
  pk_result_free(away);
}

/* A flat guide: te-like modes with 0, 1, 2 … nodes along x and none along y. */
static void nodes_rise_with_the_order(void **state) {
  (void)state;
  picket_result *r = study(MATERIALS SECTION("oxide", "", WIRE("[0, 0]")), 0);
  int seen[2] = {0, 0};
  for (int i = 0; i < r->modes->points[0].mode_count; i++) {
    const picket_section_mode *mode = mode_of(r, i);
    int *next = &seen[mode->ex_share > 0.5 ? 0 : 1];
    assert_int_equal(mode->nodes_x, *next);
    assert_int_equal(mode->nodes_y, 0);
    (*next)++;
    assert_true(mode->index.value > 1.444 && mode->index.value < 2);
  }
  assert_true(seen[0] >= 2 && seen[1] >= 2);
  pk_result_free(r);
}

/* A wire so narrow that its modes reach over more than a micrometre: the first look has to go
 * there, and the answer must not depend on where the walls stand. */
static void weak_modes_are_found(void **state) {
  (void)state;
#define NARROW "{rect: {fill: core, width_nm: 400, height_nm: 200}}"
  picket_result *chosen = study(MATERIALS SECTION("oxide", "", NARROW), 0);
  picket_result *wide = study(MATERIALS SECTION("oxide", "span_nm: [20000, 20000], ", NARROW), 0);
  int count = chosen->modes->points[0].mode_count;
  assert_true(count > 0);
  assert_int_equal(wide->modes->points[0].mode_count, count);
  for (int i = 0; i < count; i++) {
    check_near(mode_of(chosen, i)->index, mode_of(wide, i)->index);
    assert_true(mode_of(wide, i)->index.value > 1.444);
  }
  pk_result_free(chosen);
  pk_result_free(wide);
}

/* A window cut out of surroundings that go on: modes of the window itself are not the guide's, and
 * its walls are part of the bars. */
static void modes_of_the_window_are_not_guided(void **state) {
  (void)state;
  picket_result *open = study(MATERIALS SECTION("oxide", "", WIRE("[0, 0]")), 0);
  picket_result *tight =
      study(MATERIALS SECTION("oxide", "span_nm: [2600, 1400], ", WIRE("[0, 0]")), 0);
  int count = tight->modes->points[0].mode_count;
  assert_true(count > 0 && count <= open->modes->points[0].mode_count);
  for (int i = 0; i < count; i++) {
    assert_true(mode_of(tight, i)->index.value > 1.444);
  }
  check_near(mode_of(tight, 0)->index, mode_of(open, 0)->index);
  pk_result_free(open);
  pk_result_free(tight);
}

/* A square standing on a corner against the same square upright, whose corners are corrected. */
static void a_turned_square_is_the_same_guide(void **state) {
  (void)state;
  picket_result *upright = study(
      MATERIALS SECTION("oxide", "", "{rect: {fill: core, width_nm: 800, height_nm: 800}}"), 2);
  picket_result *turned =
      study(MATERIALS SECTION("oxide", "",
                              "{polygon: {fill: core, corners_nm: [[565.685424949, 0], [0, "
                              "565.685424949], [-565.685424949, 0], [0, -565.685424949]]}}"),
            2);
  for (int i = 0; i < 2; i++) {
    picket_quantity bar = mode_of(turned, i)->index;
    assert_true(isfinite(bar.uncertainty) && bar.uncertainty < 1e-3 * bar.value);
    check_near(bar, mode_of(upright, i)->index);
    check_near(mode_of(turned, i)->group_index, mode_of(upright, i)->group_index);
  }
  check_near(mode_of(upright, 0)->index, mode_of(upright, 1)->index);
  pk_result_free(upright);
  pk_result_free(turned);
}

/* Each allocation fails once: out of memory, and nothing is left behind. */
static void short_of_memory(void **state) {
  (void)state;
  static const char text[] = MATERIALS SECTION("oxide", "span_nm: [900, 700], ",
                                               "{rect: {fill: core, width_nm: 500, height_nm: "
                                               "300}}");
  picket_status status = PICKET_ERROR_MEMORY;
  long n = 1;
  for (; status == PICKET_ERROR_MEMORY && n < 100000; n += 1 + n / 40) {
    short_memory memory = {0};
    picket_context *short_one = short_memory_context(&memory);
    picket_options chosen = options;
    chosen.count = 1;
    chosen.accuracy = 1e-2;
    understood u;
    assert_int_equal(understand(short_one, text, &u), PICKET_OK);
    picket_result *result = NULL;
    memory.fail_at = memory.asked + n;
    status = pk_study_modes(u.problem, &chosen, &result);
    if (status == PICKET_OK) {
      pk_result_free(result);
    } else {
      assert_int_equal(status, PICKET_ERROR_MEMORY);
      assert_null(result);
    }
    memory.fail_at = 0;
    picket_problem_free(u.owner);
    picket_context_free(short_one);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
  assert_true(n > 100);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(absorption_in_a_metal_guide, set_up, tear_down),
      cmocka_unit_test_setup_teardown(mirror_planes_change_nothing, set_up, tear_down),
      cmocka_unit_test_setup_teardown(nodes_rise_with_the_order, set_up, tear_down),
      cmocka_unit_test_setup_teardown(weak_modes_are_found, set_up, tear_down),
      cmocka_unit_test_setup_teardown(modes_of_the_window_are_not_guided, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_turned_square_is_the_same_guide, set_up, tear_down),
      cmocka_unit_test_setup_teardown(short_of_memory, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
