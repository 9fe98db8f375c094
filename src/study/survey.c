/* See survey.h. */
#include "study/survey.h"

#include <math.h>

#include "study/estimate.h"

static const double PI = 3.141592653589793238;

enum {
  STEPS_PER_PITCH = 8,        /* of the base: the family starts at 16, where h² rules */
  STEPS_PER_PITCH_STACK = 24, /* one-dimensional: costs nothing */
  /* Of the base, in the densest medium. A pitch below the stop band is half a wave long and has
   * twice as many; the limit counts for pitches of several waves. */
  STEPS_PER_WAVE = 8
};

enum { RADIATED_ORDERS = 30 };

/* Absorbing layers: thickness times the slowest outgoing wavenumber (0.6 wavelengths: measured to
 * change guided indices by less than 1e-7 with quadratic profiles of strength 4 to 8), base steps
 * in a layer and per radian of the free wave. Waves at grazing angles below a tenth of the
 * wavenumber are absorbed less well. */
static const double LAYER_RADIANS = 4;
static const double LAYER_STEPS = 8;
static const double STEP_RADIANS = 0.5;
static const double GRAZING = 0.1;

/* Beside an outgoing wave, evanescent harmonics need not be waited for longer than this many
 * radians of the free wave: the layer takes what is left. */
static const double MOST_DECAYS = 3;

/* A first look only has to tell modes from waves of the layers. */
static const double LOOK_STRENGTH = 4;
static const double LOOK_DECAYS = 1.5;

static const double LONGEST_DECAY = 100; /* in pitches */

/* Shares of scattered values (extrapolate.h), relative, for a base of STEPS_PER_PITCH. For hy the
 * differences averaged at a cut cell mix both sides of the interface, where the field's slope jumps
 * with the permittivity: first order, and rising steeply with the contrast r. Largest share needed,
 * less step and misfit: ey 2e-4; hy 6.5e-3 at r = 12, none at 5.8 and 1.9. */
static const double SHARE_EY = 1e-3;
static const double SHARE_HY = 1.2e-2; /* times ((r - 1)/(r + 1))³ */

/* Real part of the permittivity of a material at k0, moved into its known range. */
static double permittivity_near(const pk_problem *problem, int material, double k0) {
  pk_material_range range = pk_materials_range(problem->materials, material);
  double wavelength = fmin(fmax(2 * PI / k0, range.shortest_um), range.longest_um);
  pk_medium medium;
  if (pk_materials_at(problem->materials, material, wavelength, problem->temperature_c, &medium) !=
      PICKET_OK) {
    return 1;
  }
  return creal(medium.permittivity);
}

/* |ε| of the most over that of the least refractive material. */
static double contrast_near(const pk_problem *problem, double k0) {
  double least = INFINITY, most = 0;
  for (int i = 0; i < pk_materials_count(problem->materials); i++) {
    double e = fabs(permittivity_near(problem, i, k0));
    least = fmin(least, e);
    most = fmax(most, e);
  }
  return least > 0 ? most / least : INFINITY;
}

/* The error law of a cell, corners left to corner_law.c: see extrapolate.h. */
static pk_error_law law_of(const pk_problem *problem, pk_polarization polarization, double k0) {
  pk_error_law law = {.count = 2, .exponent = {2, 4, 6}, .smooth = 1};
  if (problem->cell.lateral == PK_LATERAL_UNIFORM) {
    law.count = 3;
  } else if (!pk_geometry_is_rectangular(problem->cell.geometry)) {
    double ratio = 1 / contrast_near(problem, k0);
    law.smooth = 0;
    law.share = polarization == PK_EY ? SHARE_EY : SHARE_HY * pow((1 - ratio) / (1 + ratio), 3);
    law.share_order = polarization == PK_EY ? 2 : 1;
  }
  return law;
}

double pk_survey_permittivity(const pk_survey *survey, int material, double k0) {
  return permittivity_near(survey->problem, material, k0);
}

/* An empty box where there are too many media to tell. */
static picket_status box_between(const pk_cell *cell, const double low[2], const double high[2],
                                 pk_box *box) {
  picket_status status = pk_geometry_box(cell->geometry, low, high, box);
  if (status != PICKET_OK && status != PICKET_ERROR_MEMORY) {
    box->count = 0;
    status = PICKET_OK;
  }
  return status;
}

/* What the structure holds: the whole cell if it is closed, the extent of the shapes if it is open;
 * nothing if it cannot be told (too many media). PICKET_ERROR_MEMORY. */
