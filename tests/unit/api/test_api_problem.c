/* The public face of a problem: arguments, lifetimes, and checks that come at the first use. */
#include <math.h>
#include <picket/problem.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
/* cmocka wants some of the above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */

#include "api/problem_private.h"
#include "unit/short_memory.h"

static const char text[] =
    "format: 1\n"
    "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}}\n"
    "cell:\n"
    "  pitch_nm: 300\n"
    "  cladding: oxide\n"
    "  shapes:\n"
    "    - rect: {fill: si, length_nm: 150, width_nm: 450}\n";

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

static picket_problem *make(void) {
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_read_text(context, text, sizeof text - 1, NULL, &problem),
                   PICKET_OK);
  return problem;
}

static const pk_problem *understood(picket_problem *problem) {
  const pk_problem *out = NULL;
  assert_int_equal(pk_problem_understand(problem, &out), PICKET_OK);
  return out;
}

static void check_message(const char *expected) {
  assert_string_equal(picket_context_message(context), expected);
}

static void refuses_nonsense(void **state) {
  (void)state;
  picket_problem *none = NULL;
  picket_problem *problem = make();
  assert_int_equal(picket_problem_create(NULL, &none), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_create(context, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_read_file(NULL, "a", &none), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_read_file(context, "a", NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_read_file(context, NULL, &none), PICKET_ERROR_ARGUMENT);
  check_message("path is null, must be a file name");
  assert_int_equal(picket_problem_read_file(context, "", &none), PICKET_ERROR_ARGUMENT);
  check_message("path is empty, must be a file name");
  assert_int_equal(picket_problem_read_text(NULL, "", 0, "a", &none), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_read_text(context, "", 0, "a", NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_read_text(context, NULL, 3, "a", &none), PICKET_ERROR_ARGUMENT);
  check_message("text is null, must be 3 bytes");
  assert_int_equal(picket_problem_set(NULL, "a", "1"), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_set(problem, NULL, "1"), PICKET_ERROR_ARGUMENT);
  check_message("path is null, must be a text");
  assert_int_equal(picket_problem_set(problem, "a", NULL), PICKET_ERROR_ARGUMENT);
  check_message("value is null, must be a text");
  assert_int_equal(picket_problem_set_number(NULL, "a", 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_set_number(problem, NULL, 1), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", NAN), PICKET_ERROR_ARGUMENT);
  check_message("the value for cell.pitch_nm is not a number, must be one");
  assert_int_equal(picket_problem_check(NULL), PICKET_ERROR_ARGUMENT);
  picket_problem_free(NULL);
  assert_null(none);
  picket_problem_free(problem);
}

static void reads_now_and_checks_later(void **state) {
  (void)state;
  static const char faulty[] = "format: 1\ntemperature_c: hot\n";
  picket_problem *problem = NULL;
  assert_int_equal(
      picket_problem_read_text(context, faulty, sizeof faulty - 1, "standard input", &problem),
      PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_ERROR_INPUT);
  check_message(
      "standard input:2:16: temperature_c is \"hot\", must be a plain decimal number such as 300, "
      "-1.5 or 2e-4");
  assert_int_equal(picket_problem_set(problem, "temperature_c", "40"), PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_OK);
  check_message("");
  picket_problem_free(problem);
}

static void leaves_out_untouched_on_failure(void **state) {
  (void)state;
  picket_problem *out = NULL;
  assert_int_equal(picket_problem_read_text(context, "[\n", 2, NULL, &out), PICKET_ERROR_INPUT);
  check_message("text:2:1: a value is missing here");
  assert_int_equal(picket_problem_read_file(context, "/no/such.yaml", &out), PICKET_ERROR_FILE);
  check_message("/no/such.yaml: the file cannot be read: there is no such file");
  assert_null(out);
}

static void builds_a_problem_from_nothing(void **state) {
  (void)state;
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_create(context, &problem), PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "materials.oxide", "{catalogue: silica}"),
                   PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "materials.si", "{catalogue: silicon}"), PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "cell.cladding", "oxide"), PICKET_OK);
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", 300.1), PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "cell.shapes.0",
                                      "{rect: {fill: si, length_nm: 150, width_nm: 450}}"),
                   PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "cell.shapes.1.stripe",
                                      "{fill: si, across: x, to_nm: -2000, from_nm: 0}"),
                   PICKET_OK);
  assert_int_equal(picket_problem_set_number(problem, "cell.shapes.1.from_nm", -INFINITY),
                   PICKET_OK);
  const pk_problem *p = understood(problem);
  assert_true(p->cell.pitch_um == 300.1 / 1000);
  assert_int_equal(pk_geometry_shape_count(p->cell.geometry), 2);
  picket_problem_free(problem);
}

