/* Every allocation of whole studies fails once: the call must say so (PICKET_ERROR_MEMORY with a
 * message), leave its output alone and give everything back. Allocations of the libraries behind
 * the walls are their own; the tests of those rooms make them fail. Long studies are probed at
 * every n-th allocation, n coprime to anything regular, so that the run stays short. */
#include <picket.h>
#include <string.h>

#include "unit/near.h"
#include "unit/short_memory.h"

#define MATERIALS \
  "format: 1\nmaterials: {ox: {constant: {index: 1.444}}, si: {constant: {index: 3.476}}}\n"

static const char STACK[] = MATERIALS
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "cell: {pitch_nm: 200, cladding: ox, lateral: uniform, shapes: [{stripe: {fill: si, across: z, "
    "from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: ox, films: [{fill: si, thickness_nm: 220}], cover: ox}\n";

static const char ROW[] = MATERIALS
    "light: {wavelength_nm: 1550, polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: ox, shapes: [{rect: {fill: si, length_nm: 100, width_nm: "
    "220}}]}\n";

typedef picket_status (*study)(picket_problem *problem, const picket_options *options,
                               picket_result **out);

static picket_status summary(picket_problem *problem, const picket_options *options,
                             picket_result **out) {
  (void)options;
  return picket_summary_find(problem, out);
}

static picket_status derivatives(picket_problem *problem, const picket_options *options,
                                 picket_result **out) {
  return picket_edge_derivatives_find(problem, "cell.pitch_nm", options, out);
}

/* Reads, studies, asks for the documents, frees. */
static picket_status whole_run(short_memory *memory, const char *text, study find) {
  picket_context *context = short_memory_context(memory);
  if (!context) {
    return PICKET_ERROR_MEMORY;
  }
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  options.count = 1;
  options.points = 1;
  picket_status status = picket_problem_read_text(context, text, strlen(text), NULL, &problem);
  if (status == PICKET_OK) {
    status = find(problem, &options, &result);
  }
  if (status == PICKET_OK) {
    status =
        picket_result_json(result) && picket_result_csv(result) ? PICKET_OK : PICKET_ERROR_MEMORY;
  } else {
    assert_null(result);
    assert_true(strlen(picket_context_message(context)) > 0);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(context);
  return status;
}

static void every_allocation_fails(const char *text, study find, long stride) {
  short_memory whole = {0};
  assert_int_equal(whole_run(&whole, text, find), PICKET_OK);
  assert_int_equal(whole.living, 0);
  assert_true(whole.asked > 50);
  for (long at = 1; at <= whole.asked; at += at < 200 ? 1 : stride) {
    short_memory memory = {.fail_at = at};
    picket_status status = whole_run(&memory, text, find);
    /* An optional part may do without (the attenuation, a finer grid): then the answer is complete.
     */
    assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
    assert_true(memory.asked >= at);
    assert_int_equal(memory.living, 0);
  }
}

static void stack_studies(void **state) {
  (void)state;
  every_allocation_fails(STACK, picket_edges_find, 37);
  every_allocation_fails(STACK, picket_bands_find, 37);
  every_allocation_fails(STACK, picket_slab_find, 1);
  every_allocation_fails(STACK, summary, 1);
  every_allocation_fails(STACK, picket_index_find, 41);
}

static void row_studies(void **state) {
  (void)state;
  every_allocation_fails(ROW, picket_edges_find, 211);
  every_allocation_fails(ROW, picket_index_find, 307);
  every_allocation_fails(ROW, derivatives, 307);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(stack_studies),
      cmocka_unit_test(row_studies),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
