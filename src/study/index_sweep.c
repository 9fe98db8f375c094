/* The Bloch modes of a cell over its wavelengths and polarizations, as a kind of sweep: a piece is
 * a point. Piece i is wavelength i % wavelengths of polarization i / wavelengths (of those wanted).
 * Modes are followed through the wavelengths when all points are there. */
#include <math.h>
#include <stdio.h>

#include "base/memory.h"
#include "study/channel_level.h"
#include "study/index.h"
#include "study/study.h"
#include "study/sweep.h"
#include "study/sweep_point.h"
#include "study/trace.h"

static picket_status check(const pk_problem *problem) {
  if (!problem->has_cell && !problem->channel.given) {
    return pk_fail(
        problem->context, PICKET_ERROR_INPUT,
        "the problem has no \"cell\" and no \"channel\", which is what a Bloch index is asked of");
  }
  if (problem->light.count == 0) {
    return pk_fail_at(
        problem->context, PICKET_ERROR_INPUT,
        problem->has_cell ? problem->cell_place : problem->channel.place,
        "the Bloch index of a cell or a channel needs \"light.wavelength_nm\", which is not given");
  }
  return PICKET_OK;
}

static int answers(const pk_problem *problem) {
  return problem->light.wanted[PK_EY] + problem->light.wanted[PK_HY];
}

static int pieces(const pk_problem *problem) {
  return answers(problem) * problem->light.count;
}

static pk_polarization polarization_of(const pk_problem *problem, int answer) {
  return answer == 0 && problem->light.wanted[PK_EY] ? PK_EY : PK_HY;
}

static double wavelength_of(const pk_problem *problem, int piece) {
  return problem->light.wavelength_um[piece % problem->light.count];
}

static void label(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]) {
  pk_polarization polarization = polarization_of(problem, piece / problem->light.count);
  snprintf(text, PK_SWEEP_LABEL, "%s at %.10g nm",
           picket_polarization_name(pk_answer_word(problem, polarization)),
           1e3 * wavelength_of(problem, piece));
}

static picket_status reserve(picket_result *result, int count) {
  result->index = PK_NEW(result->context, count, picket_index_answer);
  return result->index ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static picket_status solve(const pk_problem *problem, const picket_options *options, int piece,
                           picket_result *scratch, void *body) {
  pk_sweep_point *p = body;
  double wavelength = wavelength_of(problem, piece);
  pk_polarization polarization = polarization_of(problem, piece / problem->light.count);
  p->point.estimate = NAN;
  picket_status status =
      pk_index_point(problem, polarization, wavelength, options, &p->point, &p->profile, scratch);
  p->point.wavelength_um = wavelength;
  return status;
}

static void write(const void *body, pk_record *record) {
  pk_sweep_point_write(body, record);
}

static picket_status read(picket_result *result, pk_record_reader *reader, void *body) {
  return pk_sweep_point_read(result, reader, body);
}

static void mark(const pk_problem *problem, int piece, const char *note, void *body) {
  pk_sweep_point *p = body;
  p->point.wavelength_um = wavelength_of(problem, piece);
  p->point.estimate = NAN;
  p->point.failed = 1;
  p->point.note = note;
}

static void clear(picket_context *context, void *body) {
  pk_sweep_point_clear(context, body);
}

/* Moves the points of a polarization to its answer and follows the modes through them. */
static picket_status gather_answer(const pk_problem *problem, pk_sweep_point *from, int a,
                                   pk_profile **profile, picket_result *result) {
  int count = problem->light.count;
  picket_index_point *points = PK_NEW(problem->context, count, picket_index_point);
  if (!points) {
    return PICKET_ERROR_MEMORY;
  }
  picket_index_answer *answer = &result->index[result->count++];
  answer->polarization = pk_answer_word(problem, polarization_of(problem, a));
  answer->points = points;
  answer->point_count = count;
  for (int i = 0; i < count; i++) {
    points[i] = from[i].point;
    profile[i] = from[i].profile;
    from[i].point.modes = NULL;
    from[i].point.mode_count = 0;
  }
  return pk_trace(problem->context, count, points, profile);
}

static picket_status gather(const pk_problem *problem, void *bodies, picket_result *result) {
  pk_sweep_point *from = bodies;
  int count = problem->light.count;
  pk_profile **profile = PK_NEW(problem->context, count, pk_profile *);
  picket_status status = profile ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int a = 0; a < answers(problem) && status == PICKET_OK; a++) {
    status = gather_answer(problem, from + (ptrdiff_t)a * count, a, profile, result);
  }
  pk_free(problem->context, profile);
  return status;
}

const pk_sweep_kind pk_sweep_of_index = {
    .result = PK_RESULT_INDEX,
    .phase = "Bloch indices",
    .noun = "points",
    .size = sizeof(pk_sweep_point),
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

picket_status pk_study_index(const pk_problem *problem, const picket_options *options,
                             picket_result **out) {
  pk_sweep_source source = {.problem = problem};
  return pk_sweep_run(&pk_sweep_of_index, &source, options, NULL, out);
}
