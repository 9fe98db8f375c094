/* The modes of the film stack of a problem at its wavelengths: the analytic solver of the slab
 * room, whose index is good to 1e-12 for films without absorption (slab/slab.h). */
#include <complex.h>
#include <math.h>

#include "base/memory.h"
#include "study/slab_answer.h"
#include "study/study.h"

enum { FIRST_MODES = 16 }; /* more than a film of silicon below 3 µm guides; grows when needed */
static const double SOLVER_ERROR = 1e-12;
static const char ABSORBS[] = "the films absorb: the solver vouches for no bar then";

/* The real part with its bar. */
static picket_quantity quantity(double complex value) {
  picket_quantity q = {creal(value), SOLVER_ERROR * fabs(creal(value)), NULL};
  if (cimag(value) != 0) {
    q.uncertainty = NAN;
    q.note = ABSORBS;
  }
  return q;
}

/* What one study needs at every wavelength. */
typedef struct work {
  const pk_problem *problem;
  pk_slab_polarization polarization;
  int most; /* modes wanted; 0 for all */
  pk_slab_film *films;
  pk_slab_mode *modes;
  int capacity;
} work;

/* All modes at a wavelength, in w->modes. */
static picket_status solve(work *w, double wavelength_um, int *count) {
  picket_context *context = w->problem->context;
  pk_slab slab;
  picket_status status =
      pk_materials_slab_at(w->problem->materials, &w->problem->slab.recipe, wavelength_um,
                           w->problem->temperature_c, &slab, w->films);
  if (status == PICKET_OK) {
    status =
        pk_slab_modes(context, &slab, w->polarization, wavelength_um, w->capacity, w->modes, count);
  }
  if (status != PICKET_OK || *count <= w->capacity) {
    return status;
  }
  pk_slab_mode *larger = PK_NEW(context, *count, pk_slab_mode);
  if (!larger) {
    return PICKET_ERROR_MEMORY;
  }
  pk_free(context, w->modes);
  w->modes = larger;
  w->capacity = *count;
  return pk_slab_modes(context, &slab, w->polarization, wavelength_um, w->capacity, w->modes,
                       count);
}

static picket_status fill_point(work *w, double wavelength_um, picket_slab_point *point) {
  int count = 0;
  picket_status status = solve(w, wavelength_um, &count);
  if (status != PICKET_OK) {
    return status;
  }
  count = w->most > 0 && count > w->most ? w->most : count;
  picket_slab_mode *modes = PK_NEW(w->problem->context, count, picket_slab_mode);
  if (!modes) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < count; i++) {
    modes[i].order = w->modes[i].order;
    modes[i].index = quantity(w->modes[i].index);
    modes[i].group_index = quantity(w->modes[i].group_index);
  }
  point->wavelength_um = wavelength_um;
  point->mode_count = count;
  point->modes = modes;
  return PICKET_OK;
}

static picket_status fill_answer(work *w, picket_slab_answer *answer) {
  const pk_light *light = &w->problem->light;
  picket_slab_point *points = PK_NEW(w->problem->context, light->count, picket_slab_point);
  if (!points) {
    return PICKET_ERROR_MEMORY;
  }
  answer->polarization = w->polarization == PK_SLAB_TE ? PICKET_TE : PICKET_TM;
  answer->points = points;
  answer->point_count = light->count;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < light->count; i++) {
    status = pk_progress(w->problem->context,
                         w->polarization == PK_SLAB_TE ? "slab modes, te" : "slab modes, tm",
                         (double)i / light->count);
    if (status == PICKET_OK) {
      status = fill_point(w, light->wavelength_um[i], &points[i]);
    }
  }
  return status;
}

picket_status pk_slab_check(const pk_problem *problem) {
  if (!problem->slab.given) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no \"slab\", which is what the modes are asked of");
  }
  if (problem->light.count == 0) {
    return pk_fail_at(problem->context, PICKET_ERROR_INPUT, problem->slab.place,
                      "the modes of a slab need \"light.wavelength_nm\", which is not given");
  }
  return PICKET_OK;
}

picket_status pk_slab_of(const pk_problem *problem, pk_slab_polarization polarization,
                         const picket_options *options, picket_slab_answer *answer) {
  picket_context *context = problem->context;
  work w = {.problem = problem,
            .polarization = polarization,
            .most = (int)options->count,
            .capacity = FIRST_MODES};
  w.films = PK_NEW(context, problem->slab.recipe.film_count, pk_slab_film);
  w.modes = w.films ? PK_NEW(context, w.capacity, pk_slab_mode) : NULL;
  picket_status status = w.modes ? fill_answer(&w, answer) : PICKET_ERROR_MEMORY;
  pk_free(context, w.modes);
  pk_free(context, w.films);
  return status;
}

void pk_slab_answer_clear(picket_context *context, picket_slab_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    pk_free(context, (void *)answer->points[p].modes);
  }
  pk_free(context, (void *)answer->points);
  answer->points = NULL;
  answer->point_count = 0;
}

static picket_status fill(const pk_problem *problem, const picket_options *options,
                          picket_result *result) {
  result->slab = PK_NEW(problem->context, 2, picket_slab_answer);
  picket_status status = result->slab ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int p = PK_SLAB_TE; status == PICKET_OK && p <= PK_SLAB_TM; p++) {
    if (problem->slab.wanted[p]) {
      status =
          pk_slab_of(problem, (pk_slab_polarization)p, options, &result->slab[result->count++]);
    }
  }
  return status;
}

picket_status pk_study_slab(const pk_problem *problem, const picket_options *options,
                            picket_result **out) {
  picket_result *result = NULL;
  picket_status status = pk_slab_check(problem);
  if (status == PICKET_OK) {
    status = pk_result_create(problem->context, PK_RESULT_SLAB, problem->name, options->accuracy,
                              &result);
  }
  if (status == PICKET_OK) {
    status = fill(problem, options, result);
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
