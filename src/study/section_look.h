/* The first look at a section at a wavelength: its families of modes and how many each guides. */
#ifndef PK_STUDY_SECTION_LOOK_H
#define PK_STUDY_SECTION_LOOK_H

#include "study/section_family.h"

enum { PK_FAMILIES = 4 };

typedef struct pk_section_families {
  int count;
  pk_section_family family[PK_FAMILIES];
  int total; /* modes of all of them */
} pk_section_families;

/* At most `most` modes of each family. If none is guided, a side of highest index is set apart in
 * the survey and leaking modes are looked for. The families borrow the survey. */
picket_status pk_section_look_at(pk_section_survey *survey, int most, pk_section_families *out);

/* The family of mode `order` by falling index, and its place there; null if there is none. */
pk_section_family *pk_section_look_up(pk_section_families *families, int order, int *place);

#endif
