/* What goes from a mode of one section into one of another, or from a beam (picket/match.h).
 *
 * Both sections are solved on the members of the families of their base grids, the same member of
 * both; the overlap of their fields (section/overlap.h) is extrapolated and given a bar like every
 * number. Two sections have grids that lie differently against each other on every member, so their
 * overlap scatters about the law of either: bars are those of scattered values. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "study/match_meet.h"
#include "study/match_side.h"
#include "study/study.h"

enum { ATTEMPTS = 3, MOST_GRIDS = 4, MOST_MEMBERS = ATTEMPTS * MOST_GRIDS };
static const int MEMBERS_SMOOTH[ATTEMPTS][MOST_GRIDS] = {{2, 3, 4, 6}, {3, 4, 6, 8}, {4, 6, 8, 12}};
static const int MEMBERS_SCATTERED[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4, 5}, {4, 5, 6, 7}, {6, 7, 8, 10}};

enum { SHARE, BEST, BEST_X, BEST_Y, INDEX, INDEX_B, NUMBERS };

/* A section's two polarizations, or a beam's. */
enum { CHOICES = 2 };

static const double DB = 4.342944819032518; /* 10 / ln 10 */

/* Closer than this a climb does not find a summit. */
static const double PLACE_UM = 1e-5;

/* Far from every shape: the medium there is the cladding. */
static const double FAR_UM = 1e4;

static const char NO_MODE[] =
    "there is no mode of this order at this wavelength; picket_modes_find lists what there is";
static const char NO_POWER[] = "nothing is coupled";
static const char TOO_NARROW[] =
    "no error bar: the overlap exceeds 1, as one of the fields is narrower than light can be "
    "focused; the share is cut to 1";
static const char OFFSET_GIVEN[] = "not sought: an offset was given";
static const char IS_BEAM[] = "the other side is a beam";

typedef struct work {
  const pk_problem *problem, *other;
  const picket_match_request *request;
  const picket_options *options;
  picket_result *result;
  pk_match_side a, b[CHOICES];
  int choices; /* sections or polarizations among which one is taken */
  int chosen;  /* -1 before the first grid */
  double medium_index;
  double offset[2]; /* best so far */
  pk_error_law law;
  int members;
  int member[MOST_MEMBERS];
  double values[MOST_MEMBERS][NUMBERS];
  double span_error[NUMBERS];
} work;

static bool is_beam(const work *w) {
  return w->request->gaussian_x_um > 0;
}

/* --- One grid --------------------------------------------------------------------------------- */

static void tilt(const work *w, double index, double slope[2]) {
  double k = w->a.survey.k0 * index;
  slope[0] = k * sin(w->request->tilt_x_rad);
  slope[1] = k * sin(w->request->tilt_y_rad);
}

static pk_partner partner_of(const work *w, const pk_overlap *overlap, int choice, double index) {
  const picket_match_request *r = w->request;
  pk_partner p = {.overlap = overlap, .is_beam = is_beam(w)};
  if (p.is_beam) {
    bool along_y =
        r->along == PICKET_MATCH_ALONG_Y || (r->along == PICKET_MATCH_ALONG_BEST && choice == 1);
    p.beam = (pk_gaussian){.diameter = {r->gaussian_x_um, r->gaussian_y_um},
                           .along = along_y ? PK_V : PK_U};
    tilt(w, w->medium_index, p.beam.slope);
  } else {
    tilt(w, index, p.slope);
  }
  return p;
}

/* Fills the numbers of one choice. */
static void meet(const work *w, const pk_partner *p, double values[NUMBERS]) {
  const picket_match_request *r = w->request;
  double at[2] = {0, 0}, best[2] = {w->offset[0], w->offset[1]};
  if (r->offset_given) {
    at[0] = r->offset_x_um;
    at[1] = r->offset_y_um;
  }
  values[SHARE] = pk_partner_overlap(p, at);
  values[BEST] = values[BEST_X] = values[BEST_Y] = NAN;
  if (!r->offset_given) {
    values[BEST] = pk_partner_best(p, w->chosen < 0, best);
    values[BEST_X] = best[0];
    values[BEST_Y] = best[1];
  }
}

static double worth(const work *w, const double values[NUMBERS]) {
  return w->request->offset_given ? values[SHARE] : values[BEST];
}

