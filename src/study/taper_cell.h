/* One tooth of a row, solved for itself: what a cell or a channel is at a wavelength when it goes
 * on for ever, and its field where the next one begins. */
#ifndef PK_STUDY_TAPER_CELL_H
#define PK_STUDY_TAPER_CELL_H

#include "study/record.h"
#include "study/result.h"
#include "study/taper_plane.h"

enum { PK_TAPER_GRIDS = 2 }; /* a coarse one, and one of half its spacing */

typedef struct pk_taper_cell {
  picket_polarization polarization;
  double pitch_um;
  double smallest_um; /* drawn feature; NaN if there is none */
  bool respects;      /* the rule on it, or there is no rule */
  picket_quantity bloch_index, group_index, loss_db_per_cm, clearance_um;
  bool no_band; /* the edges of the first stop band coincide: there is none */
  picket_regime regime;
  double next_index;              /* see picket_taper_tooth */
  pk_plane plane[PK_TAPER_GRIDS]; /* empty without a field */
  const char *why;                /* there is no field; null if there is one */
  const char *note;               /* the tooth failed; null if not */
} pk_taper_cell;

/* What is known without solving anything, into zeros. */
void pk_taper_cell_begin(const pk_problem *problem, pk_polarization polarization,
                         pk_taper_cell *out);

/* Solves it. `scratch` owns the texts and takes a shortfall of accuracy. Errors of the index study
 * are the tooth's. */
picket_status pk_taper_cell_solve(const pk_problem *problem, pk_polarization polarization,
                                  const picket_options *options, picket_result *scratch,
                                  pk_taper_cell *cell);

void pk_taper_cell_clear(picket_context *context, pk_taper_cell *cell); /* accepts zeros */

/* The line of a tooth that did not fail. Reading: into one that was begun; texts become the
 * result's. */
void pk_taper_cell_write(const pk_taper_cell *cell, pk_record *record);
picket_status pk_taper_cell_read(picket_result *result, pk_record_reader *reader,
                                 pk_taper_cell *cell);

/* The two grids of a number as one: the finer one's value, twice their difference as bar. */
picket_quantity pk_taper_pair(double coarse, double fine, const char *missing);

#endif
