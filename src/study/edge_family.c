/* See edge_family.h. */
#include "study/edge_family.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

static const double PI = 3.141592653589793238;

static const char NOTE_RADIATES[] =
    "not confined: this edge lies above the light line of an open side, where the mode radiates";
static const char NOTE_LOST[] = "no standing wave of the fundamental family was recognised there";
static const char NOTE_MATERIAL[] = "a material is not known at this wavelength";

const char *pk_edge_note(pk_edge_state state) {
  switch (state) {
    case PK_EDGE_RADIATES: return NOTE_RADIATES;
    case PK_EDGE_UNKNOWN_MATERIAL: return NOTE_MATERIAL;
    default: return NOTE_LOST;
  }
}

picket_status pk_edge_family_solve(pk_edge_family *family, pk_level *level) {
  return pk_stop_bands(level->solver, &level->media, &family->request, family->last);
}

/* The slowest decay into each open side among the edges found on a first grid. */
static void take_decay(pk_edge_family *f) {
  double decay[2] = {0, 0};
  for (int i = 0; i < 2 * f->request.last_order; i++) {
    const pk_edge_found *edge = &f->last[i / 2].edge[i % 2];
    for (int side = 0; edge->state == PK_EDGE_FOUND && side < 2; side++) {
      double k = PI / f->request.pitch_um;
      decay[side] = fmax(decay[side], pk_survey_decay(&f->survey, side, k, edge->k0));
    }
  }
  for (int side = 0; side < 2; side++) {
    f->survey.decay_um[side] = decay[side] > 0 ? decay[side] : f->survey.decay_um[side];
  }
}

static picket_status first_look(pk_edge_family *f) {
  pk_cell_grid base;
  pk_level level;
  pk_lay_plan plan = {.reach = PK_REACH_ROOMY, .mirror = f->mirror, .zero_walls = true};
  picket_status status = pk_survey_lay(&f->survey, &plan, &base);
  if (status != PICKET_OK) {
    return status;
  }
  status = pk_level_open(f->problem, f->polarization, &base, 2, &level);
  if (status == PICKET_OK) {
    f->request.look_inside = true;
    status = pk_edge_family_solve(f, &level);
    f->request.look_inside = false;
    pk_level_close(&level);
  }
  pk_cell_grid_clear(f->problem->context, &base);
  for (int i = 0; status == PICKET_OK && i < 2 * f->request.last_order; i++) {
    f->inside[i] = f->last[i / 2].edge[i % 2].offset > 0;
  }
  if (status == PICKET_OK) {
    take_decay(f);
    f->request.k0_start = f->last[0].edge[0].k0;
  }
  return status;
}

static picket_status check_cell(const pk_problem *problem) {
  if (!problem->has_cell) {
    return pk_fail(problem->context, PICKET_ERROR_INPUT,
                   "the problem has no cell and no channel: band edges need one");
  }
  if (problem->cell.shift != 0) {
    return pk_fail(problem->context, PICKET_ERROR_UNSUPPORTED,
                   "cell.lateral_shift is %g, must be 0 for band edges: describe the straight cell "
                   "of several rows, or ask for bands",
                   problem->cell.shift);
  }
  return PICKET_OK;
}

/* A guide below an open side in index leaks into it at every wavelength, and without contrast there
 * is none. */
static picket_status check_guidance(const pk_edge_family *f) {
  double k0 = f->survey.k0_start, core = 0;
  picket_status status = pk_survey_core_index(&f->survey, k0, &core);
  for (int side = 0; status == PICKET_OK && f->survey.open && core > 0 && side < 2; side++) {
    double index = pk_survey_side_index(&f->survey, side, k0);
    if (core <= index * (1 + 1e-9)) {
      return pk_fail(f->problem->context, PICKET_ERROR_NO_MODE,
                     "the cell guides no mode: its highest index is %.6g, that of the open side at "
                     "%sx is %.6g and must be lower; for a guide that leaks ask for its index",
                     core, side ? "+" : "-", index);
    }
  }
  return status;
}

picket_status pk_edge_family_open(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, bool mirror, pk_edge_family *out) {
  picket_status status = check_cell(problem);
  if (status != PICKET_OK) {
    return status;
  }
  pk_edge_family f = {.problem = problem, .polarization = polarization, .mirror = mirror};
  status = pk_survey_take(problem, polarization, &f.survey);
  int orders = options->count > 0 ? (int)options->count : 1;
  f.last = PK_NEW(problem->context, orders, pk_stop_band);
  f.inside = PK_NEW(problem->context, 2 * orders, bool);
  if (status == PICKET_OK) {
    status = f.last && f.inside ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  f.request =
      (pk_stop_band_request){.pitch_um = problem->cell.pitch_um,
                             .lateral_shift = problem->cell.shift,
                             .last_order = orders,
                             .k0_start = f.survey.k0_start,
                             .open = problem->cell.lateral == PK_LATERAL_OPEN,
                             .side_medium = {f.survey.side_medium[0], f.survey.side_medium[1]},
                             .inside = f.inside};
  if (status == PICKET_OK) {
    status = check_guidance(&f);
  }
  if (status == PICKET_OK) {
    status = first_look(&f);
  }
  if (status != PICKET_OK) {
    pk_edge_family_close(&f);
    return status;
  }
  *out = f;
  return PICKET_OK;
}

void pk_edge_family_close(pk_edge_family *family) {
  if (family->problem) {
    pk_free(family->problem->context, family->last);
    pk_free(family->problem->context, family->inside);
  }
  memset(family, 0, sizeof *family);
}
