/* Worker processes with pieces made up here: squares, a crash, a failure, a stop. */
#include "study/workers.h"

#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "unit/near.h"
#include "unit/short_memory.h"

enum { PIECES = 12, NOBODY = -1 };

typedef struct job {
  int crashes, exits, fails, spells; /* pieces that do so, or NOBODY */
  int answer[PIECES];
  int taken;
  char why[200];
  pid_t caller;
  bool elsewhere; /* some piece was done in another process */
  int stop_after; /* pieces taken; 0: never */
  double last_fraction;
  int logged;
} job;

static job fresh(void) {
  return (job){
      .crashes = NOBODY, .exits = NOBODY, .fails = NOBODY, .spells = NOBODY, .caller = getpid()};
}

static picket_status square(void *user, int piece, pk_record *answer) {
  job *j = user;
  picket_context *context = answer->context;
  if (piece == j->crashes) {
    kill(getpid(), SIGKILL); /* as the system does when memory is out */
  }
  if (piece == j->exits) {
    _exit(5);
  }
  if (piece == j->fails) {
    return pk_fail(context, PICKET_ERROR_MEMORY, "piece %d is too big", piece);
  }
  pk_log(context, PICKET_LOG_INFO, "piece\n%d", piece);
  if (pk_progress(context, "inside", 0.5) != PICKET_OK) {
    return PICKET_ERROR_STOPPED;
  }
  pk_record_whole(answer, piece * piece);
  pk_record_whole(answer, (int)getpid());
  for (int i = 0; piece == j->spells && i < 50000; i++) {
    pk_record_number(answer, i); /* more than a pipe holds */
  }
  return PICKET_OK;
}

static picket_status take(void *user, int piece, const char *answer, const char *why) {
  job *j = user;
  assert_int_equal(getpid(), j->caller);
  assert_int_equal(answer == NULL, why != NULL);
  j->taken++;
  if (why) {
    snprintf(j->why, sizeof j->why, "%s", why);
    j->answer[piece] = -1;
    return PICKET_OK;
  }
  pk_record_reader reader = {answer, true};
  j->answer[piece] = pk_record_read_whole(&reader, 0, 1000000);
  int process = pk_record_read_whole(&reader, 0, 2147483647);
  j->elsewhere = j->elsewhere || process != j->caller;
  for (int i = 0; piece == j->spells && i < 50000; i++) {
    assert_true(pk_record_read_number(&reader) == i);
  }
  assert_true(pk_record_read_end(&reader));
  return PICKET_OK;
}

static picket_verdict watch(const picket_progress *progress, void *user) {
  job *j = user;
  assert_int_equal(getpid(), j->caller);
  assert_true(progress->fraction >= 0 && progress->fraction <= 1);
  j->last_fraction = progress->fraction;
  return j->stop_after > 0 && j->taken >= j->stop_after ? PICKET_STOP : PICKET_CONTINUE;
}

static void hear(picket_log_level level, const char *line, void *user) {
  job *j = user;
  assert_int_equal(getpid(), j->caller);
  assert_true(strstr(line, "piece") || level == PICKET_LOG_WARNING);
  j->logged += level == PICKET_LOG_INFO;
}

static picket_context *context_of(job *j) {
  picket_context_options options;
  picket_context_options_init(&options);
  options.progress = watch;
  options.progress_user = j;
  options.log = hear;
  options.log_user = j;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(&options, &context), PICKET_OK);
  return context;
}

static const int ALL[PIECES] = {0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11};

static picket_status run(job *j, int jobs) {
  picket_context *context = context_of(j);
  pk_work work = {context, jobs, PIECES, ALL, 4, "squares", square, take, j};
  picket_status status = pk_workers_run(&work);
  if (status != PICKET_OK) {
    snprintf(j->why, sizeof j->why, "%s", picket_context_message(context));
  }
  picket_context_free(context);
  /* Every child was reaped. */
  assert_int_equal(waitpid(-1, NULL, WNOHANG), -1);
  return status;
}

static void every_piece_is_answered_once(void **state) {
  (void)state;
  for (int jobs = 1; jobs <= 3; jobs++) {
    job j = fresh();
    j.spells = 3;
    assert_int_equal(run(&j, jobs), PICKET_OK);
    assert_int_equal(j.taken, PIECES);
    assert_int_equal(j.elsewhere, jobs > 1);
    assert_int_equal(j.logged, PIECES);
    assert_true(j.last_fraction > 0.25);
    for (int i = 0; i < PIECES; i++) {
      assert_int_equal(j.answer[i], i * i);
    }
  }
}

