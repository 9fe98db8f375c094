/* The modes of a section that are even or odd in one way at its mirror planes. */
#ifndef PK_STUDY_SECTION_FAMILY_H
#define PK_STUDY_SECTION_FAMILY_H

#include <picket/modes.h>

#include "study/result.h"
#include "study/section_member.h"
#include "study/section_survey.h"

typedef struct pk_section_family {
  const pk_section_survey *survey; /* borrowed */
  pk_end plane[2];
  int count;                      /* modes wanted of it */
  double lowest[PK_FAMILY_MODES]; /* [count] indices of the first look, falling */
} pk_section_family;

/* Counts the guided modes on the base grid, at most `most`. */
picket_status pk_section_family_look(pk_section_family *family, int most);

/* Solves the modes found on finer and finer grids. modes [count] receives them by falling index of
 * the finest grid; their confinement is the caller's. `result` is marked partial if a bar of an
 * index stays above the accuracy asked. */
picket_status pk_section_family_converge(pk_section_family *family, const picket_options *options,
                                         picket_result *result, picket_section_mode *modes);

#endif
