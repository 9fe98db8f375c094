/* See section_family.h. */
#include "study/section_family.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "study/section_bend.h"
#include "study/section_describe.h"
#include "study/section_member.h"

/* Members of the family of grids on each attempt; zeros are left out. The last curved one reaches
 * 1e-5 for the fundamental mode of a rod of glass in air. */
enum { ATTEMPTS = 4, MOST_GRIDS = 4, MOST_MEMBERS = ATTEMPTS * MOST_GRIDS };
static const int MEMBERS_SMOOTH[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4}, {2, 3, 4, 6}, {3, 4, 6, 8}, {4, 6, 8, 12}};
static const int MEMBERS_CURVED[ATTEMPTS][MOST_GRIDS] = {
    {2, 3, 4, 5}, {4, 5, 6, 7}, {6, 7, 8, 10}, {8, 10, 13, 16}};

/* A first look: walls this many decay lengths away; the first window is for modes this part of the
 * way up from the surroundings to the highest index (in n²), each next one for modes this much
 * weaker. On the coarsest member of what is solved later: on a coarser one modes near cut-off may
 * be lost. */
static const double LOOK_REACH = 4, LOOK_DEPTH = 0.2, DEEPER = 8;
enum { LOOK_MEMBER = 2, LOOK_AT_ONCE = 4 };

/* Modes nearer to cut-off than this part of what a window is made for are left to the next one; of
 * two windows those nearer to each other than this, as a part of their distance from cut-off, are
 * the same. */
static const double UNRESOLVED = 0.06, SAME_DEPTH = 0.2;

/* The shift of a search from above, where no mode is, as a multiple of the highest index's β². */
static const double ABOVE_TOP = 1.001;

/* Near cut-off the index of the first look, and with it the decay length, may be far off: walls
 * whose effect is above this part of the accuracy are moved away by this factor, this often. */
static const double WALL_SHARE = 0.3, WIDER = 1.6;
enum { WIDENINGS = 3 };

typedef struct run {
  pk_section_family *family;
  const pk_section_survey *survey;
  picket_context *context;
  const picket_options *options;
  pk_axis x, y;               /* base grid */
  pk_axis closed_x, closed_y; /* of the guide without leaking sides; intervals 0: none leaks */
  double reach;               /* of the walls, in decay lengths of the first look */
  pk_error_law law;
  int members;
  int member[MOST_MEMBERS];
  double *values;     /* [MOST_MEMBERS][count][PK_NUMBERS] */
  double *span_error; /* [count][PK_NUMBERS] */
  picket_section_mode *modes;
} run;

static bool leaks(const pk_section_survey *s) {
  return s->leaks[0] || s->leaks[1] || s->leaks[2] || s->leaks[3];
}

/* --- A family of grids ------------------------------------------------------------------------ */

static picket_status sample(run *r, const pk_axis *x, const pk_axis *y, int m, bool keep,
                            double *values) {
  pk_section_mode modes[PK_FAMILY_MODES] = {{0}};
  pk_section *section = NULL;
  int count = r->family->count;
  pk_axis before = pk_section_bend_before(r->survey, x);
  picket_status status = pk_section_member_open(r->survey, &before, y, m, &section);
  if (status == PICKET_OK) {
    status = pk_section_member_solve_near(r->survey, &r->closed_x, &r->closed_y, m, section,
                                          r->family->lowest[0], count, modes);
  }
  if (status == PICKET_OK) {
    status = pk_section_bend_follow(r->survey, x, y, m, &section, count, modes);
  }
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    status = pk_section_describe(r->family, section, &modes[i], values + i * PK_NUMBERS,
                                 keep ? &r->modes[i] : NULL);
  }
  if (status == PICKET_OK) {
    pk_log(r->context, PICKET_LOG_INFO, "section: grid 1/%d, %lld unknowns, index %.10g", m,
           (long long)pk_section_size(section), values[PK_NUMBER_INDEX]);
  }
  pk_section_modes_clear(r->context, count, modes);
  pk_section_free(section);
  return status;
}

