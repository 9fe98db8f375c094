/* Answers made of independent pieces: a point of each wavelength, an answer of each polarization,
 * for the problem itself or for each of several values that one number of it takes in turn.
 *
 * Every piece is solved for itself, in any process (workers.h), comes back as a line of text
 * (record.h), and is kept in a journal if there is one (journal.h). The answer is put together from
 * the lines alone, so that it is the same however the pieces were come by. A piece that fails is
 * marked with the reason and does not stop the rest. */
#ifndef PK_STUDY_SWEEP_H
#define PK_STUDY_SWEEP_H

#include <picket/options.h>

#include "study/problem.h"
#include "study/record.h"
#include "study/result.h"

enum { PK_SWEEP_LABEL = 64 };

/* A kind of question. `body` is what a piece is held in, `size` bytes that start as zeros. */
typedef struct pk_sweep_kind {
  pk_result_kind result;
  const char *phase; /* for the progress */
  const char *noun;  /* what a piece is, in the plural */
  size_t size;
  /* Does the problem have what the question is about? */
  picket_status (*check)(const pk_problem *problem);
  int (*pieces)(const pk_problem *problem);
  int (*answers)(const pk_problem *problem);
  /* Room for so many answers in the result, whose count is still 0. */
  picket_status (*reserve)(picket_result *result, int answers);
  /* Which piece it is, for people: "ey at 1550 nm". */
  void (*label)(const pk_problem *problem, int piece, char text[PK_SWEEP_LABEL]);
  /* Texts belong to `scratch`, which takes a shortfall of accuracy too. */
  picket_status (*solve)(const pk_problem *problem, const picket_options *options, int piece,
                         picket_result *scratch, void *body);
  void (*write)(const void *body, pk_record *record);
  /* Texts become the result's. What is not as expected shows in the reader. */
  picket_status (*read)(picket_result *result, pk_record_reader *reader, void *body);
  /* A piece that failed; the note is the result's. */
  void (*mark)(const pk_problem *problem, int piece, const char *note, void *body);
  void (*clear)(picket_context *context, void *body); /* accepts zeros */
  /* Moves the pieces of a problem into the next answers of the result. */
  picket_status (*gather)(const pk_problem *problem, void *bodies, picket_result *result);
} pk_sweep_kind;

extern const pk_sweep_kind pk_sweep_of_index;
extern const pk_sweep_kind pk_sweep_of_modes;
extern const pk_sweep_kind pk_sweep_of_edges;
extern const pk_sweep_kind pk_sweep_of_slab;

/* What is asked about. */
typedef struct pk_sweep_source {
  const pk_problem *problem; /* as it stands */
  uint64_t document;         /* a fingerprint of its text; for journals */
  /* The number that takes the values in turn; null: the problem as it stands. */
  const char *path;
  int count;
  const double *value;
  /* The problem with that number changed, the caller's to free. In any process. */
  picket_status (*open)(void *user, double value, pk_problem **out);
  void *user;
} pk_sweep_source;

/* A failure that concerns a piece, not the machine or the run. */
bool pk_sweep_is_of_a_piece(picket_status status);

/*   journal  file of finished pieces, null: none
 * If every piece fails in one way, that is the failure. PICKET_ERROR_STOPPED and
 * PICKET_ERROR_OUTPUT: *out receives what was finished, if there is anything; else it is untouched.
 */
picket_status pk_sweep_run(const pk_sweep_kind *kind, const pk_sweep_source *source,
                           const picket_options *options, const char *journal, picket_result **out);

#endif
