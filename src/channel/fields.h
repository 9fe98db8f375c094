/* The fields of a Bloch mode in a plane z = constant. */
#ifndef PK_CHANNEL_FIELDS_H
#define PK_CHANNEL_FIELDS_H

#include "channel/channel.h"

/* Shapes, y fastest: ex, hy [mx][ny]; ey, hx [nx][my]; ez [nx][ny]; hz [mx][my], with the lines (n)
 * and intervals (m) of both axes that carry unknowns. h = Z0 H, so E and h have one unit. */
typedef struct pk_channel_fields {
  picket_context *context;
  int nx, ny, mx, my;
  double complex *ex, *ey, *ez, *hx, *hy, *hz;
  double complex *work, *wave; /* inside */
} pk_channel_fields;

picket_status pk_channel_fields_create(const pk_channel *channel, pk_channel_fields *out);
void pk_channel_fields_clear(pk_channel_fields *fields); /* accepts zeros */

/* The fields at z (µm, any), with exp(ikz) in them. E_z comes from D_z over ε of the slice, as D_z
 * does not jump; on a wall between slices the one above counts. */
void pk_channel_fields_at(const pk_channel *channel, double complex k, double complex k0,
                          const double complex *e, double z, pk_channel_fields *fields);

/* Coordinates of the lines that carry unknowns ([nx], [ny]) and middles of the intervals ([mx],
 * [my]), µm. */
double pk_channel_line_at(const pk_channel *channel, pk_axis_name axis, int index);
double pk_channel_middle_at(const pk_channel *channel, pk_axis_name axis, int index);

#endif
