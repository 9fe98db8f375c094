/* The Bloch modes of a cell over its wavelengths and polarizations. Every point is solved for
 * itself, in any process (workers.h), comes back as a line of text (sweep_point.h), and is kept in
 * a journal if there is one (journal.h). The answer is put together from the lines alone, so that
 * it is the same however the points were come by. */
#include <math.h>
#include <stdio.h>

#include "base/hash.h"
#include "base/memory.h"
#include "study/index.h"
#include "study/journal.h"
#include "study/study.h"
#include "study/sweep_point.h"
#include "study/trace.h"
#include "study/workers.h"

static const char NOTE_STOPPED[] = "stopped before this point was done";

/* Piece i is wavelength i % wavelengths of polarization i / wavelengths (of those wanted). */
typedef struct sweep {
  const pk_problem *problem;
  const picket_options *options;
  picket_result *result; /* owns the texts of the points */
  int wavelengths, count;
  pk_polarization polarization[2]; /* wanted */
  pk_sweep_point *point;           /* [count] */
  bool *done;                      /* [count] */
  pk_journal *journal;             /* or null */
} sweep;

/* --- One point -----------------------------------------------------------------------------------
 */

/* A failure that concerns the point, not the machine or the run. */
static bool is_of_the_point(picket_status status) {
  return status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
         status == PICKET_ERROR_NO_MODE || status == PICKET_ERROR_INPUT;
}

static picket_status solve(void *user, int piece, pk_record *answer) {
  sweep *s = user;
  picket_context *context = s->problem->context;
  pk_sweep_point p = {.point = {.estimate = NAN}};
  picket_result *scratch = NULL; /* takes the shortfall */
  picket_status status =
      pk_result_create(context, PK_RESULT_INDEX, "", s->options->accuracy, &scratch);
  if (status == PICKET_OK) {
    double wavelength = s->problem->light.wavelength_um[piece % s->wavelengths];
    status = pk_index_point(s->problem, s->polarization[piece / s->wavelengths], wavelength,
                            s->options, &p.point, &p.profile, scratch);
    p.point.wavelength_um = wavelength;
  }
  if (is_of_the_point(status)) {
    pk_sweep_point_clear(context, &p);
    p.status = status;
    p.point.note = picket_context_message(context);
    status = PICKET_OK;
  } else if (status == PICKET_OK) {
    p.shortfall = scratch->shortfall;
  }
  if (status == PICKET_OK) {
    pk_sweep_point_write(&p, answer);
    pk_message_clear(context);
  }
  pk_sweep_point_clear(context, &p);
  pk_result_free(scratch);
  return status;
}

static picket_status mark_failed(sweep *s, int piece, picket_status why, const char *note) {
  pk_sweep_point *p = &s->point[piece];
  *p = (pk_sweep_point){.status = why, .point = {.estimate = NAN, .failed = 1}};
  p->point.wavelength_um = s->problem->light.wavelength_um[piece % s->wavelengths];
  p->point.note = pk_result_text(s->result, note);
  return p->point.note ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* A line of an earlier run or of this one. */
static picket_status take_line(void *user, int piece, const char *answer) {
  sweep *s = user;
  if (piece >= s->count || s->done[piece]) {
    return PICKET_ERROR_INTERNAL;
  }
  picket_status status = pk_sweep_point_read(s->result, answer, &s->point[piece]);
  s->done[piece] = status == PICKET_OK;
  return status;
}

/* What killed a worker may pass: such a point is not kept in the journal. */
static picket_status take(void *user, int piece, const char *answer, const char *why) {
  sweep *s = user;
  if (!answer) {
    s->done[piece] = true;
    return mark_failed(s, piece, PICKET_ERROR_INTERNAL, why);
  }
  picket_status status = take_line(s, piece, answer);
  if (status == PICKET_OK && s->journal) {
    status = pk_journal_add(s->journal, piece, answer);
  }
  return status;
}

/* --- All points ----------------------------------------------------------------------------------
 */

/* Everything the answers depend on: the document, what its materials are (tables are files of their
 * own), and the options of the numbers. */
static uint64_t key_of(const sweep *s, uint64_t document) {
  const pk_problem *problem = s->problem;
  uint64_t key = pk_hash_bytes(PK_HASH_START, &document, sizeof document);
  key = pk_hash_number(key, s->options->accuracy);
  key = pk_hash_number(key, s->options->count);
  key = pk_hash_number(key, s->options->unknowns);
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    for (int i = 0; i < s->wavelengths; i++) {
      pk_medium medium = {0};
      if (pk_materials_at(problem->materials, m, problem->light.wavelength_um[i],
                          problem->temperature_c, &medium) != PICKET_OK) {
        medium = (pk_medium){0};
      }
      key = pk_hash_number(key, creal(medium.permittivity));
      key = pk_hash_number(key, cimag(medium.permittivity));
    }
  }
  pk_message_clear(problem->context);
  return key;
}

