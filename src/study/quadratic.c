/* See quadratic.h. Points in this order: the centre; +a_i, -a_i for each i; then for each pair its
 * point or its two points. */
#include "study/quadratic.h"

static int of_a_pair(int axes) {
  return axes <= PK_DESIGN_TWIN_AXES ? 2 : 1;
}

int pk_design_count(int axes) {
  return 1 + 2 * axes + of_a_pair(axes) * axes * (axes - 1) / 2;
}

void pk_design_point(int axes, const double *node, int p, double *deviate) {
  for (int i = 0; i < axes; i++) {
    deviate[i] = 0;
  }
  if (p >= 1 && p <= 2 * axes) {
    deviate[(p - 1) / 2] = p % 2 == 1 ? node[(p - 1) / 2] : -node[(p - 1) / 2];
  }
  int at = 1 + 2 * axes, each = of_a_pair(axes);
  for (int i = 0; p >= at && i < axes; i++) {
    for (int j = i + 1; j < axes; j++, at += each) {
      if (p >= at && p < at + each) {
        double sign = p == at ? 1 : -1;
        deviate[i] = sign * node[i];
        deviate[j] = sign * node[j];
      }
    }
  }
}

void pk_quadratic_fit(int axes, const double *node, const double *value, pk_quadratic *out) {
  double centre = value[0];
  *out = (pk_quadratic){.axes = axes, .constant = centre};
  for (int i = 0; i < axes; i++) {
    double up = value[1 + 2 * i], down = value[2 + 2 * i];
    out->linear[i] = (up - down) / (2 * node[i]);
    out->square[i][i] = (up + down - 2 * centre) / (2 * node[i] * node[i]);
  }
  const double *pair = value + 1 + 2 * axes;
  for (int i = 0; i < axes; i++) {
    for (int j = i + 1; j < axes; j++, pair += of_a_pair(axes)) {
      double up = value[1 + 2 * i] + value[1 + 2 * j], down = value[2 + 2 * i] + value[2 + 2 * j];
      double both = of_a_pair(axes) == 2 ? 0.5 * (pair[0] + pair[1] - up - down) + centre
                                         : pair[0] - up + centre;
      out->square[i][j] = both / (node[i] * node[j]);
    }
  }
}

double pk_quadratic_at(const pk_quadratic *quadratic, const double *deviate) {
  double sum = quadratic->constant;
  for (int i = 0; i < quadratic->axes; i++) {
    double slope = quadratic->linear[i];
    for (int j = i; j < quadratic->axes; j++) {
      slope += quadratic->square[i][j] * deviate[j];
    }
    sum += slope * deviate[i];
  }
  return sum;
}
