/* What a file says about a row that changes along its length; part of a problem. */
#ifndef PK_STUDY_TAPER_LAW_H
#define PK_STUDY_TAPER_LAW_H

#include <stdbool.h>

#include <picket/taper.h>

#include "base/context.h"

enum { PK_TAPER_CHANGES = 16, PK_TAPER_TEETH = 2000 };

typedef struct pk_taper_change {
  char *vary; /* dotted path */
  double from, to;
  picket_taper_law law;
  double exponent;
} pk_taper_change;

typedef struct pk_taper_block {
  bool given;
  pk_place place;
  bool of_channel; /* the row is one of channels */
  int count;       /* numbers that change */
  pk_taper_change change[PK_TAPER_CHANGES];
  int teeth;
  double at_um;
  double fibre_um; /* mode-field diameter; 0: not given */
} pk_taper_block;

/* The value of a change at a tooth, 0 <= tooth < teeth; both ends exactly. */
double pk_taper_value(const pk_taper_change *change, int tooth, int teeth);

#endif
