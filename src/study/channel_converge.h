/* Accuracy on demand for a channel, in two directions: grids of the section and harmonics along z.
 *
 * Values v(m, N) are sampled on a row of grids with N0 harmonics and on the first grid m0 with a
 * row of harmonics, and both rows are extrapolated (extrapolate.h, harmonics.h). With v(m, N) = X +
 * G(m) + H(N) + K G(m)/G(m0) H(N)/H(N0) the two values and the corner they share give X - K, and
 * one value off both rows gives K. */
#ifndef PK_STUDY_CHANNEL_CONVERGE_H
#define PK_STUDY_CHANNEL_CONVERGE_H

#include <picket/options.h>

#include "study/channel_level.h"
#include "study/result.h"

/* Values of all quantities on member m of the family of a base grid with harmonics up to
 * `harmonics`; NaN where there is none. */
typedef picket_status (*pk_channel_sample)(void *user, const pk_axis *x, const pk_axis *y, int m,
                                           int harmonics, double *values);

typedef struct pk_channel_request {
  const pk_channel_survey *survey;
  double index; /* of the modes: how far they reach */
  bool closed;  /* walls at leaking sides */
  int count;    /* quantities */
  pk_channel_sample sample;
  void *user;
  const picket_options *options;
  const char *phase; /* static text */
  /* The uncertainty that quantity i may keep, in its own unit; null: relative to its value. */
  double (*allowed)(const struct pk_channel_request *request, const picket_quantity *q, int i);
} pk_channel_request;

/* quantities [count]; the result is marked partial if a bar stays above the accuracy asked. */
picket_status pk_channel_converge(const pk_channel_request *request, picket_quantity *quantities,
                                  picket_result *result);

#endif
