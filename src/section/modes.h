/* Modes of a section at one k0, by shift-inverted Arnoldi iteration.
 *
 * Every pair is returned with its true relative residual |T h - β² h| / (|β²| |h|), none with a
 * residual above PK_SECTION_RESIDUAL. In lossless sections without absorbing layers the matrix is
 * factored in real arithmetic. */
#ifndef PK_SECTION_MODES_H
#define PK_SECTION_MODES_H

#include "section/section.h"

/* β² of a matrix that is not symmetric is off by about the residual times its condition number,
 * which is below ten for guided modes. */
#define PK_SECTION_RESIDUAL 1e-9

typedef struct pk_section_mode {
  double complex beta_square; /* 1/µm² */
  double complex beta;        /* the root that goes or decays along +z */
  double complex *h;          /* [n] h_x, then h_y; owned */
  double residual;
} pk_section_mode;

/* The modes nearest to the shift, by falling Re β².
 *   shift   of β², 1/µm²; just above k0² n² of the highest index: guided modes from the top
 *   wanted  how many to ask for; cut to n
 *   modes   [wanted]; pk_section_modes_clear
 *   found   how many hold
 * Every copy of a multiple eigenvalue is found. Modes are scaled to unit power (forms.h), equal
 * ones are orthogonal to each other in power, and in a real section h is real.
 * PICKET_ERROR_NUMERIC when none converged or a residual is too large. */
picket_status pk_section_modes(pk_section *section, double k0, double complex shift, int wanted,
                               pk_section_mode *modes, int *found);
void pk_section_modes_clear(picket_context *context, int count, pk_section_mode *modes);

/* |T h - β² h| / (|β²| |h|); NaN when memory is out. */
double pk_section_residual(const pk_section *section, double k0, const pk_section_mode *mode);

#endif
