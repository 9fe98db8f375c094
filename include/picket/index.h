/* The Bloch modes of a cell at given wavelengths: what a section presents to light. */
#ifndef PICKET_INDEX_H
#define PICKET_INDEX_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* The lateral sides of a cell. */
typedef enum picket_side {
  PICKET_SIDE_LOW = 0, /* towards -x */
  PICKET_SIDE_HIGH = 1 /* towards +x */
} picket_side;

/* The word of a side: "low", "high"; "unknown" for any other number. Static text. */
PICKET_EXPORT const char *picket_side_name(picket_side side);

/* A plane wave that a Bloch mode sends into an open side. */
typedef struct picket_radiated_order {
  int order; /* m: its wavenumber along z is k + 2πm/pitch */
  picket_side side;
  double angle_rad; /* from the lateral direction towards +z, -π/2 to π/2, at the real part of k */
  double share;     /* of all radiated power, 0 to 1 */
} picket_radiated_order;

/* One Bloch mode, forward (its power flows or decays along +z). */
typedef struct picket_bloch_mode {
  int order;                   /* lateral nodes of the field: 0 is the fundamental mode */
  picket_quantity bloch_index; /* Re k/k0, unfolded; inside a stop band mπ/(pitch k0) */
  picket_quantity group_index; /* energy flux formula, material dispersion included; NaN inside a
                                  stop band */
  picket_quantity dispersion_ps_per_nm_km;
  picket_quantity loss_db_per_cm; /* of power, from Im k; inside a stop band the attenuation */
  picket_quantity loss_db_per_pitch;
  picket_quantity absorption_db_per_cm; /* the part of the loss that heats the media */
  picket_quantity radiation_db_per_cm;  /* the part that leaves through open sides */
  picket_quantity radiation_per_mm;     /* the same as a power coefficient, 1/mm */
  picket_quantity upward_share; /* of the radiated power, into the side of +x; NaN if none */
  picket_regime regime;
  int radiated_count;
  const picket_radiated_order *radiated; /* borrowed from the result */
} picket_bloch_mode;

typedef struct picket_index_point {
  double wavelength_um;
  int mode_count;
  const picket_bloch_mode *modes; /* by rising order; borrowed from the result */
  double estimate;  /* index of the homogenised guide (second-order Rytov); NaN if none */
  const char *note; /* why there is no mode, or why the point failed; null otherwise */
  int failed;       /* 1 if the point could not be computed */
} picket_index_point;

typedef struct picket_index_answer {
  picket_polarization polarization;
  int point_count;
  const picket_index_point *points; /* borrowed from the result */
} picket_index_answer;

/* Bloch modes at each wavelength of the problem's `light`, for each of its polarizations,
 * `options->count` modes (default 1: the fundamental one).
 *
 * A point that cannot be computed (a material is not known there, no mode, no convergence) is
 * marked with the reason and does not stop the rest; if every point fails for the same reason, that
 * is the failure of the call. Modes are followed through the wavelengths, so that an order stays
 * with its mode where indices cross.
 *
 * With `options->jobs` other than 1 the points are solved in worker processes, forked from the
 * caller; the numbers are the same to the last digit. No other thread may be inside the library at
 * that time. Callbacks are only called in the calling process, except those for memory.
 *
 * Errors as for picket_edges_find; PICKET_ERROR_INPUT also without wavelengths.
 * PICKET_ERROR_STOPPED: if any point was finished, *out receives the result all the same, partial,
 * with the other points marked; it is yours to free. Else *out is untouched.
 *
 * Cost per wavelength: three grids, on each a factorisation per mode, and one reduction of the
 * coarsest cell to a column. */
PICKET_EXPORT picket_status picket_index_find(picket_problem *problem,
                                              const picket_options *options, picket_result **out);

/* The same with a journal: a file to which every finished point is added at once. If the file is
 * there already, the points in it are taken from it and only the others are solved, so a run that
 * was ended in whatever way can be taken up again; the result is the same to the last digit as that
 * of a run in one go. The file is kept.
 *
 * PICKET_ERROR_INPUT if the file is not a journal, or one of another problem, other options or
 * another version of the library. PICKET_ERROR_OUTPUT if it cannot be written or another run is
 * writing it; once the work has begun, *out then receives what was finished, as for
 * PICKET_ERROR_STOPPED. */
PICKET_EXPORT picket_status picket_index_find_resumable(picket_problem *problem,
                                                        const picket_options *options,
                                                        const char *journal_path,
                                                        picket_result **out);

/* Polarizations in the result of picket_index_find; 0 for another kind of result. */
PICKET_EXPORT int picket_index_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_index_get(const picket_result *result, int i,
                                             picket_index_answer *out);

#ifdef __cplusplus
}
#endif

#endif
