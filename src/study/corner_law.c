/* See corner_law.h.
 *
 * A corner of rectangles whose edges are corrected (operator/corner_patch.h) leaves
 *   v(m) = X + c_1 m^-2 + c_2 m^-(4 - 2α) + c_3 m^-4 + ...,
 * α the exponent below 1 of its singular solution; its partner 2 - α gives the second term. Of
 * several corners the smallest α counts: theirs are the largest terms. */
#include "study/corner_law.h"

#include <math.h>

#include "operator/corner_exponent.h"
#include "operator/corner_list.h"

static const double QUARTER_TURN = 1.57079632679489661923;

/* A corner so weak is not told from none: 4 - 2α is 2. */
static const double WEAK = 1e-3;

static const char NOTE_OBLIQUE[] =
    "no error bar: the magnetic field is singular at a corner with an oblique or curved side, "
    "which "
    "is not corrected, so the error does not fall as the square of the grid spacing";
static const char NOTE_LOST[] =
    "no error bar: two interfaces are too close together for grid lines on both, so the singular "
    "magnetic field at a corner there is not corrected";
static const char NOTE_METAL[] =
    "no error bar: a material with a negative real permittivity meets a corner, where the singular "
    "magnetic field is not known";

/* The smallest exponent of all corners; negative where one is not known. */
static double smallest_exponent(const pk_survey *survey, const pk_corner_list *list) {
  double smallest = 1;
  for (int i = 0; i < list->count; i++) {
    pk_sectors sectors = {.count = 4};
    for (int q = 0; q < 4; q++) {
      sectors.angle[q] = QUARTER_TURN;
      sectors.permittivity[q] =
          pk_survey_permittivity(survey, list->corner[i].medium[q], survey->k0_start);
    }
    double complex alpha[PK_CORNER_EXPONENTS];
    if (pk_corner_exponents(&sectors, alpha) < 1) {
      return -1;
    }
    smallest = fmin(smallest, creal(alpha[0]));
  }
  return smallest;
}

static void take_exponents(const pk_survey *survey, const pk_corner_list *list, pk_error_law *law) {
  double alpha = smallest_exponent(survey, list);
  if (alpha < 0) {
    law->no_bar = NOTE_METAL;
  } else if (alpha < 1 - WEAK && law->smooth) {
    *law = (pk_error_law){.count = 3, .exponent = {2, 4 - 2 * alpha, 4}, .smooth = 1, .corners = 1};
  }
}

picket_status pk_corner_law(const pk_survey *survey, const pk_cell_grid *base, pk_error_law *out) {
  pk_error_law law = survey->law;
  if (survey->polarization == PK_HY && !base->uniform_v) {
    picket_context *context = survey->problem->context;
    pk_corner_list list;
    picket_status status =
        pk_corner_list_take(context, survey->problem->cell.geometry, &base->u, &base->v, &list);
    if (status != PICKET_OK) {
      return status;
    }
    if (list.other_count > 0) {
      law.no_bar = NOTE_OBLIQUE;
    } else if (list.lost_count > 0) {
      law.no_bar = NOTE_LOST;
    } else if (list.count > 0) {
      take_exponents(survey, &list, &law);
    }
    pk_corner_list_clear(context, &list);
  }
  *out = law;
  return PICKET_OK;
}