static double *values_of(const run *r, int m) {
  for (int i = 0; i < r->members; i++) {
    if (r->member[i] == m) {
      return r->values + (ptrdiff_t)i * r->family->count * PK_NUMBERS;
    }
  }
  return NULL;
}

static picket_status sample_grids(run *r, const int *m, int count) {
  picket_status status = PICKET_OK;
  for (int g = 0; status == PICKET_OK && g < count; g++) {
    if (values_of(r, m[g])) {
      continue;
    }
    status = pk_progress(r->context, "modes of the section", (double)g / count);
    double *values = r->values + (ptrdiff_t)r->members * r->family->count * PK_NUMBERS;
    if (status == PICKET_OK) {
      status = sample(r, &r->x, &r->y, m[g], true, values);
    }
    if (status == PICKET_OK) {
      r->member[r->members++] = m[g];
    }
  }
  return status;
}

static double reach_for(double accuracy) {
  return 0.5 * log(10 / accuracy) + 1;
}

static pk_section_wish wish_of(const run *r, pk_end outer, bool closed) {
  const pk_section_family *f = r->family;
  pk_section_wish wish = {.index = f->lowest[f->count - 1],
                          .leaking = pk_section_bend_leaking(f->survey, f->count, f->lowest),
                          .reach = r->reach,
                          .closed = closed,
                          .accuracy = r->options->accuracy,
                          .outer = outer};
  memcpy(wish.plane, r->family->plane, sizeof wish.plane);
  return wish;
}

static picket_status lay(run *r, pk_end outer, pk_axis *x, pk_axis *y) {
  pk_section_wish wish = wish_of(r, outer, false);
  return pk_section_survey_lay(r->survey, &wish, x, y);
}

static picket_status lay_closed(run *r) {
  pk_section_wish wish = wish_of(r, PK_END_ZERO, true);
  picket_status status = pk_section_survey_lay(r->survey, &wish, &r->closed_x, &r->closed_y);
  return status;
}

/* The values on member m with other walls along x or y: adds how far they are off. */
static picket_status add_span_error(run *r, const pk_axis *x, const pk_axis *y, int m,
                                    double *moved) {
  picket_status status = sample(r, x, y, m, false, moved);
  const double *known = values_of(r, m);
  for (int i = 0; status == PICKET_OK && i < r->family->count * PK_NUMBERS; i++) {
    r->span_error[i] += fabs(moved[i] - known[i]);
  }
  return status;
}

/* Magnetic walls move a value the other way than electric ones, by the same amount to first order:
 * half the difference is the error of either. The whole difference is taken, as the second order is
 * not known. The walls of one axis at a time: an electric wall is a zero to the field along it and
 * a free end to the one across, so that the two axes may cancel. */
static picket_status sample_span_error(run *r, int m) {
  int count = r->family->count * PK_NUMBERS;
  memset(r->span_error, 0, (size_t)count * sizeof *r->span_error);
  if (r->survey->closed[0] && r->survey->closed[1]) {
    return PICKET_OK;
  }
  pk_axis x = {0}, y = {0};
  double *moved = PK_NEW(r->context, count, double);
  picket_status status = moved ? lay(r, PK_END_FREE, &x, &y) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK && !r->survey->closed[0]) {
    status = add_span_error(r, &x, &r->y, m, moved);
  }
  if (status == PICKET_OK && !r->survey->closed[1]) {
    status = add_span_error(r, &r->x, &y, m, moved);
  }
  pk_axis_clear(r->context, &x);
  pk_axis_clear(r->context, &y);
  pk_free(r->context, moved);
  return status;
}

