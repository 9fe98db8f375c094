/* See fields.h. A mode is found by a first look and solved once more on one member of the base grid
 * that the index study uses.
 *
 * Units: with lengths in µm and k0 in 1/µm, ωμ₀ = k0 Z₀ and ωε₀ = k0/Z₀ (per µm), so a field made
 * of J (components.h) and of u in SI units is in SI units. Power per height is the flux of
 * components.h over 2 k0 Z₀ (ey) or 2 k0/Z₀ (hy), times 1e-6 for a width in µm. */
#include "study/fields.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "study/look.h"

static const double PI = 3.141592653589793238;
static const double IMPEDANCE = 376.730313668; /* Z₀, Ω; CODATA 2018 */
static const double M_PER_UM = 1e-6;

/* Members of the family of grids by the accuracy asked: a picture, the default, and a grid for
 * computing on. The base has 8 steps per pitch. */
enum { COARSE = 2, USUAL = 4, FINE = 8 };
static const double LOW_ACCURACY = 1e-3, HIGH_ACCURACY = 1e-4;

/* A wave whose net power is below this part of ½ ∫|E||H| does not propagate. In a stop band on a
 * grid it is 1e-9 and less; next to a band edge, where the group index is a thousand, 1e-3. */
static const double LEAST_FLUX = 1e-6;

/* Values within this part of the largest are as large: rounding must not choose between the lobes
 * of a symmetric mode. */
static const double EQUALLY_LARGE = 1e-6;

enum { NOTE_BYTES = 512 };

void pk_mode_field_free(picket_field *field) {
  if (!field) {
    return;
  }
  picket_context *context = field->context;
  void *arrays[] = {field->z, field->x, field->along, field->across, field->y, field->permittivity,
                    field};
  for (size_t i = 0; i < sizeof arrays / sizeof arrays[0]; i++) {
    pk_free(context, arrays[i]);
  }
  pk_context_release(context);
}

const double complex *pk_mode_field_values(const picket_field *field, picket_component which) {
  bool electric = which <= PICKET_COMPONENT_EZ;
  bool unknown = electric == (field->about.polarization == PICKET_EY);
  switch (which) {
    case PICKET_COMPONENT_EY:
    case PICKET_COMPONENT_HY: return unknown ? field->y : NULL;
    case PICKET_COMPONENT_EX:
    case PICKET_COMPONENT_HX: return unknown ? NULL : field->across;
    case PICKET_COMPONENT_EZ:
    case PICKET_COMPONENT_HZ: break;
  }
  return unknown ? NULL : field->along;
}

/* ½ ∫|E||H| dx over all lines, mean over a pitch, of the transverse components: what a wave of
 * these amplitudes could carry. */
static double most_power(const picket_field *field) {
  double sum = 0, width = field->nx > 1 ? M_PER_UM : 1;
  for (int i = 0; i + 1 < field->nz; i++) {
    for (int j = 0; j < field->nx; j++) {
      int low = j > 0 ? j - 1 : 0, high = j + 1 < field->nx ? j + 1 : j;
      double dx = field->nx > 1 ? 0.5 * (field->x[high] - field->x[low]) : 1;
      int64_t p = (int64_t)i * field->nx + j;
      sum += 0.5 * (field->z[i + 1] - field->z[i]) * dx * width * cabs(field->across[p]) *
             cabs(field->y[p]);
    }
  }
  return sum / field->about.pitch_um;
}

static double largest_of(const picket_field *field, const double complex *values) {
  double largest = 0;
  for (int64_t i = 0; i < (int64_t)field->nz * field->nx; i++) {
    largest = fmax(largest, cabs(values[i]));
  }
  return largest;
}

/* The factor that makes the largest value of the unknown real and positive. */
static double complex turn_of(const picket_field *field) {
  double enough = (1 - EQUALLY_LARGE) * largest_of(field, field->y);
  for (int64_t i = 0; i < (int64_t)field->nz * field->nx; i++) {
    if (cabs(field->y[i]) >= enough && enough > 0) {
      return conj(field->y[i]) / cabs(field->y[i]);
    }
  }
  return 1;
}

/* From u and J to E and H with u as it is; then to unit power or largest value. */
static void scale(picket_field *field, double k0, double flux, bool stopped) {
  bool ey = field->about.polarization == PICKET_EY;
  int64_t places = (int64_t)field->nz * field->nx;
  double ratio = ey ? 1 / (k0 * IMPEDANCE) : IMPEDANCE / k0;
  double complex x_factor = (ey ? I : -I) * ratio, z_factor = -x_factor;
  for (int64_t i = 0; i < places; i++) {
    field->across[i] *= x_factor;
    field->along[i] *= z_factor;
  }
  double power = 0.5 * ratio * flux * (field->nx > 1 ? M_PER_UM : 1);
  field->about.propagates = !stopped && power > LEAST_FLUX * most_power(field);
  double size = 1 / fmax(largest_of(field, field->y),
                         fmax(largest_of(field, field->along), largest_of(field, field->across)));
  double complex factor = turn_of(field) * (field->about.propagates ? 1 / sqrt(power) : size);
  for (int64_t i = 0; i < places; i++) {
    field->y[i] *= factor;
    field->across[i] *= factor;
    field->along[i] *= factor;
  }
}

