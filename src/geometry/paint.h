/* The inside of a painted plane, for the files of this room only. */
#ifndef PK_GEOMETRY_PAINT_H
#define PK_GEOMETRY_PAINT_H

#include "geometry/geometry.h"
#include "geometry/outline.h"

typedef struct pk_shape {
  int medium;
  bool endless[2]; /* a stripe has no extent of its own along this axis */
  pk_outline outline;
} pk_shape;

/* Coordinates of axis-parallel edges along one axis, reduced to one period. Sorted up to `sorted`;
 * behind that stand those of the shape being added. */
typedef struct pk_known {
  double *at;
  int sorted, count, capacity;
} pk_known;

struct pk_geometry {
  picket_context *context;
  pk_frame frame;
  double period[2]; /* to - from where periodic, else INFINITY */
  double tolerance; /* coordinates closer than this are the same: 1e-9 of the u extent */
  double rounding;  /* lengths below this are rounding errors of coordinates in the frame */
  pk_shape *shapes; /* [count], in paint order */
  int count, capacity;
  pk_known known[2];
};

/* The periodic copies of an outline whose bounding box meets a box: offset = i (period, 0) +
 * j (shift, period). Start with pk_copies_start, then `offset` is valid after each true next. */
typedef struct pk_copies {
  const pk_geometry *geometry;
  const pk_outline *outline;
  double low[2], high[2];
  double i, i_end, j, j_end;
  double offset[2];
} pk_copies;

void pk_copies_start(pk_copies *copies, const pk_geometry *geometry, const pk_outline *outline,
                     const double low[2], const double high[2]);
bool pk_copies_next(pk_copies *copies);

/* All pieces, moved to their place, whose bounding box meets the closed box low..high. The box must
 * be finite along periodic axes. */
typedef struct pk_search {
  const pk_geometry *geometry;
  double low[2], high[2];
  int shape, piece;
  bool inside; /* a copy of `shape` is open */
  pk_copies copies;
} pk_search;

void pk_search_start(pk_search *search, const pk_geometry *geometry, const double low[2],
                     const double high[2]);
bool pk_search_next(pk_search *search, pk_piece *piece);

/* Moves a point into the frame along periodic axes; `second` (may be null) moves with it. */
void pk_wrap(const pk_geometry *geometry, double point[2], double second[2]);

/* The coordinate of the known axis-parallel edge within the tolerance of `value`, else `value`. */
double pk_snap(const pk_geometry *geometry, pk_axis_name axis, double value);

/* Snaps the coordinate of an edge of the shape being added, and makes it known. */
picket_status pk_snap_edge(pk_geometry *geometry, pk_axis_name axis, double *value);
picket_status pk_known_note(pk_geometry *geometry, pk_axis_name axis, double value);
void pk_known_keep(pk_geometry *geometry);
void pk_known_forget(pk_geometry *geometry);

/* The medium at a point, without snapping. */
int pk_paint_at(const pk_geometry *geometry, double u, double v);

/* A finite part of the plane beyond which nothing changes along open endless axes: the frame where
 * it is finite, else the extent of the structure and a margin. */
void pk_window(const pk_geometry *geometry, double low[2], double high[2]);

/* Takes over a finished outline as the next shape (cleared on failure). */
picket_status pk_paint_add(pk_geometry *geometry, pk_place place, const char *kind,
                           pk_shape *shape);

/* Straightens almost axis-parallel edges of `corners` onto known coordinates and refuses corners
 * that do not bound an area. */
picket_status pk_polygon_check(pk_geometry *geometry, pk_place place, int count,
                               double (*corners)[2]);

#endif
