/* How much of the power of one field goes into a mode that it meets at a plane.
 *
 *   η = Re[ ∫(E_1 × h_2*)_z ∫(E_2 × h_1*)_z / ∫(E_1 × h_1*)_z ] / Re ∫(E_2 × h_2*)_z
 *
 * (A. W. Snyder and J. D. Love, Optical Waveguide Theory (1983), ch. 20 and 31: the amplitude of a
 * mode in a given field by its orthogonality, taken with either field of the incoming light). The
 * product of the two integrals is free of the ratio of their impedances: what is reflected where
 * the plane joins two media is not counted.
 *
 * Each integral runs over the grid that its E lives on, where the jumps of E lie on lines or in
 * middles as they should; h, which has none, is interpolated there by cubics. Where h
 * is finer, E is continued from its places by its slope. Two fields of one grid are taken at their
 * own places, so that the overlap of a mode with itself is 1 to rounding.
 */
#ifndef PK_SECTION_OVERLAP_H
#define PK_SECTION_OVERLAP_H

#include "section/unfold.h"

/* A linearly polarized beam with a flat front at the plane:
 *   E = exp(-(x - x0)²/w_x² - (y - y0)²/w_y²) exp(i q·(r - r0)),  diameters 2w. */
typedef struct pk_gaussian {
  double diameter[2]; /* 1/e² of the intensity, along x and y, µm */
  double centre[2];   /* µm */
  double slope[2];    /* q: phase over length, 1/µm */
  pk_axis_name along; /* of its E */
} pk_gaussian;

/* Where the second mode is put: moved, and with a phase from a tilt. */
typedef struct pk_placement {
  double offset[2]; /* µm */
  double slope[2];  /* 1/µm, from its own origin */
} pk_placement;

typedef struct pk_overlap {
  picket_context *context;
  const pk_section_whole *a, *b; /* borrowed */
  double complex a_power, b_power;
  double a_field;                      /* ∫|h_t|² of a */
  struct pk_overlap_sample *sample[2]; /* along x, y */
  double complex *column, *phase;      /* [rows] */
} pk_overlap;

/* b: null if only beams are to be met. pk_overlap_close. */
picket_status pk_overlap_open(const pk_section_whole *a, const pk_section_whole *b,
                              pk_overlap *out);
void pk_overlap_close(pk_overlap *overlap); /* accepts zeros */

/* From 0, and up to 1 where both fields are as wide as light can be focused: E and h of a narrower
 * one differ in shape, and the formula, which leaves out waves that go back, loses its bound. */
double pk_overlap_beam(const pk_overlap *overlap, const pk_gaussian *beam);
double pk_overlap_modes(const pk_overlap *overlap, const pk_placement *placement);

/* |∫h_c g|² / (∫|h_t|² ∫|g|²) with h_c across the E of the beam: how much the mode looks like the
 * beam. Never above 1. */
double pk_overlap_likeness(const pk_overlap *overlap, const pk_gaussian *beam);

#endif