static picket_status solve_missing(sweep *s) {
  picket_context *context = s->problem->context;
  int *piece = PK_NEW(context, s->count, int), missing = 0;
  if (!piece) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < s->count; i++) {
    if (!s->done[i]) {
      piece[missing++] = i;
    }
  }
  int jobs = s->options->jobs > 0 ? (int)s->options->jobs : pk_workers_cores();
  pk_work work = {context,         jobs,  missing, piece, s->count - missing,
                  "Bloch indices", solve, take,    s};
  picket_status status = missing > 0 ? pk_workers_run(&work) : PICKET_OK;
  pk_free(context, piece);
  return status;
}

static picket_status prepare(sweep *s) {
  picket_context *context = s->problem->context;
  s->wavelengths = s->problem->light.count;
  for (int p = 0; p < 2; p++) {
    if (s->problem->light.wanted[p]) {
      s->polarization[s->count++] = (pk_polarization)p;
    }
  }
  int answers = s->count;
  s->count *= s->wavelengths;
  s->result->index = PK_NEW(context, 2, picket_index_answer);
  s->point = PK_NEW(context, s->count, pk_sweep_point);
  s->done = PK_NEW(context, s->count, bool);
  if (!s->result->index || !s->point || !s->done) {
    return PICKET_ERROR_MEMORY;
  }
  for (int a = 0; a < answers; a++) {
    picket_index_answer *answer = &s->result->index[s->result->count++];
    answer->polarization = (picket_polarization)s->polarization[a];
    answer->points = PK_NEW(context, s->wavelengths, picket_index_point);
    if (!answer->points) {
      return PICKET_ERROR_MEMORY;
    }
    answer->point_count = s->wavelengths;
  }
  return PICKET_OK;
}

/* --- The answer ----------------------------------------------------------------------------------
 */

/* The message of the first point if every point failed as it did: then the problem as a whole has
 * no answer. */
static picket_status fail_if_all_failed(const sweep *s) {
  picket_status status = s->point[0].status;
  for (int i = 0; i < s->count && status != PICKET_OK; i++) {
    status = s->point[i].status == status ? status : PICKET_OK;
  }
  return status == PICKET_OK ? PICKET_OK
                             : pk_fail(s->problem->context, status, "%s", s->point[0].point.note);
}