static picket_status box_of(const pk_problem *problem, pk_box *box) {
  const pk_cell *cell = &problem->cell;
  double low[2] = {-0.5 * cell->pitch_um, -0.5}, high[2] = {0.5 * cell->pitch_um, 0.5};
  if (cell->lateral == PK_LATERAL_OPEN) {
    pk_geometry_extent(cell->geometry, PK_V, &low[1], &high[1]);
  } else if (cell->lateral != PK_LATERAL_UNIFORM) {
    low[1] = -0.5 * cell->span_um;
    high[1] = 0.5 * cell->span_um;
  }
  return box_between(cell, low, high, box);
}

/* Mean index of the structure. */
static picket_status mean_index(const pk_problem *problem, double k0, double *index) {
  pk_box box;
  double mean = 0;
  picket_status status = box_of(problem, &box);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; i < box.count; i++) {
    mean += box.fraction[i] * permittivity_near(problem, box.medium[i], k0);
  }
  *index = box.count > 0 ? sqrt(mean) : 1.5; /* any index of a solid: only a place to start */
  return PICKET_OK;
}

picket_status pk_survey_resolve(pk_survey *survey, double k0) {
  const pk_problem *problem = survey->problem;
  pk_box box;
  double densest = 1;
  picket_status status = box_of(problem, &box);
  if (status != PICKET_OK) {
    return status;
  }
  for (int i = 0; i < box.count; i++) {
    densest = fmax(densest, permittivity_near(problem, box.medium[i], k0));
  }
  double waves = problem->cell.pitch_um * sqrt(densest) * k0 / (2 * PI);
  survey->steps_per_pitch = fmax(survey->steps_per_pitch, ceil(STEPS_PER_WAVE * waves));
  return PICKET_OK;
}

/* Frequency of the Bragg condition k0 n = π/Λ, from the estimate if there is one. */
static picket_status find_start(pk_survey *survey) {
  picket_edge_estimate estimate;
  double pitch = survey->problem->cell.pitch_um;
  picket_status status = pk_estimate(survey->problem, survey->polarization, &estimate);
  if (status != PICKET_OK) {
    return status;
  }
  if (isfinite(estimate.centre_um)) {
    survey->k0_start = 2 * PI / estimate.centre_um;
    return PICKET_OK;
  }
  double k0 = PI / (1.5 * pitch);
  for (int i = 0; status == PICKET_OK && i < 4; i++) {
    double index = 1;
    status = mean_index(survey->problem, k0, &index);
    k0 = PI / (index * pitch);
  }
  survey->k0_start = k0;
  return status;
}

double pk_survey_decay(const pk_survey *survey, int side, double k, double k0) {
  double pitch = survey->problem->cell.pitch_um;
  double square =
      k * k - k0 * k0 * permittivity_near(survey->problem, survey->side_medium[side], k0);
  double slowest = 1 / (LONGEST_DECAY * pitch);
  return 1 / sqrt(fmax(square, slowest * slowest));
}

double pk_survey_side_index(const pk_survey *survey, int side, double k0) {
  return sqrt(permittivity_near(survey->problem, survey->side_medium[side], k0));
}

picket_status pk_survey_core_index(const pk_survey *survey, double k0, double *index) {
  const pk_cell *cell = &survey->problem->cell;
  double low[2] = {-0.5 * cell->pitch_um, 0}, high[2] = {0.5 * cell->pitch_um, 0};
  pk_box box;
  *index = 0;
  if (!pk_geometry_extent(cell->geometry, PK_V, &low[1], &high[1]) || !(high[1] > low[1])) {
    return PICKET_OK;
  }
  picket_status status = box_between(cell, low, high, &box);
  double highest = 0;
  for (int i = 0; status == PICKET_OK && i < box.count; i++) {
    highest = fmax(highest, permittivity_near(survey->problem, box.medium[i], k0));
  }
  *index = sqrt(highest);
  return status;
}

double pk_survey_light_line(const pk_survey *survey) {
  double line = 0;
  for (int side = 0; survey->open && side < 2; side++) {
    double at;
    if (pk_light_line(survey->problem, survey->side_medium[side], &at) == PICKET_OK && at > line) {
      line = at;
    }
  }
  return line;
}

/* The smallest lateral wavenumber of the harmonics that radiate into a side, 1/µm; 0 if none does.
 */
static double slowest_outgoing(const pk_survey *survey, int side, double k, double k0) {
  double in_side = k0 * pk_survey_side_index(survey, side, k0);
  double step = 2 * PI / survey->problem->cell.pitch_um, slowest = 0;
  for (int m = -RADIATED_ORDERS; m <= RADIATED_ORDERS; m++) {
    double along = k + m * step;
    if (fabs(along) < in_side) {
      double across = sqrt(in_side * in_side - along * along);
      slowest = slowest == 0 ? across : fmin(slowest, across);
    }
  }
  return slowest;
}