static picket_status try_choice(const work *w, const pk_section_whole *a, int choice, int m,
                                bool free_walls, double values[NUMBERS]) {
  pk_section_whole b = {0};
  pk_overlap overlap = {0};
  picket_status status = PICKET_OK;
  values[INDEX_B] = NAN;
  if (!is_beam(w)) {
    status = pk_match_side_solve(&w->b[choice], m, free_walls, &b, &values[INDEX_B]);
  }
  if (status == PICKET_OK) {
    status = pk_overlap_open(a, is_beam(w) ? NULL : &b, &overlap);
  }
  if (status == PICKET_OK) {
    pk_partner p = partner_of(w, &overlap, choice, values[INDEX_B]);
    meet(w, &p, values);
  }
  pk_overlap_close(&overlap);
  pk_section_whole_clear(&b);
  return status;
}

static picket_status sample(work *w, int m, bool free_walls, double values[NUMBERS]) {
  pk_section_whole a = {0};
  double index = NAN;
  int best = w->chosen;
  picket_status status = pk_match_side_solve(&w->a, m, free_walls, &a, &index);
  for (int c = 0; status == PICKET_OK && c < w->choices; c++) {
    if (w->chosen >= 0 && c != w->chosen) {
      continue;
    }
    double found[NUMBERS];
    status = try_choice(w, &a, c, m, free_walls, found);
    if (status == PICKET_OK && (best < 0 || c == w->chosen || worth(w, found) > worth(w, values))) {
      memcpy(values, found, sizeof found);
      best = c;
    }
  }
  if (status == PICKET_OK) {
    values[INDEX] = index;
    w->chosen = best;
    w->offset[0] = values[BEST_X];
    w->offset[1] = values[BEST_Y];
  }
  pk_section_whole_clear(&a);
  return status;
}

static const double *values_of(const work *w, int m) {
  for (int i = 0; i < w->members; i++) {
    if (w->member[i] == m) {
      return w->values[i];
    }
  }
  return NULL;
}

static picket_status sample_grids(work *w, const int *m) {
  picket_status status = PICKET_OK;
  for (int g = 0; status == PICKET_OK && g < MOST_GRIDS; g++) {
    if (values_of(w, m[g])) {
      continue;
    }
    status = pk_progress(w->problem->context, "match", (double)g / MOST_GRIDS);
    if (status == PICKET_OK) {
      status = sample(w, m[g], false, w->values[w->members]);
    }
    if (status == PICKET_OK) {
      w->member[w->members++] = m[g];
    }
  }
  return status;
}

/* Half the difference between electric and magnetic walls; see section_family.c. */
static picket_status sample_span_error(work *w, int m) {
  double within[NUMBERS];
  double offset[2] = {w->offset[0], w->offset[1]};
  picket_status status = sample(w, m, true, within);
  const double *known = values_of(w, m);
  for (int k = 0; status == PICKET_OK && k < NUMBERS; k++) {
    w->span_error[k] = 0.5 * fabs(within[k] - known[k]);
  }
  w->offset[0] = offset[0];
  w->offset[1] = offset[1];
  return status;
}

/* --- Bars ------------------------------------------------------------------------------------- */

static pk_error_law law_of(const work *w) {
  pk_error_law law = w->a.law;
  if (!is_beam(w)) {
    const pk_error_law *b = &w->b[0].law;
    law.share = fmax(law.share, b->share);
    law.share_order = 2;
    law.no_bar = law.no_bar ? law.no_bar : b->no_bar;
    law.smooth = law.corners = 0;
  }
  return law;
}

static picket_quantity judge(const work *w, const int *m, int number) {
  double column[MOST_GRIDS];
  pk_error_law law = number == INDEX ? w->a.law : number == INDEX_B ? w->b[w->chosen].law : w->law;
  if (number == BEST_X || number == BEST_Y) {
    /* A summit is flat, and found by climbing: its place scatters. */
    law.smooth = law.corners = 0;
    law.share = 0;
  }
  for (int g = 0; g < MOST_GRIDS; g++) {
    column[g] = values_of(w, m[g])[number];
  }
  picket_quantity q = pk_extrapolate(&law, MOST_GRIDS, m, column);
  q.uncertainty += w->span_error[number];
  q.uncertainty += number == BEST_X || number == BEST_Y ? PLACE_UM : 0;
  return q;
}

