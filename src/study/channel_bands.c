/* Bands ω(k) of a channel along z: see channel_bands.h.
 *
 * At each wavenumber a coarse grid tells which modes lie below the light line; on finer grids the
 * modes nearest to them are taken. */
#include "study/channel_bands.h"

#include <math.h>

#include "base/memory.h"
#include "study/channel_converge.h"

static const double PI = 3.141592653589793238;

enum { USUAL_BANDS = 2, LOOK_MEMBER = 2, LOOK_HARMONICS = 1 };
static const double LOOK_REACH = 8;

static const char NOTE_ABOVE[] =
    "not guided: above the light line of an open side there is a continuum, or no such mode";
static const char NOTE_MATERIAL[] = "a material is not known at this frequency";

typedef struct work {
  pk_channel_outlook look;
  int bands, points;
  double *kz;         /* [points] π/pitch */
  const char **label; /* [points] */
  int *found;         /* [points] bands below the light line */
  double *guess;      /* [points][bands] k0 */
  bool *known;        /* [points][bands] */
} work;

static double wavenumber(const work *w, int i) {
  double folded = fabs(w->kz[i] - 2 * floor(0.5 * w->kz[i] + 0.5));
  return folded * PI / w->look.survey.problem->channel.pitch_um;
}

static picket_status lay_path(const pk_problem *problem, work *w, int per_leg) {
  static const pk_path_point usual[2] = {{{0, 0}, NULL}, {{1, 0}, NULL}};
  const pk_path *path = &problem->path;
  const pk_path_point *corner = path->given ? path->point : usual;
  int legs = (path->given ? path->count : 2) - 1;
  w->points = legs * per_leg + 1;
  w->kz = PK_NEW(problem->context, w->points, double);
  w->label = PK_NEW(problem->context, w->points, const char *);
  if (!w->kz || !w->label) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < w->points; i++) {
    int leg = i / per_leg, next = leg < legs ? leg + 1 : leg;
    double t = (double)(i % per_leg) / per_leg;
    w->kz[i] = corner[leg].at[0] + t * (corner[next].at[0] - corner[leg].at[0]);
    w->label[i] = i % per_leg == 0 ? corner[leg].label : NULL;
    if (corner[leg].at[1] != 0) {
      return pk_fail(problem->context, PICKET_ERROR_UNSUPPORTED,
                     "path.%d.at.1 is %g, must be 0 for a channel: its bands lie along z", leg,
                     corner[leg].at[1]);
    }
  }
  return PICKET_OK;
}

/* Guesses on a coarse grid; the lowest index says how far the modes reach. */
static picket_status scout(work *w) {
  const pk_channel_survey *s = &w->look.survey;
  picket_context *context = s->problem->context;
  pk_axis x = {0}, y = {0};
  pk_channel_level level = {0};
  double cut = fmax(s->section.cut, 1e-6), light = w->look.light_line * cut;
  picket_status status =
      pk_channel_survey_lay(s, w->look.index, LOOK_REACH, true, 1e-2, PK_END_ZERO, &x, &y);
  if (status == PICKET_OK) {
    status = pk_channel_level_open(s, &x, &y, LOOK_MEMBER, LOOK_HARMONICS, s->section.k0, &level);
  }
  double edge = PI / s->problem->channel.pitch_um;
  for (int i = 0; status == PICKET_OK && i < w->points; i++) {
    double k = wavenumber(w, i), *guess = w->guess + (ptrdiff_t)i * w->bands;
    if (k < 1e-6 * edge) {
      continue;
    }
    status = pk_channel_lowest(s, &level, k, light / edge * k / cut, w->bands, guess, &w->found[i]);
    for (int j = 0; status == PICKET_OK && j < w->found[i]; j++) {
      w->look.index = fmin(w->look.index, k / guess[j]);
    }
  }
  pk_channel_level_close(&level);
  pk_axis_clear(context, &x);
  pk_axis_clear(context, &y);
  return status;
}