static picket_status mark_partial(sweep *s, int failed, int first, const char *why) {
  char text[1500];
  picket_result *result = s->result;
  int length = 0;
  if (failed > 0) {
    length =
        snprintf(text, sizeof text, "%d of %d points could not be computed; ", failed, s->count);
  }
  snprintf(text + length, sizeof text - (size_t)length, "%s at %.10g nm: %s",
           s->polarization[first / s->wavelengths] == PK_EY ? "ey" : "hy",
           1e3 * s->point[first].point.wavelength_um, why);
  result->complete = false;
  result->shortfall = pk_text_copy(result->context, text);
  return result->shortfall ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* The first point that failed, or else the first that is not as accurate as asked. */
static picket_status judge(sweep *s) {
  int failed = 0, first_failed = -1, first_short = -1;
  for (int i = s->count - 1; i >= 0; i--) {
    failed += s->point[i].status != PICKET_OK;
    first_failed = s->point[i].status != PICKET_OK ? i : first_failed;
    first_short = s->point[i].shortfall ? i : first_short;
  }
  if (failed > 0) {
    return mark_partial(s, failed, first_failed, s->point[first_failed].point.note);
  }
  return first_short < 0 ? PICKET_OK
                         : mark_partial(s, 0, first_short, s->point[first_short].shortfall);
}

/* Moves the points to the result and follows the modes through them. */
static picket_status put_together(sweep *s) {
  pk_profile **profile = PK_NEW(s->problem->context, s->wavelengths, pk_profile *);
  picket_status status = profile ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int a = 0; a < s->result->count && status == PICKET_OK; a++) {
    picket_index_point *points = (picket_index_point *)s->result->index[a].points;
    for (int i = 0; i < s->wavelengths; i++) {
      pk_sweep_point *p = &s->point[a * s->wavelengths + i];
      points[i] = p->point;
      profile[i] = p->profile;
      p->point.modes = NULL;
      p->point.mode_count = 0;
    }
    status = pk_trace(s->problem->context, s->wavelengths, points, profile);
  }
  pk_free(s->problem->context, profile);
  return status;
}

/* For a run that ended early: what it did not come to. */
static picket_status mark_missing(sweep *s, int *finished) {
  picket_status status = PICKET_OK;
  *finished = 0;
  for (int i = 0; i < s->count && status == PICKET_OK; i++) {
    *finished += s->done[i];
    if (!s->done[i]) {
      status = mark_failed(s, i, PICKET_ERROR_STOPPED, NOTE_STOPPED);
    }
  }
  return status;
}

static bool leaves_a_part(picket_status status) {
  return status == PICKET_ERROR_STOPPED || status == PICKET_ERROR_OUTPUT;
}

/* Opens the journal, solves what is missing, closes it. */
static picket_status work(sweep *s, const char *journal, uint64_t document) {
  picket_status status = PICKET_OK;
  if (journal) {
    status = pk_journal_open(s->problem->context, journal, key_of(s, document), take_line, s,
                             &s->journal);
  }
  if (status == PICKET_OK) {
    status = solve_missing(s);
  }
  pk_journal_close(s->journal);
  s->journal = NULL;
  return status;
}

/* PICKET_OK with a result, or a failure; *part says whether the result is worth having in spite of
 * it. The message of the failure stays. */
static picket_status run(sweep *s, const char *journal, uint64_t document, bool *part) {
  picket_status status = prepare(s), rest = PICKET_OK;
  if (status == PICKET_OK) {
    status = work(s, journal, document);
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
    rest = judge(s);
    rest = rest == PICKET_OK ? put_together(s) : rest;
    *part = *part && rest == PICKET_OK;
  }
  return status == PICKET_OK ? rest : status;
}

static void sweep_clear(sweep *s) {
  for (int i = 0; s->point && i < s->count; i++) {
    pk_sweep_point_clear(s->problem->context, &s->point[i]);
  }
  pk_free(s->problem->context, s->point);
  pk_free(s->problem->context, s->done);
}

static picket_status check(const pk_problem *problem) {
  if (!problem->has_cell) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"cell\", which is what a Bloch index is asked of");
  }
  if (problem->light.count == 0) {
    return pk_fail_at(
        problem->context, PICKET_ERROR_INPUT, problem->cell_place,
        "the Bloch index of a cell needs \"light.wavelength_nm\", which is not given");
  }
  return PICKET_OK;
}

picket_status pk_study_index_resumable(const pk_problem *problem, const picket_options *options,
                                       const char *journal, uint64_t document,
                                       picket_result **out) {
  sweep s = {.problem = problem, .options = options};
  bool part = false;
  picket_status status = check(problem);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_result_create(problem->context, PK_RESULT_INDEX, problem->name, options->accuracy,
                            &s.result);
  if (status == PICKET_OK) {
    status = run(&s, journal, document, &part);
    sweep_clear(&s);
  }
  if (status == PICKET_OK || part) {
    *out = s.result;
  } else {
    pk_result_free(s.result);
  }
  return status;
}

picket_status pk_study_index(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  return pk_study_index_resumable(problem, options, NULL, 0, out);
}
