/* UTF-8 as RFC 3629 defines it, and values cut short for messages. */
#include "io/text.h"

#include "reading.h"

static picket_status check(const char *text, char *message, size_t size) {
  picket_context *context = plain_context();
  picket_status status = pk_text_check(context, text, strlen(text), "f", true);
  snprintf(message, size, "%s", picket_context_message(context));
  picket_context_free(context);
  return status;
}

static void takes_text(void **state) {
  (void)state;
  static const char *const rows[] = {
      "",
      "a\tb\r\nc",
      "\xc2\xa0",
      "\xdf\xbf",
      "\xe0\xa0\x80",
      "\xed\x9f\xbf",
      "\xee\x80\x80",
      "\xf0\x90\x80\x80",
      "\xf4\x8f\xbf\xbf",
  };
  char message[200];
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    assert_int_equal(check(rows[i], message, sizeof message), PICKET_OK);
  }
}

static void refuses_what_is_no_text(void **state) {
  (void)state;
  static const struct {
    const char *text, *start;
  } rows[] = {
      {"\x80", "f:1:1: byte 0x80"},                 /* a tail without a head */
      {"ab\n\xce\x93\xc0\xaf", "f:2:2: byte 0xc0"}, /* overlong, after a letter of two bytes */
      {"\xe0\x80\x80", "f:1:1: byte 0xe0"},         /* overlong */
      {"\xf0\x80\x80\x80", "f:1:1: byte 0xf0"},     /* overlong */
      {"\xed\xa0\x80", "f:1:1: byte 0xed"},         /* a surrogate */
      {"\xf4\x90\x80\x80", "f:1:1: byte 0xf4"},     /* past the last code point */
      {"\xf8\x88\x80\x80\x80", "f:1:1: byte 0xf8"}, /* five bytes */
      {"a\xe2\x82", "f:1:2: byte 0xe2"},            /* cut off */
      {"a\x7f", "f:1:2: the control character 0x7f"},
      {"\x01", "f:1:1: the control character 0x01"},
      {"\xc2\x9b", "f:1:1: the control character 0x9b"}, /* an escape of terminals */
  };
  char message[200];
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    assert_int_equal(check(rows[i].text, message, sizeof message), PICKET_ERROR_INPUT);
    message[strlen(rows[i].start)] = '\0';
    assert_string_equal(message, rows[i].start);
  }
}

static void cuts_between_letters(void **state) {
  (void)state;
  assert_string_equal(pk_text_shown("short").text, "short");
  assert_string_equal(pk_text_shown("a\nb\tc\x7f").text, "a b c ");
  char text[200];
  memset(text, 'a', PK_SHOWN);
  text[PK_SHOWN] = '\0';
  assert_string_equal(pk_text_shown(text).text, text);
  /* A letter of two bytes across the limit is left out whole. */
  strcpy(text + PK_SHOWN - 1, "\xce\x93tail");
  pk_shown shown = pk_text_shown(text);
  assert_int_equal(strlen(shown.text), PK_SHOWN - 1 + 3);
  assert_string_equal(shown.text + PK_SHOWN - 2, "a...");
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(takes_text),
      cmocka_unit_test(refuses_what_is_no_text),
      cmocka_unit_test(cuts_between_letters),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