static picket_quantity judge(const run *r, const int *m, int count, int number) {
  double column[MOST_GRIDS] = {0};
  bool zero = true;
  for (int g = 0; g < count; g++) {
    column[g] = values_of(r, m[g])[number];
    zero = zero && column[g] == 0;
  }
  pk_error_law law = pk_section_number_law(&r->law, number % PK_NUMBERS);
  picket_quantity q = pk_extrapolate(&law, count, m, column);
  q.uncertainty *= pk_section_number_caution(number % PK_NUMBERS);
  q.uncertainty = zero ? 0 : q.uncertainty + r->span_error[number];
  q.note = zero ? NULL : isnan(q.value) ? pk_section_number_note(number % PK_NUMBERS) : q.note;
  return q;
}

static const char NOTE_ALL_AROUND[] =
    "no error bar: the guide leaks on all sides, and what the absorbing layers add to so small a "
    "loss "
    "is not measured";

/* A fibre of six holes came out 1.4 % off its published loss with grids that agreed to 0.7 %. */
static void judge_leakage(const pk_section_survey *s, picket_quantity *loss) {
  if (s->leaks[0] && s->leaks[1] && s->leaks[2] && s->leaks[3]) {
    loss->uncertainty = NAN;
    loss->note = NOTE_ALL_AROUND;
  }
}

/* The largest bar of an index or group index as a multiple of what was asked. */
static double judge_all(run *r, const int *m, int count) {
  double worst = 0;
  for (int i = 0; i < r->family->count; i++) {
    picket_section_mode *mode = &r->modes[i];
    for (int k = 0; k < PK_NUMBERS; k++) {
      *pk_section_quantity(mode, k) = judge(r, m, count, i * PK_NUMBERS + k);
    }
    judge_leakage(r->survey, &mode->loss_db_per_cm);
    pk_section_bend_judge(r->family, i, mode);
    const picket_quantity *held[2] = {&mode->index, &mode->group_index};
    for (int k = 0; k < 2; k++) {
      if (isfinite(held[k]->uncertainty)) {
        worst = fmax(worst, held[k]->uncertainty / fabs(held[k]->value) / r->options->accuracy);
      }
    }
  }
  return worst;
}

