/* One axis of a rectangular grid: lines at rising coordinates, unknowns at (most of) the lines.
 *
 * A base axis is laid once for a problem: lines on every interface, a spacing that follows a size
 * function between them. A family for extrapolation divides every base interval into m equal parts,
 * so its members are exactly proportional and the error of a value expands in fixed powers of
 * 1/m. Rounding the number of intervals anew for each member would add noise of 1e-5. */
#ifndef PK_GRID_AXIS_H
#define PK_GRID_AXIS_H

#include <complex.h>
#include <stdbool.h>

#include "base/context.h"

typedef enum pk_end {
  PK_END_PERIODIC, /* both ends: the last line is the first one of the next period */
  PK_END_ZERO,     /* the unknown vanishes on the end line, which carries no unknown */
  PK_END_FREE      /* the normal derivative vanishes on the end line */
} pk_end;

/* An absorbing layer at an end of an axis: the coordinate is continued into the complex plane,
 *   dx̃ = (1 + i strength t²) dx,  t = depth in the layer / thickness,
 * so that outgoing waves decay without reflection (J.-P. Bérenger, J. Comput. Phys. 114, 185
 * (1994); W. C. Chew and W. H. Weedon, Microw. Opt. Technol. Lett. 7, 599 (1994)). Thickness 0:
 * none. */
typedef struct pk_layer {
  double thickness; /* µm */
  double strength;
} pk_layer;

typedef struct pk_axis {
  pk_end low, high;
  pk_layer layer[2]; /* at the low and the high end */
  int intervals;
  double *line; /* [intervals + 1] rising */
  double complex
      *length; /* [intervals] line[i+1] - line[i], times the stretch of an absorbing layer */
} pk_axis;

/* What a base axis should resolve. Lengths in µm. */
typedef struct pk_axis_wish {
  pk_end low, high;
  double from, to;
  int line_count;
  const double *lines; /* coordinates to have lines on, rising, inside (from, to) */
  double step;         /* largest spacing inside [inner_from, inner_to] */
  double inner_from, inner_to;
  double outer_step;   /* largest spacing elsewhere */
  double low_step;     /* the same below inner_from; 0: as outer_step */
  double growth;       /* spacing may grow by this much per length, e.g. 0.2 */
  pk_layer layer[2];   /* inside [from, to], at its ends */
  int least_intervals; /* between neighbouring lines, at least 1 */
} pk_axis_wish;

picket_status pk_axis_lay(picket_context *context, const pk_axis_wish *wish, pk_axis *out);

/* A base axis whose pattern repeats `copies` times between wish->from and wish->to: lines are taken
 * modulo the repeat, so the axis maps onto itself when it is moved by (to - from)/copies. */
picket_status pk_axis_lay_repeated(picket_context *context, const pk_axis_wish *wish, int copies,
                                   pk_axis *out);

/* The member m of the family of a base axis. */
picket_status pk_axis_divide(picket_context *context, const pk_axis *base, int m, pk_axis *out);

/* The axis with each line moved by the piecewise linear map that takes marks[i] to moved[i] (both
 * rising, at least 1); beyond the outermost marks lines are shifted rigidly. */
picket_status pk_axis_move(picket_context *context, const pk_axis *axis, int count,
                           const double *marks, const double *moved, pk_axis *out);

/* Frees the arrays; accepts an axis of zeros. */
void pk_axis_clear(picket_context *context, pk_axis *axis);

/* Unknowns along the axis, and the line of unknown 0. */
int pk_axis_unknowns(const pk_axis *axis);
int pk_axis_first_line(const pk_axis *axis);

/* The dual interval of a line: half of each neighbouring interval that exists. Real bounds for
 * averaging (periodic: may reach below `from`), stretched length for the weights. */
void pk_axis_dual(const pk_axis *axis, int line, double *low, double *high, double complex *length);

#endif
