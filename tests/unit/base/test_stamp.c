/* Structs with a size stamp: an older, smaller one is filled up, a larger or odd one refused, and
 * nobody's memory is written beyond what he has. */
#include "base/stamp.h"

#include <picket.h>
#include <stdint.h>
#include <string.h>

#include "base/options.h"
#include "unit/near.h"

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

/* What picket_options was before it had `unknowns` and what follows. */
typedef struct older_options {
  size_t size;
  double accuracy, count;
} older_options;

static void an_older_struct_is_filled_up(void **state) {
  (void)state;
  struct {
    older_options options;
    unsigned char guard[sizeof(picket_options)];
  } old;
  memset(&old, 0x5a, sizeof old);
  picket_options_init_sized((picket_options *)(void *)&old, sizeof old.options);
  assert_int_equal(old.options.size, sizeof old.options);
  for (size_t i = 0; i < sizeof old.guard; i++) {
    assert_int_equal(old.guard[i], 0x5a);
  }
  old.options.accuracy = 1e-3;
  picket_options usual, chosen;
  picket_options_init(&usual);
  assert_int_equal(pk_options_take(context, (const picket_options *)(void *)&old, &chosen),
                   PICKET_OK);
  assert_int_equal(chosen.size, sizeof chosen);
  assert_true(chosen.accuracy == 1e-3 && chosen.count == usual.count);
  assert_true(chosen.unknowns == usual.unknowns && chosen.points == usual.points);
  assert_true(chosen.jobs == usual.jobs);
  /* A member that it does not have cannot be set. */
  picket_options *options = (picket_options *)(void *)&old;
  assert_int_equal(picket_options_set(options, "count", 3), PICKET_OK);
  assert_true(old.options.count == 3);
  assert_int_equal(picket_options_set(options, "jobs", 2), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_options_choose(context, options, "jobs", 2), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "jobs"));
  assert_int_equal(old.guard[0], 0x5a);
}

static void odd_sizes_are_refused(void **state) {
  (void)state;
  const size_t wrong[] = {0,
                          1,
                          sizeof(size_t),
                          sizeof(size_t) + 1,
                          sizeof(picket_options) - 1,
                          sizeof(picket_options) + sizeof(double),
                          SIZE_MAX};
  picket_options options, chosen;
  picket_result *result = NULL;
  for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
    picket_options_init(&options);
    options.size = wrong[i];
    assert_int_equal(pk_options_take(context, &options, &chosen), PICKET_ERROR_ARGUMENT);
    assert_non_null(strstr(picket_context_message(context), "size"));
    assert_int_equal(picket_options_set(&options, "count", 1), PICKET_ERROR_ARGUMENT);
    picket_context_options how;
    picket_context *none = NULL;
    picket_context_options_init(&how);
    how.size = wrong[i] == sizeof options - 1 ? sizeof how - 1
               : wrong[i] > sizeof options    ? sizeof how + sizeof(void *)
                                              : wrong[i];
    assert_int_equal(picket_context_create(&how, &none), PICKET_ERROR_ARGUMENT);
    assert_null(none);
  }
  assert_null(result);
}

static void a_newer_struct_is_zeroed_and_refused(void **state) {
  (void)state;
  struct {
    picket_options options;
    double later;
  } newer;
  memset(&newer, 0x5a, sizeof newer);
  picket_options_init_sized(&newer.options, sizeof newer);
  assert_int_equal(newer.options.size, sizeof newer);
  assert_true(newer.later == 0);
  picket_options chosen;
  assert_int_equal(pk_options_take(context, &newer.options, &chosen), PICKET_ERROR_ARGUMENT);
  assert_non_null(strstr(picket_context_message(context), "newer"));
}

static void nothing_is_written_where_there_is_no_room(void **state) {
  (void)state;
  unsigned char room[sizeof(size_t)];
  memset(room, 0x5a, sizeof room);
  picket_options_init_sized((picket_options *)(void *)room, sizeof room - 1);
  assert_int_equal(room[0], 0x5a);
  picket_options_init_sized(NULL, sizeof(picket_options));
  picket_context_options_init_sized(NULL, sizeof(picket_context_options));
  picket_match_request_init_sized(NULL, sizeof(picket_match_request));
  picket_sweep_request_init_sized(NULL, sizeof(picket_sweep_request));
  (picket_options_init)(NULL); /* the functions behind the macros, as bindings call them */
  (picket_context_options_init)(NULL);
  (picket_match_request_init)(NULL);
  (picket_sweep_request_init)(NULL);
}

static void an_older_context_has_no_progress(void **state) {
  (void)state;
  picket_context_options how;
  picket_context *own = NULL;
  picket_context_options_init(&how);
  how.size = offsetof(picket_context_options, progress);
  how.progress_user = &how;
  assert_int_equal(picket_context_create(&how, &own), PICKET_OK);
  picket_context_free(own);
  own = NULL;
  /* Half a pair of memory callbacks stays one. */
  how.size = offsetof(picket_context_options, release);
  how.allocate = (void *(*)(size_t, void *))(uintptr_t)&own;
  assert_int_equal(picket_context_create(&how, &own), PICKET_ERROR_ARGUMENT);
  assert_null(own);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(an_older_struct_is_filled_up),
      cmocka_unit_test(odd_sizes_are_refused),
      cmocka_unit_test(a_newer_struct_is_zeroed_and_refused),
      cmocka_unit_test(nothing_is_written_where_there_is_no_room),
      cmocka_unit_test(an_older_context_has_no_progress),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
