/* See meter.h. */
#include "meter.h"

#include <stdio.h>
#include <string.h>
#include <time.h>

double meter_cpu_seconds(void) {
  struct timespec now;
  clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &now);
  return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

double meter_median(const double samples[REPETITIONS]) {
  double sorted[REPETITIONS];
  memcpy(sorted, samples, sizeof sorted);
  for (int i = 1; i < REPETITIONS; i++) {
    for (int j = i; j > 0 && sorted[j - 1] > sorted[j]; j--) {
      double swap = sorted[j];
      sorted[j] = sorted[j - 1];
      sorted[j - 1] = swap;
    }
  }
  return sorted[REPETITIONS / 2];
}

void meter_print(const meter_line *line) {
  bool meets = line->at_most ? line->ratio <= line->goal : line->ratio >= line->goal;
  printf(
      "{\"work\": \"%s\", \"ratio\": %.2f, \"goal\": \"%s %.3g\", \"meets\": %s, "
      "\"subject\": \"%s\", \"unknowns\": %lld, \"repetitions\": %d}\n",
      line->work, line->ratio, line->at_most ? "<=" : ">=", line->goal, meets ? "true" : "false",
      line->subject, (long long)line->unknowns, REPETITIONS);
  fflush(stdout);
}
