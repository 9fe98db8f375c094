/* Plane waves that a Bloch mode sends into open sides: orders, angles and shares.
 *
 * Order m has the wavenumber k_m = k + 2πm/Λ along z and radiates into a side of index n if |k_m| <
 * k0 n, at the angle asin(k_m / (k0 n)) from the lateral direction (grating equation). Its power is
 * proportional to Re(γ_m) |a_m|² (ey; hy: over ε), with γ_m = (k0² n² - k_m²)^½ and a_m the
 * harmonic of the field on a line in the side. */
#ifndef PK_STUDY_RADIATION_H
#define PK_STUDY_RADIATION_H

#include <picket/index.h>

#include "bloch/character.h"
#include "study/survey.h"

typedef struct pk_radiation {
  int mode; /* its order */
  picket_radiated_order wave;
  double power;
  double in_side; /* wavenumber of the side, 1/µm */
} pk_radiation;

/* Radiated orders of every mode of a point. */
typedef struct pk_radiation_table {
  int count, capacity;
  pk_radiation *row;
} pk_radiation_table;

/* Replaces the rows of a mode by those of its wave on a grid. */
picket_status pk_radiation_take(picket_context *context, const pk_operator *op,
                                const pk_character_request *request, const pk_survey *survey,
                                const pk_wave *wave, double complex k, int mode,
                                pk_radiation_table *table);
int pk_radiation_count(const pk_radiation_table *table, int mode);
/* True if an order besides the mode's own (m = 0) radiates. */
bool pk_radiation_has_grating_order(const pk_radiation_table *table, int mode);
/* The orders of a mode in its answer, with shares, and with the angles of the wavenumber k (its
 * real part, extrapolated). */
picket_status pk_radiation_fill(picket_context *context, const pk_radiation_table *table, int mode,
                                double k, double pitch_um, picket_bloch_mode *answer);
void pk_radiation_clear(picket_context *context, pk_radiation_table *table);

#endif
