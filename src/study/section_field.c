/* See section_field.h. The families of modes are counted by a first look; each is solved once on
 * one member of its grids, its modes are unfolded to the whole window, and all are put in the order
 * of their indices there.
 *
 * Units: the section's E and h = Z0 H have one unit. With E in V/m and lengths in µm the power is
 * ½/Z0 ∫ Re(E × h*)_z dx dy × 1e-12 W. */
#include "study/section_field.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "section/sites.h"
#include "study/section_look.h"
#include "study/section_member.h"
#include "study/sweep.h"

static const double IMPEDANCE = 376.730313668; /* Z0, Ω; CODATA 2018 */
static const double SQUARE_M_PER_UM2 = 1e-12;

/* Members of the family of grids by the accuracy asked: a picture, the default, and a grid for
 * computing on. The base has 6 steps per shortest wavelength across (section_survey.c). */
enum { COARSE = 2, USUAL = 4, FINE = 8 };
static const double LOW_ACCURACY = 1e-3, HIGH_ACCURACY = 1e-4;

/* Values within this part of the largest are as large: rounding must not choose between the lobes
 * of a symmetric mode. */
static const double EQUALLY_LARGE = 1e-6;

static const char PHASE[] = "mode fields";
enum { NOTE_BYTES = 512, ALL_MODES = 20 };

typedef struct finder {
  const pk_problem *problem;
  const picket_options *options;
  double wavelength_um;
  double from, part; /* of the progress: where this wavelength begins, and its share */
  pk_section_survey survey;
  pk_section_families families;
  int count; /* fields found so far */
  picket_section_field *field[PK_FAMILIES * PK_FAMILY_MODES];
} finder;

void pk_section_field_free(picket_section_field *field) {
  if (!field) {
    return;
  }
  picket_context *context = field->context;
  pk_section_whole_clear(&field->whole);
  for (int c = 0; c < PK_ELECTRIC; c++) {
    pk_free(context, field->permittivity[c]);
  }
  pk_free(context, field);
  pk_context_release(context);
}

/* --- Permittivities --------------------------------------------------------------------------- */

static const double complex *value_at(const finder *f, int c, double x, double y) {
  int medium = pk_geometry_medium_at(f->survey.block->geometry, x, y);
  return &f->survey.permittivity[c * f->survey.media + medium];
}

/* An array unfolded like a field, but even at every mirror plane; places without unknowns, on walls
 * and mirror planes that E is normal to, have the medium of the place. */
static void straighten(const finder *f, const pk_section_whole *w, pk_whole_name c,
                       double complex *values) {
  int nx = pk_whole_count(w, c, PK_U), ny = pk_whole_count(w, c, PK_V);
  const double *x = pk_whole_places(w, c, PK_U), *y = pk_whole_places(w, c, PK_V);
  for (int i = nx - 1; i >= 0; i--) {
    for (int j = ny - 1; j >= 0; j--) {
      int from_i = f->survey.mirror[0] && i < nx - 1 - i ? nx - 1 - i : i;
      int from_j = f->survey.mirror[1] && j < ny - 1 - j ? ny - 1 - j : j;
      double complex v = values[(ptrdiff_t)from_i * ny + from_j];
      values[(ptrdiff_t)i * ny + j] = v != 0 ? v : *value_at(f, (int)c, x[i], y[j]);
    }
  }
}

static picket_status take_permittivities(const finder *f, pk_section *section,
                                         const pk_section_fields *fields,
                                         picket_section_field *field) {
  pk_sites sites = {0};
  pk_section_whole w = {0};
  picket_status status = pk_sites_create(section, &sites);
  if (status == PICKET_OK) {
    status = pk_sites_fill(section, f->survey.permittivity, &sites);
  }
  if (status == PICKET_OK) {
    pk_section_fields disguised = *fields;
    disguised.ex = sites.x;
    disguised.ey = sites.y;
    disguised.ez = sites.z;
    status = pk_section_unfold(section, &disguised, f->survey.mirror, &w);
  }
  for (int c = 0; status == PICKET_OK && c < PK_ELECTRIC; c++) {
    straighten(f, &w, (pk_whole_name)c, w.field[c]);
    field->permittivity[c] = w.field[c];
    w.field[c] = NULL;
  }
  pk_section_whole_clear(&w);
  pk_sites_free(section, &sites);
  return status;
}

/* --- Scale ------------------------------------------------------------------------------------ */

/* The part of the interval around a place that lies between two bounds: from middle to middle for a
 * line, from line to line for a middle. */
