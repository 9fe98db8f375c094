/* See match_meet.h. Modes with nodes have several summits of equal height, and a saddle or nothing
 * where the centroids meet: so the summit is climbed from the best of a net of points. */
#include "study/match_meet.h"

#include <stdlib.h>

#include "section/climb.h"
#include "section/widths.h"

/* The net: this many points to each side of the middle, this part of the mode's 4σ apart. */
enum { NET = 3 };
static const double NET_STEP = 0.15;

/* Of equal heights the one met first, nearest to the middle, is kept. */
static const double HIGHER = 1 + 1e-6;

static const double NEAR_STRIDE = 0.02; /* of 4σ: grids move a summit by less */

double pk_partner_overlap(const pk_partner *p, const double offset[2]) {
  if (p->is_beam) {
    pk_gaussian beam = p->beam;
    beam.centre[0] = offset[0];
    beam.centre[1] = offset[1];
    return pk_overlap_beam(p->overlap, &beam);
  }
  pk_placement placement = {{offset[0], offset[1]}, {p->slope[0], p->slope[1]}};
  return pk_overlap_modes(p->overlap, &placement);
}

static double height(const double *offset, void *user) {
  return pk_partner_overlap(user, offset);
}

/* Rings of growing distance about the middle. */
static void look_around(const pk_partner *p, const double step[2], double offset[2]) {
  double middle[2] = {offset[0], offset[1]}, best = pk_partner_overlap(p, middle);
  for (int ring = 1; ring <= NET; ring++) {
    for (int i = -ring; i <= ring; i++) {
      for (int j = -ring; j <= ring; j++) {
        if (abs(i) < ring && abs(j) < ring) {
          continue;
        }
        double at[2] = {middle[0] + i * step[0], middle[1] + j * step[1]};
        double found = pk_partner_overlap(p, at);
        if (found > HIGHER * best) {
          best = found;
          offset[0] = at[0];
          offset[1] = at[1];
        }
      }
    }
  }
}

double pk_partner_best(const pk_partner *p, bool wide, double offset[2]) {
  double centre[2], width[2], step[2];
  pk_section_centre(p->overlap->a, centre, width);
  if (wide) {
    double other[2] = {0, 0}, other_width[2];
    if (!p->is_beam) {
      pk_section_centre(p->overlap->b, other, other_width);
    }
    for (int axis = 0; axis < 2; axis++) {
      offset[axis] = centre[axis] - other[axis];
      step[axis] = NET_STEP * width[axis];
    }
    look_around(p, step, offset);
  } else {
    step[0] = NEAR_STRIDE * width[0];
    step[1] = NEAR_STRIDE * width[1];
  }
  return pk_climb(2, offset, step, height, (void *)p);
}