static picket_status mark_partial(const run *r, double worst, picket_result *result) {
  char text[256];
  snprintf(text, sizeof text,
           "modes of the section: the largest uncertainty is %.2g of its value, %.1g was asked; "
           "allow more unknowns (now %.0f) or ask for less",
           worst * r->options->accuracy, r->options->accuracy, r->options->unknowns);
  result->complete = false;
  pk_free(r->context, result->shortfall);
  result->shortfall = pk_text_copy(r->context, text);
  return result->shortfall ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* The largest effect of the walls on an index or group index as a multiple of what was asked. */
static double walls_matter(const run *r, int m) {
  double worst = 0;
  const double *values = values_of(r, m);
  for (int i = 0; i < r->family->count * PK_NUMBERS; i++) {
    int number = i % PK_NUMBERS;
    if (number == PK_NUMBER_INDEX || number == PK_NUMBER_GROUP) {
      worst = fmax(worst, r->span_error[i] / fabs(values[i]) / r->options->accuracy);
    }
  }
  return worst;
}

/* Lays base grids whose walls are far enough, and samples the first member. */
static picket_status lay_wide_enough(run *r, int m) {
  picket_status status = PICKET_OK;
  r->reach = reach_for(r->options->accuracy);
  const double *span = r->survey->block->span_um;
  int widenings = span[0] > 0 && span[1] > 0 ? 0 : WIDENINGS; /* walls that are given stay */
  for (int i = 0; status == PICKET_OK && i <= widenings; i++) {
    pk_axis_clear(r->context, &r->x);
    pk_axis_clear(r->context, &r->y);
    pk_axis_clear(r->context, &r->closed_x);
    pk_axis_clear(r->context, &r->closed_y);
    r->members = 0;
    status = lay(r, PK_END_ZERO, &r->x, &r->y);
    if (status == PICKET_OK && leaks(r->survey)) {
      status = lay_closed(r);
    }
    if (status == PICKET_OK) {
      status = sample_grids(r, &m, 1);
    }
    if (status == PICKET_OK) {
      status = sample_span_error(r, m);
    }
    if (status == PICKET_OK && walls_matter(r, m) <= WALL_SHARE) {
      break;
    }
    r->reach *= WIDER;
  }
  return status;
}

static picket_status refine(run *r, picket_result *result) {
  double worst = 0;
  for (int attempt = 0; attempt < ATTEMPTS; attempt++) {
    const int *m = r->law.smooth ? MEMBERS_SMOOTH[attempt] : MEMBERS_CURVED[attempt];
    int count = m[MOST_GRIDS - 1] > 0 ? MOST_GRIDS : MOST_GRIDS - 1;
    double unknowns = 2.0 * r->x.intervals * r->y.intervals * m[count - 1] * m[count - 1];
    if (attempt > 0 && unknowns > r->options->unknowns) {
      break;
    }
    picket_status status = sample_grids(r, m, count);
    if (status != PICKET_OK) {
      return status;
    }
    worst = judge_all(r, m, count);
    if (worst <= 1) {
      return PICKET_OK;
    }
    if (walls_matter(r, MEMBERS_SMOOTH[0][0]) > 1) { /* finer grids do not help */
      break;
    }
  }
  return mark_partial(r, worst, result);
}

/* Names of materials become texts of the result, which may outlive the problem. */
static picket_status own_names(run *r, picket_result *result) {
  for (int i = 0; i < r->family->count; i++) {
    picket_confinement *list = (picket_confinement *)r->modes[i].confinement;
    for (int m = 0; m < r->modes[i].material_count; m++) {
      list[m].material = pk_result_text(result, list[m].material);
      if (!list[m].material) {
        return PICKET_ERROR_MEMORY;
      }
    }
  }
  return PICKET_OK;
}

picket_status pk_section_family_converge(pk_section_family *family, const picket_options *options,
                                         picket_result *result, picket_section_mode *modes) {
  picket_context *context = family->survey->problem->context;
  run r = {.family = family,
           .survey = family->survey,
           .context = context,
           .options = options,
           .modes = modes};
  r.values = PK_NEW(context, MOST_MEMBERS * family->count * PK_NUMBERS, double);
  r.span_error = PK_NEW(context, family->count * PK_NUMBERS, double);
  picket_status status = r.values && r.span_error ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = lay_wide_enough(&r, MEMBERS_SMOOTH[0][0]);
  }
  if (status == PICKET_OK) {
    status = pk_section_survey_law(r.survey, &r.x, &r.y, &r.law);
  }
  if (status == PICKET_OK) {
    status = refine(&r, result);
  }
  if (status == PICKET_OK) {
    status = own_names(&r, result);
  }
  for (int i = 0; status != PICKET_OK && i < family->count; i++) {
    pk_free(context, (void *)modes[i].confinement);
    modes[i] = (picket_section_mode){0};
  }
  pk_axis_clear(context, &r.x);
  pk_axis_clear(context, &r.y);
  pk_axis_clear(context, &r.closed_x);
  pk_axis_clear(context, &r.closed_y);
  pk_free(context, r.values);
  pk_free(context, r.span_error);
  return status;
}

/* --- First look ------------------------------------------------------------------------------- */

/* One window of a look: walls for modes with n² = cut² + depth. */
typedef struct look {
  pk_section_family *family;
  int most;
  double depth;
  double ceiling; /* n² of the weakest mode of the windows before, a little lowered */
} look;

