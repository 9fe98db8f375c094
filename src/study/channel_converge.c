/* See channel_converge.h. */
#include "study/channel_converge.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>

#include "base/memory.h"
#include "study/converge.h"
#include "study/harmonics.h"

/* Grids of each attempt, zeros left out, at `BASE` harmonics; and harmonics on the first grid. */
enum { ATTEMPTS = 4, ROW = 4, MOST_SAMPLES = 64 };
static const int GRIDS[ATTEMPTS][ROW] = {{2, 3, 4}, {2, 3, 4, 6}, {3, 4, 6, 8}, {4, 6, 8, 12}};
static const int GRIDS_SCATTERED[ATTEMPTS][ROW] = {
    {2, 3, 4, 5}, {3, 4, 5, 6}, {4, 5, 6, 7}, {6, 7, 8, 10}};
static const int HARMONICS[ATTEMPTS][ROW] = {
    {1, 2, 3, 4}, {2, 3, 4, 5}, {3, 4, 5, 6}, {3, 4, 5, 6}};
static const int BASE[ATTEMPTS] = {2, 3, 3, 3};
static const int UNIFORM[1] = {0};

/* α of a rectangular edge of silicon in glass. */
static const double USUAL_ALPHA = 0.77;

/* Part of the mixed term that the bar holds: the law in m is that of its leading term alone. */
static const double MIXED_SHARE = 0.3;
/* A mixed value that is left by more than this part of what harmonics add tells nothing of the
 * rest; then the bar holds twice the term. */
static const double MOST_LEFT = 0.5;

/* A family that brings the worst bar down by less than this is the last (converge.c). */
static const double WORTHWHILE = 0.7;

static const char NOTE_SIDES[] =
    "the answer is lost when the open sides end in another way, so nothing bounds what they do";

typedef struct sampled {
  int m, harmonics;
  double *values;
} sampled;

typedef struct run {
  const pk_channel_request *request;
  picket_context *context;
  pk_axis x, y;
  pk_error_law law;
  pk_harmonic_law law_z;
  int grids, rows; /* lengths of the rows of this attempt */
  const int *m, *harmonics;
  int base; /* harmonics of the row of grids */
  int count;
  sampled sample[MOST_SAMPLES];
  double *span_error; /* [quantities] */
} run;

/* --- Samples ---------------------------------------------------------------------------------- */

static const double *value_of(const run *r, int m, int harmonics) {
  for (int i = 0; i < r->count; i++) {
    if (r->sample[i].m == m && r->sample[i].harmonics == harmonics) {
      return r->sample[i].values;
    }
  }
  return NULL;
}

static picket_status take(run *r, int m, int harmonics) {
  if (value_of(r, m, harmonics)) {
    return PICKET_OK;
  }
  sampled *s = &r->sample[r->count];
  *s = (sampled){m, harmonics, PK_NEW(r->context, r->request->count, double)};
  if (!s->values) {
    return PICKET_ERROR_MEMORY;
  }
  r->count++;
  picket_status status =
      r->request->sample(r->request->user, &r->x, &r->y, m, harmonics, s->values);
  pk_log(r->context, PICKET_LOG_INFO,
         "%s: grid 1/%d, harmonics %d to %d, %.0f unknowns: %.10g %.10g", r->request->phase, m,
         -harmonics - 1, harmonics, pk_channel_level_unknowns(&r->x, &r->y, m, harmonics),
         s->values[0], r->request->count > 1 ? s->values[1] : 0);
  return status;
}

static picket_status take_rows(run *r, int attempt) {
  picket_status status = PICKET_OK;
  int steps = r->grids + r->rows + 1;
  for (int i = 0; status == PICKET_OK && i < steps; i++) {
    status =
        pk_progress(r->context, r->request->phase, pk_converge_done(attempt, (double)i / steps));
    if (status == PICKET_OK) {
      status = i < r->grids ? take(r, r->m[i], r->base)
               : i < r->grids + r->rows
                   ? take(r, r->m[0], r->harmonics[i - r->grids])
                   : take(r, r->m[r->rows > 1 ? 1 : 0], r->harmonics[r->rows - 1]);
    }
  }
  return status;
}

static double reach_for(double accuracy) {
  return 0.5 * log(10 / accuracy) + 1;
}

static picket_status lay(const run *r, pk_end outer, pk_axis *x, pk_axis *y) {
  const pk_channel_request *q = r->request;
  return pk_channel_survey_lay(q->survey, q->index, reach_for(q->options->accuracy), q->closed,
                               q->options->accuracy, outer, x, y);
}

