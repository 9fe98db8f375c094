/* Grids and harmonics together, on values that are known in closed form. */
#include "study/channel_converge.h"

#include "unit/study/understood.h"

#define CHANNEL                                                                              \
  "format: 1\n"                                                                              \
  "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}}\n"            \
  "channel: {pitch_nm: 300, cladding: oxide, span_nm: [2000, 2000], shapes: [{rect: {fill: " \
  "si, width_nm: 400, height_nm: 200, along_nm: [-75, 75]}}]}\n"

typedef struct formula {
  double mixed; /* K in units of both errors */
  int calls;
} formula;

/* X = 2, walls half a pitch apart, corners' h^(4 - 2α) left out. */
static picket_status sample(void *user, const pk_axis *x, const pk_axis *y, int m, int harmonics,
                            double *values) {
  formula *f = user;
  (void)x;
  (void)y;
  double grid = 0.03 / ((double)m * m), n = harmonics + 1;
  double along = (0.01 - 0.008 * cos(3.14159265358979323846 * n)) / (n * n * n);
  values[0] = 2 + grid + along + f->mixed * grid * along;
  f->calls++;
  return PICKET_OK;
}

static void check_mixed(double mixed) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  understood u = understand_good(context, CHANNEL);
  pk_channel_survey survey;
  picket_result *result = NULL;
  assert_int_equal(pk_channel_survey_take(u.problem, PK_HY, 1.55, &survey), PICKET_OK);
  assert_int_equal(pk_result_create(context, PK_RESULT_EDGES, "", 1e-4, &result), PICKET_OK);
  picket_options options;
  picket_options_init(&options);
  formula f = {.mixed = mixed};
  picket_quantity q;
  pk_channel_request request = {.survey = &survey,
                                .index = 2,
                                .count = 1,
                                .sample = sample,
                                .user = &f,
                                .options = &options,
                                .phase = "test"};
  assert_int_equal(pk_channel_converge(&request, &q, result), PICKET_OK);
  assert_true(result->complete);
  assert_true(fabs(q.value - 2) <= q.uncertainty);
  assert_true(q.uncertainty <= 1e-4 * q.value);
  assert_true(f.calls >= 7);
  pk_result_free(result);
  pk_channel_survey_clear(&survey);
  picket_problem_free(u.owner);
  picket_context_free(context);
}

static void finds_the_limit_in_both_directions(void **state) {
  (void)state;
  check_mixed(0);
}

/* The errors of one direction depend on the other: the mixed term is taken out. */
static void takes_the_mixed_term_out(void **state) {
  (void)state;
  check_mixed(5);
  check_mixed(-20);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(finds_the_limit_in_both_directions),
      cmocka_unit_test(takes_the_mixed_term_out),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
