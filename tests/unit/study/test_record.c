/* Lines of text: every double comes back with the same bits, every text with the same bytes, in any
 * locale; what is not a record is noticed. */
#include "study/record.h"

#include <locale.h>
#include <math.h>
#include <stdint.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

static picket_context *context;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static uint64_t bits_of(double value) {
  uint64_t bits;
  memcpy(&bits, &value, sizeof bits);
  return bits;
}

static void expect_same(double value) {
  pk_record record = {.context = context};
  pk_record_number(&record, value);
  pk_record_number(&record, 1.5);
  assert_false(record.failed);
  pk_record_reader reader = {record.text, true};
  double back = pk_record_read_number(&reader);
  assert_true(reader.good);
  if (isnan(value)) {
    assert_true(isnan(back));
  } else {
    assert_true(bits_of(back) == bits_of(value));
  }
  assert_true(pk_record_read_number(&reader) == 1.5);
  assert_true(pk_record_read_end(&reader));
  pk_record_clear(&record);
}

static void numbers_come_back_with_every_bit(void **state) {
  (void)state;
  const double chosen[] = {
      0,   -0.0,   1,        -1,        0.1,     1e308,  2.2250738585072014e-308,
      NAN, 5e-324, INFINITY, -INFINITY, -3e-310, 1.0 / 3};
  for (size_t i = 0; i < sizeof chosen / sizeof *chosen; i++) {
    expect_same(chosen[i]);
  }
  uint64_t bits = 1;
  for (int i = 0; i < 2000; i++) {
    bits = bits * 6364136223846793005u + 1442695040888963407u; /* Knuth's MMIX */
    double value;
    memcpy(&value, &bits, sizeof value);
    expect_same(value);
  }
}

static void a_comma_locale_changes_nothing(void **state) {
  (void)state;
  /* Where the locale is not installed the test is the one above. */
  (void)setlocale(LC_NUMERIC, "de_DE.UTF-8");
  expect_same(0.1);
  pk_record record = {.context = context};
  pk_record_number(&record, 0.5);
  assert_string_equal(record.text, "0x10000000000000p-53");
  pk_record_clear(&record);
  setlocale(LC_NUMERIC, "C");
}

static void texts_come_back(void **state) {
  (void)state;
  const char *texts[] = {"", "-", "=", "%", "% 20", " two words ", "line\nline\t\r", "Γ–µ", NULL};
  pk_record record = {.context = context};
  enum { COUNT = sizeof texts / sizeof *texts };
  for (int i = 0; i < COUNT; i++) {
    pk_record_text(&record, texts[i]);
  }
  assert_null(strchr(record.text, '\n'));
  pk_record_reader reader = {record.text, true};
  for (int i = 0; i < COUNT; i++) {
    char buffer[PK_RECORD_TEXT];
    const char *back = pk_record_read_text(&reader, buffer);
    assert_true(reader.good);
    if (texts[i]) {
      assert_non_null(back);
      assert_string_equal(back, texts[i]);
    } else {
      assert_null(back);
    }
  }
  assert_true(pk_record_read_end(&reader));
  pk_record_clear(&record);
}

static void a_long_text_is_cut(void **state) {
  (void)state;
  char text[3 * PK_RECORD_TEXT], buffer[PK_RECORD_TEXT];
  memset(text, 'x', sizeof text - 1);
  text[sizeof text - 1] = '\0';
  pk_record record = {.context = context};
  pk_record_text(&record, text);
  pk_record_reader reader = {record.text, true};
  assert_non_null(pk_record_read_text(&reader, buffer));
  assert_int_equal(strlen(buffer), PK_RECORD_TEXT - 1);
  assert_true(pk_record_read_end(&reader));
  pk_record_clear(&record);
}

static void nonsense_is_noticed(void **state) {
  (void)state;
  const char *numbers[] = {"",         " ",       "0x", "1 ",       "0x1p",
                           "--0x1p+0", "0x1p+0x", "in", "0x1,8p+0", "=1"};
  for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++) {
    pk_record_reader reader = {numbers[i], true};
    (void)pk_record_read_number(&reader);
    if (strcmp(numbers[i], "1 ") == 0) {
      assert_false(pk_record_read_end(&reader)); /* a number, and something left */
    } else {
      assert_false(reader.good);
    }
    /* Nothing is read any more once all is lost. */
    assert_false(pk_record_read_end(&reader));
  }
  const char *texts[] = {"", "x", "=%", "=%2", "=%zz", "=%00", "--"};
  for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
    char buffer[PK_RECORD_TEXT];
    pk_record_reader reader = {texts[i], true};
    assert_null(pk_record_read_text(&reader, buffer));
    assert_false(reader.good);
  }
  const char *wholes[] = {"4", "-1", "1.5", "99999999999999999999", "x", "", "1x"};
  for (size_t i = 0; i < sizeof wholes / sizeof *wholes; i++) {
    pk_record_reader reader = {wholes[i], true};
    assert_int_equal(pk_record_read_whole(&reader, 0, 3), 0);
    assert_false(reader.good);
  }
}

static void memory_that_runs_out_marks_the_record(void **state) {
  (void)state;
  for (long n = 2; n < 6; n++) {
    short_memory memory = {.fail_at = n};
    picket_context *poor = short_memory_context(&memory);
    pk_record record = {.context = poor};
    for (int i = 0; i < 2000; i++) {
      pk_record_number(&record, i);
    }
    assert_int_equal(record.failed, memory.asked >= n);
    pk_record_clear(&record);
    picket_context_free(poor);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(numbers_come_back_with_every_bit, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_comma_locale_changes_nothing, set_up, tear_down),
      cmocka_unit_test_setup_teardown(texts_come_back, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_long_text_is_cut, set_up, tear_down),
      cmocka_unit_test(nonsense_is_noticed),
      cmocka_unit_test(memory_that_runs_out_marks_the_record),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
