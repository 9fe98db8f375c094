/* What is said about a mode of a section: numbers that depend on the grid and are extrapolated, and
 * looks that are those of the finest grid. */
#ifndef PK_STUDY_SECTION_DESCRIBE_H
#define PK_STUDY_SECTION_DESCRIBE_H

#include "section/modes.h"
#include "study/section_family.h"

/* Numbers of a mode on a grid. */
enum {
  PK_NUMBER_INDEX,
  PK_NUMBER_GROUP,
  PK_NUMBER_LOSS,
  PK_NUMBER_AREA,
  PK_NUMBER_DIAMETERS, /* the first of PK_DIAMETERS, in the order of picket_mode_diameters */
  PK_DIAMETERS = 13,
  PK_NUMBERS = PK_NUMBER_DIAMETERS + PK_DIAMETERS
};

/* How a number depends on the grid, where others follow `law`. */
pk_error_law pk_section_number_law(const pk_error_law *law, int number);

/* By what the bar of a number is to be widened. */
double pk_section_number_caution(int number);

/* Why a number may be missing; null if it can't be. */
const char *pk_section_number_note(int number);

/* Where the number is kept once it is extrapolated. */
picket_quantity *pk_section_quantity(picket_section_mode *mode, int number);

/* numbers [PK_NUMBERS]; the looks of the mode into `mode` where given. */
picket_status pk_section_describe(const pk_section_family *family, pk_section *section,
                                  const pk_section_mode *solved, double *numbers,
                                  picket_section_mode *mode);

#endif
