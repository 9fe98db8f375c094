/* Solves λ = 2 Λ n(λ) for a medium whose index depends on the wavelength.
 *
 * F(λ) = λ - 2 Λ n(λ) is above 0 for long wavelengths and, as n falls with λ everywhere but in a
 * band of absorption, rises through 0 once. A scan from the long end brackets that crossing, and
 * false position with the Illinois rule closes the bracket (M. Dowell and P. Jarratt, BIT 11, 168
 * (1971)). */
#include "study/bragg.h"

#include <math.h>

enum {
  SCAN_STEPS = 256, /* steps of 2 %: n does not cross back and forth within one */
  CLOSE_STEPS = 100 /* false position takes about ten */
};
static const double LOWEST_INDEX = 0.5, HIGHEST_INDEX = 50; /* λ/2Λ is looked for between them */
static const double RELATIVE_WIDTH = 1e-15;                 /* a few roundings of λ */

picket_status pk_unknown_is_nan(picket_context *context, picket_status status, double *value) {
  if (status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NO_MODE ||
      status == PICKET_ERROR_NUMERIC || status == PICKET_ERROR_UNSUPPORTED) {
    pk_message_clear(context);
    *value = NAN;
    return PICKET_OK;
  }
  return status;
}

picket_status pk_permittivity_at(const pk_problem *problem, int material, double wavelength_um,
                                 double *permittivity) {
  pk_medium medium;
  picket_status status =
      pk_materials_at(problem->materials, material, wavelength_um, problem->temperature_c, &medium);
  if (status == PICKET_OK) {
    *permittivity = creal(medium.permittivity);
  }
  return pk_unknown_is_nan(problem->context, status, permittivity);
}

typedef struct condition {
  double pitch;
  pk_index_at index_at;
  void *user;
} condition;

static picket_status excess(const condition *c, double wavelength, double *out) {
  double index = NAN;
  picket_status status = c->index_at(c->user, wavelength, &index);
  *out = wavelength - 2 * c->pitch * index;
  return status;
}

/* F(a) < 0 < F(b). False position alone would leave one end where it is; when an end stays twice,
 * its value is halved. */
static picket_status close_bracket(const condition *c, double a, double fa, double b, double fb,
                                   double *root) {
  int kept = 0; /* the end that stayed last time: -1 for a, 1 for b */
  for (int i = 0; i < CLOSE_STEPS && b - a > RELATIVE_WIDTH * b; i++) {
    double f = NAN;
    double at = a + (b - a) * (fa / (fa - fb));
    if (!(at > a && at < b)) {
      at = a + (b - a) / 2;
    }
    picket_status status = excess(c, at, &f);
    if (status != PICKET_OK) {
      return status;
    }
    if (isnan(f) || f == 0) {
      *root = isnan(f) ? NAN : at;
      return PICKET_OK;
    }
    if (f < 0) {
      a = at;
      fa = f;
      fb = kept == 1 ? fb / 2 : fb;
      kept = 1;
    } else {
      b = at;
      fb = f;
      fa = kept == -1 ? fa / 2 : fa;
      kept = -1;
    }
  }
  *root = -fa < fb ? a : b;
  return PICKET_OK;
}

picket_status pk_bragg_solve(double pitch_um, double shortest_um, double longest_um,
                             pk_index_at index_at, void *user, double *wavelength_um) {
  condition c = {pitch_um, index_at, user};
  double low = fmax(shortest_um, 2 * pitch_um * LOWEST_INDEX);
  double high = fmin(longest_um, 2 * pitch_um * HIGHEST_INDEX);
  double above = NAN, f_above = NAN, root = NAN;
  picket_status status = PICKET_OK;
  for (int i = 0; low < high && i <= SCAN_STEPS; i++) {
    /* The ends themselves, not what rounding makes of them: a table ends exactly there. */
    double at = i == 0            ? high
                : i == SCAN_STEPS ? low
                                  : high * pow(low / high, (double)i / SCAN_STEPS);
    double f = NAN;
    status = excess(&c, at, &f);
    if (status != PICKET_OK) {
      return status;
    }
    if (f == 0) {
      root = at;
      break;
    }
    if (f < 0) {
      status = f_above > 0 ? close_bracket(&c, at, f, above, f_above, &root) : PICKET_OK;
      break;
    }
    above = at;
    f_above = f;
  }
  if (status == PICKET_OK) {
    *wavelength_um = root;
  }
  return status;
}
