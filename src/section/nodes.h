/* Zeros of the stronger transverse E component of a mode. */
#ifndef PK_SECTION_NODES_H
#define PK_SECTION_NODES_H

#include "section/fields.h"

/* Sign changes met along x and along y through the strongest point of E_x (along_x) or E_y, tails
 * left out; on the grid as it is, mirrored parts not counted. */
void pk_section_nodes(const pk_section_fields *fields, bool along_x, int nodes[2]);

#endif
