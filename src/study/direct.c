/* See direct.h. In the line of a task: fingerprint, slope, value, bar, scale, reached, way, solves,
 * note. */
#include "study/direct.h"

#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "study/record_part.h"
#include "study/sweep.h"
#include "study/workers.h"

enum {
  FIRST_TASKS = 64,
  MOST_TASKS = 1 << 20, /* far above what a study asks: it bounds what a journal can hold */
  KEY_TEXT = 17,
  MOST_SOLVES = 1000 /* of one task */
};

static double *values_of(const pk_direct *d, int task) {
  return d->values + (size_t)task * (size_t)d->variants->count;
}

/* --- Tasks --------------------------------------------------------------------------------------
 */

static picket_status add_task(pk_direct *d, uint64_t key, int slope, int *number) {
  picket_context *context = d->variants->context;
  size_t width = (size_t)d->variants->count;
  if (d->count == MOST_TASKS) {
    return pk_fail(context, PICKET_ERROR_UNSUPPORTED, "more than %d direct solves are asked for",
                   MOST_TASKS);
  }
  if (d->count == d->capacity) {
    int capacity = 2 * d->capacity + FIRST_TASKS;
    pk_direct_task *task =
        pk_regrow(context, d->task, (size_t)d->count, (size_t)capacity, sizeof *task);
    if (!task) {
      return PICKET_ERROR_MEMORY;
    }
    d->task = task;
    double *values = pk_regrow(context, d->values, (size_t)d->count * width,
                               (size_t)capacity * width, sizeof *values);
    if (!values) {
      return PICKET_ERROR_MEMORY;
    }
    d->values = values;
    d->capacity = capacity;
  }
  *number = d->count++;
  d->task[*number] = (pk_direct_task){.key = key, .slope = slope};
  return PICKET_OK;
}

static int find_task(const pk_direct *d, uint64_t key, int slope) {
  for (int i = 0; i < d->count; i++) {
    if (d->task[i].key == key && d->task[i].slope == slope) {
      return i;
    }
  }
  return -1;
}

picket_status pk_direct_ask(pk_direct *d, const double *values, int slope, int *number) {
  uint64_t key = pk_hash_number(PK_HASH_START, slope);
  key = pk_hash_number(key, (double)d->question.family);
  for (int i = 0; i < d->variants->count; i++) {
    key = pk_hash_number(key, values[i]);
  }
  *number = find_task(d, key, slope);
  picket_status status = *number >= 0 ? PICKET_OK : add_task(d, key, slope, number);
  if (status == PICKET_OK) {
    d->task[*number].asked = true;
    d->task[*number].family = d->question.family;
    memcpy(values_of(d, *number), values, (size_t)d->variants->count * sizeof *values);
  }
  return status;
}

/* --- Solving, in any process --------------------------------------------------------------------
 */

static picket_status measure(const pk_direct *d, const double *values, pk_direct_answer *out,
                             char reason[PK_RECORD_TEXT]) {
  pk_problem *problem = NULL;
  pk_measure_memory memory = d->memory;
  pk_measurement m = {.q = {NAN, NAN, NULL}, .scale = NAN};
  picket_status status = d->variants->make(d->variants->user, values, &problem);
  if (status == PICKET_OK) {
    status = pk_measure(problem, &d->question, d->options, &memory, &m);
  }
  pk_problem_free(problem);
  *out = (pk_direct_answer){m.q, m.scale, m.reached, PK_SLOPE_NONE, 1};
  snprintf(reason, PK_RECORD_TEXT, "%s", m.reason[0] ? m.reason : m.q.note ? m.q.note : "");
  return status;
}

static picket_status differentiate(const pk_direct *d, const double *values, int i,
                                   pk_direct_answer *out, char reason[PK_RECORD_TEXT]) {
  pk_measured_slope slope = {.q = {NAN, NAN, NULL}};
  picket_status status =
      pk_measure_slope(d->variants, values, i, &d->question, d->options, &d->memory, &slope);
  *out = (pk_direct_answer){slope.q, NAN, true, slope.way, slope.solves};
  snprintf(reason, PK_RECORD_TEXT, "%s",
           slope.reason[0] ? slope.reason
           : slope.q.note  ? slope.q.note
                           : "");
  return status;
}

