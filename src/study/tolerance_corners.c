/* Corners: every combination of ends. Few are solved directly; of more, the surrogate says which is
 * the worst, and that one is solved. */
#include <math.h>

#include "base/memory.h"
#include "study/tolerance_private.h"

static void corner_at(const pk_tolerance_study *s, unsigned number, double *deviate) {
  for (int j = 0; j < s->spreading->deviates; j++) {
    double end = pk_spreading_corner(s->spreading, j);
    deviate[j] = number >> j & 1U ? end : -end;
  }
}

static bool are_solved(const pk_tolerance_study *s) {
  return s->spreading->deviates <= PK_TOLERANCE_SOLVED;
}

static bool are_listed(const pk_tolerance_study *s) {
  return s->spreading->deviates <= PK_TOLERANCE_LISTED;
}

static int listed_count(const pk_tolerance_study *s) {
  return are_listed(s) ? 1 << s->spreading->deviates : 1;
}

/* Number of the i-th corner of the list. */
static unsigned number_of(const pk_tolerance_study *s, int i) {
  return are_listed(s) ? (unsigned)i : s->worst_number;
}

static picket_status ask_corner(pk_tolerance_study *s, unsigned number, int *task) {
  double deviate[PK_DEVIATES];
  corner_at(s, number, deviate);
  return pk_tolerance_ask(s, deviate, task);
}

picket_status pk_tolerance_ask_corners(pk_tolerance_study *s) {
  int count = listed_count(s);
  picket_status status = PICKET_OK;
  s->worst_task = -1;
  s->corner = PK_NEW(s->problem->context, count, int);
  if (!s->corner) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < count && status == PICKET_OK; i++) {
    s->corner[i] = -1;
    if (are_solved(s)) {
      status = ask_corner(s, number_of(s, i), &s->corner[i]);
    }
  }
  return status;
}

picket_status pk_tolerance_ask_worst(pk_tolerance_study *s) {
  double worst = INFINITY;
  if (are_solved(s) || !s->fitted) {
    return PICKET_OK;
  }
  for (unsigned number = 0; number < 1U << s->spreading->deviates; number++) {
    double deviate[PK_DEVIATES];
    corner_at(s, number, deviate);
    double margin = pk_tolerance_margin(s->block, pk_quadratic_at(&s->surrogate, deviate));
    if (margin < worst) {
      worst = margin;
      s->worst_number = number;
    }
  }
  picket_status status = ask_corner(s, s->worst_number, &s->worst_task);
  s->corner[are_listed(s) ? s->worst_number : 0] = s->worst_task;
  return status;
}

/* --- The list -----------------------------------------------------------------------------------
 */

static picket_status fill_places(pk_tolerance_study *s, unsigned number,
                                 picket_tolerance_corner *corner) {
  double deviate[PK_DEVIATES], values[PK_SPREADS];
  int count = s->spreading->count;
  picket_tolerance_place *places = PK_NEW(s->problem->context, count, picket_tolerance_place);
  if (!places) {
    return PICKET_ERROR_MEMORY;
  }
  corner->places = places;
  corner->place_count = count;
  corner_at(s, number, deviate);
  pk_spreading_values(s->spreading, deviate, values);
  for (int i = 0; i < count; i++) {
    places[i] = (picket_tolerance_place){s->answer->sensitivities[i].vary, values[i]};
  }
  return PICKET_OK;
}

/* What the surrogate may be off at a corner: as at the checks, or as at the one that was solved. */
static double trust_at_corners(const pk_tolerance_study *s) {
  double trust = s->trust;
  if (s->worst_task >= 0) {
    double deviate[PK_DEVIATES];
    corner_at(s, s->worst_number, deviate);
    double seen = pk_tolerance_answered(s, s->worst_task)->q.value;
    trust = fmax(trust, 2 * fabs(seen - pk_quadratic_at(&s->surrogate, deviate)));
  }
  return trust;
}

static void fill_value(const pk_tolerance_study *s, int i, picket_tolerance_corner *corner) {
  if (s->corner[i] >= 0) {
    corner->value = pk_tolerance_answered(s, s->corner[i])->q;
    corner->direct = 1;
  } else if (s->fitted) {
    double deviate[PK_DEVIATES];
    corner_at(s, number_of(s, i), deviate);
    corner->value = (picket_quantity){pk_quadratic_at(&s->surrogate, deviate),
                                      s->bar + trust_at_corners(s), NULL};
  } else {
    corner->value = (picket_quantity){NAN, NAN, s->answer->surrogate_note};
  }
}

/* The direct ones alone can be the worst: the surrogate's choice is among them. */
static void find_worst(pk_tolerance_study *s) {
  double worst = INFINITY;
  s->answer->worst = -1;
  s->answer->worst_value = (picket_quantity){NAN, NAN, "no corner has a value"};
  for (int i = 0; i < s->answer->corner_count; i++) {
    const picket_tolerance_corner *corner = &s->answer->corners[i];
    if (!corner->direct) {
      continue;
    }
    if (!isfinite(corner->value.value)) {
      s->answer->worst = -1;
      s->answer->worst_value = corner->value;
      return;
    }
    double margin = pk_tolerance_margin(s->block, corner->value.value);
    if (margin < worst) {
      worst = margin;
      s->answer->worst = i;
      s->answer->worst_value = corner->value;
    }
  }
}

static const char LISTED[] =
    "all combinations of three standard deviations below and above, and of the ends of ranges";
static const char WORST_ONLY[] =
    "of all combinations of three standard deviations below and above, and of the ends of ranges, "
    "the worst by the surrogate; they are listed up to 10 independent spreads";

picket_status pk_tolerance_take_corners(pk_tolerance_study *s) {
  int count = listed_count(s);
  picket_status status = PICKET_OK;
  picket_tolerance_corner *list = PK_NEW(s->problem->context, count, picket_tolerance_corner);
  if (!list) {
    return PICKET_ERROR_MEMORY;
  }
  s->answer->corners = list;
  s->answer->corner_count = count;
  s->answer->corner_convention = are_listed(s) ? LISTED : WORST_ONLY;
  for (int i = 0; i < count && status == PICKET_OK; i++) {
    status = fill_places(s, number_of(s, i), &list[i]);
    if (status == PICKET_OK) {
      fill_value(s, i, &list[i]);
    }
  }
  if (status == PICKET_OK) {
    find_worst(s);
  }
  return status;
}
