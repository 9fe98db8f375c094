/* See nodes.h. */
#include "section/nodes.h"

/* Weaker values than this part of the largest one are tails: their sign is not a lobe's. */
static const double TAIL = 0.05;

static int changes(int count, int stride, const double complex *e, double complex largest) {
  int nodes = 0;
  double before = 0;
  for (int i = 0; i < count; i++) {
    double value = creal(e[i * stride] / largest);
    if (value > TAIL || value < -TAIL) {
      nodes += before * value < 0 ? 1 : 0;
      before = value;
    }
  }
  return nodes;
}

void pk_section_nodes(const pk_section_fields *f, bool along_x, int nodes[2]) {
  const double complex *e = along_x ? f->ex : f->ey;
  int count_x = along_x ? f->mx : f->nx, count_y = along_x ? f->ny : f->my;
  int best = 0;
  for (int p = 0; p < count_x * count_y; p++) {
    best = cabs(e[p]) > cabs(e[best]) ? p : best;
  }
  nodes[0] = changes(count_x, count_y, e + best % count_y, e[best]);
  nodes[1] = changes(count_y, 1, e + best / count_y * count_y, e[best]);
}
