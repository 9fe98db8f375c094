/* Comparison of doubles. The one of cmocka rounds its arguments to single precision, so it cannot
 * see a difference below 1e-7. */
#ifndef PICKET_TESTS_NEAR_H
#define PICKET_TESTS_NEAR_H

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
/* cmocka wants the four above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */

static inline void near_check(double value, double expected, double tolerance, const char *file,
                              int line) {
  if (!(fabs(value - expected) <= tolerance)) {
    print_error("%.17g is not %.17g: off by %.3g, allowed %.3g\n", value, expected,
                fabs(value - expected), tolerance);
    _fail(file, line);
  }
}

/* |value - expected| <= tolerance; NaN fails. */
#define assert_near(value, expected, tolerance) \
  near_check((value), (expected), (tolerance), __FILE__, __LINE__)

#endif