static picket_status take_guided(look *l, pk_section *section, double shift, int wanted, int *found,
                                 int *taken) {
  pk_section_family *f = l->family;
  const pk_section_survey *s = f->survey;
  pk_section_mode modes[PK_FAMILY_MODES];
  picket_status status = pk_section_modes(section, s->k0, shift, wanted, modes, found);
  if (status != PICKET_OK) {
    return status;
  }
  *taken = 0;
  for (int i = 0; i < *found; i++) {
    double index = creal(modes[i].beta) / s->k0;
    double above = index * index - s->cut * s->cut;
    bool guided = index > s->cut && cimag(modes[i].beta) < creal(modes[i].beta);
    if (guided && above > UNRESOLVED * l->depth && index * index < l->ceiling &&
        f->count + *taken < l->most) {
      f->lowest[f->count + (*taken)++] = index;
    }
  }
  pk_section_modes_clear(s->problem->context, *found, modes);
  return PICKET_OK;
}

/* The first window is searched from above until modes that are not guided turn up, the wider ones
 * near the modes they are made for. */
static picket_status search_window(look *l, pk_section *section, bool first) {
  const pk_section_survey *s = l->family->survey;
  double k_square = s->k0 * s->k0;
  double shift =
      first ? k_square * s->top * s->top * ABOVE_TOP : k_square * (s->cut * s->cut + 2 * l->depth);
  int wanted = l->most < LOOK_AT_ONCE ? l->most : LOOK_AT_ONCE, found = 0, taken = 0;
  for (;;) {
    picket_status status = take_guided(l, section, shift, wanted, &found, &taken);
    bool more = taken == found && found == wanted && wanted < l->most;
    if (status != PICKET_OK || !more) {
      l->family->count += status == PICKET_OK ? taken : 0;
      return status;
    }
    wanted = 3 * wanted < l->most ? 3 * wanted : l->most;
  }
}

static picket_status look_through(look *l, bool first) {
  pk_section_family *f = l->family;
  const pk_section_survey *s = f->survey;
  picket_context *context = s->problem->context;
  pk_axis x = {0}, y = {0};
  pk_section *section = NULL;
  pk_section_wish wish = {.index = sqrt(s->cut * s->cut + l->depth),
                          .reach = LOOK_REACH,
                          .closed = true,
                          .accuracy = 1e-2,
                          .outer = PK_END_ZERO};
  memcpy(wish.plane, f->plane, sizeof wish.plane);
  picket_status status = pk_section_survey_lay(s, &wish, &x, &y);
  if (status == PICKET_OK) {
    status = pk_section_member_open(s, &x, &y, LOOK_MEMBER, &section);
  }
  if (status == PICKET_OK) {
    status = search_window(l, section, first);
  }
  pk_section_free(section);
  pk_axis_clear(context, &x);
  pk_axis_clear(context, &y);
  if (status == PICKET_ERROR_NUMERIC && !first) { /* nothing stands out there */
    pk_message_clear(context);
    status = PICKET_OK;
  }
  return status;
}

/* Windows grow until they hold the weakest modes that are followed: in a wide one the modes of the
 * window itself crowd, and only those near the shift can be told from each other. */
picket_status pk_section_family_look(pk_section_family *f, int most) {
  const pk_section_survey *s = f->survey;
  f->count = 0;
  if (s->cut >= s->top) {
    return PICKET_OK;
  }
  double least = pk_section_survey_least_depth();
  look l = {.family = f, .most = most, .ceiling = INFINITY};
  l.depth = LOOK_DEPTH * (s->top * s->top - s->cut * s->cut);
  picket_status status = look_through(&l, true);
  bool open = !s->closed[0] || !s->closed[1];
  while (status == PICKET_OK && open && s->cut > 0 && l.depth > least && f->count < most) {
    if (f->count > 0) {
      double weakest = f->lowest[f->count - 1] * f->lowest[f->count - 1];
      l.ceiling = weakest - SAME_DEPTH * (weakest - s->cut * s->cut);
    }
    l.depth = fmax(l.depth / DEEPER, 0.5 * least);
    status = look_through(&l, false);
  }
  return status;
}
