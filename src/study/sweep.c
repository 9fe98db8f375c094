/* See sweep.h. Pieces are numbered value by value, in each value as its kind numbers them. The line
 * of a piece: status, note, shortfall, and its body if it did not fail. */
#include "study/sweep.h"

#include <limits.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "study/journal.h"
#include "study/record_part.h"
#include "study/sweep_key.h"
#include "study/workers.h"

static const char NOTE_STOPPED[] = "stopped before this point was done";

enum { MOST_PIECES = 1000000, NOTE_BYTES = 1500, NO_VALUE = -1 };

typedef struct piece_state {
  bool done;
  picket_status status;
  const char *note;      /* why it failed; the result's, as is the shortfall */
  const char *shortfall; /* of its accuracy; null if it was met */
} piece_state;

/* A value whose problem cannot be had has the pieces of the problem as it stands, all failed. */
typedef struct value_state {
  int first; /* piece */
  picket_status status;
  const char *note; /* the result's */
} value_state;

typedef struct sweep {
  const pk_sweep_kind *kind;
  const pk_sweep_source *source;
  const picket_options *options;
  picket_context *context;
  picket_result *result;
  int values, count;
  value_state *value; /* [values + 1] */
  piece_state *piece; /* [count] */
  char *bodies;       /* [count] of the kind's size */
  uint64_t key;
  pk_journal *journal; /* or null */
  int held_value;      /* whose problem is held, or NO_VALUE */
  pk_problem *held;
} sweep;

bool pk_sweep_is_of_a_piece(picket_status status) {
  return status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
         status == PICKET_ERROR_NO_MODE || status == PICKET_ERROR_INPUT ||
         status == PICKET_ERROR_UNSUPPORTED;
}

static void *body_of(const sweep *s, int piece) {
  return s->bodies + (size_t)piece * s->kind->size;
}

/* --- The problem of a value ----------------------------------------------------------------------
 */

static void let_go(sweep *s) {
  pk_problem_free(s->held);
  s->held = NULL;
  s->held_value = NO_VALUE;
}

/* One at a time is held: ten thousand problems would take gigabytes. */
static picket_status hold(sweep *s, int value, const pk_problem **out) {
  const pk_sweep_source *source = s->source;
  if (!source->path) {
    *out = source->problem;
    return PICKET_OK;
  }
  if (s->held_value != value) {
    let_go(s);
    picket_status status = source->open(source->user, source->value[value], &s->held);
    if (status != PICKET_OK) {
      return status;
    }
    s->held_value = value;
  }
  *out = s->held;
  return PICKET_OK;
}

/* The problem that says which pieces a value has. */
static picket_status hold_outline(sweep *s, int value, const pk_problem **out) {
  if (s->value[value].status == PICKET_OK) {
    return hold(s, value, out);
  }
  *out = s->source->problem;
  return PICKET_OK;
}

static int value_of_piece(const sweep *s, int piece) {
  int low = 0, high = s->values;
  while (high - low > 1) {
    int middle = low + (high - low) / 2;
    if (s->value[middle].first <= piece) {
      low = middle;
    } else {
      high = middle;
    }
  }
  return low;
}

/* --- One piece -----------------------------------------------------------------------------------
 */

static picket_status solve_body(sweep *s, int piece, picket_result *scratch, void *body) {
  const pk_problem *problem = NULL;
  int value = value_of_piece(s, piece);
  picket_status status = hold(s, value, &problem);
  return status == PICKET_OK
             ? s->kind->solve(problem, s->options, piece - s->value[value].first, scratch, body)
             : status;
}

static void write_piece(const sweep *s, picket_status status, const char *shortfall,
                        const void *body, pk_record *answer) {
  pk_record_whole(answer, (int)status);
  pk_record_text(answer, status == PICKET_OK ? NULL : picket_context_message(s->context));
  pk_record_text(answer, shortfall);
  if (status == PICKET_OK) {
    s->kind->write(body, answer);
  }
}

