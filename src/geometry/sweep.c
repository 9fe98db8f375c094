/* What an axis-parallel box holds, exactly.
 *
 * The box is cut into strips v0 < v < v1 at every v where something changes: ends of pieces
 * (vertices and arc extremes), crossings of two pieces, crossings with the box sides. Inside a
 * strip the curves u_1(v) < u_2(v) < ... do not cross, so their order is that at the middle of the
 * strip, and between two of them the medium is that of one point. Then area between neighbours = ∫
 * u_{i+1} dv - ∫ u_i dv   (closed forms, outline.c) and a curve between different media adds its
 * chord, turned by a right angle, to the interface vector. Interfaces along v = constant are found
 * between two strips, where the media below and above are compared. The areas telescope, so they
 * add up to the box but for rounding.
 *
 * Most boxes hold one medium. They are recognised first: shapes are looked at from the top down,
 * and the first one that fills the box is the floor, which hides everything below. */
#include <assert.h>
#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "geometry/paint.h"

/* A fraction below this is rounding, as geometry.h promises. */
static const double no_fraction = 1e-13;

/* A copy of a shape whose boundary runs through the box. */
typedef struct pk_cover {
  const pk_shape *shape;
  double offset[2];
} pk_cover;

/* A curve through a strip, or a side of the box. */
typedef struct pk_edge {
  double middle;      /* u at the middle of the strip */
  double bottom, top; /* u at its ends */
  double integral;    /* of (u - low u) dv over the strip */
  double facing[3];   /* integral of n nᵀ over the strip */
  bool oblique;
} pk_edge;

/* edges[0 .. count], media[0 .. count-1] between them; edges 0 and count are the box sides. */
typedef struct pk_row {
  pk_edge *edges;
  int *media;
  int count;
} pk_row;

typedef struct pk_sweep {
  const pk_geometry *geometry;
  double low[2], high[2];
  pk_cover *covers; /* [cover_count], from the top down */
  int cover_count;
  pk_piece *pieces; /* [piece_count], moved to their place */
  int piece_count;
  int floor; /* medium below all covers */
  double *cuts;
  int cut_count, cut_capacity;
  pk_row rows[2]; /* this strip and the one below */
  int media_count;
  int medium[PK_BOX_MEDIA];
  double area[PK_BOX_MEDIA];
  double facing[3]; /* integral of n nᵀ over the visible interfaces */
  bool oblique;
} pk_sweep;

/* True if a monotone piece runs through the open box: its part between the low and high v of the
 * box spans the range of u between its two ends. */
static bool runs_through(const pk_piece *piece, const double low[2], const double high[2],
                         double slack) {
  for (int a = 0; a < 2; a++) {
    if (piece->low[a] >= high[a] - slack || piece->high[a] <= low[a] + slack) {
      return false;
    }
  }
  if (pk_piece_is_level(piece, PK_U) || pk_piece_is_level(piece, PK_V)) {
    return true;
  }
  double u0 = pk_piece_at(piece, PK_V, fmax(piece->low[1], low[1]));
  double u1 = pk_piece_at(piece, PK_V, fmin(piece->high[1], high[1]));
  return fmin(u0, u1) < high[0] - slack && fmax(u0, u1) > low[0] + slack;
}

/* Counts the pieces of one copy that run through the box, and keeps them if there is room. */
static int take_pieces(pk_sweep *sweep, const pk_outline *outline, const double offset[2]) {
  int count = 0;
  for (int i = 0; i < outline->count; i++) {
    pk_piece piece = pk_piece_moved(&outline->pieces[i], offset);
    if (!runs_through(&piece, sweep->low, sweep->high, sweep->geometry->rounding)) {
      continue;
    }
    if (sweep->pieces) {
      sweep->pieces[sweep->piece_count] = piece;
    }
    sweep->piece_count++;
    count++;
  }
  return count;
}

/* Finds the covers and the floor; only counts as long as there are no arrays. Sets `plain` if all
 * covers have the medium of the floor. */