static picket_status sample(void *user, const pk_axis *x, const pk_axis *y, int m, int harmonics,
                            double *values) {
  work *w = user;
  pk_channel_level level;
  const pk_channel_survey *s = &w->look.survey;
  picket_status status =
      pk_channel_level_open(s, x, y, m, harmonics, w->look.pair.k0[PK_LONG], &level);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; status == PICKET_OK && i < w->points; i++) {
    ptrdiff_t at = (ptrdiff_t)i * w->bands;
    status = pk_progress(s->problem->context, "bands", (double)i / w->points);
    if (status == PICKET_OK) {
      status = pk_channel_near(s, &level, wavenumber(w, i), w->found[i], w->guess + at, values + at,
                               w->known + at);
    }
    for (int j = 0; j < w->bands; j++) {
      bool sound = j < w->found[i] && w->known[at + j];
      values[at + j] = sound ? values[at + j] * s->problem->channel.pitch_um / (2 * PI) : NAN;
    }
  }
  pk_channel_level_close(&level);
  return status;
}

static picket_status fill(const work *w, const picket_quantity *q, picket_bands_answer *answer) {
  picket_context *context = w->look.survey.problem->context;
  picket_band_point *points = PK_NEW(context, w->points, picket_band_point);
  picket_gap *gaps = PK_NEW(context, 1, picket_gap); /* open sides: no gap is complete */
  answer->points = points;
  answer->gaps = gaps;
  answer->band_count = w->bands;
  if (!points || !gaps) {
    return PICKET_ERROR_MEMORY;
  }
  answer->point_count = w->points;
  for (int i = 0; i < w->points; i++) {
    ptrdiff_t at = (ptrdiff_t)i * w->bands;
    picket_quantity *own = pk_copy(context, q + at, (size_t)w->bands, sizeof *own);
    points[i].kz = w->kz[i];
    points[i].frequency = own;
    points[i].label = w->label[i] ? pk_text_copy(context, w->label[i]) : NULL;
    if (!own || (w->label[i] && !points[i].label)) {
      return PICKET_ERROR_MEMORY;
    }
    for (int j = 0; j < w->bands; j++) {
      if (isnan(own[j].value)) {
        own[j].note = j < w->found[i] && !w->known[at + j] ? NOTE_MATERIAL : NOTE_ABOVE;
      }
    }
  }
  return PICKET_OK;
}

static picket_status solve(work *w, const picket_options *options, picket_bands_answer *answer,
                           picket_result *result) {
  picket_context *context = result->context;
  int count = w->points * w->bands;
  w->found = PK_NEW(context, w->points, int);
  w->guess = PK_NEW(context, count, double);
  w->known = PK_NEW(context, count, bool);
  picket_quantity *q = PK_NEW(context, count, picket_quantity);
  picket_status status = w->found && w->guess && w->known && q ? scout(w) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_channel_request request = {
        .survey = &w->look.survey,
        .index = w->look.index,
        .closed = true,
        .count = count,
        .sample = sample,
        .user = w,
        .options = options,
        .phase = w->look.survey.polarization == PK_HY ? "bands, te-like" : "bands, tm-like"};
    status = pk_channel_converge(&request, q, result);
  }
  if (status == PICKET_OK) {
    status = fill(w, q, answer);
  }
  pk_free(context, q);
  return status;
}

picket_status pk_channel_bands_of(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_bands_answer *answer,
                                  picket_result *result) {
  work w = {.bands = options->count > 0 ? (int)options->count : USUAL_BANDS};
  answer->polarization = pk_channel_word(polarization);
  picket_status status = lay_path(problem, &w, (int)options->points);
  if (status == PICKET_OK) {
    status = pk_channel_outlook_take(problem, polarization, &w.look);
  }
  if (status == PICKET_OK) {
    status = solve(&w, options, answer, result);
  }
  pk_channel_outlook_clear(&w.look);
  pk_free(problem->context, w.kz);
  pk_free(problem->context, (void *)w.label);
  pk_free(problem->context, w.found);
  pk_free(problem->context, w.guess);
  pk_free(problem->context, w.known);
  return status;
}
