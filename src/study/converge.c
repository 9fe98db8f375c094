/* See converge.h. */
#include "study/converge.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>

#include "base/memory.h"
#include "study/corner_law.h"
#include "study/level.h"

/* Members of the family on each attempt; zeros are left out. Three grids settle two exponents; a
 * fourth tells scatter from law where interfaces cut the cells, and a third exponent on
 * one-dimensional stacks and at corners. */
enum { ATTEMPTS = 7, MOST_GRIDS = 4, MOST_MEMBERS = ATTEMPTS * MOST_GRIDS };
static const int MEMBERS_SMOOTH[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4}, {3, 4, 6}, {4, 6, 8}, {6, 8, 12}, {8, 12, 16}, {12, 16, 24}, {16, 24, 32}};
static const int MEMBERS_FOUR[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4, 6},     {4, 5, 6, 8},     {6, 8, 10, 12},  {8, 12, 16, 20},
    {12, 16, 20, 24}, {16, 20, 24, 32}, {20, 24, 32, 40}};
static const int MEMBERS_CORNERS[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4},      {2, 3, 4, 6},    {3, 4, 6, 8},    {4, 6, 8, 12},
    {6, 8, 12, 16}, {8, 12, 16, 24}, {12, 16, 24, 32}};

/* A family that brings the worst bar down by less than this factor, twice running, is not worth a
 * finer one: rounding, open sides or scatter decide. */
static const double WORTHWHILE = 0.7;

/* Open sides are moved out when cutting them off takes more than this part of what is allowed. */
static const double SPAN_PART = 0.3;
enum { WIDENINGS = 3 };

static const char NOTE_COARSE[] =
    "the grids that are allowed are too coarse for an error bar: allow more unknowns";

static const char NOTE_SIDES[] =
    "the answer is lost when the open sides end in another way, so nothing bounds what they do";

/* Open sides end where the field has fallen to a tenth of the accuracy in power, and one more decay
 * length. */
static double reach_for(double accuracy) {
  return 0.5 * log(10 / accuracy) + 1;
}

typedef struct family {
  const pk_converge_request *request;
  picket_context *context;
  double reach; /* of open sides, in decay lengths */
  pk_cell_grid base;
  pk_error_law law;
  int count;    /* grids of this attempt */
  const int *m; /* [count] */
  int members;  /* sampled so far, and which */
  int member[MOST_MEMBERS];
  double *values;     /* [members][quantities] */
  double *span_error; /* [quantities] of cutting off open sides */
  double shown;       /* how much was said to be done: open sides that move out start anew */
} family;

/* The values of a member, or null. */
static double *values_of(const family *f, int m) {
  for (int i = 0; i < f->members; i++) {
    if (f->member[i] == m) {
      return f->values + (ptrdiff_t)i * f->request->count;
    }
  }
  return NULL;
}

static picket_status sample_member(family *f, int m) {
  double *values = f->values + (ptrdiff_t)f->members * f->request->count;
  picket_status status = f->request->sample(f->request->user, &f->base, m, values);
  if (status == PICKET_OK) {
    f->member[f->members++] = m;
  }
  return status;
}

double pk_converge_done(int attempt, double part) {
  static const double FIRST = 0.6; /* most questions are answered by the first attempt */
  return 1 - pow(1 - FIRST, attempt) * (1 - FIRST * part);
}

/* Members known from an attempt before are not solved again. */
static picket_status sample_grids(family *f, int attempt) {
  picket_status status = PICKET_OK;
  for (int g = 0; status == PICKET_OK && g < f->count; g++) {
    f->shown = fmax(f->shown, pk_converge_done(attempt, (double)g / f->count));
    status = pk_progress(f->context, f->request->phase, f->shown);
    if (status == PICKET_OK) {
      status = values_of(f, f->m[g]) ? PICKET_OK : sample_member(f, f->m[g]);
    }
    if (status == PICKET_OK) {
      pk_log(f->context, PICKET_LOG_INFO, "%s: grid %d of %d, %.0f unknowns", f->request->phase,
             g + 1, f->count, pk_level_unknowns(&f->base, f->m[g]));
    }
  }
  return status;
}

/* Walls where the slope vanishes move a value the other way than walls where the field does, by the
 * same amount to first order, so that half the difference is the error of either. The whole is
 * taken, for terms of second order and the coarse grid it is measured on: among random cells errors
 * of 1.2 times the half were found. */