static double share_of(const pk_section_whole *w, pk_axis_name axis, bool on_middle, int i,
                       double from, double to) {
  const double *line = w->line[axis], *middle = w->middle[axis];
  int last = w->lines[axis] - 1;
  double low = on_middle ? line[i] : i > 0 ? middle[i - 1] : line[0];
  double high = on_middle ? line[i + 1] : i < last ? middle[i] : line[last];
  return fmax(0, fmin(high, to) - fmax(low, from));
}

/* ∫ Re(a b*) over the window of two components at the same places. */
static double product(const picket_section_field *field, pk_whole_name a, pk_whole_name b) {
  const pk_section_whole *w = &field->whole;
  const picket_section_field_description *d = &field->about;
  int nx = pk_whole_count(w, a, PK_U), ny = pk_whole_count(w, a, PK_V);
  double sum = 0;
  for (int i = 0; i < nx; i++) {
    double dx = share_of(w, PK_U, pk_whole_on_middles(a, PK_U), i, d->x_from_um, d->x_to_um);
    for (int j = 0; j < ny; j++) {
      ptrdiff_t p = (ptrdiff_t)i * ny + j;
      double dy = share_of(w, PK_V, pk_whole_on_middles(a, PK_V), j, d->y_from_um, d->y_to_um);
      sum += dx * dy * creal(w->field[a][p] * conj(w->field[b][p]));
    }
  }
  return sum;
}

static ptrdiff_t places_of(const pk_section_whole *w, pk_whole_name c) {
  return (ptrdiff_t)pk_whole_count(w, c, PK_U) * pk_whole_count(w, c, PK_V);
}

/* The factor that makes the largest value of E_x and E_y real and positive. */
static double complex turn_of(const pk_section_whole *w) {
  double largest = 0;
  for (int c = PK_WHOLE_EX; c <= PK_WHOLE_EY; c++) {
    for (ptrdiff_t p = 0; p < places_of(w, (pk_whole_name)c); p++) {
      largest = fmax(largest, cabs(w->field[c][p]));
    }
  }
  for (int c = PK_WHOLE_EX; c <= PK_WHOLE_EY; c++) {
    for (ptrdiff_t p = 0; p < places_of(w, (pk_whole_name)c); p++) {
      double size = cabs(w->field[c][p]);
      if (size > 0 && size >= (1 - EQUALLY_LARGE) * largest) {
        return conj(w->field[c][p]) / size;
      }
    }
  }
  return 1;
}

static picket_status scale(const finder *f, picket_section_field *field) {
  pk_section_whole *w = &field->whole;
  double power =
      product(field, PK_WHOLE_EX, PK_WHOLE_HY) - product(field, PK_WHOLE_EY, PK_WHOLE_HX);
  power *= 0.5 / IMPEDANCE * SQUARE_M_PER_UM2;
  if (!(power > 0)) {
    return pk_fail(f->problem->context, PICKET_ERROR_NUMERIC,
                   "a mode of the section at %.10g nm carries no power", 1e3 * f->wavelength_um);
  }
  double complex factor = turn_of(w) / sqrt(power);
  for (int c = 0; c < PK_WHOLE_NAMES; c++) {
    double complex by = c < PK_ELECTRIC ? factor : factor / IMPEDANCE;
    for (ptrdiff_t p = 0; p < places_of(w, (pk_whole_name)c); p++) {
      w->field[c][p] *= by;
    }
  }
  return PICKET_OK;
}

/* --- A mode ----------------------------------------------------------------------------------- */

/* The window without absorbing layers; what a mirror plane cuts off has what the other side has. */
static void take_window(const pk_axis *axis, bool mirrored, double *from, double *to) {
  *to = axis->line[axis->intervals] - axis->layer[1].thickness;
  *from = mirrored ? 2 * axis->line[0] - *to : axis->line[0] + axis->layer[0].thickness;
}

static picket_status make_field(const finder *f, const pk_axis *x, const pk_axis *y,
                                pk_section *section, const pk_section_mode *mode,
                                picket_section_field **out) {
  pk_section_fields fields = {0};
  picket_section_field *field = PK_NEW(f->problem->context, 1, picket_section_field);
  if (!field) {
    return PICKET_ERROR_MEMORY;
  }
  field->context = pk_context_hold(f->problem->context);
  field->about = (picket_section_field_description){.wavelength_um = f->wavelength_um,
                                                    .index_re = creal(mode->beta) / f->survey.k0,
                                                    .index_im = cimag(mode->beta) / f->survey.k0};
  take_window(x, f->survey.mirror[0], &field->about.x_from_um, &field->about.x_to_um);
  take_window(y, f->survey.mirror[1], &field->about.y_from_um, &field->about.y_to_um);
  picket_status status = pk_section_fields_take(section, f->survey.k0, mode, &fields);
  if (status == PICKET_OK) {
    status = pk_section_unfold(section, &fields, f->survey.mirror, &field->whole);
  }
  if (status == PICKET_OK) {
    status = take_permittivities(f, section, &fields, field);
  }
  if (status == PICKET_OK) {
    status = scale(f, field);
  }
  pk_section_fields_clear(&fields);
  if (status != PICKET_OK) {
    pk_section_field_free(field);
    return status;
  }
  *out = field;
  return PICKET_OK;
}

