/* The stop bands of a cell as a kind of sweep: a piece is the answer of a polarization. In its
 * line: the number of bands, and of each its order, edges, attenuation and what is confined; where
 * the operating band stands; the estimate. */
#include <assert.h>
#include <math.h>
#include <stdio.h>

#include "base/memory.h"
#include "study/channel_level.h"
#include "study/edges.h"
#include "study/record_part.h"
#include "study/sweep.h"

/* Far above what an answer has: it only bounds what a damaged line can ask for. */
enum { MOST_BANDS = 10000 };

static const char NOTE_FAILED[] = "this polarization could not be computed";

static picket_status check(const pk_problem *problem) {
  return problem->has_cell || problem->channel.given
             ? PICKET_OK
             : pk_fail(problem->context, PICKET_ERROR_INPUT,
                       "the problem has no \"cell\" and no \"channel\", which is what stop bands "
                       "are of");
}

static int pieces(const pk_problem *problem) {
  return problem->light.wanted[PK_EY] + problem->light.wanted[PK_HY];
}

static pk_polarization polarization_of(const pk_problem *problem, int piece) {
  return piece == 0 && problem->light.wanted[PK_EY] ? PK_EY : PK_HY;
}

static picket_status reserve(picket_result *result, int count) {
  result->edges = PK_NEW(result->context, count, picket_edges_answer);
  return result->edges ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static void label(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]) {
  snprintf(text, PK_SWEEP_LABEL, "%s",
           picket_polarization_name(pk_answer_word(problem, polarization_of(problem, piece))));
}

static picket_status solve(const pk_problem *problem, const picket_options *options, int piece,
                           picket_result *scratch, void *body) {
  return pk_edges_of(problem, polarization_of(problem, piece), options, body, scratch);
}

/* A member that is added to these structs belongs into write and read below; then count it here.
 * (Sizes are those of 64-bit machines, where every member but two flags takes 8 bytes or three
 * times that.) */
static_assert(sizeof(void *) != 8 ||
                  (sizeof(picket_stop_band) == 3 * sizeof(picket_quantity) + 2 * 8 &&
                   sizeof(picket_operating_band) == sizeof(picket_quantity) + 4 * 8 &&
                   sizeof(picket_edge_estimate) == sizeof(picket_quantity) + 2 * 8),
              "a member of an answer about edges is not in its line");

static void write(const void *body, pk_record *record) {
  const picket_edges_answer *answer = body;
  const picket_operating_band *band = &answer->operating;
  pk_record_whole(record, (int)answer->polarization);
  pk_record_whole(record, answer->band_count);
  for (int i = 0; i < answer->band_count; i++) {
    const picket_stop_band *b = &answer->bands[i];
    pk_record_whole(record, b->order);
    pk_part_write_quantity(record, &b->short_um);
    pk_part_write_quantity(record, &b->long_um);
    pk_record_whole(record, b->short_confined);
    pk_record_whole(record, b->long_confined);
    pk_part_write_quantity(record, &b->attenuation_db_per_pitch);
  }
  pk_record_whole(record, band->given);
  pk_record_number(record, band->from_um);
  pk_record_number(record, band->to_um);
  pk_record_whole(record, (int)band->regime);
  pk_part_write_quantity(record, &band->clearance_um);
  pk_record_text(record, answer->estimate.method);
  pk_record_number(record, answer->estimate.centre_um);
  pk_part_write_quantity(record, &answer->estimate.error_um);
}

static picket_status read_band(picket_result *result, pk_record_reader *reader,
                               picket_stop_band *b) {
  b->order = pk_record_read_whole(reader, 0, MOST_BANDS);
  picket_status status = pk_part_read_quantity(result, reader, &b->short_um);
  if (status == PICKET_OK) {
    status = pk_part_read_quantity(result, reader, &b->long_um);
  }
  b->short_confined = pk_record_read_whole(reader, 0, 1);
  b->long_confined = pk_record_read_whole(reader, 0, 1);
  return status == PICKET_OK ? pk_part_read_quantity(result, reader, &b->attenuation_db_per_pitch)
                             : status;
}

static picket_status read_bands(picket_result *result, pk_record_reader *reader,
                                picket_edges_answer *answer) {
  int count = pk_record_read_whole(reader, 0, MOST_BANDS);
  picket_stop_band *bands = PK_NEW(result->context, count, picket_stop_band);
  picket_status status = bands ? PICKET_OK : PICKET_ERROR_MEMORY;
  answer->bands = bands;
  for (int i = 0; i < count && status == PICKET_OK && reader->good; i++) {
    answer->band_count = i + 1;
    status = read_band(result, reader, &bands[i]);
  }
  return status;
}

static picket_status read(picket_result *result, pk_record_reader *reader, void *body) {
  picket_edges_answer *answer = body;
  picket_operating_band *band = &answer->operating;
  answer->polarization =
      (picket_polarization)pk_record_read_whole(reader, PICKET_EY, PICKET_TE_LIKE);
  picket_status status = read_bands(result, reader, answer);
  band->given = pk_record_read_whole(reader, 0, 1);
  band->from_um = pk_record_read_number(reader);
  band->to_um = pk_record_read_number(reader);
  band->regime =
      (picket_regime)pk_record_read_whole(reader, PICKET_REGIME_UNKNOWN, PICKET_REGIME_RADIATING);
  if (status == PICKET_OK) {
    status = pk_part_read_quantity(result, reader, &band->clearance_um);
  }
  if (status == PICKET_OK) {
    status = pk_part_read_text(result, reader, &answer->estimate.method);
  }
  answer->estimate.centre_um = pk_record_read_number(reader);
  return status == PICKET_OK ? pk_part_read_quantity(result, reader, &answer->estimate.error_um)
                             : status;
}

static void mark(const pk_problem *problem, int piece, const char *note, void *body) {
  picket_edges_answer *answer = body;
  const picket_quantity none = {NAN, NAN, NOTE_FAILED};
  answer->polarization = pk_answer_word(problem, polarization_of(problem, piece));
  answer->operating = (picket_operating_band){.from_um = NAN, .to_um = NAN, .clearance_um = none};
  answer->estimate = (picket_edge_estimate){.centre_um = NAN, .error_um = none};
  answer->note = note;
  answer->failed = 1;
}

static void clear(picket_context *context, void *body) {
  picket_edges_answer *answer = body;
  pk_free(context, (void *)answer->bands);
  answer->bands = NULL;
  answer->band_count = 0;
}

static picket_status gather(const pk_problem *problem, void *bodies, picket_result *result) {
  picket_edges_answer *from = bodies;
  for (int i = 0; i < pieces(problem); i++) {
    result->edges[result->count++] = from[i];
    from[i].bands = NULL;
    from[i].band_count = 0;
  }
  return PICKET_OK;
}

const pk_sweep_kind pk_sweep_of_edges = {
    .result = PK_RESULT_EDGES,
    .phase = "stop bands",
    .noun = "answers",
    .size = sizeof(picket_edges_answer),
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
