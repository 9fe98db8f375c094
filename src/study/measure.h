/* A quantity by its name, as one number with a bar: what can be aimed at and what can be required.
 *
 * A measurement follows its mode: a memory keeps which one it was, and a number of another mode, or
 * from the other side of a stop band, is refused, so that a search cannot jump between branches. */
#ifndef PK_STUDY_MEASURE_H
#define PK_STUDY_MEASURE_H

#include <stdbool.h>

#include <picket/options.h>
#include <picket/quantity.h>

#include "study/measured.h"
#include "study/problem.h"
#include "study/variants.h"

/* What of a problem is measured. */
typedef enum pk_structure {
  PK_STRUCTURE_CELL,
  PK_STRUCTURE_SECTION,
  PK_STRUCTURE_CHANNEL
} pk_structure;

/* Families of modes: of a cell by the field normal to the plane, of a section or a channel by the
 * larger transverse electric component. */
typedef enum pk_family {
  PK_FAMILY_EY,
  PK_FAMILY_HY,
  PK_FAMILY_TE_LIKE,
  PK_FAMILY_TM_LIKE
} pk_family;
/* "ey", "hy", "te-like", "tm-like". Static text. */
const char *pk_family_name(pk_family family);

typedef struct pk_question {
  pk_measured what;
  pk_structure structure;
  pk_family family;
  double at_um; /* for quantities at one wavelength, otherwise not looked at */
} pk_question;

/* The structure that a quantity is asked of: that in which `path` (or null) lies, else the one that
 * the problem has; of several, the section for `index` and the cell before the channel for the
 * rest. PICKET_ERROR_INPUT at `place` if there is none that has the quantity. */
picket_status pk_question_structure(const pk_problem *problem, pk_measured what, const char *path,
                                    pk_place place, pk_structure *out);

/* The families to answer for, in the order of answers, with their number: of a cell and, unless the
 * block names some (`given`), of a channel those of the polarizations of light; else those that are
 * wanted, te-like and tm-like. */
int pk_question_families(const pk_problem *problem, pk_structure structure, bool given,
                         const bool wanted[2], pk_family out[2]);

/* Which mode it was. All zeros: nothing is known, and the first measurement decides. */
typedef struct pk_measure_memory {
  bool known;
  int zone;        /* of a Bloch mode: half periods of its wave in one pitch, rounded down */
  int nodes[2];    /* of a section's mode */
  double ex_share; /* of a section's mode */
  int most;        /* modes of a section that must be asked for to have it among them */
  double expected; /* the value that is due, with what it may be off; reach 0: anything goes */
  double reach;
} pk_measure_memory;

/* An outcome, also where there is no number: then the value is NaN and `reason` says why. */
typedef struct pk_measurement {
  picket_quantity q; /* its note, if any, is `reason` or static */
  bool reached;      /* the bar is below the accuracy asked */
  double scale;      /* the size that the accuracy is relative to, in the unit of the quantity: the
                        wavelength of an edge for a clearance, the larger part of a sum */
  double limit;     /* of a Bloch index: what it would be at the stop band that bounds its zone from
                       above; else NaN */
  char reason[256]; /* "" if there is none */
} pk_measurement;

/* Measures at options->accuracy (relative to the scale). Counts nothing as a failure that is an
 * outcome: no such mode, a material that is not known there, a refused jump. PICKET_ERROR_MEMORY,
 * PICKET_ERROR_STOPPED, PICKET_ERROR_INPUT (no structure, no wavelengths), PICKET_ERROR_INTERNAL.
 *   memory   updated by a measurement that has a value, else untouched; null: nothing is known */
picket_status pk_measure(const pk_problem *problem, const pk_question *question,
                         const picket_options *options, pk_measure_memory *memory,
                         pk_measurement *out);

/* How a derivative was found. */
typedef enum pk_slope_way {
  PK_SLOPE_NONE,
  PK_SLOPE_ANALYTIC,  /* by the theorem of Hellmann and Feynman on the discrete operator */
  PK_SLOPE_DIFFERENCE /* by direct solves on both sides (one, at the end of a range) */
} pk_slope_way;
const char *pk_slope_way_name(pk_slope_way way); /* "analytic", "difference", "none" */

typedef struct pk_measured_slope {
  picket_quantity q; /* per unit of the varied number, as the file gives it; note as above */
  pk_slope_way way;
  int solves; /* passes over the grids that it took: 1 if analytic */
  char reason[256];
} pk_measured_slope;

/* Whether the derivative of a quantity is analytic. */
bool pk_measured_has_slope(pk_measured what, pk_structure structure);

/* Derivative with respect to varied number i at the values [variants->count]. `memory` must know
 * the mode (from a measurement there); it is not changed. Outcomes and failures as above. */
picket_status pk_measure_slope(const pk_variants *variants, const double *values, int i,
                               const pk_question *question, const picket_options *options,
                               const pk_measure_memory *memory, pk_measured_slope *out);

/* The same by the analytic derivative only: where there is none the value is NaN. */
picket_status pk_measure_slope_analytic(const pk_variants *variants, const double *values, int i,
                                        const pk_question *question, const picket_options *options,
                                        pk_measured_slope *out);

#endif