/* The smallest |k_m| among the harmonics that do not radiate into a side: it reaches farthest. */
static double slowest_evanescent(const pk_survey *survey, int side, double k, double k0) {
  double in_side = k0 * pk_survey_side_index(survey, side, k0);
  double step = 2 * PI / survey->problem->cell.pitch_um, slowest = INFINITY;
  for (int m = -RADIATED_ORDERS; m <= RADIATED_ORDERS; m++) {
    double along = fabs(k + m * step);
    slowest = along >= in_side ? fmin(slowest, along) : slowest;
  }
  return slowest;
}

void pk_survey_absorb(pk_survey *survey, double k0) {
  survey->outer_step_um = 0;
  for (int side = 0; survey->open && side < 2; side++) {
    double in_side = k0 * pk_survey_side_index(survey, side, k0);
    survey->layer[side] = (pk_layer){2 * LAYER_RADIANS / in_side, LOOK_STRENGTH};
    survey->decay_um[side] = LOOK_DECAYS / in_side;
    double step = STEP_RADIANS / in_side;
    survey->outer_step_um = survey->outer_step_um == 0 ? step : fmin(survey->outer_step_um, step);
  }
}

void pk_survey_open_sides(pk_survey *survey, double k, double k0, double accuracy) {
  survey->outer_step_um = 0;
  for (int side = 0; survey->open && side < 2; side++) {
    survey->layer[side] = (pk_layer){0};
    double along = slowest_evanescent(survey, side, k, k0);
    survey->decay_um[side] = pk_survey_decay(survey, side, along, k0);
    double across = slowest_outgoing(survey, side, k, k0);
    if (across == 0) {
      continue;
    }
    double in_side = k0 * pk_survey_side_index(survey, side, k0);
    across = fmax(across, GRAZING * in_side);
    double thickness = LAYER_RADIANS / across;
    /* Once through the layer and back: exp(-2 across strength thickness / 3). */
    double strength = 1.5 * log(100 / accuracy) / LAYER_RADIANS;
    survey->layer[side] = (pk_layer){thickness, strength};
    survey->decay_um[side] = fmin(survey->decay_um[side], MOST_DECAYS / in_side);
    double step = fmin(thickness / LAYER_STEPS, STEP_RADIANS / in_side);
    survey->outer_step_um = survey->outer_step_um == 0 ? step : fmin(survey->outer_step_um, step);
    pk_log(survey->problem->context, PICKET_LOG_DETAIL,
           "side %s: absorbing layer of %.3g um, strength %.3g, for outgoing waves of %.3g /um",
           side ? "+x" : "-x", thickness, strength, across);
  }
}

picket_status pk_survey_take(const pk_problem *problem, pk_polarization polarization,
                             pk_survey *out) {
  pk_survey survey = {.problem = problem, .polarization = polarization};
  const pk_cell *cell = &problem->cell;
  survey.steps_per_pitch =
      cell->lateral == PK_LATERAL_UNIFORM ? STEPS_PER_PITCH_STACK : STEPS_PER_PITCH;
  survey.open = cell->lateral == PK_LATERAL_OPEN;
  if (survey.open && !pk_geometry_side_media(cell->geometry, PK_V, &survey.side_medium[0],
                                             &survey.side_medium[1])) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "an open side of the cell holds more than one material");
  }
  picket_status status = find_start(&survey);
  if (status != PICKET_OK) {
    return status;
  }
  survey.law = law_of(problem, polarization, survey.k0_start);
  for (int side = 0; side < 2; side++) {
    survey.decay_um[side] = pk_survey_decay(&survey, side, PI / cell->pitch_um, survey.k0_start);
  }
  *out = survey;
  return PICKET_OK;
}

picket_status pk_survey_lay(const pk_survey *survey, const pk_lay_plan *plan, pk_cell_grid *out) {
  const pk_cell *cell = &survey->problem->cell;
  bool zero = plan->zero_walls;
  if (cell->lateral == PK_LATERAL_ELECTRIC) {
    zero = survey->polarization == PK_EY;
  } else if (cell->lateral == PK_LATERAL_MAGNETIC) {
    zero = survey->polarization == PK_HY;
  }
  pk_cell_grid_wish wish = {.steps_per_pitch = survey->steps_per_pitch,
                            .mirror = plan->mirror,
                            .zero_walls = zero,
                            .decay_um = {survey->decay_um[0], survey->decay_um[1]},
                            .reach = {plan->reach, plan->reach},
                            .layer = {survey->layer[0], survey->layer[1]},
                            .outer_step_um = survey->outer_step_um};
  return pk_cell_grid_lay(survey->problem->context, cell, &wish, out);
}
