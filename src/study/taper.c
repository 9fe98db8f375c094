/* A row that changes tooth by tooth: a sweep over its teeth (sweep.h) whose value is the number of
 * a tooth, put together to rows at the end (taper_row.c). A piece is a tooth in one polarization.
 * See taper.h. */
#include "study/taper.h"

#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "study/channel_edges.h"
#include "study/channel_level.h"
#include "study/sweep.h"

/* What the sweep goes over, in labels: "tooth = 3, hy". */
static const char TOOTH[] = "tooth";

static picket_status check(const pk_problem *problem) {
  const pk_taper_block *taper = &problem->taper;
  if (taper->of_channel ? problem->channel.given : problem->has_cell) {
    return PICKET_OK;
  }
  return pk_fail_at(problem->context, PICKET_ERROR_INPUT, taper->place,
                    "a taper needs a \"cell\" or a \"channel\" in the file: the first tooth, with "
                    "the numbers that change");
}

static int pieces(const pk_problem *problem) {
  return problem->light.wanted[PK_EY] + problem->light.wanted[PK_HY];
}

static pk_polarization polarization_of(const pk_problem *problem, int piece) {
  return piece == 0 && problem->light.wanted[PK_EY] ? PK_EY : PK_HY;
}

static picket_status reserve(picket_result *result, int count) {
  result->taper_cells = PK_NEW(result->context, count, pk_taper_cell);
  return result->taper_cells ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static void label(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]) {
  pk_taper_cell cell;
  pk_taper_cell_begin(problem, polarization_of(problem, piece), &cell);
  snprintf(text, PK_SWEEP_LABEL, "%s", picket_polarization_name(cell.polarization));
}

static picket_status solve(const pk_problem *problem, const picket_options *options, int piece,
                           picket_result *scratch, void *body) {
  return pk_taper_cell_solve(problem, polarization_of(problem, piece), options, scratch, body);
}

static void write(const void *body, pk_record *record) {
  pk_taper_cell_write(body, record);
}

static picket_status read(picket_result *result, pk_record_reader *reader, void *body) {
  return pk_taper_cell_read(result, reader, body);
}

static void mark(const pk_problem *problem, int piece, const char *note, void *body) {
  pk_taper_cell *cell = body;
  pk_taper_cell_begin(problem, polarization_of(problem, piece), cell);
  cell->note = cell->why = note;
}

static void clear(picket_context *context, void *body) {
  pk_taper_cell_clear(context, body);
}

static picket_status gather(const pk_problem *problem, void *bodies, picket_result *result) {
  pk_taper_cell *from = bodies;
  for (int i = 0; i < pieces(problem); i++) {
    result->taper_cells[result->count++] = from[i];
    memset(&from[i], 0, sizeof from[i]);
  }
  return PICKET_OK;
}

static const pk_sweep_kind KIND = {
    .result = PK_RESULT_TAPER,
    .phase = "teeth of the row",
    .noun = "teeth",
    .size = sizeof(pk_taper_cell),
    .check = check,
    .pieces = pieces,
    .answers = pieces,
    .reserve = reserve,
    .label = label,
    .solve = solve,
    .write = write,
    .read = read,
    .mark = mark,
    .clear = clear,
    .gather = gather,
};

/* --- Teeth -------------------------------------------------------------------------------------
 */

typedef struct row {
  const pk_problem *problem;
  const pk_variants *variants;
} row;

static picket_status open_tooth(void *user, double number, pk_problem **out) {
  const row *r = user;
  const pk_taper_block *taper = &r->problem->taper;
  double values[PK_TAPER_CHANGES];
  for (int i = 0; i < taper->count; i++) {
    values[i] = pk_taper_value(&taper->change[i], (int)number - 1, taper->teeth);
  }
  return r->variants->make(r->variants->user, values, out);
}

/* A row with a tooth that cannot be is a mistake in the file, known before anything is solved. */
static picket_status check_teeth(row *r) {
  const pk_taper_block *taper = &r->problem->taper;
  picket_context *context = r->problem->context;
  picket_status status = PICKET_OK;
  for (int tooth = 1; tooth <= taper->teeth && status == PICKET_OK; tooth++) {
    pk_problem *problem = NULL;
    status = open_tooth(r, tooth, &problem);
    pk_problem_free(problem);
    if (status == PICKET_ERROR_INPUT) {
      char why[600];
      snprintf(why, sizeof why, "%s", picket_context_message(context));
      status = pk_fail(context, status, "%s (as tooth %d of the %d of the taper)", why, tooth,
                       taper->teeth);
    }
  }
  return status;
}

void pk_taper_cells_free(picket_context *context, int count, pk_taper_cell *cells) {
  for (int i = 0; cells && i < count; i++) {
    pk_taper_cell_clear(context, &cells[i]);
  }
  pk_free(context, cells);
}

/* From teeth to rows: the result of the sweep becomes that of the taper. */
static picket_status put_together(const pk_problem *problem, picket_result *result) {
  picket_context *context = problem->context;
  pk_taper_cell *cells = result->taper_cells;
  int count = result->count, answers = pieces(problem);
  picket_status status = PICKET_OK;
  result->taper_cells = NULL;
  result->count = 0;
  pk_free(context, result->sweep_path);
  pk_free(context, result->sweep_value);
  result->sweep_path = NULL;
  result->sweep_value = NULL;
  result->taper = PK_NEW(context, answers, picket_taper_answer);
  status = result->taper ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int a = 0; a < answers && status == PICKET_OK; a++) {
    result->count = a + 1;
    status = pk_taper_row(problem, cells + a, answers, result, &result->taper[a]);
  }
  pk_taper_cells_free(context, count, cells);
  return status;
}

static picket_status run(row *r, pk_sweep_source *source, const picket_options *options,
                         const char *journal, picket_result **out) {
  picket_result *result = NULL;
  picket_status status = pk_sweep_run(&KIND, source, options, journal, &result);
  if (result) { /* also a part of one */
    picket_status rest = put_together(r->problem, result);
    if (rest == PICKET_OK) {
      *out = result;
    } else {
      pk_result_free(result);
      status = rest;
    }
  }
  return status;
}

picket_status pk_study_taper(const pk_problem *problem, const pk_variants *variants,
                             uint64_t document, const picket_options *options, const char *journal,
                             picket_result **out) {
  row r = {problem, variants};
  double *number = PK_NEW(problem->context, problem->taper.teeth, double);
  picket_status status = number ? check(problem) : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < problem->taper.teeth; i++) {
    number[i] = i + 1;
  }
  if (status == PICKET_OK) {
    status = check_teeth(&r);
  }
  if (status == PICKET_OK) {
    pk_sweep_source source = {.problem = problem,
                              .document = document,
                              .path = TOOTH,
                              .count = problem->taper.teeth,
                              .value = number,
                              .open = open_tooth,
                              .user = &r};
    status = run(&r, &source, options, journal, out);
  }
  pk_free(problem->context, number);
  return status;
}
