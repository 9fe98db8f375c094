/* The planes of a block across a guide: a section is one plane, the outline of a channel has one
 * for each of its slices. What a grid needs to know of all of them together. */
#ifndef PK_STUDY_SECTION_PLANES_H
#define PK_STUDY_SECTION_PLANES_H

#include "study/problem.h"

/* Lines closer than this are one: the tolerance of coordinates in a section (io/read_section.c). */
#define PK_SAME_LINE_UM 2e-7

int pk_planes_count(const pk_section_block *block);
const pk_geometry *pk_planes_get(const pk_section_block *block, int i);

/* Puts a value into a rising list with room for it; the new length. */
int pk_line_insert(double value, int count, double *line);

/* Lines of all planes along an axis, rising; those of two planes may coincide. *out is the
 * caller's, with room for one more. */
picket_status pk_planes_lines(picket_context *context, const pk_section_block *block, int axis,
                              double **out, int *count);

bool pk_planes_are_rectangular(const pk_section_block *block);

/* Whether the line `axis` = *centre is a mirror plane of every plane. */
picket_status pk_planes_mirror(picket_context *context, const pk_section_block *block, int axis,
                               bool *found, double *centre);

#endif
