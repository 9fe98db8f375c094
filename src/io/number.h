/* Strict numbers: the whole text is a decimal number or it is none. The language's own parsers take
 * too much (0x10, 010, "220nm" up to its n, nan, 1e400 as infinity) and follow the user's locale.
 */
#ifndef PK_IO_NUMBER_H
#define PK_IO_NUMBER_H

#include <stdbool.h>

enum { PK_NUMBER_TEXT = 32 }; /* room for any double written by pk_number_write */

typedef enum pk_number_verdict {
  PK_NUMBER_GOOD,
  PK_NUMBER_NONE,     /* not a decimal number */
  PK_NUMBER_TOO_LARGE /* a number beyond what a double holds */
} pk_number_verdict;

/* Decimal digits with an optional sign, point and exponent; .inf, +.inf and -.inf give an infinity.
 * A number too small for a double is 0. `out` is untouched unless good. */
pk_number_verdict pk_number_parse(const char *text, double *out);

/* A whole number in decimal digits, optional sign; false if it is none or beyond ±999999999. */
bool pk_whole_parse(const char *text, long *out);

/* The shortest of 15 to 17 digits that reads back as the same number; infinities as pk_number_parse
 * takes them. Not for NaN. */
void pk_number_write(double value, char out[PK_NUMBER_TEXT]);

#endif