static picket_status sample_span_error(family *f) {
  const pk_survey *survey = f->request->survey;
  int quantities = f->request->count;
  for (int i = 0; i < quantities; i++) {
    f->span_error[i] = 0;
  }
  if (!survey->open) {
    return PICKET_OK;
  }
  pk_lay_plan plan = {f->reach, f->request->mirror, false};
  pk_cell_grid base;
  picket_status status = pk_survey_lay(survey, &plan, &base);
  if (status != PICKET_OK) {
    return status;
  }
  status = f->request->sample(f->request->user, &base, f->m[0], f->span_error);
  pk_cell_grid_clear(f->context, &base);
  for (int i = 0; i < quantities; i++) {
    f->span_error[i] = fabs(f->span_error[i] - values_of(f, f->m[0])[i]);
  }
  return status;
}

static void log_table(const family *f, const picket_quantity *quantities) {
  if (!pk_log_wanted(f->context, PICKET_LOG_DETAIL)) {
    return;
  }
  for (int i = 0; i < f->request->count; i++) {
    char line[256];
    int used = 0;
    for (int g = 0; g < f->count && used < (int)sizeof line; g++) {
      used += snprintf(line + used, sizeof line - (size_t)used, "  1/%d: %.10g", f->m[g],
                       values_of(f, f->m[g])[i]);
    }
    pk_log(f->context, PICKET_LOG_DETAIL, "%s, quantity %d:%s -> %.10g ± %.1e (sides %.1e)",
           f->request->phase, i, line, quantities[i].value, quantities[i].uncertainty,
           f->span_error[i]);
  }
}

static void judge(const family *f, picket_quantity *quantities) {
  int quantities_count = f->request->count;
  for (int i = 0; i < quantities_count; i++) {
    double column[MOST_GRIDS];
    for (int g = 0; g < f->count; g++) {
      column[g] = values_of(f, f->m[g])[i];
    }
    quantities[i] = pk_extrapolate(&f->law, f->count, f->m, column);
    if (isfinite(f->span_error[i])) {
      quantities[i].uncertainty += f->span_error[i];
    } else if (isfinite(values_of(f, f->m[0])[i])) {
      quantities[i].uncertainty = NAN;
      quantities[i].note = NOTE_SIDES;
    }
  }
  log_table(f, quantities);
}

/* True if a quantity was found on some grids and not on others: an edge that crosses a wavelength
 * as the grid changes. Finer grids will agree. */
static bool is_split(const family *f, int i) {
  int found = 0;
  for (int g = 0; g < f->count; g++) {
    found += isfinite(values_of(f, f->m[g])[i]) ? 1 : 0;
  }
  return found > 0 && found < f->count;
}

static double allowed_of(const family *f, const picket_quantity *quantities, int i) {
  if (f->request->allowed) {
    return f->request->allowed(f->request, quantities, i);
  }
  return f->request->options->accuracy * fabs(quantities[i].value);
}

/* The largest bar as a multiple of what is allowed; 0 when nothing has a bar. */
static double worst_of(const family *f, const picket_quantity *quantities) {
  double worst = 0;
  for (int i = 0; i < f->request->count; i++) {
    double allowed = allowed_of(f, quantities, i);
    if (isfinite(quantities[i].uncertainty) && isfinite(quantities[i].value)) {
      worst = fmax(worst, quantities[i].uncertainty / allowed);
    } else if (!isinf(allowed) && is_split(f, i)) {
      worst = INFINITY;
    }
  }
  return worst;
}

static picket_status mark_partial(const family *f, double worst, picket_result *result) {
  return pk_result_fall_short(
      result,
      "%s: the largest uncertainty is %.2g of its value, %.1g was asked; allow more unknowns "
      "(now %.0f) or ask for less",
      f->request->phase, worst * f->request->options->accuracy, f->request->options->accuracy,
      f->request->options->unknowns);
}

/* Why a value that was asked for has no bar; null if all have one. */
static const char *unvouched(const family *f, const picket_quantity *quantities) {
  for (int i = 0; i < f->request->count; i++) {
    if (isfinite(quantities[i].value) && isnan(quantities[i].uncertainty) &&
        !isinf(allowed_of(f, quantities, i))) {
      return quantities[i].note ? quantities[i].note : "no error bar can be vouched for";
    }
  }
  return NULL;
}

static const int *members_of(const pk_error_law *law, int attempt) {
  if (law->corners) {
    return MEMBERS_CORNERS[attempt];
  }
  return law->smooth && law->count <= 2 ? MEMBERS_SMOOTH[attempt] : MEMBERS_FOUR[attempt];
}

/* The part of what is allowed that cutting off open sides takes, at worst. */
static double span_part(const family *f, const picket_quantity *quantities) {
  double worst = 0;
  for (int i = 0; i < f->request->count; i++) {
    double allowed = allowed_of(f, quantities, i);
    if (isfinite(f->span_error[i]) && isfinite(quantities[i].value) && allowed > 0) {
      worst = fmax(worst, f->span_error[i] / allowed);
    }
  }
  return worst;
}

