/* Two thousand times: a context, a problem, a changed value, an answer with its documents, a field,
 * and everything given back. Neither our own objects nor the process grow. */
#include <picket.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "unit/near.h"
#include "unit/short_memory.h"

static const char TEXT[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: 1550, polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n";

enum { CYCLES = 2000, SETTLED = 200, PAGES_OF_NOISE = 256 };

static void cycle(short_memory *memory, int i) {
  picket_context *context = short_memory_context(memory);
  picket_problem *problem = NULL;
  picket_result *edges = NULL, *slab = NULL;
  picket_field *field = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  assert_int_equal(picket_problem_read_text(context, TEXT, sizeof TEXT - 1, NULL, &problem),
                   PICKET_OK);
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", 200 + i % 50), PICKET_OK);
  assert_int_equal(picket_edges_find(problem, &options, &edges), PICKET_OK);
  assert_int_equal(picket_slab_find(problem, &options, &slab), PICKET_OK);
  assert_int_equal(picket_field_find(problem, &options, PICKET_HY, 1.55, 0, &field), PICKET_OK);
  assert_non_null(picket_result_json(edges));
  assert_non_null(picket_result_csv(slab));
  /* A failure leaves nothing behind either. */
  assert_int_equal(picket_problem_set_number(problem, "cell.pitch_nm", -1), PICKET_OK);
  assert_int_equal(picket_problem_check(problem), PICKET_ERROR_INPUT);
  picket_context_free(context);
  picket_problem_free(problem);
  picket_field_free(field);
  picket_result_free(edges);
  picket_result_free(slab);
  assert_int_equal(memory->living, 0);
}

/* Pages that the process has in memory; 0 where that cannot be told. */
static long resident_pages(void) {
  long all = 0, resident = 0;
  FILE *file = fopen("/proc/self/statm", "r");
  if (file) {
    if (fscanf(file, "%ld %ld", &all, &resident) != 2) {
      resident = 0;
    }
    fclose(file);
  }
  return resident;
}

static void memory_does_not_grow(void **state) {
  (void)state;
  short_memory memory = {0};
  long settled = 0;
  for (int i = 0; i < CYCLES; i++) {
    cycle(&memory, i);
    if (i == SETTLED) {
      settled = resident_pages();
    }
  }
  long grown = resident_pages() - settled;
  /* A leak of one block of 1 kB in each cycle would be 450 pages. */
  if (grown > PAGES_OF_NOISE) {
    print_error("%ld pages more after %d cycles than after %d\n", grown, CYCLES, SETTLED);
    fail();
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {cmocka_unit_test(memory_does_not_grow)};
  return cmocka_run_group_tests(tests, NULL, NULL);
}
