/* The stop bands of the fundamental guided mode of a cell, on one grid.
 *
 * A stop band of order m opens where the Bloch wave of the fundamental mode meets its own
 * reflection, at k = mπ/Λ. Its two edges are standing waves there (or extremes of the band inside
 * the zone, found from the slope). Edges of other families may lie in between, so the edges are
 * recognised by what they are made of: the lateral shape of the fundamental mode times
 * exp(±imπz/Λ). */
#ifndef PK_BLOCH_STOP_BAND_H
#define PK_BLOCH_STOP_BAND_H

#include "bloch/media.h"
#include "bloch/resonance.h"
#include "bloch/solver.h"

typedef enum pk_edge_state {
  PK_EDGE_FOUND = 0,
  PK_EDGE_RADIATES,        /* above the light line of an open side: not confined */
  PK_EDGE_LOST,            /* no state looks enough like the fundamental family */
  PK_EDGE_UNKNOWN_MATERIAL /* lies where a material is not known */
} pk_edge_state;

typedef struct pk_edge_found {
  pk_edge_state state;
  double k0;     /* 1/µm; set when found, and as a rough place otherwise if above 0 */
  double offset; /* distance from the zone boundary mπ/Λ, in π/Λ; 0 for nearly every cell */
} pk_edge_found;

typedef struct pk_stop_band {
  int order;
  pk_edge_found edge[2]; /* [0] long wavelength, [1] short wavelength */
  bool has_attenuation;
  double attenuation; /* largest Im k inside, 1/µm */
} pk_stop_band;

typedef struct pk_stop_band_request {
  double pitch_um;
  double lateral_shift; /* fraction of the pitch */
  int last_order;       /* orders 1 to last_order are found */
  double k0_start;      /* where the media are taken for a first look */
  bool open;            /* sides are open: a light line exists */
  int side_medium[2];   /* media at -x and +x of an open cell */
  bool look_inside;     /* search every edge's band for an extreme inside the zone; otherwise only
                           where `inside` says that there is one */
  const bool *inside;   /* [last_order][2] as found by an earlier look, or null */
} pk_stop_band_request;

/* bands[last_order].
 * PICKET_ERROR_NO_MODE if the cell guides no mode at the zone edge. */
picket_status pk_stop_bands(pk_solver *solver, pk_media *media, const pk_stop_band_request *request,
                            pk_stop_band *bands);

#endif
