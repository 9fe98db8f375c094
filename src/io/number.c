/* See number.h. The text is checked against the grammar
 *   [+-] (0 | 1-9 digits) [. digits] [e [+-] digits]      (also .5 and 5.)
 * and only then given to strtod, with the point replaced by the one of the caller's locale. */
#include "io/number.h"

#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum {
  LONGEST = 80,    /* characters; 17 digits hold a double, more are only noise */
  POINT_ROOM = 8,  /* bytes of a locale's decimal point, one UTF-8 character in practice */
  WHOLE_DIGITS = 9 /* digits that surely fit into a long of 32 bits */
};

static const char *skip_digits(const char *s) {
  return s + strspn(s, "0123456789");
}

/* True if the text is a number of the grammar; *point is where its '.' stands, or null. */
static bool is_number(const char *text, const char **point) {
  const char *s = text + (text[0] == '+' || text[0] == '-');
  const char *end = skip_digits(s);
  bool digits = end > s;
  *point = NULL;
  if (end - s > 1 && s[0] == '0') {
    return false;
  }
  if (*end == '.') {
    *point = end;
    s = end + 1;
    end = skip_digits(s);
    digits = digits || end > s;
  }
  if (digits && (*end == 'e' || *end == 'E')) {
    s = end + 1;
    s += *s == '+' || *s == '-';
    end = skip_digits(s);
    digits = end > s;
  }
  return digits && *end == '\0';
}

static const char *locale_point(void) {
  const char *point = localeconv()->decimal_point;
  return point && point[0] && strlen(point) < POINT_ROOM ? point : ".";
}

pk_number_verdict pk_number_parse(const char *text, double *out) {
  if (strcmp(text, ".inf") == 0 || strcmp(text, "+.inf") == 0) {
    *out = INFINITY;
    return PK_NUMBER_GOOD;
  }
  if (strcmp(text, "-.inf") == 0) {
    *out = -INFINITY;
    return PK_NUMBER_GOOD;
  }
  const char *point = NULL;
  if (strlen(text) > LONGEST || !is_number(text, &point)) {
    return PK_NUMBER_NONE;
  }
  char buffer[LONGEST + POINT_ROOM + 1];
  if (point) {
    snprintf(buffer, sizeof buffer, "%.*s%s%s", (int)(point - text), text, locale_point(),
             point + 1);
  } else {
    snprintf(buffer, sizeof buffer, "%s", text);
  }
  double value = strtod(buffer, NULL);
  if (!isfinite(value)) {
    return PK_NUMBER_TOO_LARGE;
  }
  *out = value;
  return PK_NUMBER_GOOD;
}

bool pk_whole_parse(const char *text, long *out) {
  const char *s = text + (text[0] == '+' || text[0] == '-');
  const char *end = skip_digits(s);
  if (end == s || *end != '\0' || end - s > WHOLE_DIGITS || (s[0] == '0' && end - s > 1)) {
    return false;
  }
  *out = strtol(text, NULL, 10);
  return true;
}

/* Puts '.' in the place of the locale's decimal point. */
static void plain_point(char *text) {
  const char *point = locale_point();
  char *found = strcmp(point, ".") != 0 ? strstr(text, point) : NULL;
  if (found) {
    size_t length = strlen(point);
    *found = '.';
    memmove(found + 1, found + length, strlen(found + length) + 1);
  }
}

void pk_number_write(double value, char out[PK_NUMBER_TEXT]) {
  if (isinf(value)) {
    snprintf(out, PK_NUMBER_TEXT, "%s", value > 0 ? ".inf" : "-.inf");
    return;
  }
  for (int digits = 15; digits <= 17; digits++) {
    snprintf(out, PK_NUMBER_TEXT, "%.*g", digits, value);
    if (strtod(out, NULL) == value) {
      break;
    }
  }
  plain_point(out);
}