static picket_quantity share_of(picket_quantity q) {
  if (isfinite(q.uncertainty) && q.value - q.uncertainty > 1) {
    return (picket_quantity){1, NAN, TOO_NARROW};
  }
  q.value = fmin(1, fmax(0, q.value));
  return q;
}

static picket_quantity in_db(picket_quantity q) {
  if (!(q.value > 0)) {
    return (picket_quantity){NAN, NAN, q.note ? q.note : NO_POWER};
  }
  return (picket_quantity){DB * log(q.value), DB * q.uncertainty / q.value, q.note};
}

static void take_coupling(picket_quantity share, picket_quantity x, picket_quantity y,
                          picket_coupling *out) {
  out->share = share_of(share);
  out->share_db = in_db(out->share);
  out->offset_x_um = x;
  out->offset_y_um = y;
}

static double judge_all(const work *w, const int *m, picket_match_point *point) {
  const picket_match_request *r = w->request;
  const picket_quantity none = {NAN, NAN, OFFSET_GIVEN};
  picket_quantity x = {r->offset_given ? r->offset_x_um : 0, 0, NULL};
  picket_quantity y = {r->offset_given ? r->offset_y_um : 0, 0, NULL};
  take_coupling(judge(w, m, SHARE), x, y, &point->coupling);
  double worst = point->coupling.share.uncertainty;
  if (r->offset_given) {
    point->best = (picket_coupling){none, none, none, none};
  } else {
    take_coupling(judge(w, m, BEST), judge(w, m, BEST_X), judge(w, m, BEST_Y), &point->best);
    worst = fmax(worst, point->best.share.uncertainty); /* a NaN steps back */
  }
  point->index = judge(w, m, INDEX);
  point->index_b = is_beam(w) ? (picket_quantity){NAN, NAN, IS_BEAM} : judge(w, m, INDEX_B);
  return worst;
}

static double unknowns_of(const pk_match_side *side, int m) {
  return 2.0 * side->x.intervals * side->y.intervals * m * m;
}

static picket_status refine(work *w, picket_match_point *point) {
  double worst = 0;
  for (int attempt = 0; attempt < ATTEMPTS; attempt++) {
    const int *m = w->law.smooth ? MEMBERS_SMOOTH[attempt] : MEMBERS_SCATTERED[attempt];
    int most = m[MOST_GRIDS - 1];
    double unknowns = fmax(unknowns_of(&w->a, most), unknowns_of(&w->b[0], most));
    if (attempt > 0 && unknowns > w->options->unknowns) {
      break;
    }
    picket_status status = sample_grids(w, m);
    if (status == PICKET_OK && attempt == 0) {
      status = sample_span_error(w, m[0]);
    }
    if (status != PICKET_OK) {
      return status;
    }
    worst = judge_all(w, m, point);
    if (!(worst > w->options->accuracy)) {
      return PICKET_OK;
    }
  }
  return pk_result_fall_short(w->result,
                              "the largest uncertainty of a coupled share is %.2g, %.1g was asked; "
                              "allow more unknowns (now %.0f) or ask for less",
                              worst, w->options->accuracy, w->options->unknowns);
}

/* --- Points ----------------------------------------------------------------------------------- */

static void take_medium(work *w) {
  const pk_section_survey *s = &w->a.survey;
  int medium = pk_geometry_medium_at(s->block->geometry, FAR_UM, FAR_UM);
  w->medium_index =
      w->request->medium_index > 0 ? w->request->medium_index : sqrt(cabs(s->permittivity[medium]));
}

/* False if there is no such mode. */
static picket_status take_sides(work *w, double wavelength_um, bool *there) {
  const picket_match_request *r = w->request;
  double accuracy = w->options->accuracy;
  picket_status status = pk_match_side_take(w->problem, wavelength_um, r->mode, accuracy, &w->a);
  *there = status == PICKET_OK && w->a.family != NULL;
  w->choices = 1;
  if (*there && is_beam(w)) {
    take_medium(w);
    w->choices = r->along == PICKET_MATCH_ALONG_BEST ? CHOICES : 1;
  } else if (*there) {
    int first = r->mode_b < 0 ? 0 : r->mode_b;
    status = pk_match_side_take(w->other, wavelength_um, first, accuracy, &w->b[0]);
    *there = status == PICKET_OK && w->b[0].family != NULL;
  }
  if (*there && !is_beam(w) && r->mode_b < 0) {
    status = pk_match_side_take(w->other, wavelength_um, 1, accuracy, &w->b[1]);
    w->choices = w->b[1].family ? CHOICES : 1;
  }
  return status;
}