static picket_status lay_base(family *f) {
  pk_lay_plan plan = {f->reach, f->request->mirror, true};
  pk_cell_grid_clear(f->context, &f->base);
  f->members = 0;
  picket_status status = pk_survey_lay(f->request->survey, &plan, &f->base);
  return status == PICKET_OK ? pk_corner_law(f->request->survey, &f->base, &f->law) : status;
}

/* The first family; open sides are moved out until cutting them off hardly matters. */
static picket_status first_attempt(family *f, picket_quantity *quantities) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i <= WIDENINGS; i++) {
    status = sample_grids(f, 0);
    if (status == PICKET_OK) {
      status = sample_span_error(f);
    }
    if (status != PICKET_OK) {
      break;
    }
    judge(f, quantities);
    double part = span_part(f, quantities);
    if (part <= SPAN_PART || i == WIDENINGS) {
      break;
    }
    f->reach += 0.5 * log(part / SPAN_PART) + 1;
    pk_log(f->context, PICKET_LOG_DETAIL, "%s: open sides moved out to %.3g decay lengths",
           f->request->phase, f->reach);
    status = lay_base(f);
  }
  return status;
}

static void choose_members(family *f, int attempt) {
  f->m = members_of(&f->law, attempt);
  f->count = f->m[MOST_GRIDS - 1] > 0 ? MOST_GRIDS : MOST_GRIDS - 1;
}

/* A first family that is over the limit of unknowns gives way to a coarser one, whose values are a
 * hint without a bar; if that is over the limit too, there is nothing to give. */
static picket_status fit_first(family *f) {
  static const int coarse[3] = {1, 2, 3};
  double most = f->request->options->unknowns;
  if (pk_level_unknowns(&f->base, f->m[f->count - 1]) <= most) {
    return PICKET_OK;
  }
  f->m = coarse;
  f->count = 3;
  f->law.no_bar = NOTE_COARSE;
  double unknowns = pk_level_unknowns(&f->base, f->m[f->count - 1]);
  if (unknowns > most) {
    return pk_fail(f->context, PICKET_ERROR_NUMERIC,
                   "%s: the coarsest family of grids needs %.0f unknowns, %.0f are allowed: allow "
                   "more unknowns, or simplify the cell",
                   f->request->phase, unknowns, most);
  }
  return PICKET_OK;
}

/* Finer families while they help. Memory that runs out on the way leaves the values found so far.
 */
static picket_status refine(family *f, picket_quantity *quantities, double *worst) {
  int idle = 0;
  for (int attempt = 1; attempt<ATTEMPTS && * worst> 1 && idle < 2; attempt++) {
    choose_members(f, attempt);
    if (pk_level_unknowns(&f->base, f->m[f->count - 1]) > f->request->options->unknowns) {
      return PICKET_OK;
    }
    picket_status status = sample_grids(f, attempt);
    if (status == PICKET_ERROR_MEMORY) {
      pk_message_clear(f->context);
      return PICKET_OK;
    }
    if (status != PICKET_OK) {
      return status;
    }
    double before = *worst;
    judge(f, quantities);
    *worst = worst_of(f, quantities);
    idle = *worst > WORTHWHILE * before ? idle + 1 : 0;
  }
  return PICKET_OK;
}

static picket_status run_family(family *f, picket_quantity *quantities, picket_result *result) {
  choose_members(f, 0);
  picket_status status = fit_first(f);
  if (status == PICKET_OK) {
    status = first_attempt(f, quantities);
  }
  double worst = status == PICKET_OK ? worst_of(f, quantities) : 0;
  if (status == PICKET_OK) {
    status = refine(f, quantities, &worst);
  }
  const char *reason = status == PICKET_OK ? unvouched(f, quantities) : NULL;
  if (reason) {
    return pk_result_fall_short(result, "%s: %s", f->request->phase, reason);
  }
  return status == PICKET_OK && worst > 1 ? mark_partial(f, worst, result) : status;
}

picket_status pk_converge(const pk_converge_request *request, picket_quantity *quantities,
                          picket_result *result) {
  family f = {.request = request, .context = request->survey->problem->context};
  f.reach = reach_for(request->options->accuracy);
  f.values = PK_NEW(f.context, MOST_MEMBERS * request->count, double);
  f.span_error = PK_NEW(f.context, request->count, double);
  picket_status status = f.values && f.span_error ? lay_base(&f) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = run_family(&f, quantities, result);
  }
  if (status == PICKET_OK) {
    status = pk_progress(f.context, request->phase, 1);
  }
  pk_cell_grid_clear(f.context, &f.base);
  pk_free(f.context, f.values);
  pk_free(f.context, f.span_error);
  return status;
}
