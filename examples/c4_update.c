/* A design loop: one problem is kept and its geometry changed, instead of reading it anew for every
 * value. The answers are the same to the last digit; what is saved is reading and parsing, which is
 * most of the work where the solve is quick. */
#include <picket.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

static const char TEXT[] =
    "format: 1\n"
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "materials: {silicon: {catalogue: silicon}, oxide: {catalogue: silica}}\n"
    "slab: {substrate: oxide, films: [{fill: silicon, thickness_nm: 220}], cover: oxide}\n";

enum { VALUES = 2000 };
static const double FROM_NM = 180, STEP_NM = 0.04;

/* Index of the fundamental mode of the problem's film at a thickness; 0 on failure. */
static double index_at(picket_problem *problem, double thickness_nm) {
  picket_options options;
  picket_result *result = NULL;
  picket_slab_answer slab;
  double index = 0;
  picket_options_init(&options);
  options.count = 1;
  if (picket_problem_set_number(problem, "slab.films.0.thickness_nm", thickness_nm) == PICKET_OK &&
      picket_slab_find(problem, &options, &result) == PICKET_OK &&
      picket_slab_get(result, 0, &slab) == PICKET_OK && slab.points[0].mode_count > 0) {
    index = slab.points[0].modes[0].index.value;
  }
  picket_result_free(result);
  return index;
}

static double seconds_since(clock_t start) {
  return (double)(clock() - start) / CLOCKS_PER_SEC;
}

int main(void) {
  static double updated[VALUES], anew[VALUES];
  picket_context *context = NULL;
  picket_problem *kept = NULL;
  if (picket_context_create(NULL, &context) != PICKET_OK ||
      picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &kept) != PICKET_OK) {
    fprintf(stderr, "%s\n", picket_context_message(context));
    return 1;
  }
  clock_t start = clock();
  for (int i = 0; i < VALUES; i++) {
    updated[i] = index_at(kept, FROM_NM + STEP_NM * i);
  }
  double update_s = seconds_since(start);
  start = clock();
  for (int i = 0; i < VALUES; i++) {
    picket_problem *fresh = NULL;
    if (picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &fresh) == PICKET_OK) {
      anew[i] = index_at(fresh, FROM_NM + STEP_NM * i);
    }
    picket_problem_free(fresh);
  }
  double anew_s = seconds_since(start);
  bool same = memcmp(updated, anew, sizeof anew) == 0 && updated[0] > 1;
  printf("index %.6f at %g nm, %.6f at %g nm; answers %s\n", updated[0], FROM_NM,
         updated[VALUES - 1], FROM_NM + STEP_NM * (VALUES - 1), same ? "the same" : "differ");
  printf("%d values: %.3f s updated, %.3f s anew\n", VALUES, update_s, anew_s);
  picket_problem_free(kept);
  picket_context_free(context);
  return same ? 0 : 1;
}
