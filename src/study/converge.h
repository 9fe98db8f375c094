/* Accuracy on demand: quantities are sampled on a family of grids, extrapolated and given bars;
 * finer families follow until every bar is below the accuracy asked or the limit of unknowns is
 * met. */
#ifndef PK_STUDY_CONVERGE_H
#define PK_STUDY_CONVERGE_H

#include <picket/options.h>

#include "study/result.h"
#include "study/survey.h"

/* Values of all quantities on member m of the family of a base grid; NaN where there is none. */
typedef picket_status (*pk_sample)(void *user, const pk_cell_grid *base, int m, double *values);

typedef struct pk_converge_request {
  const pk_survey *survey;
  int count; /* quantities */
  pk_sample sample;
  void *user;
  const picket_options *options;
  const char *phase; /* what is being done, for progress; static text */
  bool mirror;       /* the laterally even family is enough */
  /* The uncertainty that quantity i may keep, in its own unit (INFINITY: it takes what it gets);
   * null: the accuracy asked, relative to its value. */
  double (*allowed)(const struct pk_converge_request *request, const picket_quantity *quantities,
                    int i);
} pk_converge_request;

/* How much of the work is done, 0 to 1: which attempt, and what part of it. */
double pk_converge_done(int attempt, double part);

/* quantities[count]; the result is marked partial if a bar stays above the accuracy asked. For open
 * sides the error of cutting them off is measured (walls of both kinds) and added to each bar. */
picket_status pk_converge(const pk_converge_request *request, picket_quantity *quantities,
                          picket_result *result);

#endif
