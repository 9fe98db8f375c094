/* A mode of a part of a plane, cut at its mirror planes, as the fields of the whole plane.
 *
 * Across a mirror plane that is an electric wall (PK_END_ZERO) the components that lie on lines of
 * that axis (tangential E, normal H) are odd and those on its middles even; across a magnetic one
 * (PK_END_FREE) it is the other way round. */
#ifndef PK_SECTION_UNFOLD_H
#define PK_SECTION_UNFOLD_H

#include "section/fields.h"

/* h = Z0 H. */
typedef enum pk_whole_name {
  PK_WHOLE_EX,
  PK_WHOLE_EY,
  PK_WHOLE_EZ,
  PK_WHOLE_HX,
  PK_WHOLE_HY,
  PK_WHOLE_HZ,
  PK_WHOLE_NAMES
} pk_whole_name;

/* Components on all lines, those without unknowns included: walls hold zeros, and the last line of
 * a periodic axis what the first one holds. */
typedef struct pk_section_whole {
  picket_context *context;
  int lines[2]; /* along x, along y; middles are one fewer */
  double *line[2], *middle[2];
  double complex *field[PK_WHOLE_NAMES]; /* [count along x][count along y], y fastest */
} pk_section_whole;

/* Places of a component along an axis: ex, hy, hz are at middles of x, ey, hx, hz at those of y,
 * all others on lines. */
bool pk_whole_on_middles(pk_whole_name name, pk_axis_name axis);
int pk_whole_count(const pk_section_whole *whole, pk_whole_name name, pk_axis_name axis);
const double *pk_whole_places(const pk_section_whole *whole, pk_whole_name name, pk_axis_name axis);

/* mirrored[axis]: the low end of that axis is a mirror plane, of the kind of the axis' low end. */
picket_status pk_section_unfold(const pk_section *section, const pk_section_fields *part,
                                const bool mirrored[2], pk_section_whole *out);
void pk_section_whole_clear(pk_section_whole *whole); /* accepts zeros */

#endif