/* --- A family --------------------------------------------------------------------------------- */

static picket_status lay(const finder *f, const pk_section_family *family, bool closed, pk_axis *x,
                         pk_axis *y) {
  pk_section_wish wish = {.index = family->lowest[family->count - 1],
                          .reach = 0.5 * log(10 / f->options->accuracy) + 1, /* as the indices */
                          .closed = closed,
                          .accuracy = f->options->accuracy,
                          .outer = PK_END_ZERO};
  memcpy(wish.plane, family->plane, sizeof wish.plane);
  return pk_section_survey_lay(&f->survey, &wish, x, y);
}

static int member_for(const finder *f, const pk_axis *x, const pk_axis *y) {
  double accuracy = f->options->accuracy, base = 2.0 * x->intervals * y->intervals;
  int m = accuracy >= LOW_ACCURACY ? COARSE : accuracy >= HIGH_ACCURACY ? USUAL : FINE;
  while (m > COARSE && base * m * m > f->options->unknowns) {
    m--;
  }
  return m;
}

static bool leaks(const pk_section_survey *s) {
  return s->leaks[0] || s->leaks[1] || s->leaks[2] || s->leaks[3];
}

static picket_status solve_family(finder *f, const pk_section_family *family) {
  picket_context *context = f->problem->context;
  pk_axis x = {0}, y = {0}, closed_x = {0}, closed_y = {0};
  pk_section_mode modes[PK_FAMILY_MODES] = {{0}};
  pk_section *section = NULL;
  int m = 0, solved = 0;
  picket_status status = lay(f, family, false, &x, &y);
  if (status == PICKET_OK && leaks(&f->survey)) {
    status = lay(f, family, true, &closed_x, &closed_y);
  }
  if (status == PICKET_OK) {
    m = member_for(f, &x, &y);
    status = pk_section_member_open(&f->survey, &x, &y, m, &section);
  }
  if (status == PICKET_OK) {
    status =
        pk_section_member_solve(&f->survey, &closed_x, &closed_y, m, section, family->count, modes);
    solved = status == PICKET_OK ? family->count : 0;
  }
  for (int i = 0; status == PICKET_OK && i < solved; i++) {
    if (cimag(modes[i].beta) >= creal(modes[i].beta)) {
      continue; /* guided on the coarse grid, cut off on this one: it carries no power */
    }
    status = make_field(f, &x, &y, section, &modes[i], &f->field[f->count]);
    f->count += status == PICKET_OK;
  }
  pk_section_modes_clear(context, solved, modes);
  pk_section_free(section);
  pk_axis *axes[] = {&x, &y, &closed_x, &closed_y};
  for (size_t i = 0; i < sizeof axes / sizeof axes[0]; i++) {
    pk_axis_clear(context, axes[i]);
  }
  return status;
}

/* --- A wavelength ----------------------------------------------------------------------------- */

/* Of each family only the modes that are among the `most` of highest index. */
static void keep_highest(finder *f, int most) {
  int kept[PK_FAMILIES] = {0}, place = 0;
  const pk_section_family *family = NULL;
  for (int i = 0; i < most && (family = pk_section_look_up(&f->families, i, &place)); i++) {
    kept[family - f->families.family] = place + 1;
  }
  for (int i = 0; i < f->families.count; i++) {
    f->families.family[i].count = kept[i];
  }
}

static int by_falling_index(const void *a, const void *b) {
  const picket_section_field *const *p = a, *const *q = b;
  return ((*p)->about.index_re < (*q)->about.index_re) -
         ((*p)->about.index_re > (*q)->about.index_re);
}

static picket_status no_mode(const pk_problem *problem, int order, double wavelength_um) {
  return pk_fail(problem->context, PICKET_ERROR_NO_MODE,
                 "the section guides no mode of order %d at %.10g nm", order, 1e3 * wavelength_um);
}

