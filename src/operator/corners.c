/* Corners of an operator: which edges meet at one, and what their weights are multiplied by. */
#include <assert.h>
#include <string.h>

#include "base/memory.h"
#include "operator/corner_list.h"
#include "operator/operator_private.h"

static int64_t node_of(const pk_operator *op, const pk_grid_corner *corner) {
  int iu = corner->line[0] - pk_axis_first_line(&op->u);
  int iv = corner->line[1] - pk_axis_first_line(&op->v);
  return (int64_t)iu * op->nv + iv;
}

/* Writes into each edge the numbers, from 1, of the corners at its ends. */
static picket_status mark_edges(pk_operator *op, const pk_corner_list *list) {
  int *number = PK_NEW(op->context, op->pattern.n, int);
  if (!number) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < list->count; i++) {
    number[node_of(op, &list->corner[i])] = i + 1;
  }
  for (int64_t e = 0; e < op->edge_count; e++) {
    pk_edge *edge = &op->edge[e];
    edge->corner[0] = number[edge->p];
    edge->corner[1] = edge->q >= 0 ? number[edge->q] : 0;
  }
  pk_free(op->context, number);
  return PICKET_OK;
}

static picket_status take_corners(pk_operator *op, const pk_corner_list *list) {
  op->corner = PK_NEW(op->context, list->count, pk_operator_corner);
  picket_status status = op->corner ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = pk_corner_cache_create(op->context, &op->cures);
  }
  for (int i = 0; status == PICKET_OK && i < list->count; i++) {
    memcpy(op->corner[i].medium, list->corner[i].medium, sizeof op->corner[i].medium);
    memcpy(op->corner[i].site.spacing, list->corner[i].spacing, sizeof op->corner[i].site.spacing);
  }
  if (status == PICKET_OK) {
    status = mark_edges(op, list);
  }
  op->corner_count = status == PICKET_OK ? list->count : 0;
  return status;
}

picket_status pk_operator_correct_corners(pk_operator *op, const pk_geometry *geometry) {
  assert(!op->corner);
  if (op->polarization == PK_EY || op->lateral) {
    return PICKET_OK;
  }
  pk_corner_list list;
  picket_status status = pk_corner_list_take(op->context, geometry, &op->u, &op->v, &list);
  if (status == PICKET_OK) {
    status = list.count > 0 ? take_corners(op, &list) : PICKET_OK;
    pk_corner_list_clear(op->context, &list);
  }
  return status;
}

picket_status pk_operator_load_corners(pk_operator *op, const double complex *permittivity) {
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < op->corner_count; i++) {
    pk_operator_corner *corner = &op->corner[i];
    for (int q = 0; q < 4; q++) {
      corner->site.permittivity[q] = permittivity[corner->medium[q]];
    }
    status = pk_corner_cache_cure(op->cures, &corner->site, &corner->cure);
  }
  return status;
}

double complex pk_edge_boost(const pk_operator *op, const pk_edge *edge) {
  double complex boost = 1;
  for (int end = 0; end < 2; end++) {
    if (edge->corner[end] > 0) {
      boost *= 1 + op->corner[edge->corner[end] - 1].cure.c;
    }
  }
  return boost;
}

/* The weight w (1 + c) of an edge also changes with c: product × w × ∂c/∂ε of each quadrant. */
picket_status pk_edge_corner_forms(const pk_operator *op, const pk_edge *edge,
                                   double complex product, double complex *stiff) {
  for (int end = 0; end < 2; end++) {
    if (edge->corner[end] == 0) {
      continue;
    }
    const pk_operator_corner *corner = &op->corner[edge->corner[end] - 1];
    double complex slope[4];
    picket_status status = pk_corner_cache_slope(op->cures, &corner->site, slope);
    if (status != PICKET_OK) {
      return status;
    }
    for (int q = 0; q < 4; q++) {
      stiff[corner->medium[q]] += product * slope[q] / (1 + corner->cure.c);
    }
  }
  return PICKET_OK;
}