static picket_status solve(void *user, int number, pk_record *line) {
  pk_direct *d = user;
  const pk_direct_task *task = &d->task[number];
  picket_context *context = d->variants->context;
  char reason[PK_RECORD_TEXT] = "", key[KEY_TEXT];
  pk_direct_answer a = {.q = {NAN, NAN, NULL}, .scale = NAN};
  picket_status status = task->slope == PK_DIRECT_VALUE
                             ? measure(d, values_of(d, number), &a, reason)
                             : differentiate(d, values_of(d, number), task->slope, &a, reason);
  if (pk_sweep_is_of_a_piece(status)) {
    a = (pk_direct_answer){.q = {NAN, NAN, NULL}, .scale = NAN, .solves = 1};
    snprintf(reason, sizeof reason, "%s", picket_context_message(context));
    pk_message_clear(context);
    status = PICKET_OK;
  }
  snprintf(key, sizeof key, "%016" PRIx64, task->key);
  pk_record_text(line, key);
  pk_record_whole(line, task->slope);
  pk_record_number(line, a.q.value);
  pk_record_number(line, a.q.uncertainty);
  pk_record_number(line, a.scale);
  pk_record_whole(line, a.reached);
  pk_record_whole(line, (int)a.way);
  pk_record_whole(line, a.solves);
  pk_record_text(line, reason[0] ? reason : NULL);
  return status == PICKET_OK && line->failed ? PICKET_ERROR_MEMORY : status;
}

/* --- Taking answers -----------------------------------------------------------------------------
 */

/* PICKET_ERROR_INTERNAL, with a message, for a line that is no answer. */
static picket_status read_line(pk_direct *d, const char *text, uint64_t *key, int *slope,
                               pk_direct_answer *out) {
  pk_record_reader reader = {text, true};
  char buffer[PK_RECORD_TEXT];
  const char *word = pk_record_read_text(&reader, buffer);
  *key = word ? strtoull(word, NULL, 16) : 0;
  *slope = pk_record_read_whole(&reader, PK_DIRECT_VALUE, d->variants->count - 1);
  out->q.value = pk_record_read_number(&reader);
  out->q.uncertainty = pk_record_read_number(&reader);
  out->scale = pk_record_read_number(&reader);
  out->reached = pk_record_read_whole(&reader, 0, 1) == 1;
  out->way = (pk_slope_way)pk_record_read_whole(&reader, PK_SLOPE_NONE, PK_SLOPE_DIFFERENCE);
  out->solves = pk_record_read_whole(&reader, 0, MOST_SOLVES);
  picket_status status = pk_part_read_text(d->result, &reader, &out->q.note);
  if (status == PICKET_OK && !pk_record_read_end(&reader)) {
    status = pk_fail(d->variants->context, PICKET_ERROR_INTERNAL,
                     "a line that should hold a direct solve does not");
  }
  return status;
}

static picket_status take_kept(void *user, int number, const char *text) {
  pk_direct *d = user;
  uint64_t key = 0;
  int slope = 0, at = 0;
  pk_direct_answer answer = {.q = {NAN, NAN, NULL}};
  (void)number; /* of an order of asking: the fingerprint says what it is */
  picket_status status = read_line(d, text, &key, &slope, &answer);
  if (status == PICKET_OK) {
    at = find_task(d, key, slope);
    status = at >= 0 ? PICKET_OK : add_task(d, key, slope, &at);
  }
  if (status == PICKET_OK) {
    d->task[at].answer = answer;
    d->task[at].done = true;
  }
  return status;
}

static picket_status take(void *user, int number, const char *text, const char *why) {
  pk_direct *d = user;
  pk_direct_task *task = &d->task[number];
  uint64_t key = 0;
  int slope = 0;
  picket_status status = PICKET_OK;
  if (text) {
    status = read_line(d, text, &key, &slope, &task->answer);
    if (status == PICKET_OK && d->journal) {
      status = pk_journal_add(d->journal, number, text);
    }
  } else { /* what killed a worker may pass: not for the journal */
    const char *note = pk_result_text(d->result, why);
    task->answer = (pk_direct_answer){.q = {NAN, NAN, note}, .scale = NAN};
    status = note ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  task->done = status == PICKET_OK;
  return status;
}

picket_status pk_direct_resume(pk_direct *d, const char *path, uint64_t key) {
  return pk_journal_open(d->variants->context, path, key, take_kept, d, &d->journal);
}

picket_status pk_direct_solve(pk_direct *d, const char *phase) {
  picket_context *context = d->variants->context;
  int *number = PK_NEW(context, d->count + 1, int), missing = 0;
  if (!number) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < d->count; i++) {
    if (d->task[i].asked && !d->task[i].done) {
      number[missing++] = i;
    }
  }
  int jobs = d->options->jobs > 0 ? (int)d->options->jobs : pk_workers_cores();
  pk_work work = {context, jobs, missing, number, 0, phase, solve, take, d};
  picket_status status = missing > 0 ? pk_workers_run(&work) : PICKET_OK;
  pk_free(context, number);
  return status;
}

int pk_direct_solves(const pk_direct *d) {
  int sum = 0;
  for (int i = 0; i < d->count; i++) {
    bool counts = d->task[i].asked && d->task[i].family == d->question.family;
    sum += counts ? d->task[i].answer.solves : 0;
  }
  return sum;
}

void pk_direct_clear(pk_direct *d) {
  picket_context *context = d->variants->context;
  pk_journal_close(d->journal);
  d->journal = NULL;
  pk_free(context, d->task);
  pk_free(context, d->values);
  d->task = NULL;
  d->values = NULL;
  d->count = d->capacity = 0;
}