/* J_z belongs to the x component and J_x to the z component. */
static void move_arrays(pk_components *c, picket_field *field) {
  field->nz = c->nz;
  field->nx = c->nx;
  field->z = c->z;
  field->x = c->x;
  field->y = c->u;
  field->across = c->along;
  field->along = c->across;
  field->permittivity = c->permittivity;
  memset(c, 0, sizeof *c);
}

static picket_status make_field(const pk_look *look, const pk_level *level, int order,
                                const pk_wave *wave, const pk_character *character,
                                picket_field **out) {
  const pk_problem *problem = look->problem;
  picket_field *field = PK_NEW(problem->context, 1, picket_field);
  if (!field) {
    return PICKET_ERROR_MEMORY;
  }
  field->context = pk_context_hold(problem->context);
  pk_phase phase = {wave->xi, 1, 0};
  pk_power_window window = pk_power_window_of(level->op);
  double complex index = character->k / look->k0;
  field->about = (picket_field_description){.polarization = (picket_polarization)look->polarization,
                                            .order = order,
                                            .wavelength_um = 2 * PI / look->k0,
                                            .pitch_um = problem->cell.pitch_um,
                                            .index_re = creal(index),
                                            .index_im = cimag(index)};
  pk_components components = {0};
  picket_status status = pk_components_take(problem->context, level->op, problem->cell.geometry,
                                            phase, character->k, wave->right, &components);
  if (status != PICKET_OK) {
    pk_mode_field_free(field);
    return status;
  }
  move_arrays(&components, field);
  const pk_axis *v = &level->grid.v;
  bool layers = v->layer[0].thickness > 0 || v->layer[1].thickness > 0;
  int first = layers ? pk_axis_first_line(v) : 0;
  field->about.x_from_um = field->x[layers ? window.low + first : 0];
  field->about.x_to_um = field->x[layers ? window.high + first : field->nx - 1];
  scale(field, look->k0, pk_components_flux(level->op, phase, window, wave->right),
        character->at_boundary);
  *out = field;
  return PICKET_OK;
}

static int member_for(const pk_cell_grid *base, const picket_options *options) {
  int m = options->accuracy >= LOW_ACCURACY ? COARSE : FINE;
  if (options->accuracy >= HIGH_ACCURACY && options->accuracy < LOW_ACCURACY) {
    m = USUAL;
  }
  while (m > COARSE && pk_level_unknowns(base, m) > options->unknowns) {
    m--;
  }
  return m;
}

picket_status pk_field_on(const pk_look *look, pk_level *level, const pk_followed *mode,
                          picket_field **out) {
  pk_wave wave = {0};
  pk_character character;
  bool same = false;
  picket_status status = pk_look_follow(look, level, mode, &wave, &character, &same);
  if (status == PICKET_OK && !same) {
    status = pk_fail(look->problem->context, PICKET_ERROR_NUMERIC,
                     "mode %d at %.10g nm could not be followed to a fine grid", mode->order,
                     2e3 * PI / look->k0);
  }
  if (status == PICKET_OK) {
    status = make_field(look, level, mode->order, &wave, &character, out);
  }
  pk_wave_clear(look->problem->context, &wave);
  return status;
}

/* A grid as the index study lays it, open sides as far as it goes. */
static picket_status open_grid(pk_look *look, const picket_options *options, pk_level *out) {
  pk_cell_grid base;
  pk_lay_plan plan = {.reach = 0.5 * log(10 / options->accuracy) + 1, .zero_walls = true};
  picket_status status = pk_survey_lay(&look->survey, &plan, &base);
  if (status == PICKET_OK) {
    int m = member_for(&base, options);
    status = pk_look_open(look, &base, m, out);
    pk_cell_grid_clear(look->problem->context, &base);
  }
  return status;
}

static picket_status no_mode(const pk_problem *problem, int order, double wavelength_um) {
  return pk_fail(problem->context, PICKET_ERROR_NO_MODE,
                 "the cell has no Bloch mode of order %d at %.10g nm", order, 1e3 * wavelength_um);
}

static picket_status check_cell(const pk_problem *problem) {
  return problem->has_cell
             ? PICKET_OK
             : pk_fail(problem->context, PICKET_ERROR_INPUT,
                       "the problem has no \"cell\", which is what a mode field is of");
}

