/* Direct solves that a study asks for in rounds: each different one is done once, by worker
 * processes, and kept in a journal if there is one. What a number is depends on the question alone,
 * not on the process, the round or the journal. */
#ifndef PK_STUDY_DIRECT_H
#define PK_STUDY_DIRECT_H

#include <picket/options.h>

#include "study/journal.h"
#include "study/measure.h"
#include "study/result.h"
#include "study/variants.h"

enum { PK_DIRECT_VALUE = -1 }; /* the quantity itself, not a derivative */

typedef struct pk_direct_answer {
  picket_quantity q; /* its note is the result's */
  double scale;      /* as pk_measurement has it; NaN of a derivative */
  bool reached;      /* of the quantity: the bar is below the accuracy asked */
  pk_slope_way way;  /* of a derivative */
  int solves;        /* passes over the grids that it took */
} pk_direct_answer;

typedef struct pk_direct_task {
  uint64_t key; /* fingerprint of what is asked */
  int slope;    /* the varied number it is the derivative with respect to, or PK_DIRECT_VALUE */
  bool asked;   /* since this run began, not only kept in the journal */
  bool done;
  pk_family family;
  pk_direct_answer answer;
} pk_direct_task;

/* Filled by its user up to `result`; the rest starts as zeros. */
typedef struct pk_direct {
  const pk_variants *variants;
  const picket_options *options;
  picket_result *result;
  pk_question question;     /* may change between rounds */
  pk_measure_memory memory; /* of the question's mode; never changed */
  pk_journal *journal;
  int count, capacity;
  pk_direct_task *task;
  double *values; /* [count][variants->count] */
} pk_direct;

/* Opens a journal of the problem with this fingerprint. PICKET_ERROR_INPUT, PICKET_ERROR_OUTPUT. */
picket_status pk_direct_resume(pk_direct *direct, const char *path, uint64_t key);

/* Asks for the quantity, or its derivative, at the values [variants->count]; *number is that of the
 * task, which may have been asked for before. */
picket_status pk_direct_ask(pk_direct *direct, const double *values, int slope, int *number);

/* Solves what was asked for and is not done; `phase` is for the progress, static text. */
picket_status pk_direct_solve(pk_direct *direct, const char *phase);

/* The solves that the answers took which the question's family asked for. */
int pk_direct_solves(const pk_direct *direct);

void pk_direct_clear(pk_direct *direct);

#endif