/* Walls of the other kind move a value the other way; half the difference is the error of either.
 */
static picket_status take_span_error(run *r) {
  const double *span = r->request->survey->section.block->span_um;
  if (span[0] > 0 && span[1] > 0) {
    return PICKET_OK;
  }
  pk_axis x = {0}, y = {0};
  picket_status status = lay(r, PK_END_FREE, &x, &y);
  if (status == PICKET_OK) {
    status = r->request->sample(r->request->user, &x, &y, r->m[0], r->base, r->span_error);
  }
  const double *known = value_of(r, r->m[0], r->base);
  for (int i = 0; status == PICKET_OK && i < r->request->count; i++) {
    r->span_error[i] = 0.5 * fabs(r->span_error[i] - known[i]);
  }
  pk_axis_clear(r->context, &x);
  pk_axis_clear(r->context, &y);
  return status;
}

/* --- Judging ---------------------------------------------------------------------------------- */

/* K of channel_converge.h from the value off both rows, and its bar. `along` is what the law in N
 * gives on the first grid. */
static double mixed_term(const run *r, int i, double along, double *bar) {
  const int m0 = r->m[0], m1 = r->m[1], h0 = r->base, h1 = r->harmonics[r->rows - 1];
  double v00 = value_of(r, m0, h0)[i], v01 = value_of(r, m0, h1)[i];
  double difference = value_of(r, m1, h1)[i] - v01 - value_of(r, m1, h0)[i] + v00;
  double left = (v01 - along) / (v00 - along), grid = 1 - pow((double)m1 / m0, -r->law.exponent[0]);
  bool sound = fabs(left) < MOST_LEFT;
  double mixed = difference / grid / (sound ? 1 - left : 1);
  *bar = (sound ? MIXED_SHARE : 2) * fabs(mixed);
  return v00 == along ? 0 : mixed;
}

static picket_quantity judge_one(const run *r, int i) {
  double grid[ROW], row[ROW], mixed_bar = 0;
  int n[ROW];
  for (int g = 0; g < r->grids; g++) {
    grid[g] = value_of(r, r->m[g], r->base)[i];
  }
  for (int h = 0; h < r->rows; h++) {
    row[h] = value_of(r, r->m[0], r->harmonics[h])[i];
    n[h] = r->harmonics[h] + 1;
  }
  picket_quantity q = pk_extrapolate(&r->law, r->grids, r->m, grid);
  if (r->rows > 1) {
    picket_quantity z = pk_harmonics_extrapolate(&r->law_z, r->rows, n, row);
    double mixed = mixed_term(r, i, z.value, &mixed_bar);
    pk_log(r->context, PICKET_LOG_DETAIL,
           "%s, quantity %d: grids %.10g ± %.1e, harmonics %+.3e ± %.1e, mixed %+.1e",
           r->request->phase, i, q.value, q.uncertainty, z.value - grid[0], z.uncertainty, mixed);
    q.value += z.value - grid[0] + mixed;
    q.uncertainty += z.uncertainty + mixed_bar;
  }
  q.uncertainty += r->span_error[i];
  if (isfinite(q.value) && isnan(q.uncertainty) && !q.note) {
    q.note = NOTE_SIDES;
  }
  return q;
}

static double allowed_of(const run *r, const picket_quantity *q, int i) {
  return r->request->allowed ? r->request->allowed(r->request, q, i)
                             : r->request->options->accuracy * fabs(q[i].value);
}

/* The largest bar as a multiple of what is allowed. */
static double judge(const run *r, picket_quantity *q) {
  double worst = 0;
  for (int i = 0; i < r->request->count; i++) {
    q[i] = judge_one(r, i);
    pk_log(r->context, PICKET_LOG_DETAIL, "%s, quantity %d: %.10g ± %.1e (sides %.1e)",
           r->request->phase, i, q[i].value, q[i].uncertainty, r->span_error[i]);
  }
  for (int i = 0; i < r->request->count; i++) {
    if (isfinite(q[i].value) && isfinite(q[i].uncertainty)) {
      worst = fmax(worst, q[i].uncertainty / allowed_of(r, q, i));
    }
  }
  return worst;
}