static picket_status solve(void *user, int piece, pk_record *answer) {
  sweep *s = user;
  picket_result *scratch = NULL;
  void *body = pk_alloc(s->context, 1, s->kind->size);
  picket_status status =
      body ? pk_result_create(s->context, s->kind->result, "", s->options->accuracy, &scratch)
           : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = solve_body(s, piece, scratch, body);
    if (status == PICKET_OK || pk_sweep_is_of_a_piece(status)) {
      write_piece(s, status, status == PICKET_OK ? scratch->shortfall : NULL, body, answer);
      status = answer->failed ? PICKET_ERROR_MEMORY : PICKET_OK;
      if (status == PICKET_OK) {
        pk_message_clear(s->context);
      }
    }
  }
  if (body) {
    s->kind->clear(s->context, body);
  }
  pk_free(s->context, body);
  pk_result_free(scratch);
  return status;
}

/* A line of an earlier run or of this one. */
static picket_status take_line(void *user, int number, const char *answer) {
  sweep *s = user;
  if (number >= s->count || s->piece[number].done) {
    return PICKET_ERROR_INTERNAL;
  }
  pk_record_reader reader = {answer, true};
  piece_state p = {.done = true};
  p.status = (picket_status)pk_record_read_whole(&reader, PICKET_ERROR_OUTPUT, PICKET_OK);
  picket_status status = pk_part_read_text(s->result, &reader, &p.note);
  if (status == PICKET_OK) {
    status = pk_part_read_text(s->result, &reader, &p.shortfall);
  }
  if (status == PICKET_OK && p.status == PICKET_OK) {
    status = s->kind->read(s->result, &reader, body_of(s, number));
  }
  bool whole = pk_record_read_end(&reader) && (p.status == PICKET_OK || p.note);
  if (status == PICKET_OK && !whole) {
    status = pk_fail(s->context, PICKET_ERROR_INTERNAL,
                     "a line that should hold a piece of a sweep does not");
  }
  if (status == PICKET_OK) {
    s->piece[number] = p;
  } else {
    s->kind->clear(s->context, body_of(s, number));
    memset(body_of(s, number), 0, s->kind->size);
  }
  return status;
}

static picket_status mark_failed(sweep *s, int number, picket_status why, const char *note) {
  s->piece[number] =
      (piece_state){.done = true, .status = why, .note = pk_result_text(s->result, note)};
  return s->piece[number].note ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* What killed a worker may pass: such a piece is not kept in the journal. */
static picket_status take(void *user, int number, const char *answer, const char *why) {
  sweep *s = user;
  if (!answer) {
    return mark_failed(s, number, PICKET_ERROR_INTERNAL, why);
  }
  picket_status status = take_line(s, number, answer);
  if (status == PICKET_OK && s->journal) {
    status = pk_journal_add(s->journal, number, answer);
  }
  return status;
}

/* --- All pieces ----------------------------------------------------------------------------------
 */

/* What pieces a value has, and in the key what they depend on. */
static picket_status outline_value(sweep *s, int v, int *pieces, int *answers) {
  const pk_problem *problem = NULL;
  value_state *state = &s->value[v];
  picket_status status = hold(s, v, &problem);
  if (status == PICKET_OK) {
    status = s->kind->check(problem);
  }
  if (s->source->path && pk_sweep_is_of_a_piece(status)) {
    state->status = status;
    state->note = pk_result_text(s->result, picket_context_message(s->context));
    problem = s->source->problem;
    status = state->note ? PICKET_OK : PICKET_ERROR_MEMORY;
    if (status == PICKET_OK) {
      pk_message_clear(s->context);
    }
  }
  if (status != PICKET_OK) {
    return status;
  }
  *pieces = s->kind->pieces(problem);
  *answers = s->kind->answers(problem);
  s->key = pk_hash_number(s->key, s->source->path ? s->source->value[v] : 0);
  s->key = pk_sweep_key_of_media(s->key, problem);
  return PICKET_OK;
}

static picket_status outline(sweep *s, int *answers) {
  picket_status status = PICKET_OK;
  *answers = 0;
  for (int v = 0; v < s->values && status == PICKET_OK; v++) {
    int pieces = 0, more = 0;
    s->value[v].first = s->count;
    if (s->source->path) {
      status = pk_progress(s->context, "reading the problem of every value", (double)v / s->values);
    }
    if (status == PICKET_OK) {
      status = outline_value(s, v, &pieces, &more);
    }
    if (status == PICKET_OK && pieces > MOST_PIECES - s->count) {
      status = pk_fail(s->context, PICKET_ERROR_INPUT,
                       "the sweep has more than %d %s; take fewer values or wavelengths",
                       MOST_PIECES, s->kind->noun);
    }
    s->count += pieces;
    *answers += more;
  }
  s->value[s->values].first = s->count;
  return status;
}

static picket_status prepare(sweep *s) {
  int answers = 0;
  s->key = pk_sweep_key_of_run(s->kind, s->source, s->options);
  s->value = PK_NEW(s->context, s->values + 1, value_state);
  picket_status status = s->value ? outline(s, &answers) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    s->piece = PK_NEW(s->context, s->count, piece_state);
    s->bodies = pk_alloc(s->context, (size_t)s->count, s->kind->size);
    status = s->piece && s->bodies ? s->kind->reserve(s->result, answers) : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK && s->source->path) {
    s->result->sweep_path = pk_text_copy(s->context, s->source->path);
    s->result->sweep_value = PK_NEW(s->context, answers, double);
    status = s->result->sweep_path && s->result->sweep_value ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return status;
}

/* Values without a problem; a journal may have their pieces too. */
static void mark_values(sweep *s) {
  for (int v = 0; v < s->values; v++) {
    const value_state *state = &s->value[v];
    for (int i = state->first; state->status != PICKET_OK && i < s->value[v + 1].first; i++) {
      s->piece[i] = (piece_state){.done = true, .status = state->status, .note = state->note};
    }
  }
}

static picket_status solve_missing(sweep *s) {
  int *number = PK_NEW(s->context, s->count, int), missing = 0;
  if (!number) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < s->count; i++) {
    if (!s->piece[i].done) {
      number[missing++] = i;
    }
  }
  int jobs = s->options->jobs > 0 ? (int)s->options->jobs : pk_workers_cores();
  pk_work work = {s->context,     jobs,  missing, number, s->count - missing,
                  s->kind->phase, solve, take,    s};
  picket_status status = missing > 0 ? pk_workers_run(&work) : PICKET_OK;
  pk_free(s->context, number);
  return status;
}