static void look_down(pk_sweep *sweep, bool *plain) {
  const pk_geometry *geometry = sweep->geometry;
  double middle[2] = {(sweep->low[0] + sweep->high[0]) / 2, (sweep->low[1] + sweep->high[1]) / 2};
  int first_medium = 0;
  bool mixed = false;
  sweep->cover_count = sweep->piece_count = 0;
  sweep->floor = geometry->frame.background;
  for (int s = geometry->count - 1; s >= 0; s--) {
    const pk_shape *shape = &geometry->shapes[s];
    pk_copies copies;
    bool filled = false;
    pk_copies_start(&copies, geometry, &shape->outline, sweep->low, sweep->high);
    while (pk_copies_next(&copies) && !filled) {
      if (take_pieces(sweep, &shape->outline, copies.offset) == 0) {
        filled = pk_outline_contains(&shape->outline, middle[0] - copies.offset[0],
                                     middle[1] - copies.offset[1]);
        continue;
      }
      if (sweep->covers) {
        sweep->covers[sweep->cover_count] = (pk_cover){shape, {copies.offset[0], copies.offset[1]}};
      }
      mixed = mixed || (sweep->cover_count > 0 && shape->medium != first_medium);
      first_medium = sweep->cover_count == 0 ? shape->medium : first_medium;
      sweep->cover_count++;
    }
    if (filled) {
      sweep->floor = shape->medium;
      break;
    }
  }
  *plain = sweep->cover_count == 0 || (!mixed && first_medium == sweep->floor);
}

static int medium_under(const pk_sweep *sweep, double u, double v) {
  for (int i = 0; i < sweep->cover_count; i++) {
    const pk_cover *cover = &sweep->covers[i];
    if (pk_outline_contains(&cover->shape->outline, u - cover->offset[0], v - cover->offset[1])) {
      return cover->shape->medium;
    }
  }
  return sweep->floor;
}

static picket_status add_cut(pk_sweep *sweep, double v) {
  if (!(v > sweep->low[1] && v < sweep->high[1])) {
    return PICKET_OK;
  }
  if (sweep->cut_count == sweep->cut_capacity) {
    int capacity = 2 * sweep->cut_capacity;
    double *cuts = pk_regrow(sweep->geometry->context, sweep->cuts, (size_t)sweep->cut_count,
                             (size_t)capacity, sizeof *cuts);
    if (!cuts) {
      return PICKET_ERROR_MEMORY;
    }
    sweep->cuts = cuts;
    sweep->cut_capacity = capacity;
  }
  sweep->cuts[sweep->cut_count++] = v;
  return PICKET_OK;
}

static picket_status cut_at_piece(pk_sweep *sweep, const pk_piece *piece) {
  picket_status status = add_cut(sweep, piece->low[1]);
  if (status == PICKET_OK) {
    status = add_cut(sweep, piece->high[1]);
  }
  for (int side = 0; side < 2 && status == PICKET_OK; side++) {
    double u = side ? sweep->high[0] : sweep->low[0];
    if (u > piece->low[0] && u < piece->high[0]) {
      status = add_cut(sweep, pk_piece_at(piece, PK_U, u));
    }
  }
  return status;
}

static picket_status cut_at_crossings(pk_sweep *sweep) {
  picket_status status = PICKET_OK;
  for (int i = 0; i < sweep->piece_count; i++) {
    for (int k = i + 1; k < sweep->piece_count; k++) {
      double points[2][2];
      int count = pk_piece_crossings(&sweep->pieces[i], &sweep->pieces[k],
                                     sweep->geometry->rounding, points);
      for (int p = 0; p < count && status == PICKET_OK; p++) {
        status = add_cut(sweep, points[p][1]);
      }
    }
  }
  return status;
}

static int compare(const void *a, const void *b) {
  double x = *(const double *)a;
  double y = *(const double *)b;
  return (x > y) - (x < y);
}

/* The low ends of the strips, sorted; cuts that differ by rounding become one. */
static picket_status find_cuts(pk_sweep *sweep) {
  sweep->cut_capacity = 4 * sweep->piece_count + 8;
  sweep->cuts = PK_NEW(sweep->geometry->context, sweep->cut_capacity, double);
  if (!sweep->cuts) {
    return PICKET_ERROR_MEMORY;
  }
  sweep->cuts[sweep->cut_count++] = sweep->low[1];
  picket_status status = PICKET_OK;
  for (int i = 0; i < sweep->piece_count && status == PICKET_OK; i++) {
    status = cut_at_piece(sweep, &sweep->pieces[i]);
  }
  if (status == PICKET_OK) {
    status = cut_at_crossings(sweep);
  }
  if (status != PICKET_OK) {
    return status;
  }
  double rounding = sweep->geometry->rounding;
  qsort(sweep->cuts, (size_t)sweep->cut_count, sizeof *sweep->cuts, compare);
  int kept = 1;
  for (int i = 1; i < sweep->cut_count; i++) {
    if (sweep->cuts[i] > sweep->cuts[kept - 1] + rounding &&
        sweep->cuts[i] < sweep->high[1] - rounding) {
      sweep->cuts[kept++] = sweep->cuts[i];
    }
  }
  sweep->cut_count = kept;
  return PICKET_OK;
}

