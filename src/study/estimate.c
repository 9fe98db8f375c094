/* See estimate.h: the Bragg condition of the homogenised core (core.c, bragg.c). */
#include "study/estimate.h"

#include <math.h>

#include "study/bragg.h"
#include "study/core.h"

static picket_status index_of_core(void *user, double wavelength_um, double *index) {
  return pk_core_index(user, wavelength_um, index);
}

picket_status pk_estimate(const pk_problem *problem, pk_polarization polarization,
                          picket_edge_estimate *out) {
  picket_edge_estimate estimate = {NULL, NAN, {NAN, NAN, "there is no estimate to compare with"}};
  pk_core core = {0};
  bool applies = false;
  picket_status status = pk_core_create(problem, polarization, &core, &applies);
  if (status == PICKET_OK && applies) {
    estimate.method = problem->cell.lateral == PK_LATERAL_UNIFORM
                          ? "second-order Rytov average of the stack"
                          : "second-order Rytov average of the core, slab of that core";
    status = pk_bragg_solve(problem->cell.pitch_um, core.shortest_um, core.longest_um,
                            index_of_core, &core, &estimate.centre_um);
  }
  if (!isnan(estimate.centre_um)) {
    estimate.error_um.note = "the stop band itself was not looked for";
  }
  pk_core_free(&core);
  if (status == PICKET_OK) {
    *out = estimate;
  }
  return status;
}

picket_status pk_estimated_index(const pk_problem *problem, pk_polarization polarization,
                                 double wavelength_um, double *index) {
  pk_core core = {0};
  bool applies = false;
  *index = NAN;
  picket_status status = pk_core_create(problem, polarization, &core, &applies);
  if (status == PICKET_OK && applies) {
    status = pk_core_index(&core, wavelength_um, index);
  }
  pk_core_free(&core);
  return status;
}

typedef struct side {
  const pk_problem *problem;
  int material;
} side;

static picket_status index_of_side(void *user, double wavelength_um, double *index) {
  const side *s = user;
  double permittivity = NAN;
  picket_status status = pk_permittivity_at(s->problem, s->material, wavelength_um, &permittivity);
  *index = permittivity > 0 ? sqrt(permittivity) : NAN;
  return status;
}

picket_status pk_light_line(const pk_problem *problem, int material, double *wavelength_um) {
  side s = {problem, material};
  pk_material_range range = pk_materials_range(problem->materials, material);
  return pk_bragg_solve(problem->cell.pitch_um, range.shortest_um, range.longest_um, index_of_side,
                        &s, wavelength_um);
}
