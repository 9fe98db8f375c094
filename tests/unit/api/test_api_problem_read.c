/* What a problem says, read back: its numbers by their paths, and its text, which is the same
 * problem again. */
#include <math.h>
#include <picket.h>
#include <string.h>

#include "api/problem_private.h"
#include "unit/near.h"
#include "unit/short_memory.h"

static const char TEXT[] =
    "format: 1\n"
    "name: \"a \\\"row\\\", with\\\\marks: and # more\"\n"
    "temperature_c: 25\n"
    "materials:\n"
    "  oxide: {constant: {index: 1.45}} # a comment\n"
    "  odd.name: {constant: {index: 2}}\n"
    "  si: {constant: {index: '3.5'}}\n"
    "light:\n"
    "cell:\n"
    "  pitch_nm: 3.0e2\n"
    "  cladding: oxide, or so\n"
    "  lateral: |\n"
    "    two\n"
    "    lines\n"
    "  shapes:\n"
    "    - rect: {fill: si, length_nm: 150, width_nm: .inf, at_nm: [-1.5, +2]}\n"
    "    - {}\n";

static picket_context *context;
static picket_problem *problem;

static int set_up(void **state) {
  (void)state;
  if (picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &problem);
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}

static double number(const char *path) {
  double value = NAN;
  assert_int_equal(picket_problem_number(problem, path, &value), PICKET_OK);
  return value;
}

static void numbers_by_path(void **state) {
  (void)state;
  assert_true(number("cell.pitch_nm") == 300);
  assert_true(number("cell.shapes.0.rect.length_nm") == 150);
  assert_true(number("cell.shapes.0.length_nm") == 150);
  assert_true(number("materials.oxide.constant.index") == 1.45);
  /* All digits come back. */
  const double odd = 1.0 / 3 + 300;
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", odd), PICKET_OK);
  assert_true(number("cell.pitch_nm") == odd);
}

