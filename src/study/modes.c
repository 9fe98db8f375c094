/* The modes of a section at a wavelength (modes_sweep.c: at those of a problem).
 *
 * A first look on the base grid counts the guided modes of every family (even
 * or odd at the mirror planes) and says how far they reach; then each family is solved on exactly
 * proportional grids, extrapolated and given bars, until those are below the accuracy asked. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "study/modes.h"
#include "study/section_bend.h"
#include "study/section_look.h"

enum { MOST_MODES = 20 };

static const char NO_MODE[] =
    "no guided mode was found at this wavelength: the section guides none, or binds one too weakly "
    "for the "
    "span that was looked at; a larger section.span_nm may show it";

typedef struct work {
  const pk_problem *problem;
  const picket_options *options;
  picket_result *result;
  pk_section_survey survey;
  int most; /* modes wanted */
  pk_section_families families;
} work;

/* Of all families together the `most` modes of highest index are kept. */
static void keep_highest(work *w) {
  for (;;) {
    int total = 0, weakest = -1;
    for (int f = 0; f < w->families.count; f++) {
      total += w->families.family[f].count;
      if (w->families.family[f].count > 0 &&
          (weakest < 0 ||
           w->families.family[f].lowest[w->families.family[f].count - 1] <
               w->families.family[weakest].lowest[w->families.family[weakest].count - 1])) {
        weakest = f;
      }
    }
    if (total <= w->most) {
      return;
    }
    w->families.family[weakest].count--;
  }
}

static int compare_modes(const void *a, const void *b) {
  double x = ((const picket_section_mode *)a)->index.value;
  double y = ((const picket_section_mode *)b)->index.value;
  return (x < y) - (x > y);
}

/* Walls that are given may push a weak mode below the index of what goes on beyond them once the
 * grids are fine: the coarse look had it above. It is none that the guide holds by itself. The
 * list is in falling order. */
static void drop_pushed_out(const work *w, picket_modes_point *point) {
  const double *span = w->survey.block->span_um;
  if ((!(span[0] > 0) && !(span[1] > 0)) || pk_section_bent(&w->survey)) {
    return;
  }
  while (point->mode_count > 0 &&
         point->modes[point->mode_count - 1].index.value <= w->survey.cut) {
    point->mode_count--;
    pk_free(w->problem->context, (void *)point->modes[point->mode_count].confinement);
  }
  point->note = point->mode_count == 0 ? NO_MODE : point->note;
}

/* All families' modes in one list. */
static picket_status fill_modes(work *w, int total, picket_modes_point *point) {
  picket_section_mode *modes = PK_NEW(w->problem->context, total, picket_section_mode);
  if (!modes) {
    return PICKET_ERROR_MEMORY;
  }
  point->modes = modes;
  picket_status status = PICKET_OK;
  for (int f = 0; status == PICKET_OK && f < w->families.count; f++) {
    if (w->families.family[f].count > 0) {
      status = pk_section_family_converge(&w->families.family[f], w->options, w->result,
                                          modes + point->mode_count);
      point->mode_count += status == PICKET_OK ? w->families.family[f].count : 0;
    }
  }
  qsort(modes, (size_t)point->mode_count, sizeof *modes, compare_modes);
  if (status == PICKET_OK) {
    drop_pushed_out(w, point);
  }
  for (int i = 0; i < point->mode_count; i++) {
    modes[i].order = i;
  }
  return status;
}

static picket_status fill_point(work *w, double wavelength_um, picket_modes_point *point) {
  point->wavelength_um = wavelength_um;
  picket_status status =
      pk_section_survey_take(w->problem, &w->problem->section, wavelength_um, &w->survey);
  if (status == PICKET_OK) {
    status = pk_section_look_at(&w->survey, w->most, &w->families);
  }
  int total = w->families.total;
  if (status == PICKET_OK && total == 0) {
    point->note = NO_MODE;
  } else if (status == PICKET_OK) {
    keep_highest(w);
    status = fill_modes(w, total, point);
  }
  pk_section_survey_clear(&w->survey);
  return status;
}

picket_status pk_modes_point(const pk_problem *problem, double wavelength_um,
                             const picket_options *options, picket_modes_point *point,
                             picket_result *result) {
  work w = {.problem = problem, .options = options, .result = result};
  w.most = options->count > 0 ? (int)options->count : MOST_MODES;
  return fill_point(&w, wavelength_um, point);
}

void pk_modes_point_clear(picket_context *context, picket_modes_point *point) {
  for (int m = 0; m < point->mode_count; m++) {
    pk_free(context, (void *)point->modes[m].confinement);
  }
  pk_free(context, (void *)point->modes);
  point->modes = NULL;
  point->mode_count = 0;
}
