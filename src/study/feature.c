/* See feature.h. */
#include "study/feature.h"

#include <math.h>

static const double SLACK = 1e-9; /* of a rule: what rounding may take from a feature */

double pk_smallest_feature(const pk_problem *problem, pk_structure structure) {
  double um = INFINITY;
  if (structure == PK_STRUCTURE_CELL) {
    um = problem->smallest_um;
  } else if (structure == PK_STRUCTURE_SECTION) {
    um = pk_geometry_smallest_along(problem->section.geometry, PK_U);
  } else {
    const pk_channel_block *channel = &problem->channel;
    for (int i = 0; i < channel->slices; i++) {
      um = fmin(um, pk_geometry_smallest_along(channel->slice[i], PK_U));
      um = channel->slices > 1 ? fmin(um, channel->from_um[i + 1] - channel->from_um[i]) : um;
    }
  }
  return isfinite(um) ? um : NAN;
}

int pk_feature_respects(const pk_rules_block *rules, double smallest_um) {
  if (rules->smallest_um == 0) {
    return -1;
  }
  return isnan(smallest_um) || smallest_um >= rules->smallest_um * (1 - SLACK);
}
