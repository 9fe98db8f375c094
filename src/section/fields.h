/* All field components of a mode at their places on the staggered grid (section.h). */
#ifndef PK_SECTION_FIELDS_H
#define PK_SECTION_FIELDS_H

#include "section/modes.h"

/* Shapes, y fastest: ex, hy [mx][ny]; ey, hx [nx][my]; ez [nx][ny]; hz [mx][my], with the lines
 * (n) and intervals (m) of both axes that carry unknowns. h = Z0 H, so E and h have one unit. In a
 * bend they are the components along x, y and the arc, without the metric factor. */
typedef struct pk_section_fields {
  picket_context *context;
  int nx, ny, mx, my;
  double complex *ex, *ey, *ez;
  const double complex *hx, *hy; /* borrowed from the mode */
  double complex *hz;
} pk_section_fields;

picket_status pk_section_fields_take(const pk_section *section, double k0,
                                     const pk_section_mode *mode, pk_section_fields *out);
void pk_section_fields_clear(pk_section_fields *fields); /* accepts zeros */

/* Coordinates of the lines that carry unknowns ([nx], [ny]) and middles of the intervals ([mx],
 * [my]), µm. */
double pk_section_line_at(const pk_section *section, pk_axis_name axis, int index);
double pk_section_middle_at(const pk_section *section, pk_axis_name axis, int index);

#endif