/* --- The answer ----------------------------------------------------------------------------------
 */

/* The message of the first piece if every piece failed as it did: then the question as a whole has
 * no answer. */
static picket_status fail_if_all_failed(const sweep *s) {
  picket_status status = s->piece[0].status;
  for (int i = 0; i < s->count && status != PICKET_OK; i++) {
    status = s->piece[i].status == status ? status : PICKET_OK;
  }
  return status == PICKET_OK ? PICKET_OK : pk_fail(s->context, status, "%s", s->piece[0].note);
}

/* "cell.pitch_nm = 310, ey at 1550 nm" */
static picket_status label_of(sweep *s, int number, char *text, size_t size) {
  const pk_problem *problem = NULL;
  int v = value_of_piece(s, number), length = 0;
  char label[PK_SWEEP_LABEL];
  picket_status status = hold_outline(s, v, &problem);
  if (status != PICKET_OK) {
    return status;
  }
  s->kind->label(problem, number - s->value[v].first, label);
  if (s->source->path) {
    length = snprintf(text, size, "%.300s = %.10g, ", s->source->path, s->source->value[v]);
  }
  snprintf(text + length, size - (size_t)length, "%s", label);
  return PICKET_OK;
}

static picket_status mark_partial(sweep *s, int failed, int first, const char *why) {
  char text[NOTE_BYTES], label[PK_SWEEP_LABEL + 400];
  picket_result *result = s->result;
  int length = 0;
  picket_status status = label_of(s, first, label, sizeof label);
  if (status != PICKET_OK) {
    return status;
  }
  if (failed > 0) {
    length = snprintf(text, sizeof text, "%d of %d %s could not be computed; ", failed, s->count,
                      s->kind->noun);
  }
  snprintf(text + length, sizeof text - (size_t)length, "%s: %s", label, why);
  result->complete = false;
  result->shortfall = pk_text_copy(s->context, text);
  return result->shortfall ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* The first piece that failed, or else the first that is not as accurate as asked. */
static picket_status judge(sweep *s) {
  int failed = 0, first_failed = -1, first_short = -1;
  for (int i = s->count - 1; i >= 0; i--) {
    failed += s->piece[i].status != PICKET_OK;
    first_failed = s->piece[i].status != PICKET_OK ? i : first_failed;
    first_short = s->piece[i].shortfall ? i : first_short;
  }
  if (failed > 0) {
    return mark_partial(s, failed, first_failed, s->piece[first_failed].note);
  }
  return first_short < 0 ? PICKET_OK
                         : mark_partial(s, 0, first_short, s->piece[first_short].shortfall);
}

static picket_status gather_value(sweep *s, int v) {
  const pk_problem *problem = NULL;
  int first = s->value[v].first, before = s->result->count;
  picket_status status = hold_outline(s, v, &problem);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = first; i < s->value[v + 1].first; i++) {
    if (s->piece[i].status != PICKET_OK) {
      s->kind->mark(problem, i - first, s->piece[i].note, body_of(s, i));
    }
  }
  status = s->kind->gather(problem, body_of(s, first), s->result);
  for (int i = before; s->source->path && i < s->result->count; i++) {
    s->result->sweep_value[i] = s->source->value[v];
  }
  return status;
}

