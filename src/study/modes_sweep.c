/* The modes of a section over its wavelengths, as a kind of sweep: a piece is a point. */
#include <stdio.h>

#include "base/memory.h"
#include "study/modes.h"
#include "study/modes_record.h"
#include "study/study.h"
#include "study/sweep.h"

static picket_status check(const pk_problem *problem) {
  if (!problem->section.given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"section\", which is what the modes are asked of");
  }
  if (problem->light.count == 0) {
    return pk_fail_at(problem->context, PICKET_ERROR_INPUT, problem->section.place,
                      "the modes of a section need \"light.wavelength_nm\", which is not given");
  }
  return PICKET_OK;
}

static int pieces(const pk_problem *problem) {
  return problem->light.count;
}

static int answers(const pk_problem *problem) {
  (void)problem;
  return 1;
}

static picket_status reserve(picket_result *result, int count) {
  result->modes = PK_NEW(result->context, count, picket_modes_answer);
  return result->modes ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static void label(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]) {
  snprintf(text, PK_SWEEP_LABEL, "%.10g nm", 1e3 * problem->light.wavelength_um[piece]);
}

static picket_status solve(const pk_problem *problem, const picket_options *options, int piece,
                           picket_result *scratch, void *body) {
  return pk_modes_point(problem, problem->light.wavelength_um[piece], options, body, scratch);
}

static void write(const void *body, pk_record *record) {
  pk_modes_record_write(body, record);
}

static picket_status read(picket_result *result, pk_record_reader *reader, void *body) {
  return pk_modes_record_read(result, reader, body);
}

static void mark(const pk_problem *problem, int piece, const char *note, void *body) {
  picket_modes_point *point = body;
  point->wavelength_um = problem->light.wavelength_um[piece];
  point->note = note;
  point->failed = 1;
}

static void clear(picket_context *context, void *body) {
  pk_modes_point_clear(context, body);
}

static picket_status gather(const pk_problem *problem, void *bodies, picket_result *result) {
  picket_modes_point *from = bodies;
  int count = problem->light.count;
  picket_modes_point *points = PK_NEW(problem->context, count, picket_modes_point);
  if (!points) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < count; i++) {
    points[i] = from[i];
    from[i].modes = NULL;
    from[i].mode_count = 0;
  }
  result->modes[result->count++] = (picket_modes_answer){.point_count = count, .points = points};
  return PICKET_OK;
}

const pk_sweep_kind pk_sweep_of_modes = {
    .result = PK_RESULT_MODES,
    .phase = "modes of the section",
    .noun = "points",
    .size = sizeof(picket_modes_point),
    .check = check,
    .pieces = pieces,
    .answers = answers,
    .reserve = reserve,
    .label = label,
    .solve = solve,
    .write = write,
    .read = read,
    .mark = mark,
    .clear = clear,
    .gather = gather,
};

picket_status pk_study_modes(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  pk_sweep_source source = {.problem = problem};
  return pk_sweep_run(&pk_sweep_of_modes, &source, options, NULL, out);
}
