/* A point of a section's study as a line of text: everything of it must come back, to the last bit,
 * also what is added to it later. */
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "study/modes.h"
#include "study/modes_record.h"
#include "unit/near.h"
#include "unit/short_memory.h"

static picket_confinement shares[2] = {{"core of silicon", 0.75}, {"ox%", 0.25}};

static picket_section_mode filled(int seed) {
  picket_section_mode mode = {.order = seed, .nodes_x = 2, .nodes_y = 3};
  picket_quantity *many = (picket_quantity *)&mode.diameters;
  for (size_t i = 0; i < sizeof mode.diameters / sizeof *many; i++) {
    many[i] = (picket_quantity){1 + (double)i / 3, i % 2 ? NAN : 0.1, i % 2 ? "no bar" : NULL};
  }
  mode.index = (picket_quantity){2.1 / 3, 1e-300, NULL};
  mode.group_index = (picket_quantity){4.2, NAN, "a note, with %20 and\nan end"};
  mode.loss_db_per_cm = (picket_quantity){-0.0, INFINITY, NULL};
  mode.effective_area_um2 = (picket_quantity){NAN, NAN, "none"};
  mode.ex_share = 1.0 / 7;
  mode.material_count = 2;
  mode.confinement = shares;
  return mode;
}

static void everything_comes_back(void **state) {
  (void)state;
  picket_context *context = NULL;
  picket_result *result = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_result_create(context, PK_RESULT_MODES, "", 1, &result), PICKET_OK);
  picket_section_mode modes[2] = {filled(0), filled(1)};
  modes[1].material_count = 0;
  picket_modes_point before = {1.55, 2, modes, "weakly bound", 0}, after = {0};
  pk_record record = {.context = context}, again = {.context = context};
  pk_modes_record_write(&before, &record);
  pk_record_reader reader = {record.text, true};
  assert_int_equal(pk_modes_record_read(result, &reader, &after), PICKET_OK);
  assert_true(pk_record_read_end(&reader));
  pk_modes_record_write(&after, &again);
  assert_string_equal(again.text, record.text);
  assert_int_equal(after.mode_count, 2);
  assert_string_equal(after.note, "weakly bound");
  assert_string_equal(after.modes[0].group_index.note, modes[0].group_index.note);
  assert_true(after.modes[0].index.value == modes[0].index.value);
  assert_true(after.modes[0].index.uncertainty == 1e-300);
  assert_true(signbit(after.modes[0].loss_db_per_cm.value));
  assert_true(after.modes[0].ex_share == 1.0 / 7);
  assert_int_equal(after.modes[1].order, 1);
  assert_string_equal(after.modes[0].confinement[1].material, "ox%");
  assert_true(after.modes[0].confinement[1].share == 0.25);
  pk_modes_point_clear(context, &after);
  /* Cut off anywhere it is no point, and nothing leaks. */
  for (size_t cut = 0; cut < record.used; cut++) {
    char kept = record.text[cut];
    record.text[cut] = '\0';
    reader = (pk_record_reader){record.text, true};
    memset(&after, 0, sizeof after);
    assert_int_equal(pk_modes_record_read(result, &reader, &after), PICKET_OK);
    assert_true(!pk_record_read_end(&reader) || cut > record.used - 2);
    pk_modes_point_clear(context, &after);
    record.text[cut] = kept;
  }
  pk_record_clear(&record);
  pk_record_clear(&again);
  picket_result_free(result);
  picket_context_free(context);
}

/* A mode of every byte set one by one: each one that counts changes the line. Bytes that do not are
 * the gaps of alignment, fewer than one number for each of the two places where they may be; a
 * member missing in the table of modes_record.c would be more. */
static void no_member_is_left_out(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  picket_section_mode mode;
  picket_modes_point point = {1.55, 1, &mode, NULL, 0};
  pk_record plain = {.context = context};
  memset(&mode, 0, sizeof mode);
  pk_modes_record_write(&point, &plain);
  size_t silent = 0, pointers = sizeof mode.confinement;
  for (size_t i = 0; i < sizeof mode; i += sizeof(int)) {
    bool is_pointer = false;
    memset(&mode, 0, sizeof mode);
    for (size_t q = offsetof(picket_section_mode, index);
         q + sizeof(picket_quantity) <= offsetof(picket_section_mode, ex_share);
         q += sizeof(picket_quantity)) {
      size_t note = q + offsetof(picket_quantity, note);
      is_pointer = is_pointer || (i >= note && i < note + sizeof(char *));
    }
    size_t list = offsetof(picket_section_mode, confinement);
    is_pointer = is_pointer || (i >= list && i < list + pointers) ||
                 i == offsetof(picket_section_mode, material_count);
    if (is_pointer) {
      continue; /* tested above */
    }
    ((unsigned char *)&mode)[i] = 1;
    pk_record changed = {.context = context};
    pk_modes_record_write(&point, &changed);
    silent += strcmp(changed.text, plain.text) == 0 ? sizeof(int) : 0;
    pk_record_clear(&changed);
  }
  assert_true(silent <= 2 * sizeof(int));
  pk_record_clear(&plain);
  picket_context_free(context);
}

static void allocations_may_fail(void **state) {
  (void)state;
  picket_section_mode modes[2] = {filled(0), filled(1)};
  picket_modes_point before = {1.55, 2, modes, "weakly bound", 0};
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    picket_result *result = NULL;
    assert_int_equal(pk_result_create(context, PK_RESULT_MODES, "", 1, &result), PICKET_OK);
    pk_record record = {.context = context};
    pk_modes_record_write(&before, &record);
    picket_modes_point after = {0};
    pk_record_reader reader = {record.text, true};
    memory.fail_at = memory.asked + n;
    picket_status status = pk_modes_record_read(result, &reader, &after);
    bool met = memory.asked >= memory.fail_at;
    assert_int_equal(status, met ? PICKET_ERROR_MEMORY : PICKET_OK);
    pk_modes_point_clear(context, &after);
    pk_record_clear(&record);
    picket_result_free(result);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (!met) {
      assert_true(n > 5);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(everything_comes_back),
      cmocka_unit_test(no_member_is_left_out),
      cmocka_unit_test(allocations_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
