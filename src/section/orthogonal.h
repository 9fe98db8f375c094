/* Unit power, and orthogonality among modes of equal index. */
#ifndef PK_SECTION_ORTHOGONAL_H
#define PK_SECTION_ORTHOGONAL_H

#include "section/modes.h"

/* Modes sorted by β². Those of one level are combined so that the unconjugated products P(a, b) of
 * different ones vanish; each is scaled to P(a, a) = 1, and turned so that its largest h is as real
 * as can be. Evanescent modes and those whose product vanishes by itself keep unit 2-norm. */
picket_status pk_section_orthogonalise(pk_section *section, double k0, int count,
                                       pk_section_mode *modes);

#endif