/* All fields of the finder, by falling index; PICKET_ERROR_NO_MODE without one. */
static picket_status find(finder *f, int most) {
  picket_status status = pk_progress(f->problem->context, PHASE, f->from);
  if (status == PICKET_OK) {
    status = pk_section_survey_take(f->problem, &f->problem->section, f->wavelength_um, &f->survey);
  }
  if (status == PICKET_OK) {
    status = pk_section_look_at(&f->survey, most, &f->families);
  }
  if (status == PICKET_OK) {
    keep_highest(f, most);
  }
  for (int i = 0; status == PICKET_OK && i < f->families.count; i++) {
    double done = (i + 1.0) / (f->families.count + 1);
    status = pk_progress(f->problem->context, PHASE, f->from + f->part * done);
    if (status == PICKET_OK && f->families.family[i].count > 0) {
      status = solve_family(f, &f->families.family[i]);
    }
  }
  if (status == PICKET_OK && f->count == 0) {
    status = no_mode(f->problem, 0, f->wavelength_um);
  }
  qsort(f->field, (size_t)f->count, sizeof f->field[0], by_falling_index);
  for (int i = 0; i < f->count; i++) {
    f->field[i]->about.order = i;
  }
  pk_section_survey_clear(&f->survey);
  return status;
}

static void finder_clear(finder *f) {
  for (int i = 0; i < f->count; i++) {
    pk_section_field_free(f->field[i]);
  }
  pk_free(f->problem->context, f);
}

static picket_status finder_new(const pk_problem *problem, const picket_options *options,
                                double wavelength_um, finder **out) {
  finder *f = PK_NEW(problem->context, 1, finder); /* too large for a stack of threads */
  if (!f) {
    return PICKET_ERROR_MEMORY;
  }
  f->problem = problem;
  f->options = options;
  f->wavelength_um = wavelength_um;
  f->part = 1;
  *out = f;
  return PICKET_OK;
}

static picket_status check_section(const pk_problem *problem) {
  const pk_section_block *section = &problem->section;
  if (!section->given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"section\", which is what the mode field is of");
  }
  if (section->bend_radius_um > 0) {
    return pk_fail_at(problem->context, PICKET_ERROR_UNSUPPORTED, section->place,
                      "section.bend_radius_um is %.10g um, but fields are those of straight "
                      "sections only",
                      section->bend_radius_um);
  }
  return PICKET_OK;
}

picket_status pk_section_field(const pk_problem *problem, double wavelength_um,
                               const picket_options *options, int order,
                               picket_section_field **out) {
  finder *f = NULL;
  picket_status status = check_section(problem);
  if (status == PICKET_OK) {
    status = finder_new(problem, options, wavelength_um, &f);
  }
  if (status != PICKET_OK) {
    return status;
  }
  status = find(f, order + 1);
  if (status == PICKET_OK && order >= f->count) {
    status = no_mode(problem, order, wavelength_um);
  }
  if (status == PICKET_OK) {
    *out = f->field[order];
    f->field[order] = NULL;
  }
  finder_clear(f);
  return status;
}

/* --- All wavelengths -------------------------------------------------------------------------- */

typedef struct run {
  const pk_section_sink *sink;
  double from, part;   /* of the progress: where this wavelength begins, and its share */
  int found;           /* fields taken so far */
  picket_status first; /* the first failure of a wavelength, and what it said */
  char note[NOTE_BYTES];
} run;

static picket_status take_point(const pk_problem *problem, const picket_options *options,
                                double wavelength_um, run *r) {
  finder *f = NULL;
  int most = options->count > 0 ? (int)options->count : ALL_MODES;
  picket_status status = finder_new(problem, options, wavelength_um, &f);
  if (status != PICKET_OK) {
    return status;
  }
  f->from = r->from;
  f->part = r->part;
  status = find(f, most);
  for (int i = 0; status == PICKET_OK && i < f->count; i++) {
    status = r->sink->take(r->sink->user, f->field[i]);
    r->found++;
  }
  finder_clear(f);
  if (!pk_sweep_is_of_a_piece(status)) {
    return status;
  }
  char note[NOTE_BYTES];
  snprintf(note, sizeof note, "%s", picket_context_message(problem->context));
  pk_message_clear(problem->context);
  if (r->first == PICKET_OK) {
    r->first = status;
    memcpy(r->note, note, sizeof note);
  }
  return r->sink->miss(r->sink->user, wavelength_um, note);
}

picket_status pk_study_section_fields(const pk_problem *problem, const picket_options *options,
                                      const pk_section_sink *sink) {
  run r = {.sink = sink, .first = PICKET_OK};
  const pk_light *light = &problem->light;
  picket_status status = check_section(problem);
  if (status == PICKET_OK && light->count == 0) {
    status = pk_fail_at(problem->context, PICKET_ERROR_INPUT, problem->section.place,
                        "mode fields need \"light.wavelength_nm\", which is not given");
  }
  for (int i = 0; status == PICKET_OK && i < light->count; i++) {
    r.from = (double)i / light->count;
    r.part = 1.0 / light->count;
    status = take_point(problem, options, light->wavelength_um[i], &r);
  }
  if (status == PICKET_OK && r.found == 0) {
    status = pk_fail(problem->context, r.first, "%s", r.note);
  }
  return status;
}
