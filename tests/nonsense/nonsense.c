/* Runs the generated calls three times: with everything alive; with the context let go of while
 * its objects live; with the problem gone too and only results and fields left. */
#include "harness.h"

typedef picket_status (*finder)(picket_problem *, const picket_options *, picket_result **);

static const double VALUES[] = {200, 210};

static picket_status summary(picket_problem *problem, const picket_options *options,
                             picket_result **out) {
  (void)options;
  return picket_summary_find(problem, out);
}

static picket_status edge_derivatives(picket_problem *problem, const picket_options *options,
                                      picket_result **out) {
  return picket_edge_derivatives_find(problem, "cell.pitch_nm", options, out);
}

static picket_status index_derivatives(picket_problem *problem, const picket_options *options,
                                       picket_result **out) {
  return picket_index_derivatives_find(problem, "cell.pitch_nm", options, out);
}

static picket_status sweep(picket_problem *problem, const picket_options *options,
                           picket_result **out) {
  picket_sweep_request request;
  picket_sweep_request_init(&request);
  request.path = "cell.pitch_nm";
  request.count = 2;
  request.values = VALUES;
  return picket_sweep_find(problem, &request, options, out);
}

static const struct {
  const char *kind;
  finder find;
} FINDERS[] = {{"summary", summary},
               {"edges", picket_edges_find},
               {"bands", picket_bands_find},
               {"slab", picket_slab_find},
               {"index", picket_index_find},
               {"modes", picket_modes_find},
               {"aim", picket_aim_find},
               {"sweep", sweep},
               {"edge_derivatives", edge_derivatives},
               {"index_derivatives", index_derivatives}};

static void make_wrong(env *e) {
  const double accuracies[] = {NAN, 0, -1, 1e300, DBL_MIN};
  for (int i = 0; i < 9; i++) {
    e->wrong_options[i] = e->picket_options;
    if (i < 5) {
      e->wrong_options[i].accuracy = accuracies[i];
    }
  }
  e->wrong_options[5].count = 1.5;
  e->wrong_options[6].unknowns = NAN;
  e->wrong_options[7].size = 0;
  e->wrong_options[8].size = (size_t)-1;
  const size_t sizes[] = {0, 1, sizeof(size_t), (size_t)-1};
  for (int i = 0; i < 4; i++) {
    e->wrong_picket_context_options[i] = e->picket_context_options;
    e->wrong_picket_context_options[i].size = sizes[i];
    e->wrong_picket_sweep_request[i] = e->picket_sweep_request;
    e->wrong_picket_sweep_request[i].size = sizes[i];
    e->wrong_picket_match_request[i] = e->picket_match_request;
    e->wrong_picket_match_request[i].size = sizes[i];
    e->wrong_picket_figure_options[i] = e->picket_figure_options;
    e->wrong_picket_figure_options[i].size = sizes[i];
  }
}

static bool make(env *e) {
  picket_options_init(&e->picket_options);
  e->picket_options.accuracy = 1e-2;
  e->picket_options.count = 1;
  picket_context_options_init(&e->picket_context_options);
  picket_match_request_init(&e->picket_match_request);
  picket_figure_options_init(&e->picket_figure_options);
  picket_sweep_request_init(&e->picket_sweep_request);
  e->picket_sweep_request.path = "cell.pitch_nm";
  e->picket_sweep_request.count = 1;
  e->picket_sweep_request.values = VALUES;
  make_wrong(e);
  e->room = malloc(ROOM * sizeof *e->room);
  e->endless = malloc(ENDLESS + 1);
  if (!e->room || !e->endless || picket_context_create(NULL, &e->picket_context) != PICKET_OK) {
    return false;
  }
  memset(e->endless, 'a', ENDLESS);
  e->endless[ENDLESS] = '\0';
  const picket_options *options = &e->picket_options;
  for (size_t i = 0; i < sizeof FINDERS / sizeof *FINDERS; i++) {
    e->kind[i] = FINDERS[i].kind;
    if (FINDERS[i].find(problem(e), options, &e->result[i]) != PICKET_OK) {
      printf("%s: %s\n", e->kind[i], picket_context_message(e->picket_context));
      return false;
    }
  }
  return picket_field_find(problem(e), options, PICKET_HY, 1.55, 0, &e->picket_field) ==
             PICKET_OK &&
         picket_section_field_find(problem(e), options, 1.55, 0, &e->picket_section_field) ==
             PICKET_OK;
}

int main(int count, char **arguments) {
  env e = {.file = count > 1 ? arguments[1] : ""};
  FILE *file = fopen(e.file, "w");
  if (!file || fputs(TEXT, file) < 0 || fclose(file) != 0 || !make(&e)) {
    printf("the objects could not be made\n");
    return 1;
  }
  every_call(&e);
  picket_context_free(e.picket_context);
  e.picket_context = NULL;
  every_call(&e);
  picket_problem_free(e.picket_problem);
  e.picket_problem = NULL;
  every_call(&e);
  for (int i = 0; i < KINDS; i++) {
    picket_result_free(e.result[i]);
  }
  picket_field_free(e.picket_field);
  picket_section_field_free(e.picket_section_field);
  free(e.room);
  free(e.endless);
  printf("%d calls, %d faults\n", e.calls, e.faults);
  return e.faults > 0 || e.calls < 500;
}
