/* A row of cells or channels that changes along its length, tooth by tooth. */
#ifndef PICKET_TAPER_H
#define PICKET_TAPER_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* How a number goes from its first value (t = 0, first tooth) to its last (t = 1, last tooth). */
typedef enum picket_taper_law {
  PICKET_TAPER_LINEAR = 0, /* t */
  PICKET_TAPER_POWER = 1,  /* t to the power of `exponent` */
  PICKET_TAPER_COSINE = 2  /* (1 - cos πt)/2: level at both ends */
} picket_taper_law;

/* The word of a law: "linear", "power", "cosine"; "unknown" for any other number. Static text. */
PICKET_EXPORT const char *picket_taper_law_name(picket_taper_law law);

/* One number of the file that changes along the row, in the unit of the file. */
typedef struct picket_taper_change {
  const char *vary; /* its dotted path */
  double from, to;
  picket_taper_law law;
  double exponent; /* of the power law; 1 for the others */
} picket_taper_change;

/* What may be wrong with a tooth: bits of picket_taper_tooth.warnings. */
typedef enum picket_taper_warning {
  PICKET_TAPER_STOP_BAND = 1,     /* the wavelength lies inside the stop band of this cell */
  PICKET_TAPER_PAST_BAND = 2,     /* it lies on the short side of its first stop band */
  PICKET_TAPER_RADIATING = 4,     /* the cell leaks into an open side */
  PICKET_TAPER_SMALL_FEATURE = 8, /* a feature is smaller than rules.smallest_feature_nm */
  PICKET_TAPER_ABRUPT = 16        /* towards the next cell `adiabatic` is 1 or more */
} picket_taper_warning;

/* The words of one warning: "stop-band", "past-band", "radiating", "small-feature",
 * "abrupt"; "unknown" for anything else. Static text. */
PICKET_EXPORT const char *picket_taper_warning_name(picket_taper_warning warning);

/* One cell of the row as if it went on for ever.
 *
 * Fields are compared at the planes z = ±pitch/2 of the cells, where one ends and the next begins
 * (in the middle of the gap if the tooth stands in the middle of its cell). Numbers made of them
 * come from two grids; their bars are twice the difference. They are missing, and say why, for
 * channels, inside a stop band and where no mode was found. */
typedef struct picket_taper_tooth {
  int number;      /* from 1 */
  double at_um;    /* its middle, from the beginning of the row */
  double pitch_um; /* its length along the row */
  int value_count;
  const double *values; /* of the numbers that change, in the order of `changes`; borrowed */
  picket_quantity bloch_index;
  picket_quantity group_index;
  picket_quantity loss_db_per_cm;
  picket_quantity clearance_um; /* the wavelength minus the long edge of the first stop band */
  picket_regime regime;
  picket_quantity mode_size_um;    /* 4σ of the power flow across the guide; of a Gaussian beam its
                                      diameter at 1/e² */
  picket_quantity overlap_next;    /* of its mode with that of the next cell, see below */
  picket_quantity reflection_next; /* share that its own mode takes back, were there only the two
                                      modes */
  picket_quantity fibre_share;     /* share that the mode has in common with the fibre's beam */
  double next_index; /* of what the mode couples to first: the next guided mode of its symmetry
                        (from a coarse grid) or the denser open side; NaN if there is neither */
  double adiabatic;  /* how fast the mode changes its size towards the next cell, as a part of what
                        the length-scale criterion allows: below 1 it holds; NaN if not known */
  double smallest_feature_um; /* of the drawn shapes and gaps; NaN if there is none */
  int warnings;               /* sum of picket_taper_warning */
  const char *note;           /* why the tooth has no numbers; null otherwise */
  int failed;                 /* 1 if it has none */
} picket_taper_tooth;

typedef struct picket_taper_answer {
  picket_polarization polarization;
  double wavelength_um;
  double fibre_um;  /* mode-field diameter of the fibre; NaN without one */
  double length_um; /* of the row */
  int change_count;
  const picket_taper_change *changes; /* borrowed from the result, as is all below */
  int tooth_count;
  const picket_taper_tooth *teeth;
  picket_quantity transmission; /* the product of all overlaps */
  picket_quantity fibre_share;  /* of the last tooth */
} picket_taper_answer;

/* Follows the row of the problem's `taper`: `teeth` cells (or channels, if the numbers that change
 * are those of `channel`), for each polarization of `light`, at the wavelength `at_nm`. Every tooth
 * is solved for itself.
 *
 * Neighbours a and b are compared by the shapes of their transverse H, which has no jumps, at the
 * plane where they meet,
 *
 *   η = |∫ H_a · H_b* dx|² / (∫|H_a|² dx ∫|H_b|² dx),
 *
 * 1 for equal cells and less for all others. Where the impedance of the modes is the same all over
 * the plane (a plain guide in ey) this is the share of the power that goes on; elsewhere it says
 * how much the two are alike. It does not count what the joint reflects,
 *
 *   R = |∫(E_b × H_a - E_a × H_b)_z dx|² / |∫(E_a* × H_b + E_b × H_a*)_z dx|²,
 *
 * the wave of a and its way back against the wave of b: exact for a stack, an estimate elsewhere.
 * Not included: light that radiates at a joint and is caught again, and what two joints do
 * together. So the product of the shares is what passes if whatever a joint loses stays lost and
 * nothing comes back; for a slow row it is too low, and where reflections add up, as near a stop
 * band, too high. The share with a fibre is that of picket_match_find, the beam centred on the
 * mode. A cell is two-dimensional: sizes and shares speak of the lateral direction alone.
 *
 * The criterion (J. D. Love, W. M. Henry, W. J. Stewart, R. J. Black, S. Lacroix and F. Gonthier,
 * IEE Proc. J 138, 343 (1991): the length over which the guide tapers must exceed the beat length
 * with the mode that it couples to first), taken with half of the mode's size as its radius ρ:
 *   |dρ/dz| < ρ (β₁ - β₂)/2π.
 *
 * A tooth without numbers is marked with the reason and does not stop the rest. Jobs, journals and
 * PICKET_ERROR_STOPPED as for picket_index_find. PICKET_ERROR_INPUT without `taper`, without the
 * structure that it changes, or if the file would be wrong at any tooth; PICKET_ERROR_MEMORY. Cost
 * per tooth and polarization: as picket_index_find, picket_edges_find and two picket_field_find. */
PICKET_EXPORT picket_status picket_taper_find(picket_problem *problem,
                                              const picket_options *options, picket_result **out);

/* The same with a journal, as picket_index_find_resumable. */
PICKET_EXPORT picket_status picket_taper_find_resumable(picket_problem *problem,
                                                        const picket_options *options,
                                                        const char *journal_path,
                                                        picket_result **out);

/* Polarizations in the result of picket_taper_find; 0 for another kind of result. */
PICKET_EXPORT int picket_taper_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_taper_get(const picket_result *result, int i,
                                             picket_taper_answer *out);

#ifdef __cplusplus
}
#endif

#endif
