/* The stop band of a problem file, with a log, a line of progress, and a way to give up.
 *   c2_edge FILE.yaml [QUESTIONS]    gives up when progress was asked so many times */
#include <picket.h>
#include <stdio.h>
#include <stdlib.h>

typedef struct patience {
  long asked, most; /* most 0: without end */
} patience;

/* Between factorisations. A program with a window looks at its button here. */
static picket_verdict go_on(const picket_progress *progress, void *user) {
  patience *left = user;
  printf("%3.0f %% of %s\n", 100 * progress->fraction, progress->phase);
  return ++left->asked == left->most ? PICKET_STOP : PICKET_CONTINUE;
}

static void tell(picket_log_level level, const char *line, void *user) {
  (void)level;
  (void)user;
  fprintf(stderr, "%s\n", line);
}

static void print(const picket_result *result) {
  for (int i = 0; i < picket_edges_count(result); i++) {
    picket_edges_answer answer;
    if (picket_edges_get(result, i, &answer) != PICKET_OK || answer.band_count == 0) {
      continue;
    }
    const picket_stop_band *band = &answer.bands[0];
    printf("%s: stop band from %.6f +- %.6f um to %.6f +- %.6f um\n",
           picket_polarization_name(answer.polarization), band->short_um.value,
           band->short_um.uncertainty, band->long_um.value, band->long_um.uncertainty);
  }
  if (!picket_result_complete(result)) {
    printf("partial: %s\n", picket_result_shortfall(result));
  }
}

int main(int count, char **words) {
  patience left = {0, count > 2 ? strtol(words[2], NULL, 10) : 0};
  picket_context *context = NULL;
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_context_options callbacks;
  picket_context_options_init(&callbacks);
  callbacks.progress = go_on;
  callbacks.progress_user = &left;
  callbacks.log = tell;
  callbacks.log_level = PICKET_LOG_WARNING;

  picket_status status = picket_context_create(&callbacks, &context);
  if (status == PICKET_OK) {
    status = picket_problem_read_file(context, count > 1 ? words[1] : "bus_section.yaml", &problem);
  }
  if (status == PICKET_OK) {
    status = picket_edges_find(problem, NULL, &result); /* the default accuracy, 1e-4 */
  }
  if (status == PICKET_OK) {
    print(result);
  } else if (status == PICKET_ERROR_STOPPED) {
    printf("given up: %s\n", picket_context_message(context));
  } else {
    fprintf(stderr, "%s: %s\n", picket_status_name(status), picket_context_message(context));
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
  return status == PICKET_OK || status == PICKET_ERROR_STOPPED ? 0 : 1;
}