static int compare_edges(const void *a, const void *b) {
  double x = ((const pk_edge *)a)->middle;
  double y = ((const pk_edge *)b)->middle;
  return (x > y) - (x < y);
}

static double clamp(double value, double low, double high) {
  return fmin(fmax(value, low), high);
}

/* The curves of the strip from left to right between the box sides, coincident ones once. */
static void order_edges(const pk_sweep *sweep, double v0, double v1, pk_row *row) {
  double middle = (v0 + v1) / 2;
  double rounding = sweep->geometry->rounding;
  double left = sweep->low[0];
  double right = sweep->high[0];
  int count = 1;
  row->edges[0] = (pk_edge){.middle = left, .bottom = left, .top = left};
  for (int i = 0; i < sweep->piece_count; i++) {
    const pk_piece *piece = &sweep->pieces[i];
    if (middle < piece->low[1] || middle >= piece->high[1]) {
      continue;
    }
    double u = pk_piece_at(piece, PK_V, middle);
    if (u > left + rounding && u < right - rounding) {
      pk_edge *edge = &row->edges[count++];
      *edge = (pk_edge){.middle = u,
                        .bottom = clamp(pk_piece_at(piece, PK_V, v0), left, right),
                        .top = clamp(pk_piece_at(piece, PK_V, v1), left, right),
                        .integral = pk_piece_integral(piece, v0, v1, left),
                        .oblique = !pk_piece_is_level(piece, PK_U)};
      pk_piece_facing(piece, v0, v1, edge->facing);
    }
  }
  qsort(row->edges + 1, (size_t)(count - 1), sizeof *row->edges, compare_edges);
  int kept = 1;
  for (int i = 1; i < count; i++) {
    if (row->edges[i].middle > row->edges[kept - 1].middle + rounding) {
      row->edges[kept++] = row->edges[i];
    }
  }
  row->edges[kept] = (pk_edge){
      .middle = right, .bottom = right, .top = right, .integral = (right - left) * (v1 - v0)};
  row->count = kept;
}

/* Finds the media between the edges and drops edges that nobody sees. */
static void find_media(const pk_sweep *sweep, double middle, pk_row *row) {
  int kept = 0;
  for (int i = 0; i < row->count; i++) {
    double u = (row->edges[i].middle + row->edges[i + 1].middle) / 2;
    int medium = medium_under(sweep, u, middle);
    if (kept == 0 || medium != row->media[kept - 1]) {
      row->edges[kept] = row->edges[i];
      row->media[kept++] = medium;
    }
  }
  row->edges[kept] = row->edges[row->count];
  row->count = kept;
}

static picket_status add_area(pk_sweep *sweep, int medium, double area) {
  int i = 0;
  while (i < sweep->media_count && sweep->medium[i] != medium) {
    i++;
  }
  if (i == PK_BOX_MEDIA) {
    return pk_fail(sweep->geometry->context, PICKET_ERROR_UNSUPPORTED,
                   "a grid cell holds more than %d different media, must be at most %d",
                   PK_BOX_MEDIA, PK_BOX_MEDIA);
  }
  if (i == sweep->media_count) {
    sweep->medium[i] = medium;
    sweep->area[i] = 0;
    sweep->media_count++;
  }
  sweep->area[i] += area;
  return PICKET_OK;
}

static picket_status add_row(pk_sweep *sweep, const pk_row *row) {
  picket_status status = PICKET_OK;
  for (int i = 0; i < row->count && status == PICKET_OK; i++) {
    const pk_edge *edge = &row->edges[i];
    status = add_area(sweep, row->media[i], row->edges[i + 1].integral - edge->integral);
    if (i > 0) {
      for (int k = 0; k < 3; k++) {
        sweep->facing[k] += edge->facing[k];
      }
      sweep->oblique = sweep->oblique || edge->oblique;
    }
  }
  return status;
}

