/* The modes of a film stack as a kind of sweep: a piece is the answer of a polarization. In its
 * line: the number of points, and of each its wavelength and its modes. */
#include <stdio.h>

#include "base/memory.h"
#include "study/record_part.h"
#include "study/slab_answer.h"
#include "study/sweep.h"

/* Far above what an answer has: they only bound what a damaged line can ask for. */
enum { MOST_POINTS = 1000000, MOST_MODES = 100000 };

static int pieces(const pk_problem *problem) {
  return problem->slab.wanted[PK_SLAB_TE] + problem->slab.wanted[PK_SLAB_TM];
}

static pk_slab_polarization polarization_of(const pk_problem *problem, int piece) {
  return piece == 0 && problem->slab.wanted[PK_SLAB_TE] ? PK_SLAB_TE : PK_SLAB_TM;
}

static picket_slab_polarization public_name(pk_slab_polarization polarization) {
  return polarization == PK_SLAB_TE ? PICKET_TE : PICKET_TM;
}

static picket_status reserve(picket_result *result, int count) {
  result->slab = PK_NEW(result->context, count, picket_slab_answer);
  return result->slab ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static void label(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]) {
  bool te = polarization_of(problem, piece) == PK_SLAB_TE;
  snprintf(text, PK_SWEEP_LABEL, "%s", te ? "te" : "tm");
}

static picket_status solve(const pk_problem *problem, const picket_options *options, int piece,
                           picket_result *scratch, void *body) {
  (void)scratch; /* analytic: never short of the accuracy */
  return pk_slab_of(problem, polarization_of(problem, piece), options, body);
}

static void write(const void *body, pk_record *record) {
  const picket_slab_answer *answer = body;
  pk_record_whole(record, (int)answer->polarization);
  pk_record_whole(record, answer->point_count);
  for (int p = 0; p < answer->point_count; p++) {
    const picket_slab_point *point = &answer->points[p];
    pk_record_number(record, point->wavelength_um);
    pk_record_whole(record, point->mode_count);
    for (int m = 0; m < point->mode_count; m++) {
      pk_record_whole(record, point->modes[m].order);
      pk_part_write_quantity(record, &point->modes[m].index);
      pk_part_write_quantity(record, &point->modes[m].group_index);
    }
  }
}

static picket_status read_point(picket_result *result, pk_record_reader *reader,
                                picket_slab_point *point) {
  point->wavelength_um = pk_record_read_number(reader);
  int count = pk_record_read_whole(reader, 0, MOST_MODES);
  picket_slab_mode *modes = PK_NEW(result->context, count, picket_slab_mode);
  picket_status status = modes ? PICKET_OK : PICKET_ERROR_MEMORY;
  point->modes = modes;
  for (int m = 0; m < count && status == PICKET_OK && reader->good; m++) {
    point->mode_count = m + 1;
    modes[m].order = pk_record_read_whole(reader, 0, MOST_MODES);
    status = pk_part_read_quantity(result, reader, &modes[m].index);
    if (status == PICKET_OK) {
      status = pk_part_read_quantity(result, reader, &modes[m].group_index);
    }
  }
  return status;
}

static picket_status read(picket_result *result, pk_record_reader *reader, void *body) {
  picket_slab_answer *answer = body;
  answer->polarization =
      (picket_slab_polarization)pk_record_read_whole(reader, PICKET_TE, PICKET_TM);
  int count = pk_record_read_whole(reader, 0, MOST_POINTS);
  picket_slab_point *points = PK_NEW(result->context, count, picket_slab_point);
  picket_status status = points ? PICKET_OK : PICKET_ERROR_MEMORY;
  answer->points = points;
  for (int p = 0; p < count && status == PICKET_OK && reader->good; p++) {
    answer->point_count = p + 1;
    status = read_point(result, reader, &points[p]);
  }
  return status;
}

static void mark(const pk_problem *problem, int piece, const char *note, void *body) {
  picket_slab_answer *answer = body;
  answer->polarization = public_name(polarization_of(problem, piece));
  answer->note = note;
  answer->failed = 1;
}

static void clear(picket_context *context, void *body) {
  pk_slab_answer_clear(context, body);
}

static picket_status gather(const pk_problem *problem, void *bodies, picket_result *result) {
  picket_slab_answer *from = bodies;
  for (int i = 0; i < pieces(problem); i++) {
    result->slab[result->count++] = from[i];
    from[i].points = NULL;
    from[i].point_count = 0;
  }
  return PICKET_OK;
}

const pk_sweep_kind pk_sweep_of_slab = {
    .result = PK_RESULT_SLAB,
    .phase = "slab modes",
    .noun = "answers",
    .size = sizeof(picket_slab_answer),
    .check = pk_slab_check,
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
