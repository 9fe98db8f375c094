/* CPU time of this process, and the median over repetitions that alternate between the pieces of
 * work compared, so that a change of the machine's speed meets all of them. */
#ifndef BENCHMARKS_METER_H
#define BENCHMARKS_METER_H

#include <stdbool.h>
#include <stdint.h>

enum { REPETITIONS = 7 };

double meter_cpu_seconds(void);
double meter_median(const double samples[REPETITIONS]);

/* One line of JSON: {"work": "…", "ratio": …, "goal": …, "meets": …, "subject": "…", "unknowns": …}
 *   at_most   true: the ratio should not exceed the goal; false: it should reach it */
typedef struct meter_line {
  const char *work, *subject;
  double ratio, goal;
  bool at_most;
  int64_t unknowns;
} meter_line;
void meter_print(const meter_line *line);

#endif