static void name_choice(const work *w, picket_match_point *point) {
  point->mode_b = is_beam(w) ? -1 : w->b[w->chosen].order;
  point->along = !is_beam(w)                                    ? PICKET_MATCH_ALONG_BEST
                 : w->request->along != PICKET_MATCH_ALONG_BEST ? w->request->along
                 : w->chosen == 0                               ? PICKET_MATCH_ALONG_X
                                                                : PICKET_MATCH_ALONG_Y;
}

static void leave_empty(picket_match_point *point) {
  const picket_quantity none = {NAN, NAN, NO_MODE};
  point->coupling = point->best = (picket_coupling){none, none, none, none};
  point->index = point->index_b = none;
  point->mode_b = -1;
  point->note = NO_MODE;
}

static picket_status fill_point(work *w, double wavelength_um, picket_match_point *point) {
  bool there = false;
  point->wavelength_um = wavelength_um;
  w->chosen = -1;
  w->members = 0;
  memset(w->span_error, 0, sizeof w->span_error);
  picket_status status = take_sides(w, wavelength_um, &there);
  if (status == PICKET_OK && there) {
    w->law = law_of(w);
    status = refine(w, point);
  }
  if (status == PICKET_OK && there) {
    name_choice(w, point);
  } else {
    leave_empty(point);
  }
  pk_match_side_clear(w->problem->context, &w->a);
  for (int c = 0; c < CHOICES; c++) {
    pk_match_side_clear(w->problem->context, &w->b[c]);
  }
  return status;
}

static picket_status fill(work *w) {
  picket_context *context = w->problem->context;
  const pk_light *light = &w->problem->light;
  picket_match_answer *answer = w->result->match = PK_NEW(context, 1, picket_match_answer);
  picket_match_point *points = answer ? PK_NEW(context, light->count, picket_match_point) : NULL;
  if (!points) {
    return PICKET_ERROR_MEMORY;
  }
  w->result->count = 1;
  answer->request = *w->request;
  answer->points = points;
  answer->point_count = light->count;
  if (!is_beam(w)) {
    answer->with = pk_result_text(w->result, w->other->name);
    if (!answer->with) {
      return PICKET_ERROR_MEMORY;
    }
  }
  picket_status status = PICKET_OK;
  int empty = 0;
  for (int i = 0; status == PICKET_OK && i < light->count; i++) {
    status = fill_point(w, light->wavelength_um[i], &points[i]);
    empty += points[i].note != NULL;
  }
  if (status == PICKET_OK && empty == light->count) {
    status =
        pk_fail(context, PICKET_ERROR_INPUT,
                "mode %d of the first section or mode %d of the second is asked for, but there "
                "is none of that order at any wavelength",
                w->request->mode, w->request->mode_b < 0 ? 0 : w->request->mode_b);
  }
  return status;
}

static picket_status check(const pk_problem *problem, const pk_problem *other) {
  if (!problem->section.given || (other && !other->section.given)) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the %s problem has no \"section\", which is what is to be matched",
                   problem->section.given ? "second" : "first");
  }
  if (problem->light.count == 0) {
    return pk_fail_at(problem->context, PICKET_ERROR_INPUT, problem->section.place,
                      "a match needs \"light.wavelength_nm\" in the first problem, which is not "
                      "given");
  }
  return PICKET_OK;
}

picket_status pk_study_match(const pk_problem *problem, const pk_problem *other,
                             const picket_match_request *request, const picket_options *options,
                             picket_result **out) {
  work *w = PK_NEW(problem->context, 1, work);
  picket_status status = w ? check(problem, other) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    *w = (work){.problem = problem, .other = other, .request = request, .options = options};
    status = pk_result_create(problem->context, PK_RESULT_MATCH, problem->name, options->accuracy,
                              &w->result);
  }
  if (status == PICKET_OK) {
    status = fill(w);
  }
  if (status == PICKET_OK) {
    *out = w->result;
  } else if (w) {
    pk_result_free(w->result);
  }
  pk_free(problem->context, w);
  return status;
}