static void names_the_set_value_in_messages(void **state) {
  (void)state;
  picket_problem *problem = make();
  assert_int_equal(picket_problem_set(problem, "cell.pitch_nm", "-3"), PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_ERROR_INPUT);
  check_message("set cell.pitch_nm: cell.pitch_nm is -3, must be above 0 and at most 1000000 nm");
  assert_int_equal(picket_problem_set(problem, "cell.ptich_nm", "300"), PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_ERROR_INPUT);
  check_message("set cell.ptich_nm: unknown key \"ptich_nm\" in cell; did you mean \"pitch_nm\"?");
  picket_problem_free(problem);
}

static void understands_again_after_a_change_only(void **state) {
  (void)state;
  picket_problem *problem = make();
  const pk_problem *first = understood(problem);
  assert_ptr_equal(understood(problem), first);
  assert_int_equal(picket_problem_set(problem, "cell..x", "1"), PICKET_ERROR_INPUT);
  assert_ptr_equal(understood(problem), first); /* a failed set changes nothing */
  assert_int_equal(picket_problem_set_number(problem, "cell.shapes.0.length_nm", 0.1 + 0.2),
                   PICKET_OK);
  const pk_problem *p = understood(problem);
  double edge = (0.1 + 0.2) / 2 / 1000;
  int si = pk_materials_find(p->materials, "si");
  assert_int_equal(pk_geometry_medium_at(p->cell.geometry, 0.99 * edge, 0), si);
  assert_int_not_equal(pk_geometry_medium_at(p->cell.geometry, 1.01 * edge, 0), si);
  picket_problem_free(problem);
}

static void says_when_the_context_is_busy(void **state) {
  (void)state;
  picket_problem *problem = make();
  picket_problem *out = NULL;
  assert_true(pk_context_enter(context));
  assert_int_equal(picket_problem_create(context, &out), PICKET_ERROR_BUSY);
  assert_int_equal(picket_problem_read_text(context, text, 3, NULL, &out), PICKET_ERROR_BUSY);
  assert_int_equal(picket_problem_read_file(context, "a", &out), PICKET_ERROR_BUSY);
  assert_int_equal(picket_problem_set(problem, "a", "1"), PICKET_ERROR_BUSY);
  assert_int_equal(picket_problem_set_number(problem, "a", 1), PICKET_ERROR_BUSY);
  assert_int_equal(picket_problem_check(problem), PICKET_ERROR_BUSY);
  pk_context_leave(context);
  assert_null(out);
  assert_int_equal(picket_problem_check(problem), PICKET_OK);
  picket_problem_free(problem);
}

static void outlives_the_name_of_its_context(void **state) {
  (void)state;
  short_memory memory = {0, 0, 0};
  picket_context *own = short_memory_context(&memory);
  picket_problem *problem = NULL;
  assert_int_equal(picket_problem_read_text(own, text, sizeof text - 1, NULL, &problem), PICKET_OK);
  picket_context_free(own);
  assert_int_equal(picket_problem_check(problem), PICKET_OK);
  picket_problem_free(problem);
  assert_int_equal(memory.living, 0);
}

/* Read, set, check: whichever allocation fails, the call says so, and the same calls succeed on the
 * same problem once there is memory again. */
static void survives_every_failed_allocation(void **state) {
  (void)state;
  bool all_done = false;
  for (long n = 1; !all_done; n++) {
    short_memory memory = {0, 0, 0};
    picket_context *own = short_memory_context(&memory);
    picket_problem *problem = NULL;
    memory.fail_at = memory.asked + n;
    picket_status status = picket_problem_read_text(own, text, sizeof text - 1, NULL, &problem);
    if (status == PICKET_OK) {
      status = picket_problem_set(problem, "slab.cover", "oxide");
    }
    if (status == PICKET_OK) {
      status = picket_problem_set(problem, "slab", "");
      assert_int_not_equal(status, PICKET_OK); /* nothing is no value */
      status = status == PICKET_ERROR_INPUT ? PICKET_OK : status;
    }
    if (status == PICKET_OK) {
      status = picket_problem_set(
          problem, "slab",
          "{substrate: oxide, films: [{fill: si, thickness_nm: 220}], cover: oxide}");
    }
    if (status == PICKET_OK) {
      status = picket_problem_check(problem);
    }
    all_done = status == PICKET_OK;
    assert_true(all_done || status == PICKET_ERROR_MEMORY);
    if (!all_done && problem) {
      assert_int_equal(
          picket_problem_set(
              problem, "slab",
              "{substrate: oxide, films: [{fill: si, thickness_nm: 220}], cover: oxide}"),
          PICKET_OK);
      assert_int_equal(picket_problem_check(problem), PICKET_OK);
    }
    picket_problem_free(problem);
    picket_context_free(own);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_nonsense),
      cmocka_unit_test(reads_now_and_checks_later),
      cmocka_unit_test(leaves_out_untouched_on_failure),
      cmocka_unit_test(builds_a_problem_from_nothing),
      cmocka_unit_test(names_the_set_value_in_messages),
      cmocka_unit_test(understands_again_after_a_change_only),
      cmocka_unit_test(says_when_the_context_is_busy),
      cmocka_unit_test(outlives_the_name_of_its_context),
      cmocka_unit_test(survives_every_failed_allocation),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
