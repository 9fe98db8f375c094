/* Bilinear forms of an operator between a left and a right vector: what perturbation theory
 * (Hellmann and Feynman) needs. The left vector belongs to the transposed problem, at 1/ξ and 1/χ.
 */
#include <string.h>

#include "operator/operator_private.h"

static double complex wrap_factor(double complex xi, double complex chi, int wu, int wv) {
  double complex factor = wu > 0 ? xi : wu < 0 ? 1 / xi : 1;
  return wv > 0 ? factor * chi : wv < 0 ? factor / chi : factor;
}

double complex pk_operator_phase_form(const pk_operator *op, pk_phase phase, double weight_u,
                                      double weight_v, const double complex *l,
                                      const double complex *r) {
  double complex sum = 0;
  for (int64_t c = 0; c < op->pattern.n; c++) {
    for (int64_t s = op->pattern.start[c]; s < op->pattern.start[c + 1]; s++) {
      if (op->wu[s] == 0 && op->wv[s] == 0) {
        continue;
      }
      double weight = weight_u * op->wu[s] + weight_v * op->wv[s];
      sum += weight * wrap_factor(phase.xi, phase.chi, op->wu[s], op->wv[s]) * op->stiff[s] *
             l[op->pattern.row[s]] * r[c];
    }
  }
  return sum;
}

double complex pk_operator_mass_form(const pk_operator *op, const double complex *l,
                                     const double complex *r) {
  double complex sum = 0;
  for (int64_t p = 0; p < op->pattern.n; p++) {
    sum += l[p] * op->mass[p] * r[p];
  }
  return sum;
}

/* (D l)(D r) of an edge: the product that its weight multiplies. */
static double complex edge_product(const pk_edge *edge, pk_phase phase, const double complex *l,
                                   const double complex *r) {
  if (edge->q == edge->p) {
    return phase.kx * phase.kx * l[edge->p] * r[edge->p];
  }
  if (edge->q < 0) {
    return l[edge->p] * r[edge->p];
  }
  double complex factor = wrap_factor(phase.xi, phase.chi, edge->wu, edge->wv);
  return (l[edge->q] / factor - l[edge->p]) * (r[edge->q] * factor - r[edge->p]);
}

static double complex cross_difference(const pk_cross *cross, int axis, double complex xi,
                                       double complex chi, const double complex *x) {
  double complex sum = 0;
  for (int a = 0; a < cross->count[axis]; a++) {
    sum += cross->coefficient[axis][a] * x[cross->node[axis][a]] *
           wrap_factor(xi, chi, cross->wu[axis][a], cross->wv[axis][a]);
  }
  return sum;
}

static double complex cross_product(const pk_cross *cross, pk_phase phase, const double complex *l,
                                    const double complex *r) {
  double complex lu = cross_difference(cross, 0, 1 / phase.xi, 1 / phase.chi, l);
  double complex lv = cross_difference(cross, 1, 1 / phase.xi, 1 / phase.chi, l);
  double complex ru = cross_difference(cross, 0, phase.xi, phase.chi, r);
  double complex rv = cross_difference(cross, 1, phase.xi, phase.chi, r);
  return lu * rv + lv * ru;
}

static picket_status media_forms_hy(const pk_operator *op, pk_phase phase, const double complex *l,
                                    const double complex *r, double complex *stiff) {
  for (int64_t e = 0; e < op->edge_count; e++) {
    const pk_edge *edge = &op->edge[e];
    const pk_mixture *mixture = &op->mixtures.list[edge->mixture];
    pk_axis_name along = (pk_axis_name)edge->along;
    double complex product =
        edge->scale * edge_product(edge, phase, l, r) * pk_edge_boost(op, edge);
    for (int i = 0; i < mixture->count; i++) {
      stiff[mixture->medium[i]] +=
          product * pk_mixture_weight_slope(mixture, along, op->permittivity, i);
    }
    if (edge->corner[0] > 0 || edge->corner[1] > 0) {
      product *= pk_mixture_weight(mixture, along, op->permittivity);
      picket_status status = pk_edge_corner_forms(op, edge, product, stiff);
      if (status != PICKET_OK) {
        return status;
      }
    }
  }
  for (int64_t k = 0; k < op->cross_count; k++) {
    const pk_cross *cross = &op->cross[k];
    const pk_mixture *mixture = &op->mixtures.list[cross->mixture];
    double complex product = cross->scale * cross_product(cross, phase, l, r);
    for (int i = 0; i < mixture->count; i++) {
      stiff[mixture->medium[i]] += product * pk_mixture_mixed_slope(mixture, op->permittivity, i);
    }
  }
  return PICKET_OK;
}

picket_status pk_operator_media_forms(const pk_operator *op, pk_phase phase,
                                      const double complex *l, const double complex *r,
                                      double complex *stiff, double complex *mass) {
  memset(stiff, 0, (size_t)op->media * sizeof *stiff);
  memset(mass, 0, (size_t)op->media * sizeof *mass);
  if (op->polarization == PK_HY) {
    return media_forms_hy(op, phase, l, r, stiff);
  }
  for (int64_t p = 0; p < op->pattern.n; p++) {
    const pk_mixture *mixture = &op->mixtures.list[op->node_mixture[p]];
    double complex product = op->cell[p] * l[p] * r[p];
    for (int i = 0; i < mixture->count; i++) {
      mass[mixture->medium[i]] += mixture->fraction[i] * product;
    }
  }
  return PICKET_OK;
}
