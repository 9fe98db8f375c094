/* The field of a mode on one plane across a guide (or along the line that such a plane is in a
 * two-dimensional cell), and what two of them have in common. */
#ifndef PK_STUDY_TAPER_PLANE_H
#define PK_STUDY_TAPER_PLANE_H

#include <complex.h>

#include "study/fields.h"

/* E and h are the transverse components whose product E h* is the power flow along z. */
typedef struct pk_plane {
  int count;
  double *x;             /* [count] rising, µm */
  double complex *e, *h; /* [count] */
  bool *interface;       /* [count] the media differ on both sides of this place */
  bool jumps; /* E jumps at interfaces; what is stored there is no value of either side */
} pk_plane;

picket_status pk_plane_create(picket_context *context, int count, pk_plane *out);
void pk_plane_clear(picket_context *context, pk_plane *plane); /* accepts zeros */

/* The plane z = pitch/2 of a field, without absorbing layers. */
picket_status pk_plane_of_field(const picket_field *field, pk_plane *out);

/* What the mode of a passes on to that of b where the two planes are one; NaN if one of them
 * carries nothing. */
typedef struct pk_joint {
  double share;      /* |∫h_a h_b*|² / (∫|h_a|² ∫|h_b|²): 1 for equal planes to rounding */
  double reflection; /* |∫(E_b h_a - E_a h_b)|² / |∫(E_a* h_b + E_b h_a*)|²: 0 for equal planes */
} pk_joint;
picket_status pk_plane_meet(picket_context *context, const pk_plane *a, const pk_plane *b,
                            pk_joint *out);

/* Centroid and 4σ of Re E h*; NaN where there is no positive power. */
void pk_plane_size(const pk_plane *plane, double *centroid, double *size);

/* |∫E g ∫g h*| / |∫E h* ∫g²| with the beam g = exp(-(2(x - centre)/diameter)²). */
void pk_plane_beam(const pk_plane *plane, double centre, double diameter, double *share);

#endif