static void no_pieces_and_more_workers_than_pieces(void **state) {
  (void)state;
  job j = fresh();
  picket_context *context = context_of(&j);
  pk_work work = {context, 4, 0, ALL, 0, "squares", square, take, &j};
  assert_int_equal(pk_workers_run(&work), PICKET_OK);
  work.count = 2;
  work.jobs = 100;
  assert_int_equal(pk_workers_run(&work), PICKET_OK);
  assert_int_equal(j.taken, 2);
  picket_context_free(context);
}

static void a_crash_costs_one_piece(void **state) {
  (void)state;
  const char *expected[2] = {"signal 9", "status 5"};
  for (int kind = 0; kind < 2; kind++) {
    job j = fresh();
    *(kind == 0 ? &j.crashes : &j.exits) = 5;
    assert_int_equal(run(&j, 2), PICKET_OK);
    assert_int_equal(j.taken, PIECES);
    assert_non_null(strstr(j.why, expected[kind]));
    for (int i = 0; i < PIECES; i++) {
      assert_int_equal(j.answer[i], i == 5 ? -1 : i * i);
    }
  }
}

static void a_failure_ends_the_whole(void **state) {
  (void)state;
  for (int jobs = 1; jobs <= 2; jobs++) {
    job j = fresh();
    j.fails = 6;
    assert_int_equal(run(&j, jobs), PICKET_ERROR_MEMORY);
    assert_string_equal(j.why, "piece 6 is too big");
    assert_true(j.taken < PIECES);
  }
}

static void a_stop_keeps_what_was_taken(void **state) {
  (void)state;
  for (int jobs = 1; jobs <= 2; jobs++) {
    job j = fresh();
    j.stop_after = 3;
    assert_int_equal(run(&j, jobs), PICKET_ERROR_STOPPED);
    assert_non_null(strstr(j.why, "stopped"));
    assert_true(j.taken >= 3 && j.taken < PIECES);
  }
}

/* A worker whose caller is killed does not stay. */
static void workers_end_with_their_caller(void **state) {
  (void)state;
  int pipe_ends[2];
  assert_int_equal(pipe(pipe_ends), 0);
  pid_t caller = fork();
  if (caller == 0) {
    job j = fresh();
    picket_context *context = context_of(&j);
    pk_work work = {context, 2, PIECES, ALL, 0, "squares", square, take, &j};
    j.crashes = NOBODY;
    for (;;) { /* the pipe's writing end is held by this process and its workers */
      (void)pk_workers_run(&work);
      if (write(pipe_ends[1], "x", 1) != 1) {
        _exit(1);
      }
    }
  }
  close(pipe_ends[1]);
  char byte;
  assert_int_equal(read(pipe_ends[0], &byte, 1), 1);
  assert_int_equal(kill(caller, SIGKILL), 0);
  assert_int_equal(waitpid(caller, NULL, 0), caller);
  ssize_t got;
  while ((got = read(pipe_ends[0], &byte, 1)) == 1) { /* hangs if a worker lives on */
  }
  assert_int_equal(got, 0);
  close(pipe_ends[0]);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (int jobs = 1; jobs <= 2; jobs++) {
    for (long n = 2; n < 8; n++) {
      short_memory memory = {.fail_at = n};
      picket_context *context = short_memory_context(&memory);
      job j = fresh();
      pk_work work = {context, jobs, PIECES, ALL, 0, "squares", square, take, &j};
      picket_status status = pk_workers_run(&work);
      /* In workers the count starts at what the caller had asked for: each may meet the failure. */
      assert_true(status == PICKET_ERROR_MEMORY || (status == PICKET_OK && j.taken == PIECES));
      if (n == 2) {
        assert_int_equal(status, PICKET_ERROR_MEMORY);
      }
      picket_context_free(context);
      assert_int_equal(memory.living, 0);
      assert_int_equal(waitpid(-1, NULL, WNOHANG), -1);
    }
  }
}

static void there_is_at_least_one_core(void **state) {
  (void)state;
  assert_true(pk_workers_cores() >= 1);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(every_piece_is_answered_once),
      cmocka_unit_test(no_pieces_and_more_workers_than_pieces),
      cmocka_unit_test(a_crash_costs_one_piece),
      cmocka_unit_test(a_failure_ends_the_whole),
      cmocka_unit_test(a_stop_keeps_what_was_taken),
      cmocka_unit_test(workers_end_with_their_caller),
      cmocka_unit_test(every_allocation_may_fail),
      cmocka_unit_test(there_is_at_least_one_core),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