static const char *unvouched(const run *r, const picket_quantity *q) {
  for (int i = 0; i < r->request->count; i++) {
    if (isfinite(q[i].value) && isnan(q[i].uncertainty) && !isinf(allowed_of(r, q, i))) {
      return q[i].note ? q[i].note : "no error bar can be vouched for";
    }
  }
  return NULL;
}

/* --- Attempts --------------------------------------------------------------------------------- */

static int length_of(const int *row) {
  return row[ROW - 1] > 0 ? ROW : ROW - 1;
}

static void choose(run *r, int attempt) {
  r->m = r->law.smooth ? GRIDS[attempt] : GRIDS_SCATTERED[attempt];
  r->grids = length_of(r->m);
  r->harmonics = r->law_z.uniform ? UNIFORM : HARMONICS[attempt];
  r->base = r->law_z.uniform ? 0 : BASE[attempt];
  r->rows = r->law_z.uniform ? 1 : ROW;
}

static double most_unknowns(const run *r) {
  double along = pk_channel_level_unknowns(&r->x, &r->y, r->m[r->grids - 1], r->base);
  double across = pk_channel_level_unknowns(&r->x, &r->y, r->m[0], r->harmonics[r->rows - 1]);
  return fmax(along, across);
}

static picket_status refine(run *r, picket_quantity *q, double *worst) {
  picket_status status = PICKET_OK;
  bool helps = true;
  for (int attempt = 0; status == PICKET_OK && attempt < ATTEMPTS && helps; attempt++) {
    choose(r, attempt);
    if (attempt > 0 && most_unknowns(r) > r->request->options->unknowns) {
      break;
    }
    status = take_rows(r, attempt);
    if (status == PICKET_OK && attempt == 0) {
      status = take_span_error(r);
    }
    if (status == PICKET_ERROR_MEMORY && attempt > 0) {
      pk_message_clear(r->context);
      return PICKET_OK;
    }
    double before = *worst;
    *worst = status == PICKET_OK ? judge(r, q) : *worst;
    helps = *worst > 1 && (attempt == 0 || *worst < WORTHWHILE * before || attempt == 1);
  }
  return status;
}

static picket_status conclude(const run *r, const picket_quantity *q, double worst,
                              picket_result *result) {
  const char *reason = unvouched(r, q);
  if (reason) {
    return pk_result_fall_short(result, "%s: %s", r->request->phase, reason);
  }
  return worst <= 1 ? PICKET_OK
                    : pk_result_fall_short(
                          result,
                          "%s: the largest uncertainty is %.2g of its value, %.1g was asked; "
                          "allow more unknowns (now %.0f) or ask for less",
                          r->request->phase, worst * r->request->options->accuracy,
                          r->request->options->accuracy, r->request->options->unknowns);
}

/* Edges parallel to z are corrected as in a section; those parallel to x and y, where teeth end,
 * are not, and leave an error h^2α (channel.h). They hold the media of the others, so α is that of
 * the law of the section; without one there, that of a strong contrast. */
static void add_tooth_ends(run *r) {
  double alpha = r->law.corners ? 0.5 * (4 - r->law.exponent[1]) : USUAL_ALPHA;
  if (!r->law_z.uniform && r->law.smooth) {
    r->law = (pk_error_law){.count = 3,
                            .exponent = {2 * alpha, 2, 4 - 2 * alpha},
                            .smooth = 1,
                            .corners = 1,
                            .no_bar = r->law.no_bar};
  }
}

picket_status pk_channel_converge(const pk_channel_request *request, picket_quantity *quantities,
                                  picket_result *result) {
  run r = {.request = request,
           .context = request->survey->problem->context,
           .law_z = pk_harmonic_law_of(&request->survey->problem->channel)};
  double worst = 0;
  r.span_error = PK_NEW(r.context, request->count, double);
  picket_status status = r.span_error ? lay(&r, PK_END_ZERO, &r.x, &r.y) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = pk_section_survey_law(&request->survey->section, &r.x, &r.y, &r.law);
  }
  if (status == PICKET_OK) {
    add_tooth_ends(&r);
    status = refine(&r, quantities, &worst);
  }
  if (status == PICKET_OK) {
    status = conclude(&r, quantities, worst, result);
  }
  if (status == PICKET_OK) {
    status = pk_progress(r.context, request->phase, 1);
  }
  for (int i = 0; i < r.count; i++) {
    pk_free(r.context, r.sample[i].values);
  }
  pk_free(r.context, r.span_error);
  pk_axis_clear(r.context, &r.x);
  pk_axis_clear(r.context, &r.y);
  return status;
}
