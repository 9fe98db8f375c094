/* One point of an index study of a channel: its fundamental mode at one wavelength. */
#ifndef PK_STUDY_CHANNEL_INDEX_H
#define PK_STUDY_CHANNEL_INDEX_H

#include <picket/index.h>

#include "study/channel_edges.h"
#include "study/profile.h"

/* As pk_index_point. */
picket_status pk_channel_index_point(const pk_problem *problem, pk_polarization polarization,
                                     double wavelength_um, const picket_options *options,
                                     picket_index_point *point, pk_profile **profile,
                                     picket_result *result);

/* The fundamental mode at a wavelength on a coarse grid, and the survey for finer ones. */
typedef struct pk_channel_sight {
  pk_channel_survey survey; /* the caller's to clear */
  double k0;
  bool found;
  bool leaks;       /* into sides set apart */
  bool radiates;    /* past the stop band, into the sides themselves */
  double complex k; /* in (0, K], or Re k = K in the stop band */
} pk_channel_sight;

picket_status pk_channel_sight_take(const pk_problem *problem, pk_polarization polarization,
                                    double wavelength_um, pk_channel_sight *out);
void pk_channel_sight_clear(pk_channel_sight *sight); /* accepts zeros */

/* The mode of the sight on another grid: the wave nearest to it in ((k - K)Λ/π)². The vectors are
 * the caller's. PICKET_ERROR_NUMERIC if there is none. */
picket_status pk_channel_sight_follow(const pk_channel_sight *sight, pk_channel_level *level,
                                      pk_channel_mode *out);

/* dk/dk0 of a mode, material dispersion included. */
picket_status pk_channel_slope(pk_channel_level *level, double k0, const pk_channel_mode *mode,
                               double complex *slope);

#endif
