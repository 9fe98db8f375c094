/* Numbers of an operator: weights of the edges for given permittivities, and the values of
 * T = A(ξ, χ) - k0² B on the pattern. */
#include <assert.h>
#include <float.h>
#include <math.h>
#include <string.h>

#include "operator/operator_private.h"

double complex pk_edge_weight(const pk_operator *op, const pk_edge *edge) {
  if (op->polarization == PK_EY) {
    return edge->scale;
  }
  double complex average = pk_mixture_weight(&op->mixtures.list[edge->mixture],
                                             (pk_axis_name)edge->along, op->permittivity);
  return edge->scale * average * pk_edge_boost(op, edge);
}

static void load_edges(pk_operator *op) {
  for (int64_t e = 0; e < op->edge_count; e++) {
    const pk_edge *edge = &op->edge[e];
    double complex weight = pk_edge_weight(op, edge);
    if (edge->q == edge->p) {
      op->lateral[edge->p] += weight;
      continue;
    }
    op->stiff[edge->slot[0]] += weight;
    if (edge->q >= 0) {
      op->stiff[edge->slot[1]] += weight;
      op->stiff[edge->slot[2]] -= weight;
      op->stiff[edge->slot[3]] -= weight;
    }
  }
}

static void load_crosses(pk_operator *op) {
  for (int64_t k = 0; k < op->cross_count; k++) {
    const pk_cross *cross = &op->cross[k];
    double complex weight =
        cross->scale * pk_mixture_mixed(&op->mixtures.list[cross->mixture], op->permittivity);
    for (int s = 0; s < 2; s++) {
      for (int a = 0; a < cross->count[s]; a++) {
        for (int b = 0; b < cross->count[1 - s]; b++) {
          /* The product first: it is the same number for (row, column) and (column, row). */
          double complex product = cross->coefficient[s][a] * cross->coefficient[1 - s][b];
          op->stiff[cross->slot[s][a][b]] += weight * product;
        }
      }
    }
  }
}

static void load_mass(pk_operator *op) {
  for (int64_t p = 0; p < op->pattern.n; p++) {
    op->mass[p] = op->cell[p];
    if (op->polarization == PK_EY) {
      op->mass[p] *= pk_mixture_mean(&op->mixtures.list[op->node_mixture[p]], op->permittivity);
    }
  }
}

picket_status pk_operator_load(pk_operator *op, const double complex *permittivity) {
  picket_status status = pk_operator_load_corners(op, permittivity);
  if (status != PICKET_OK) {
    return status;
  }
  op->is_real = op->real_axes;
  for (int m = 0; m < op->media; m++) {
    op->permittivity[m] = permittivity[m];
    op->is_real = op->is_real && cimag(permittivity[m]) == 0;
  }
  size_t entries = (size_t)op->pattern.start[op->pattern.n];
  memset(op->stiff, 0, entries * sizeof *op->stiff);
  if (op->lateral) {
    memset(op->lateral, 0, (size_t)op->pattern.n * sizeof *op->lateral);
  }
  load_edges(op);
  load_crosses(op);
  load_mass(op);
  return PICKET_OK;
}

int64_t pk_operator_size(const pk_operator *op) {
  return op->pattern.n;
}

const pk_pattern *pk_operator_pattern(const pk_operator *op) {
  return &op->pattern;
}

bool pk_operator_is_real(const pk_operator *op) {
  return op->is_real;
}

const double complex *pk_operator_mass(const pk_operator *op) {
  return op->mass;
}

/* 1/ξ; on the unit circle the conjugate, so that a matrix at real k is Hermitian to the last bit.
 */
static double complex inverse(double complex xi) {
  double square = creal(xi) * creal(xi) + cimag(xi) * cimag(xi);
  return fabs(square - 1) <= 4 * DBL_EPSILON ? conj(xi) : 1 / xi;
}

/* ξ^wu χ^wv for wu, wv in -1, 0, 1: [wu + 1][wv + 1]. */
static void phase_table(double complex xi, double complex chi, double complex table[3][3]) {
  double complex u[3] = {inverse(xi), 1, xi}, v[3] = {inverse(chi), 1, chi};
  for (int a = 0; a < 3; a++) {
    for (int b = 0; b < 3; b++) {
      table[a][b] = u[a] * v[b];
    }
  }
}

void pk_operator_values(const pk_operator *op, pk_phase phase, double complex shift,
                        double complex *values) {
  double complex table[3][3];
  phase_table(phase.xi, phase.chi, table);
  int64_t entries = op->pattern.start[op->pattern.n];
  for (int64_t s = 0; s < entries; s++) {
    values[s] = op->stiff[s] * table[op->wu[s] + 1][op->wv[s] + 1];
  }
  for (int64_t p = 0; p < op->pattern.n; p++) {
    double complex lateral = op->lateral ? phase.kx * phase.kx * op->lateral[p] : 0;
    values[op->diagonal[p]] += lateral - shift * op->mass[p];
  }
}

void pk_operator_values_real(const pk_operator *op, pk_phase phase, double shift, double *values) {
  assert(op->is_real && cimag(phase.xi) == 0 && cimag(phase.chi) == 0);
  double complex table[3][3];
  phase_table(phase.xi, phase.chi, table);
  int64_t entries = op->pattern.start[op->pattern.n];
  for (int64_t s = 0; s < entries; s++) {
    values[s] = creal(op->stiff[s]) * creal(table[op->wu[s] + 1][op->wv[s] + 1]);
  }
  for (int64_t p = 0; p < op->pattern.n; p++) {
    double lateral = op->lateral ? phase.kx * phase.kx * creal(op->lateral[p]) : 0;
    values[op->diagonal[p]] += lateral - shift * creal(op->mass[p]);
  }
}

static void wrapped_times(const pk_operator *op, int wrap, double complex chi,
                          const double complex *x, double complex *y) {
  double complex v[3] = {1 / chi, 1, chi};
  memset(y, 0, (size_t)op->pattern.n * sizeof *y);
  for (int64_t c = 0; c < op->pattern.n; c++) {
    for (int64_t s = op->pattern.start[c]; s < op->pattern.start[c + 1]; s++) {
      if (op->wu[s] == wrap) {
        y[op->pattern.row[s]] += op->stiff[s] * v[op->wv[s] + 1] * x[c];
      }
    }
  }
}

void pk_operator_forward_times(const pk_operator *op, double complex chi, const double complex *x,
                               double complex *y) {
  wrapped_times(op, 1, chi, x, y);
}

void pk_operator_backward_times(const pk_operator *op, double complex chi, const double complex *x,
                                double complex *y) {
  wrapped_times(op, -1, chi, x, y);
}