static void what_is_no_number(void **state) {
  (void)state;
  const char *const wrong[] = {"cell",
                               "cell.nothing",
                               "cell.cladding",
                               "cell.shapes",
                               "",
                               "cell..pitch_nm",
                               "cell.pitch_nm.more",
                               "materials.si.constant.index",
                               "cell.shapes.0.width_nm",
                               "light"};
  double value = 7;
  for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
    assert_int_equal(picket_problem_number(problem, wrong[i], &value), PICKET_ERROR_INPUT);
    assert_string_not_equal(picket_context_message(context), "");
  }
  assert_int_equal(picket_problem_number(problem, NULL, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_number(problem, "cell.pitch_nm", NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_number(NULL, "cell.pitch_nm", &value), PICKET_ERROR_ARGUMENT);
  assert_true(value == 7);
}

static void every_number_is_listed(void **state) {
  (void)state;
  /* Not: the quoted one, the infinite one, and the one below a key that a path cannot name. */
  static const char *const paths[] = {"format",
                                      "temperature_c",
                                      "materials.oxide.constant.index",
                                      "cell.pitch_nm",
                                      "cell.shapes.0.rect.length_nm",
                                      "cell.shapes.0.rect.at_nm.0",
                                      "cell.shapes.0.rect.at_nm.1"};
  static const double values[] = {1, 25, 1.45, 300, 150, -1.5, 2};
  enum { COUNT = sizeof values / sizeof *values };
  assert_int_equal(picket_problem_number_count(problem), COUNT);
  const char *path = NULL;
  double value = NAN;
  for (int i = 0; i < COUNT; i++) {
    assert_int_equal(picket_problem_number_at(problem, i, &path, &value), PICKET_OK);
    assert_string_equal(path, paths[i]);
    assert_true(value == values[i]);
    assert_true(number(paths[i]) == values[i]);
    assert_int_equal(picket_problem_number_at(problem, i, &path, NULL), PICKET_OK);
  }
  path = TEXT;
  value = 7;
  assert_int_equal(picket_problem_number_at(problem, -1, &path, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_number_at(problem, COUNT, &path, &value), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "0 to 6"));
  assert_int_equal(picket_problem_number_at(problem, 0, NULL, &value), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_number_at(NULL, 0, &path, &value), PICKET_ERROR_ARGUMENT);
  assert_true(path == TEXT && value == 7);
  assert_int_equal(picket_problem_number_count(NULL), -1);
}

static void texts_of_parts(void **state) {
  (void)state;
  const char *text = NULL;
  assert_int_equal(picket_problem_text(problem, "cell.shapes.0.at_nm", &text), PICKET_OK);
  assert_string_equal(text, "[-1.5, +2]");
  assert_int_equal(picket_problem_text(problem, "materials.si", &text), PICKET_OK);
  assert_string_equal(text, "{constant: {index: \"3.5\"}}");
  assert_int_equal(picket_problem_text(problem, "cell.pitch_nm", &text), PICKET_OK);
  assert_string_equal(text, "3.0e2");
  const char *before = text;
  assert_int_equal(picket_problem_text(problem, "cell.gone", &text), PICKET_ERROR_INPUT);
  assert_int_equal(picket_problem_text(problem, "cell", NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_problem_text(NULL, "cell", &text), PICKET_ERROR_ARGUMENT);
  assert_ptr_equal(text, before);
}

/* Keys, values, lists and quotes are part of the hash: the text is the same problem. */
static void the_text_is_the_same_problem(void **state) {
  (void)state;
  const char *text = NULL;
  picket_problem *again = NULL;
  assert_int_equal(picket_problem_set(problem, "cell.lateral", "{a: [1, {b: c}], d: ''}"),
                   PICKET_OK);
  /* Only a value with marks in it that was not in quotes gets them. */
  assert_int_equal(picket_problem_set(problem, "cell.cladding", "\"oxide, or so\""), PICKET_OK);
  assert_int_equal(picket_problem_text(problem, NULL, &text), PICKET_OK);
  assert_int_equal(picket_problem_read_text(context, text, strlen(text), NULL, &again), PICKET_OK);
  assert_int_equal(pk_document_hash(again->document), pk_document_hash(problem->document));
  picket_problem_free(again);
  /* So is a part of it, put back. */
  uint64_t before = pk_document_hash(problem->document);
  assert_int_equal(picket_problem_text(problem, "cell", &text), PICKET_OK);
  char copy[1000];
  assert_true(strlen(text) < sizeof copy);
  strcpy(copy, text);
  assert_int_equal(picket_problem_set(problem, "cell", copy), PICKET_OK);
  assert_int_equal(pk_document_hash(problem->document), before);
}

static void block_texts_keep_their_lines(void **state) {
  (void)state;
  const char *text = NULL;
  assert_int_equal(picket_problem_text(problem, "cell.lateral", &text), PICKET_OK);
  assert_string_equal(text, "\"two\\nlines\\n\"");
}

static void out_of_memory(void **state) {
  (void)state;
  short_memory memory = {0};
  picket_context *scarce = short_memory_context(&memory);
  picket_problem *own = NULL;
  const char *text = NULL, *path = NULL;
  assert_int_equal(picket_problem_read_text(scarce, TEXT, sizeof TEXT - 1, NULL, &own), PICKET_OK);
  memory.fail_at = memory.asked + 1;
  assert_int_equal(picket_problem_text(own, NULL, &text), PICKET_ERROR_MEMORY);
  memory.fail_at = memory.asked + 1;
  assert_int_equal(picket_problem_text(own, "cell", &text), PICKET_ERROR_MEMORY);
  memory.fail_at = memory.asked + 2;
  assert_int_equal(picket_problem_text(own, "cell", &text), PICKET_ERROR_MEMORY);
  memory.fail_at = memory.asked + 1;
  assert_int_equal(picket_problem_number_at(own, 0, &path, NULL), PICKET_ERROR_MEMORY);
  assert_null(text);
  assert_null(path);
  picket_problem_free(own);
  picket_context_free(scarce);
  assert_int_equal(memory.living, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(numbers_by_path, set_up, tear_down),
      cmocka_unit_test_setup_teardown(what_is_no_number, set_up, tear_down),
      cmocka_unit_test_setup_teardown(every_number_is_listed, set_up, tear_down),
      cmocka_unit_test_setup_teardown(texts_of_parts, set_up, tear_down),
      cmocka_unit_test_setup_teardown(the_text_is_the_same_problem, set_up, tear_down),
      cmocka_unit_test_setup_teardown(block_texts_keep_their_lines, set_up, tear_down),
      cmocka_unit_test_setup_teardown(out_of_memory, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