/* Interfaces along the cut between two strips. */
static void add_level(pk_sweep *sweep, const pk_row *below, const pk_row *above) {
  double at = sweep->low[0];
  int i = 0;
  int k = 0;
  while (i < below->count && k < above->count) {
    double end = fmin(below->edges[i + 1].top, above->edges[k + 1].bottom);
    if (below->media[i] != above->media[k] && end > at + sweep->geometry->rounding) {
      sweep->facing[2] += end - at;
    }
    at = fmax(at, end);
    if (below->edges[i + 1].top <= end) {
      i++;
    } else {
      k++;
    }
  }
}

static picket_status sweep_strips(pk_sweep *sweep) {
  picket_status status = PICKET_OK;
  pk_row *below = NULL;
  for (int i = 0; i < sweep->cut_count && status == PICKET_OK; i++) {
    double v0 = sweep->cuts[i];
    double v1 = i + 1 < sweep->cut_count ? sweep->cuts[i + 1] : sweep->high[1];
    pk_row *row = &sweep->rows[i % 2];
    order_edges(sweep, v0, v1, row);
    find_media(sweep, (v0 + v1) / 2, row);
    status = add_row(sweep, row);
    if (below) {
      add_level(sweep, below, row);
    }
    below = row;
  }
  return status;
}

/* Areas to fractions that add up to 1, in rising order of the medium. */
static void finish(const pk_sweep *sweep, pk_box *box) {
  double total = 0;
  double size = (sweep->high[0] - sweep->low[0]) * (sweep->high[1] - sweep->low[1]);
  pk_box result = {.count = 0};
  for (int i = 0; i < sweep->media_count; i++) {
    if (sweep->area[i] <= no_fraction * size) {
      continue;
    }
    total += sweep->area[i];
    int k = result.count++;
    for (; k > 0 && result.medium[k - 1] > sweep->medium[i]; k--) {
      result.medium[k] = result.medium[k - 1];
      result.fraction[k] = result.fraction[k - 1];
    }
    result.medium[k] = sweep->medium[i];
    result.fraction[k] = sweep->area[i];
  }
  for (int k = 0; k < result.count; k++) {
    result.fraction[k] /= total;
  }
  double length = sweep->facing[0] + sweep->facing[2];
  if (result.count > 1 && length > 0) {
    result.oblique = sweep->oblique;
    for (int k = 0; k < 3; k++) {
      result.facing[k] = sweep->facing[k] / length;
    }
  }
  *box = result;
}

static picket_status sweep_box(pk_sweep *sweep, pk_box *box) {
  picket_context *context = sweep->geometry->context;
  picket_status status = PICKET_ERROR_MEMORY;
  bool plain;
  size_t row = (size_t)sweep->piece_count + 2;
  sweep->covers = PK_NEW(context, sweep->cover_count, pk_cover);
  sweep->pieces = sweep->covers ? PK_NEW(context, sweep->piece_count, pk_piece) : NULL;
  pk_edge *edges = sweep->pieces ? PK_NEW(context, 2 * row, pk_edge) : NULL;
  int *media = edges ? PK_NEW(context, 2 * row, int) : NULL;
  if (media) {
    sweep->rows[0] = (pk_row){edges, media, 0};
    sweep->rows[1] = (pk_row){edges + row, media + row, 0};
    look_down(sweep, &plain);
    status = find_cuts(sweep);
  }
  if (status == PICKET_OK) {
    status = sweep_strips(sweep);
  }
  if (status == PICKET_OK) {
    finish(sweep, box);
  }
  pk_free(context, sweep->covers);
  pk_free(context, sweep->pieces);
  pk_free(context, sweep->cuts);
  pk_free(context, edges);
  pk_free(context, media);
  return status;
}

picket_status pk_geometry_box(const pk_geometry *geometry, const double low[2],
                              const double high[2], pk_box *box) {
  assert(low[0] < high[0] && low[1] < high[1]);
  pk_sweep sweep = {.geometry = geometry, .low = {low[0], low[1]}, .high = {high[0], high[1]}};
  pk_wrap(geometry, sweep.low, sweep.high);
  for (int a = 0; a < 2; a++) {
    sweep.low[a] = pk_snap(geometry, (pk_axis_name)a, sweep.low[a]);
    sweep.high[a] = pk_snap(geometry, (pk_axis_name)a, sweep.high[a]);
  }
  bool plain = true;
  look_down(&sweep, &plain);
  if (plain) {
    *box = (pk_box){.count = 1, .medium = {sweep.floor}, .fraction = {1}};
    return PICKET_OK;
  }
  return sweep_box(&sweep, box);
}
