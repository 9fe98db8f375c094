/* Strict numbers. The language's parsers take more than a problem file should; each thing they take
 * too much has a row. */
#include <float.h>
#include <locale.h>
#include <math.h>
#include <string.h>

#include "io/number.h"
#include "unit/near.h"

static void takes_decimal_numbers(void **state) {
  (void)state;
  static const struct {
    const char *text;
    double value;
  } rows[] = {
      {"0", 0.0},
      {"300", 300.0},
      {"-1.5", -1.5},
      {"+2", 2.0},
      {"0.1", 0.1},
      {".5", 0.5},
      {"5.", 5.0},
      {"1e3", 1000.0},
      {"2.5E-4", 2.5e-4},
      {"1e+2", 100.0},
      {"0e0", 0.0},
      {"-0", 0.0},
      {"1e-400", 0.0},
      {".inf", INFINITY},
      {"-.inf", -INFINITY},
      {"+.inf", INFINITY},
      {"1.7976931348623157e308", DBL_MAX},
  };
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    double value = 12345;
    assert_int_equal(pk_number_parse(rows[i].text, &value), PK_NUMBER_GOOD);
    assert_true(value == rows[i].value);
  }
}

static void refuses_everything_else(void **state) {
  (void)state;
  static const char *const rows[] = {
      "",     " ",    "220nm", "3,5",   "0x10",  "010",  "00",       "-01", "1e",  "e5",
      "1e+",  "--1",  "+-1",   "1.2.3", ".",     "-",    "+",        "1 ",  " 1",  "1_000",
      "nan",  ".nan", ".NaN",  "inf",   ".Inf",  "INF",  "1d3",      "0b1", "0o7", "1/2",
      "1:30", "1e5.", "~",     "1e1e1", "0x1p3", "1.5f", "\xc2\xbd",
  };
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    double value = 12345;
    assert_int_equal(pk_number_parse(rows[i], &value), PK_NUMBER_NONE);
    assert_true(value == 12345);
  }
}

static void tells_a_number_that_is_too_large(void **state) {
  (void)state;
  double value = 12345;
  assert_int_equal(pk_number_parse("1e400", &value), PK_NUMBER_TOO_LARGE);
  assert_int_equal(pk_number_parse("-1e309", &value), PK_NUMBER_TOO_LARGE);
  assert_true(value == 12345);
}

static void refuses_endless_digits(void **state) {
  (void)state;
  char text[1000];
  memset(text, '1', sizeof text - 1);
  text[sizeof text - 1] = '\0';
  double value = 0;
  long whole = 0;
  assert_int_equal(pk_number_parse(text, &value), PK_NUMBER_NONE);
  assert_false(pk_whole_parse(text, &whole));
}

static void takes_whole_numbers(void **state) {
  (void)state;
  long value = 0;
  assert_true(pk_whole_parse("999999999", &value));
  assert_int_equal(value, 999999999);
  assert_true(pk_whole_parse("-3", &value));
  assert_int_equal(value, -3);
  static const char *const bad[] = {"", "1.0", "1e3", "010", "0x1", "1000000000", "-", "1 ", "a"};
  for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
    assert_false(pk_whole_parse(bad[i], &value));
  }
  assert_int_equal(value, -3);
}

/* What is written reads back as the same number, and short where it can be. */
static void writes_what_it_reads(void **state) {
  (void)state;
  static const double values[] = {0.1,      1.0 / 3,   310,    -2e-300,
                                  DBL_MAX,  DBL_MIN,   5e-324, 1e22,
                                  INFINITY, -INFINITY, 0,      123456789.123456789};
  char text[PK_NUMBER_TEXT];
  for (size_t i = 0; i < sizeof values / sizeof *values; i++) {
    double back = 12345;
    pk_number_write(values[i], text);
    assert_int_equal(pk_number_parse(text, &back), PK_NUMBER_GOOD);
    assert_true(back == values[i]);
  }
  pk_number_write(0.1, text);
  assert_string_equal(text, "0.1");
  pk_number_write(310, text);
  assert_string_equal(text, "310");
}

/* A program that embeds the library may have set a locale with a decimal comma. */
static void ignores_the_locale(void **state) {
  (void)state;
  static const char *const names[] = {"de_DE.UTF-8", "de_DE.utf8", "fr_FR.UTF-8", "nl_NL.UTF-8"};
  bool found = false;
  for (size_t i = 0; !found && i < sizeof names / sizeof *names; i++) {
    found = setlocale(LC_NUMERIC, names[i]) != NULL;
  }
  if (!found) {
    skip(); /* no such locale is installed here */
  }
  double value = 0;
  char text[PK_NUMBER_TEXT];
  pk_number_verdict verdict = pk_number_parse("1.5", &value);
  pk_number_write(2.25, text);
  setlocale(LC_NUMERIC, "C");
  assert_int_equal(verdict, PK_NUMBER_GOOD);
  assert_true(value == 1.5);
  assert_string_equal(text, "2.25");
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(takes_decimal_numbers),
      cmocka_unit_test(refuses_everything_else),
      cmocka_unit_test(tells_a_number_that_is_too_large),
      cmocka_unit_test(refuses_endless_digits),
      cmocka_unit_test(takes_whole_numbers),
      cmocka_unit_test(writes_what_it_reads),
      cmocka_unit_test(ignores_the_locale),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
