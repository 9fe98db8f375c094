/* See variants.h. */
#include "study/variants.h"

#include <math.h>
#include <string.h>

/* Step of a value, as a part of its size. The operator is smooth, so the error of the difference,
 * of fourth order, is of the order of 1e-12; corrections of corners are known to 5e-11, which over
 * the step and with their part of the whole leaves less than 1e-8 of the derivative. */
static const double STEP = 5e-4;

double pk_vary_size(const char *path, double value) {
  size_t length = strlen(path);
  bool is_length = length > 3 && strcmp(path + length - 3, "_nm") == 0;
  bool is_temperature = strcmp(path, "temperature_c") == 0;
  bool in_list = length > 0 && path[length - 1] >= '0' && path[length - 1] <= '9';
  return fmax(fabs(value), is_length || is_temperature || in_list ? 100 : 1);
}

double pk_vary_step(const char *path, double value) {
  return STEP * pk_vary_size(path, value);
}

enum { MOST_VARIED = 64 }; /* more numbers than any study moves */

picket_status pk_variants_around(const pk_variants *variants, const double *values, int i,
                                 double centre, double step, pk_variation *variation) {
  static const int AT[PK_NEIGHBOURS] = {-2, -1, 1, 2};
  double moved[MOST_VARIED];
  picket_status status =
      variants->count <= MOST_VARIED
          ? PICKET_OK
          : pk_fail(variants->context, PICKET_ERROR_UNSUPPORTED,
                    "%d values are varied, must be at most %d", variants->count, MOST_VARIED);
  for (int k = 0; status == PICKET_OK && k < variants->count; k++) {
    moved[k] = values[k];
  }
  variation->step = step;
  memset(variation->neighbour, 0, sizeof variation->neighbour);
  for (int n = 0; status == PICKET_OK && n < PK_NEIGHBOURS; n++) {
    pk_problem *made = NULL;
    moved[i] = centre + AT[n] * step;
    status = variants->make(variants->user, moved, &made);
    variation->neighbour[n] = made;
  }
  if (status != PICKET_OK) {
    pk_variants_forget(variation);
  }
  return status;
}

void pk_variants_forget(pk_variation *variation) {
  for (int n = 0; n < PK_NEIGHBOURS; n++) {
    pk_problem_free((pk_problem *)variation->neighbour[n]);
    variation->neighbour[n] = NULL;
  }
}
