/* See section_bend.h.
 *
 * With r = R + x, ν = R k0 n_eff and k = k0 times the index of the medium outside, a mode goes as
 * exp(±∫ √(ν²/r² - k²) dr) along x there: it decays up to the caustic r = ν/k, beyond which the
 * wave is free and leaves. What it has lost on its way there is closed:
 *
 *   ∫_r^{ν/k} √(ν²/r² - k²) dr = ν artanh(t) - ν t,      t = √(1 - (kr/ν)²)
 *   ∫_{ν/k}^r √(k² - ν²/r²) dr = ν (t - arctan(t)),      t = √((kr/ν)² - 1)
 *
 * (E. A. J. Marcatili, Bell Syst. Tech. J. 48, 2103 (1969); D. Marcuse, J. Opt. Soc. Am. 66, 311
 * (1976)). Towards the centre the decay only gets steeper. */
#include "study/section_bend.h"

#include <math.h>

#include "dense/dense.h"
#include "section/outflow.h"

static const double QUARTER_TURN = 1.57079632679489661923;
static const double DB_PER_CM = 86858.896380650366; /* section_describe.c */
static const double CM_PER_UM = 1e-4;

/* Amplitude lost on the way to the caustic, in nepers: at 30 the loss is 1e-26 of what flows. The
 * power that leaves was right to 1 % at 33 in a bent slab of known answer. */
static const double MOST_BARRIER = 30;

/* Grids reach this far; beyond, materials are not asked (io/read_section.c). */
static const double FARTHEST_UM = 49.9;

/* The layer begins at the caustic and holds this many radians of the free wave. Through it and back
 * the wave falls by exp(-2 strength ∫ t² k_x dx), which is 1.14 strength times as many nepers for
 * k_x ~ √x beyond a caustic. */
static const double LAYER_RADIANS = 5;

/* Steps of the base grid per 1/e length, and in radians of the free wave at the end of the layer.
 */
static const double STEPS_PER_DECAY = 1.5, STEP_RADIANS = 0.5;

/* Nepers by which the wave reflected by a wall above or below is weaker at the caustic than the one
 * that goes there straight: 1e-3 of the loss. */
static const double IMAGE_NEPERS = 7;

/* Modes this much alike are one, where others have less than what is left. */
static const double ALIKE = 0.8, LEAST_ALIKE = 0.55;
enum { CANDIDATES = 5, SMALLEST_STEP = 32 }; /* of the curvature: a part of this many */

/* Im β below this part of β is not told from rounding when it is read off β. */
static const double ROUNDING = 1e-11;

static const char NOTE_WALL[] =
    "not known: section.span_nm ends the window at walls, which let nothing out of the bend";
static const char NOTE_SMALL[] =
    "not known: the loss of the bend is below 1e-20 dB/cm, or the place where its wave becomes "
    "free lies more than 50 µm away";
static const char NOTE_NOISE[] = "not known: the loss of the bend is smaller than its uncertainty";

bool pk_section_bent(const pk_section_survey *s) {
  return s->block->bend_radius_um > 0;
}

/* --- The way out ------------------------------------------------------------------------------ */

typedef struct way {
  double nu, k, radius;
} way;

static way way_out(const pk_section_survey *s, int side, double index) {
  double radius = s->block->bend_radius_um;
  return (way){radius * s->k0 * index, s->k0 * s->side[side], radius};
}

static double caustic(const way *w) {
  return w->nu / w->k - w->radius;
}

/* Nepers from x to the caustic, or radians from there to x. */
static double nepers(const way *w, double x) {
  double ratio = w->k * (w->radius + x) / w->nu;
  double t = sqrt(fmax(1 - ratio * ratio, 0));
  return w->nu * (atanh(t) - t);
}

static double radians(const way *w, double x) {
  double ratio = w->k * (w->radius + x) / w->nu;
  double t = sqrt(fmax(ratio * ratio - 1, 0));
  return w->nu * (t - atan(t));
}

static double step_at(const way *w, double x) {
  double rate = fabs(w->k * w->k - pow(w->nu / (w->radius + x), 2));
  return 1 / sqrt(rate);
}

/* Where f has fallen or grown by `amount` between `from` and `to`. */
static double where(const way *w, double (*f)(const way *, double), double from, double to,
                    double amount) {
  double start = f(w, from);
  for (int i = 0; i < 60; i++) { /* to the last bit */
    double middle = 0.5 * (from + to);
    *(fabs(f(w, middle) - start) < amount ? &from : &to) = middle;
  }
  return from;
}

static double layer_start(const pk_section_survey *s, double index) {
  way w = way_out(s, 1, index);
  return fmax(caustic(&w), s->high[0]);
}