picket_status pk_mode_field(const pk_problem *problem, pk_polarization polarization,
                            double wavelength_um, const picket_options *options, int order,
                            picket_field **out) {
  pk_look look = {0};
  pk_level level = {0};
  picket_status status = check_cell(problem);
  if (status == PICKET_OK) {
    status = pk_progress(problem->context, "mode field", 0);
  }
  if (status == PICKET_OK) {
    status =
        pk_look_take(problem, polarization, wavelength_um, order + 1, options->accuracy, &look);
  }
  int i = 0;
  while (status == PICKET_OK && i < look.count && look.mode[i].order != order) {
    i++;
  }
  if (status == PICKET_OK && i == look.count) {
    status = no_mode(problem, order, wavelength_um);
  }
  if (status == PICKET_OK) {
    status = pk_progress(problem->context, "mode field", 0.5);
  }
  if (status == PICKET_OK) {
    status = open_grid(&look, options, &level);
  }
  if (status == PICKET_OK) {
    status = pk_field_on(&look, &level, &look.mode[i], out);
    pk_level_close(&level);
  }
  pk_look_clear(&look);
  return status;
}

/* --- All wavelengths ---------------------------------------------------------------------------
 */

typedef struct sweep {
  const pk_problem *problem;
  const picket_options *options;
  const pk_field_sink *sink;
  int found;           /* fields taken so far */
  picket_status first; /* the first failure of a point, and what it said */
  char note[NOTE_BYTES];
} sweep;

/* A failure that concerns a point, not the machine or the run. */
static bool is_of_the_point(picket_status status) {
  return status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
         status == PICKET_ERROR_NO_MODE || status == PICKET_ERROR_INPUT;
}

/* A mode that cannot be followed is left out; the others stand. */
static picket_status take_mode(sweep *s, const pk_look *look, pk_level *level, int i) {
  picket_field *field = NULL;
  picket_status status = pk_field_on(look, level, &look->mode[i], &field);
  if (status == PICKET_OK) {
    status = s->sink->take(s->sink->user, field);
    pk_mode_field_free(field);
    s->found++;
  } else if (status == PICKET_ERROR_NUMERIC && look->count > 1) {
    pk_log(s->problem->context, PICKET_LOG_WARNING, "%s",
           picket_context_message(s->problem->context));
    pk_message_clear(s->problem->context);
    status = PICKET_OK;
  }
  return status;
}

static picket_status take_modes(sweep *s, pk_polarization polarization, double wavelength_um) {
  pk_look look = {0};
  pk_level level = {0};
  int wanted = s->options->count > 0 ? (int)s->options->count : 1;
  picket_status status =
      pk_look_take(s->problem, polarization, wavelength_um, wanted, s->options->accuracy, &look);
  if (status == PICKET_OK && look.count == 0) {
    status = no_mode(s->problem, 0, wavelength_um);
  }
  if (status == PICKET_OK) {
    status = open_grid(&look, s->options, &level);
  }
  for (int i = 0; status == PICKET_OK && i < look.count; i++) {
    status = take_mode(s, &look, &level, i);
  }
  pk_level_close(&level);
  pk_look_clear(&look);
  return status;
}

static picket_status take_point(sweep *s, pk_polarization polarization, double wavelength_um) {
  picket_status status = take_modes(s, polarization, wavelength_um);
  if (!is_of_the_point(status)) {
    return status;
  }
  char note[NOTE_BYTES];
  snprintf(note, sizeof note, "%s", picket_context_message(s->problem->context));
  pk_message_clear(s->problem->context);
  if (s->first == PICKET_OK) {
    s->first = status;
    memcpy(s->note, note, sizeof note);
  }
  return s->sink->miss(s->sink->user, polarization, wavelength_um, note);
}

picket_status pk_study_fields(const pk_problem *problem, const picket_options *options,
                              const pk_field_sink *sink) {
  sweep s = {.problem = problem, .options = options, .sink = sink, .first = PICKET_OK};
  const pk_light *light = &problem->light;
  picket_status status = check_cell(problem);
  if (status == PICKET_OK && light->count == 0) {
    status = pk_fail_at(problem->context, PICKET_ERROR_INPUT, problem->cell_place,
                        "mode fields need \"light.wavelength_nm\", which is not given");
  }
  int both = light->wanted[PK_EY] && light->wanted[PK_HY] ? 2 : 1, done = 0;
  for (int p = 0; p < 2; p++) {
    for (int i = 0; status == PICKET_OK && light->wanted[p] && i < light->count; i++, done++) {
      status = pk_progress(problem->context, "mode fields", (double)done / (both * light->count));
      if (status == PICKET_OK) {
        status = take_point(&s, (pk_polarization)p, light->wavelength_um[i]);
      }
    }
  }
  if (status == PICKET_OK && s.found == 0) {
    bool known = s.first != PICKET_OK;
    status = pk_fail(problem->context, known ? s.first : PICKET_ERROR_NUMERIC, "%s",
                     known ? s.note : "no mode could be followed to a fine grid");
  }
  return status;
}
