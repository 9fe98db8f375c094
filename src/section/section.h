/* Full-vector modes of a section: a plane (x, y) that does not vary along z, or along the arc of a
 * bend.
 *
 * Fields go as exp(i(βz - ωt)); h = Z0 H. Maxwell's equations with a diagonal or full transverse
 * permittivity, ∇×E = i k0 h and ∇×h = -i k0 εE, leave the transverse magnetic field:
 *
 *   β² h_x =  ∂x d - (ε q)_y      d = ∂x h_x + ∂y h_y
 *   β² h_y =  ∂y d + (ε q)_x      c = (∂x h_y - ∂y h_x) / ε_zz
 *   q_x = ∂x c + k0² h_y,  q_y = ∂y c - k0² h_x
 *   E_x = q_x/(k0 β),  E_y = q_y/(k0 β),  E_z = i c/k0,  h_z = i d/β
 *
 * on the staggered grid of K. S. Yee, IEEE Trans. Antennas Propag. 14, 302 (1966). With lines i of
 * the x axis and lines j of the y axis, on which interfaces lie:
 *
 *   E_z (i, j);   E_x, h_y (i+½, j);   E_y, h_x (i, j+½);   h_z (i+½, j+½)
 *
 * so every E component is tangential to the interfaces that it lies on, and its permittivity is an
 * area average there. An end PK_END_ZERO of an axis is an electric wall (or a mirror plane with the
 * tangential E odd), PK_END_FREE a magnetic one. The matrix is not symmetric, but the discrete
 * curls are adjoint to each other, so power orthogonality and perturbation formulas hold to
 * rounding. Unknowns: all h_x, then all h_y; y fastest.
 *
 * In a bend of radius R about the line x = -R the arc length s at x = 0 stands for z, and fields go
 * as exp(i β s). In these cylindrical coordinates ds has the metric factor
 *
 *   g = (R + x) / R = 1 + x × curvature
 *
 * and the components g E_z, g h_z obey Maxwell's equations of a straight guide whose ε and μ are
 * multiplied by diag(g, g, 1/g); exact for the full vector, and the same as the map u = R ln g of
 * M. Heiblum and J. H. Harris, IEEE J. Quantum Electron. 11, 75 (1975), seen from x instead of u:
 *
 *   β² h_x = ∂x(g d) - g (ε q)_y     d = ∂x(g h_x) + ∂y(g h_y)
 *   β² h_y = ∂y(g d) + g (ε q)_x     c as above
 *   q_x = ∂x(g c) + k0² g h_y,  q_y = ∂y(g c) - k0² g h_x
 *
 * with E and h_z as above; g is taken at each site, and in an absorbing layer at the continued x,
 * where it is complex. Straight is g = 1. */
#ifndef PK_SECTION_SECTION_H
#define PK_SECTION_SECTION_H

#include <complex.h>
#include <stdbool.h>

#include "geometry/geometry.h"
#include "grid/axis.h"
#include "sparse/sparse.h"

typedef struct pk_section pk_section;

/* What it is made of. Geometry and axes are used during creation only. */
typedef struct pk_section_plan {
  const pk_geometry *geometry; /* u = x, v = y */
  const pk_axis *x, *y;
  int media;            /* media numbers run from 0 to media - 1 */
  bool correct_corners; /* cure the singular E at corners of rectangles (corner_patch.h) */
  double curvature;     /* 1/R, 1/µm; 0: straight. g must be positive on all of the x axis, which
                           must not be periodic then */
} pk_section_plan;

picket_status pk_section_create(picket_context *context, const pk_section_plan *plan,
                                pk_section **out);
void pk_section_free(pk_section *section); /* accepts null */

int64_t pk_section_size(const pk_section *section);
const pk_pattern *pk_section_pattern(const pk_section *section);

/* True if medium m has a share in any site. */
bool pk_section_uses(const pk_section *section, int medium);

/* Gives the media their permittivities: [3][media], the entries xx, yy and zz. */
picket_status pk_section_load(pk_section *section, const double complex *permittivity);

double pk_section_curvature(const pk_section *section);

/* True when the permittivities and the lengths of the axes are real. */
bool pk_section_is_real(const pk_section *section);

/* values [pattern nnz] of T - shift with T h = β² h at k0. `_real` needs a real section. */
void pk_section_values(const pk_section *section, double k0, double complex shift,
                       double complex *values);
void pk_section_values_real(const pk_section *section, double k0, double shift, double *values);

#endif
