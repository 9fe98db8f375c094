/* Independent pieces of work in worker processes: a solver that keeps state of its own (ARPACK)
 * uses several cores only that way, and a crash costs one piece.
 *
 * Workers are forked from the calling process, so they see everything that was prepared; each takes
 * the next piece when it is done with one, and sends its answer back as a line of text. They end by
 * _exit: nothing of the caller's is flushed or run twice. Log lines and progress come to the
 * caller's callbacks in the caller's process. The pieces of a lone worker are done in the calling
 * process itself, by the same functions. */
#ifndef PK_STUDY_WORKERS_H
#define PK_STUDY_WORKERS_H

#include "study/record.h"

typedef struct pk_work {
  picket_context *context;
  int jobs;          /* at least 1 */
  int count;         /* pieces */
  const int *piece;  /* [count] their numbers, in the order they are given out */
  int before;        /* pieces done earlier: for the progress of the whole only */
  const char *phase; /* static text */
  /* Does a piece and writes its answer; in any process. Anything but PICKET_OK ends the whole. */
  picket_status (*solve)(void *user, int piece, pk_record *answer);
  /* Takes an answer, in the calling process, in any order. `answer` is null if the worker died of
   * the piece; `why` is then a sentence about it, else null. */
  picket_status (*take)(void *user, int piece, const char *answer, const char *why);
  void *user;
} pk_work;

/* Returns when every answer was taken, or with the first failure; all workers are gone then.
 * PICKET_ERROR_STOPPED if the progress callback asked for it: what was taken until then stands. */
picket_status pk_workers_run(const pk_work *work);

/* Cores that this machine has, at least 1. */
int pk_workers_cores(void);

#endif