static picket_status put_together(sweep *s) {
  picket_status status = judge(s);
  for (int v = 0; v < s->values && status == PICKET_OK; v++) {
    status = gather_value(s, v);
  }
  return status;
}

/* For a run that ended early: what it did not come to. */
static picket_status mark_missing(sweep *s, int *finished) {
  picket_status status = PICKET_OK;
  *finished = 0;
  for (int i = 0; i < s->count && status == PICKET_OK; i++) {
    bool solved = s->piece[i].done && s->value[value_of_piece(s, i)].status == PICKET_OK;
    *finished += solved;
    if (!s->piece[i].done) {
      status = mark_failed(s, i, PICKET_ERROR_STOPPED, NOTE_STOPPED);
    }
  }
  return status;
}

static bool leaves_a_part(picket_status status) {
  return status == PICKET_ERROR_STOPPED || status == PICKET_ERROR_OUTPUT;
}

/* Opens the journal, solves what is missing, closes it. */
static picket_status work(sweep *s, const char *journal) {
  picket_status status = PICKET_OK;
  if (journal) {
    status = pk_journal_open(s->context, journal, s->key, take_line, s, &s->journal);
  }
  if (status == PICKET_OK) {
    mark_values(s);
    status = solve_missing(s);
  }
  pk_journal_close(s->journal);
  s->journal = NULL;
  return status;
}

/* PICKET_OK with a result, or a failure; *part says whether the result is worth having in spite of
 * it. The message of the failure stays. */
static picket_status run(sweep *s, const char *journal, bool *part) {
  picket_status status = prepare(s), rest = PICKET_OK;
  if (status == PICKET_OK) {
    status = work(s, journal);
    if (leaves_a_part(status)) {
      int finished = 0;
      rest = mark_missing(s, &finished);
      *part = rest == PICKET_OK && finished > 0;
    }
  }
  if (status == PICKET_OK) {
    status = fail_if_all_failed(s);
  }
  if (status == PICKET_OK || *part) {
    rest = put_together(s);
    *part = *part && rest == PICKET_OK;
  }
  return status == PICKET_OK ? rest : status;
}

static void sweep_clear(sweep *s) {
  for (int i = 0; s->bodies && i < s->count; i++) {
    s->kind->clear(s->context, body_of(s, i));
  }
  pk_free(s->context, s->bodies);
  pk_free(s->context, s->piece);
  pk_free(s->context, s->value);
  let_go(s);
}

picket_status pk_sweep_run(const pk_sweep_kind *kind, const pk_sweep_source *source,
                           const picket_options *options, const char *journal,
                           picket_result **out) {
  const pk_problem *problem = source->problem;
  sweep s = {.kind = kind,
             .source = source,
             .options = options,
             .context = problem->context,
             .values = source->path ? source->count : 1,
             .held_value = NO_VALUE};
  bool part = false;
  picket_status status = kind->check(problem);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_result_create(s.context, kind->result, problem->name, options->accuracy, &s.result);
  if (status == PICKET_OK) {
    status = run(&s, journal, &part);
    sweep_clear(&s);
  }
  if (status == PICKET_OK || part) {
    *out = s.result;
  } else {
    pk_result_free(s.result);
  }
  return status;
}
