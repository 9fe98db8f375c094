/* The inside of an operator, for the files of this room. */
#ifndef PK_OPERATOR_OPERATOR_PRIVATE_H
#define PK_OPERATOR_OPERATOR_PRIVATE_H

#include <stdint.h>

#include "operator/corner_cache.h"
#include "operator/mixture.h"
#include "operator/operator.h"

/* A difference u_q ξ^wu χ^wv - u_p between neighbouring nodes, with the weight
 * scale × (ey: 1; hy: the average of the mixture). */
typedef struct pk_edge {
  int64_t p, q;        /* q is the neighbour upwards along the axis; q = p: a uniform axis */
  signed char wu, wv;  /* how q wraps */
  unsigned char along; /* pk_axis_name */
  int mixture;
  int corner[2];        /* corrected corners at p and q, counted from 1; 0: none */
  double complex scale; /* dual length across / length along, stretched */
  int64_t slot[4];      /* of (p,p), (q,q), (p,q), (q,p) in the pattern */
} pk_edge;

/* The mixed term at a node p: scale × weight × (D_u* D_v + D_v* D_u), each D the mean of the two
 * edges along its axis: D = Σ coefficient × u_neighbour over 3 nodes. */
typedef struct pk_cross {
  int mixture;
  double complex scale;
  int count[2];
  int64_t node[2][3];
  signed char wu[2][3], wv[2][3];
  double complex coefficient[2][3];
  int64_t slot[2][3][3]; /* [s][a][b]: row = node[s][a], column = node[1-s][b] */
} pk_cross;

/* A corner whose four edges are corrected. */
typedef struct pk_operator_corner {
  int medium[4];
  pk_corner_site site; /* permittivities as loaded */
  pk_corner_cure cure;
} pk_operator_corner;

struct pk_operator {
  picket_context *context;
  pk_polarization polarization;
  int media, nu, nv;
  bool real_axes; /* no stretched lengths */
  bool is_real;   /* after a load */
  pk_axis u, v;   /* own copies */
  pk_pattern pattern;
  signed char *wu, *wv; /* [nnz] wraps of the entries */
  int64_t *diagonal;    /* [n] slots of the diagonal */
  int64_t edge_count, cross_count;
  pk_edge *edge;
  pk_cross *cross;
  pk_mixtures mixtures;
  int corner_count;
  pk_operator_corner *corner;   /* [corner_count] or null */
  pk_corner_cache *cures;       /* or null */
  int *node_mixture;            /* [n], ey */
  double complex *cell;         /* [n] dual area, stretched */
  double complex *permittivity; /* [media] as loaded */
  double complex *stiff;        /* [nnz] */
  double complex *lateral;      /* [n] or null: weight of kx² on the diagonal (uniform v axis) */
  double complex *mass;         /* [n] */
};

/* The slot of (row, column), which must exist. */
int64_t pk_operator_slot(const pk_operator *op, int64_t row, int64_t column);

/* Looks up the corrections of all corners for permittivities [media]. */
picket_status pk_operator_load_corners(pk_operator *op, const double complex *permittivity);

/* What the corners at the ends of an edge multiply its weight by. */
double complex pk_edge_boost(const pk_operator *op, const pk_edge *edge);

/* Adds to stiff[media] how the corrections at an edge change with the permittivities; `product` is
 * its part of the form, its whole weight included. */
picket_status pk_edge_corner_forms(const pk_operator *op, const pk_edge *edge,
                                   double complex product, double complex *stiff);

/* The weight of an edge for loaded permittivities. */
double complex pk_edge_weight(const pk_operator *op, const pk_edge *edge);

#endif
