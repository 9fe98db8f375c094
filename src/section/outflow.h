/* The power that a mode of a bend sends outwards. */
#ifndef PK_SECTION_OUTFLOW_H
#define PK_SECTION_OUTFLOW_H

#include "section/fields.h"

/* Im β from the power that leaves across the last line at or below x, over twice the power that is
 * carried on this side of it: what flows out there is missing from the mode as it goes on. In a
 * section that absorbs nothing up to x and is closed at its other sides this is Im β itself, on the
 * grid too; but it keeps its digits where Im β is far below the rounding of β, because the waves
 * far out are known to as many digits as those inside. x must lie outside absorbing layers, with a
 * line below it. */
double pk_section_outflow(const pk_section *section, const pk_section_fields *mode, double x);

#endif