static double layer_end(const pk_section_survey *s, double index) {
  way w = way_out(s, 1, index);
  double start = layer_start(s, index);
  /* radians(x) ≥ k (x - start)/2 where x is twice the radius of the caustic or more */
  double far = 4 * (w.radius + start) + 4 * LAYER_RADIANS / w.k;
  return where(&w, radians, start, far, LAYER_RADIANS);
}

static double nepers_of(const pk_section_survey *s, double index) {
  way w = way_out(s, 1, index);
  return nepers(&w, s->high[0]);
}

static bool shows(const pk_section_survey *s, double index) {
  return s->block->span_um[0] == 0 && nepers_of(s, index) <= MOST_BARRIER &&
         layer_end(s, index) < FARTHEST_UM;
}

double pk_section_bend_leaking(const pk_section_survey *s, int count, const double *index) {
  for (int i = 0; pk_section_bent(s) && i < count; i++) {
    if (shows(s, index[i])) {
      return index[i];
    }
  }
  return 0;
}

/* --- Grids ------------------------------------------------------------------------------------ */

static void place_inside(const pk_section_survey *s, const pk_section_wish *wish, pk_axis_wish *x) {
  way w = way_out(s, 0, wish->index);
  double low = s->low[0];
  /* From there to the centre a mode loses all; 1e-9 of the radius is short of it. */
  x->from = where(&w, nepers, low, -w.radius * (1 - 1e-9), wish->reach);
  x->outer_step = fmin(x->outer_step, step_at(&w, low) / STEPS_PER_DECAY);
}

static void place_outside(const pk_section_survey *s, const pk_section_wish *wish,
                          pk_axis_wish *x) {
  way w = way_out(s, 1, wish->index);
  double high = s->high[0];
  x->outer_step = fmin(x->outer_step, step_at(&w, high) / STEPS_PER_DECAY);
  if (wish->leaking == 0) {
    double to = where(&w, nepers, high, fmax(caustic(&w), high + 1 / w.k), wish->reach);
    x->to = fmin(to, FARTHEST_UM);
    return;
  }
  double start = layer_start(s, wish->leaking);
  x->to = layer_end(s, wish->leaking);
  x->layer[1] = (pk_layer){x->to - start, log(100 / wish->accuracy) / LAYER_RADIANS};
  x->outer_step = fmin(x->outer_step, STEP_RADIANS * step_at(&w, x->to));
}

void pk_section_bend_place(const pk_section_survey *s, const pk_section_wish *wish,
                           pk_axis_wish *x) {
  place_inside(s, wish, x);
  place_outside(s, wish, x);
}

/* From the guide to the caustic straight, and by way of a wall at this height. */
double pk_section_bend_height(const pk_section_survey *s, const pk_section_wish *wish) {
  if (wish->leaking == 0 || wish->closed) {
    return 0;
  }
  way w = way_out(s, 1, wish->leaking);
  double away = fmax(caustic(&w) - s->high[0], 1 / s->k0);
  double rate = fmax(nepers(&w, s->high[0]), 1) / away;
  double longer = away + IMAGE_NEPERS / rate;
  return 0.5 * sqrt(longer * longer - away * away);
}

pk_axis pk_section_bend_before(const pk_section_survey *s, const pk_axis *x) {
  pk_axis before = *x;
  if (pk_section_bent(s)) {
    before.layer[1] = (pk_layer){0}; /* the family's members are stretched by it anew */
  }
  return before;
}

/* --- Following -------------------------------------------------------------------------------- */

typedef struct trail {
  const pk_section_survey *survey;
  const pk_axis *x, *y;
  int m;
  pk_section *target;
} trail;

/* |h_a · h_b|² / (|h_a| |h_b|)², with conjugates: at most 1 for any two, also where products of
 * waves in the layer vanish. The grid is finest where the guide is. */
static double likeness(int64_t n, const pk_section_mode *a, const pk_section_mode *b) {
  double own = pk_dense_norm((long)n, a->h) * pk_dense_norm((long)n, b->h);
  double common = cabs(pk_dense_dot((long)n, a->h, b->h)) / own;
  return common * common;
}

/* The mode of `next` most like `mode` of `now`. */
static picket_status most_alike(const trail *t, const pk_section_mode *mode, pk_section *next,
                                pk_section_mode *out, double *alike) {
  picket_context *context = t->survey->problem->context;
  pk_section_mode modes[CANDIDATES] = {{0}};
  int found = 0, best = 0;
  picket_status status =
      pk_section_modes(next, t->survey->k0, mode->beta_square, CANDIDATES, modes, &found);
  if (status != PICKET_OK) {
    return status;
  }
  *alike = 0;
  for (int i = 0; i < found; i++) {
    double share = likeness(pk_section_size(next), mode, &modes[i]);
    if (share > *alike) {
      *alike = share;
      best = i;
    }
  }
  *out = modes[best];
  modes[best].h = NULL;
  pk_section_modes_clear(context, found, modes);
  return PICKET_OK;
}

