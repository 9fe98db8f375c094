/* A first look at a cell before anything is solved: where the first stop band may lie, what is at
 * its sides, how fine the base grid should be, and how values will depend on the grid. */
#ifndef PK_STUDY_SURVEY_H
#define PK_STUDY_SURVEY_H

#include "grid/cell_grid.h"
#include "operator/operator.h"
#include "study/extrapolate.h"
#include "study/problem.h"

/* Distance of the walls of open sides, in decay lengths, for a first look: exp(-2·12) is far below
 * any accuracy that a coarse grid has. */
#define PK_REACH_ROOMY 12.0

typedef struct pk_survey {
  const pk_problem *problem;
  pk_polarization polarization;
  double k0_start; /* a frequency to start from: near the first stop band, 1/µm */
  bool open;
  int side_medium[2];     /* of open sides at -x and +x */
  double decay_um[2];     /* 1/e length of the field there, as known so far */
  pk_layer layer[2];      /* absorbing layers of open sides; thickness 0: none */
  double outer_step_um;   /* largest base spacing in open sides; 0: as the decay wants */
  double steps_per_pitch; /* of the base grid */
  pk_error_law law;       /* corners left out: see corner_law.h */
} pk_survey;

picket_status pk_survey_take(const pk_problem *problem, pk_polarization polarization,
                             pk_survey *out);

/* Makes the base grid fine enough for waves of frequency k0 in the densest medium of the cell. */
picket_status pk_survey_resolve(pk_survey *survey, double k0);

/* 1/e length into an open side of a field with wavenumber k at frequency k0; never longer than a
 * hundred pitches (a mode at the light line reaches as far as it likes). */
double pk_survey_decay(const pk_survey *survey, int side, double k, double k0);

/* Real part of the permittivity of a material at k0, moved into its known range. */
double pk_survey_permittivity(const pk_survey *survey, int material, double k0);

/* Index of an open side at k0 (materials moved into their known range). */
double pk_survey_side_index(const pk_survey *survey, int side, double k0);

/* The highest index between the outermost edges of the shapes at k0; 0 where it can't be told. */
picket_status pk_survey_core_index(const pk_survey *survey, double k0, double *index);

/* The longest vacuum wavelength, µm, at which a state at the zone edge lies above the light line of
 * an open side; 0 for closed cells. */
double pk_survey_light_line(const pk_survey *survey);

/* Prepares open sides for waves of wavenumber k (complex, along the main harmonic) at k0: a decay
 * length where every spatial harmonic is evanescent, an absorbing layer where one radiates. The
 * layer's reflection of the slowest outgoing harmonic is below a hundredth of `accuracy`. Logs what
 * it chose. */
void pk_survey_open_sides(pk_survey *survey, double k, double k0, double accuracy);

/* For a first look, when nothing is known of the waves: a layer on each open side. */
void pk_survey_absorb(pk_survey *survey, double k0);

typedef struct pk_lay_plan {
  double reach;    /* of open sides, in decay lengths */
  bool mirror;     /* keep only the laterally even family where the cell has a mirror plane */
  bool zero_walls; /* what stands in for infinity on open sides */
} pk_lay_plan;

/* A base grid for the cell. */
picket_status pk_survey_lay(const pk_survey *survey, const pk_lay_plan *plan, pk_cell_grid *out);

#endif