static picket_status lost(const trail *t, double curvature, const pk_section_mode *mode) {
  return pk_fail(t->survey->problem->context, PICKET_ERROR_NUMERIC,
                 "the mode of index %.4g was lost on its way into the bend: at a radius of %.3g µm "
                 "no mode is like it; ask for a larger section.bend_radius_um (now %.3g) or for "
                 "fewer modes",
                 creal(mode->beta) / t->survey->k0, 1 / curvature,
                 t->survey->block->bend_radius_um);
}

/* One step: to `curvature` if the mode stays itself. */
static picket_status step(const trail *t, double curvature, bool last_resort, pk_section_mode *mode,
                          bool *done) {
  pk_section *between = NULL;
  pk_section_mode found = {0};
  double alike = 0;
  bool whole = curvature == pk_section_curvature(t->target);
  picket_status status =
      whole ? PICKET_OK : pk_section_member_bent(t->survey, t->x, t->y, t->m, curvature, &between);
  if (status == PICKET_OK) {
    status = most_alike(t, mode, whole ? t->target : between, &found, &alike);
  }
  *done = status == PICKET_OK && alike >= (last_resort ? LEAST_ALIKE : ALIKE);
  pk_section_mode *left = *done ? mode : &found;
  pk_section_modes_clear(t->survey->problem->context, 1, left);
  pk_section_free(between);
  if (*done) {
    *mode = found;
  }
  return status == PICKET_OK && !*done && last_resort ? lost(t, curvature, mode) : status;
}

static picket_status follow_mode(const trail *t, pk_section_mode *mode) {
  double target = pk_section_curvature(t->target), at = 0, by = target;
  picket_status status = PICKET_OK;
  while (status == PICKET_OK && at < target) {
    double next = at + by > target * (1 - 1e-9) ? target : at + by;
    bool done = false, last_resort = by < 1.5 * target / SMALLEST_STEP;
    status = step(t, next, last_resort, mode, &done);
    at = done ? next : at;
    by = done ? 2 * by : by / 2;
  }
  return status;
}

picket_status pk_section_bend_follow(const pk_section_survey *s, const pk_axis *x, const pk_axis *y,
                                     int m, pk_section **section, int count,
                                     pk_section_mode *modes) {
  if (!pk_section_bent(s)) {
    return PICKET_OK;
  }
  trail t = {s, x, y, m, NULL};
  picket_status status =
      pk_section_member_bent(s, x, y, m, 1 / s->block->bend_radius_um, &t.target);
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = follow_mode(&t, &modes[i]);
  }
  if (status == PICKET_OK) {
    pk_section_free(*section);
    *section = t.target;
  } else {
    pk_section_free(t.target);
  }
  return status;
}

/* --- Loss ------------------------------------------------------------------------------------- */

static bool lossless(const pk_section_survey *s) {
  for (int m = 0; m < 3 * s->media; m++) {
    if (cimag(s->permittivity[m]) != 0) {
      return false;
    }
  }
  return !(s->leaks[0] || s->leaks[1] || s->leaks[2] || s->leaks[3]);
}

double pk_section_bend_loss(const pk_section_family *f, const pk_section *section,
                            const pk_section_mode *mode, const pk_section_fields *fields) {
  double leaking = pk_section_bend_leaking(f->survey, f->count, f->lowest);
  return leaking > 0 && lossless(f->survey)
             ? pk_section_outflow(section, fields, layer_start(f->survey, leaking))
             : cimag(mode->beta);
}

static picket_quantity missing(const char *note) {
  return (picket_quantity){NAN, NAN, note};
}

void pk_section_bend_judge(const pk_section_family *f, int i, picket_section_mode *mode) {
  const pk_section_survey *s = f->survey;
  mode->bend_loss_db_per_90_deg = missing(NULL);
  if (!pk_section_bent(s)) {
    return;
  }
  picket_quantity *loss = &mode->loss_db_per_cm;
  bool shown = shows(s, f->lowest[i]), far = !shown && nepers_of(s, f->lowest[i]) < MOST_BARRIER;
  if (!lossless(s)) {
    loss->uncertainty += DB_PER_CM * ROUNDING * s->k0 * mode->index.value;
  }
  if (s->block->span_um[0] > 0) {
    *loss = missing(NOTE_WALL);
  } else if (!shown && (far || lossless(s))) {
    *loss = missing(NOTE_SMALL);
  } else if (!(loss->value > 0) || loss->value <= loss->uncertainty) {
    *loss = missing(NOTE_NOISE);
  }
  double arc = QUARTER_TURN * s->block->bend_radius_um * CM_PER_UM;
  mode->bend_loss_db_per_90_deg =
      (picket_quantity){loss->value * arc, loss->uncertainty * arc, loss->note};
}
