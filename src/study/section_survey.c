/* See section_survey.h. */
#include "study/section_survey.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "operator/corner_exponent.h"
#include "operator/corner_list.h"
#include "slab/slab.h"
#include "study/section_bend.h"
#include "study/section_planes.h"

static const double PI = 3.141592653589793238;
static const double QUARTER_TURN = 1.57079632679489661923;

/* Steps of the base grid per shortest wavelength that a guided mode can have across, 2π/(k0 √(n² -
 * n_cut²)): members 2 to 4 of the family have 12 to 24 steps in it, which is where the error
 * follows its law (wire of silicon: bars of 2e-5). */
static const double STEPS_PER_WAVELENGTH = 6;
/* Curved and oblique shapes are resolved themselves. */
static const double STEPS_PER_SHAPE = 8;

/* Share of scattered values (extrapolate.h), times (r - 1)/(r + 1) with r the contrast: rods of
 * glass and silicon (r = 2.25 and 5.8) needed up to 1e-3. */
static const double SHARE = 2e-3;

static const double STEPS_PER_DECAY = 1.5;
static const double GROWTH = 0.3;

/* Near cut-off a mode reaches as far as it likes; this many wavelengths are followed: n² is then
 * 2.5e-4 above that of the surroundings. Steps grow with the distance, so a wide look is cheap. */
static const double LONGEST_DECAY = 10;

/* Far out: beyond every shape that a file may hold (io/read_section.c). */
/* Absorbing layers: thickness times the wavenumber that goes out, steps of the base per radian of
 * the free wave there, and the room before the layer, in radians (measured for cells, survey.c). */
static const double LAYER_RADIANS = 4, STEP_RADIANS = 0.5, ROOM_RADIANS = 2;

static const double FAR_X_UM = 49.99, FAR_Y_UM = 60;

/* A corner so weak is not told from none: 4 - 2α is 2. */
static const double WEAK = 1e-3;

static const char NOTE_LOST[] =
    "no error bar: two interfaces are too close together for grid lines on both, so the singular "
    "electric field at a corner there is not corrected";
static const char NOTE_METAL[] =
    "no error bar: a material with a negative real permittivity meets a corner, where the singular "
    "electric field is not known";

/* --- Media ------------------------------------------------------------------------------------ */

static picket_status take_media(pk_section_survey *s, double wavelength_um) {
  const pk_problem *problem = s->problem;
  s->media = pk_materials_count(problem->materials);
  s->permittivity = PK_NEW(problem->context, 3 * s->media, double complex);
  s->slope = PK_NEW(problem->context, 3 * s->media, double complex);
  if (!s->permittivity || !s->slope) {
    return PICKET_ERROR_MEMORY;
  }
  for (int m = 0; m < s->media; m++) {
    pk_medium at[3] = {{.permittivity = 1}, {.permittivity = 1}, {.permittivity = 1}};
    picket_status status = PICKET_OK;
    if (s->block->used[m]) {
      status =
          pk_materials_tensor_at(problem->materials, m, wavelength_um, problem->temperature_c, at);
      for (int c = 0; c < 3; c++) {
        s->top = fmax(s->top, creal(csqrt(at[c].permittivity)));
      }
    }
    if (status != PICKET_OK) {
      return status;
    }
    for (int c = 0; c < 3; c++) {
      s->permittivity[c * s->media + m] = at[c].permittivity;
      s->slope[c * s->media + m] = at[c].slope;
    }
    s->dispersive = s->dispersive || at[0].slope != 0;
  }
  return PICKET_OK;
}

static int medium_on(const pk_geometry *geometry, int axis, double along, double across) {
  return axis == PK_U ? pk_geometry_medium_at(geometry, along, across)
                      : pk_geometry_medium_at(geometry, across, along);
}

/* Where a side is looked at: just inside the border of a window that is given. */
static double far_out(const pk_section_survey *s, int side) {
  int axis = side / 2;
  double span = s->block->span_um[axis];
  double far = span > 0 ? 0.5 * span - PK_SAME_LINE_UM : axis == PK_U ? FAR_X_UM : FAR_Y_UM;
  return side % 2 ? far : -far;
}

/* Highest index of a guided mode of the films that a plane has along the line `axis` = at, or of
 * their surroundings. */
static picket_status films_index(const pk_section_survey *s, const pk_geometry *geometry, int axis,
                                 double at, int count, const double *line, double *index) {
  picket_context *context = s->problem->context;
  int low_side = axis == PK_U ? 2 : 0; /* of the films */
  double low = s->leaks[low_side] ? s->edge[low_side] + 1e-6 : far_out(s, low_side);
  double high = s->leaks[low_side + 1] ? s->edge[low_side + 1] - 1e-6 : far_out(s, low_side + 1);
  pk_slab_film *films = PK_NEW(context, count, pk_slab_film);
  if (!films) {
    return PICKET_ERROR_MEMORY;
  }
  pk_slab slab = {.films = films};
  bool same = true;
  int first = medium_on(geometry, axis, at, low);
  for (int i = 0; i + 1 < count; i++) {
    if (line[i] < low || line[i + 1] > high) {
      continue;
    }
    int medium = medium_on(geometry, axis, at, 0.5 * (line[i] + line[i + 1]));
    same = same && medium == first;
    films[slab.film_count].thickness_um = line[i + 1] - line[i];
    films[slab.film_count++].medium = pk_slab_isotropic(creal(s->permittivity[medium]), 0);
  }
  int last = medium_on(geometry, axis, at, high);
  slab.substrate = pk_slab_isotropic(creal(s->permittivity[first]), 0);
  slab.cover = pk_slab_isotropic(creal(s->permittivity[last]), 0);
  *index = sqrt(fmax(0, fmax(creal(s->permittivity[first]), creal(s->permittivity[last]))));
  picket_status status = PICKET_OK;
  pk_slab_mode mode;
  if (!same) {
    status =
        pk_slab_mode_of_order(context, &slab, PK_SLAB_TE, 2 * PI / s->k0, 0, &mode, NULL, NULL);
    if (status == PICKET_OK) {
      *index = fmax(*index, creal(mode.index));
    } else if (status != PICKET_ERROR_MEMORY) { /* no guided mode, or metal: the surroundings */
      pk_message_clear(context);
      status = PICKET_OK;
    }
  }
  pk_free(context, films);
  return status;
}

static picket_status side_index(const pk_section_survey *s, const pk_geometry *geometry, int side,
                                double *index) {
  picket_context *context = s->problem->context;
  int axis = side / 2;
  double *line = NULL;
  int count = 0;
  picket_status status = pk_geometry_lines(geometry, axis == PK_U ? PK_V : PK_U, &line, &count);
  if (status == PICKET_OK) {
    status = films_index(s, geometry, axis, far_out(s, side), count, line, index);
  }
  pk_free(context, line);
  return status;
}

/* Of a channel whose side differs from slice to slice the highest, which bounds that of the whole.
 */
static picket_status take_sides(pk_section_survey *s) {
  picket_status status = PICKET_OK;
  for (int side = 0; side < PK_SIDES; side++) {
    double highest = 0;
    for (int i = 0; status == PICKET_OK && i < pk_planes_count(s->block); i++) {
      double index = 0;
      status = side_index(s, pk_planes_get(s->block, i), side, &index);
      highest = fmax(highest, index);
    }
    s->side[side] = highest;
  }
  return status;
}

/* --- Extent and planes ------------------------------------------------------------------------ */

static picket_status take_extent(pk_section_survey *s) {
  const pk_section_block *block = s->block;
  picket_status status = PICKET_OK;
  for (int axis = 0; status == PICKET_OK && axis < 2; axis++) {
    bool given = block->span_um[axis] > 0;
    s->low[axis] = given ? -0.5 * block->span_um[axis] : block->low_um[axis];
    s->high[axis] = given ? 0.5 * block->span_um[axis] : block->high_um[axis];
    bool found = false;
    status = pk_planes_mirror(s->problem->context, block, axis, &found, &s->centre[axis]);
    bool bent = axis == PK_U && pk_section_bent(s);
    s->mirror[axis] = found && !bent && (!given || s->centre[axis] == 0);
  }
  return status;
}

/* A window along which nothing varies is a guide between walls; any other one is cut out of
 * surroundings that go on beyond it. */
static picket_status take_closed(pk_section_survey *s) {
  picket_status status = PICKET_OK;
  for (int axis = 0; status == PICKET_OK && axis < 2; axis++) {
    double *line = NULL;
    int count = 0;
    status = pk_planes_lines(s->problem->context, s->block, axis, &line, &count);
    bool varies = !pk_planes_are_rectangular(s->block);
    for (int i = 0; i < count; i++) {
      varies = varies || (line[i] > s->low[axis] && line[i] < s->high[axis]);
    }
    s->closed[axis] = s->block->span_um[axis] > 0 && !varies;
    pk_free(s->problem->context, line);
  }
  return status;
}

static void take_cut(pk_section_survey *s) {
  s->cut = 0;
  for (int side = 0; side < PK_SIDES; side++) {
    bool walled = s->closed[side / 2] || s->leaks[side];
    s->cut = fmax(s->cut, walled ? 0 : s->side[side]);
  }
}

/* Where no medium stands above the surroundings, every mode leaks, on all sides: whether the shapes
 * have ends there, which are then the edges. */
static bool leak_all_around(pk_section_survey *s) {
  const pk_section_block *block = s->block;
  bool possible = s->cut >= s->top;
  for (int axis = 0; axis < 2; axis++) {
    possible = possible && block->span_um[axis] == 0 && block->low_um[axis] < block->high_um[axis];
  }
  for (int side = 0; possible && side < PK_SIDES; side++) {
    s->leaks[side] = true;
    s->edge[side] = side % 2 ? s->high[side / 2] : s->low[side / 2];
  }
  return possible;
}

picket_status pk_section_survey_set_apart(pk_section_survey *s, bool *done) {
  picket_context *context = s->problem->context;
  bool found = false;
  for (int axis = 0; axis < 2; axis++) {
    double *line = NULL;
    int count = 0;
    picket_status status = pk_planes_lines(s->problem->context, s->block, axis, &line, &count);
    if (status != PICKET_OK) {
      return status;
    }
    for (int end = 0; end < 2 && count > 0; end++) {
      int side = 2 * axis + end;
      double edge = end == 0 ? line[0] : line[count - 1];
      bool beyond = end == 0 ? edge < s->low[axis] : edge > s->high[axis];
      if (axis == PK_V && beyond && s->side[side] >= s->cut && !s->leaks[side] &&
          s->block->span_um[axis] == 0) {
        s->leaks[side] = found = true;
        s->edge[side] = edge;
      }
    }
    pk_free(context, line);
  }
  picket_status status = PICKET_OK;
  if (!found && leak_all_around(s)) {
    take_cut(s);
    *done = true;
    return PICKET_OK;
  }
  if (found) {
    double kept[PK_SIDES];
    memcpy(kept, s->side, sizeof kept);
    status = take_sides(s);
    for (int side = 0; side < PK_SIDES; side++) {
      s->side[side] = s->leaks[side] ? kept[side] : s->side[side];
    }
    take_cut(s);
  }
  *done = found;
  return status;
}

picket_status pk_section_survey_take(const pk_problem *problem, const pk_section_block *block,
                                     double wavelength_um, pk_section_survey *out) {
  pk_section_survey s = {.problem = problem, .block = block, .k0 = 2 * PI / wavelength_um};
  picket_status status = take_media(&s, wavelength_um);
  if (status == PICKET_OK) {
    status = take_sides(&s);
  }
  if (status == PICKET_OK) {
    status = take_extent(&s);
  }
  if (status == PICKET_OK) {
    status = take_closed(&s);
  }
  if (status != PICKET_OK) {
    pk_section_survey_clear(&s);
    return status;
  }
  take_cut(&s);
  *out = s;
  return PICKET_OK;
}

void pk_section_survey_clear(pk_section_survey *s) {
  if (s->problem) {
    pk_free(s->problem->context, s->permittivity);
    pk_free(s->problem->context, s->slope);
  }
  memset(s, 0, sizeof *s);
}

/* --- Grids ------------------------------------------------------------------------------------ */

double pk_section_survey_least_depth(void) {
  double least = 1 / (LONGEST_DECAY * 2 * PI);
  return least * least;
}

/* 1/e length beyond a side of a mode of an index. */
static double decay_of(const pk_section_survey *s, int side, double index) {
  double square = index * index - s->side[side] * s->side[side];
  return 1 / (s->k0 * sqrt(fmax(square, pk_section_survey_least_depth())));
}

/* Lines of a grid inside (from, to): those of the geometry, and the ends of the shapes, which
 * curved and oblique ones do not have among them but where the fine steps end. [count + 2] is
 * enough. */
static int choose_lines(const pk_section_block *block, int axis, const pk_axis_wish *w, int count,
                        const double *known, double *line) {
  const double ends[2] = {block->low_um[axis], block->high_um[axis]};
  int kept = 0;
  for (int i = 0; i < count; i++) {
    line[kept++] = known[i];
  }
  for (int e = 0; e < 2; e++) {
    kept = isfinite(ends[e]) ? pk_line_insert(ends[e], kept, line) : kept;
  }
  int inside = 0;
  for (int i = 0; i < kept; i++) {
    bool repeated = inside > 0 && line[i] - line[inside - 1] < PK_SAME_LINE_UM;
    if (line[i] > w->from && line[i] < w->to && !repeated) {
      line[inside++] = line[i];
    }
  }
  return inside;
}

/* A side that modes leak into: a wall at its edge, or some of it and a layer. */
static void place_leak(const pk_section_survey *s, const pk_section_wish *wish, int side,
                       pk_axis_wish *w) {
  int end = side % 2;
  double *at = end == 0 ? &w->from : &w->to;
  *at = s->edge[side];
  if (wish->closed) {
    return;
  }
  double index = s->side[side];
  double across = s->k0 * sqrt(fmax(index * index - wish->index * wish->index, 1e-4));
  w->layer[end].thickness = LAYER_RADIANS / across;
  /* Once through the layer and back: exp(-2 across strength thickness / 3). */
  w->layer[end].strength = 1.5 * log(100 / wish->accuracy) / LAYER_RADIANS;
  double away = ROOM_RADIANS / across + w->layer[end].thickness;
  *at += end == 0 ? -away : away;
  w->outer_step = fmin(w->outer_step, STEP_RADIANS / across);
}

static void place_ends(const pk_section_survey *s, const pk_section_wish *wish, int axis,
                       pk_axis_wish *w) {
  w->from = s->low[axis];
  w->to = s->high[axis];
  w->inner_from = s->block->low_um[axis];
  w->inner_to = s->block->high_um[axis];
  w->low = w->high = s->closed[axis] ? PK_END_ZERO : wish->outer;
  bool open = s->block->span_um[axis] == 0;
  bool bent = open && axis == PK_U && pk_section_bent(s) && !wish->closed;
  if (bent) {
    pk_section_bend_place(s, wish, w);
  }
  for (int end = 0; end < 2 && !s->closed[axis] && !bent; end++) {
    int side = 2 * axis + end;
    if (!open) {
      w->outer_step = fmin(w->outer_step, decay_of(s, side, wish->index) / STEPS_PER_DECAY);
      continue;
    }
    if (s->leaks[side]) {
      place_leak(s, wish, side, w);
      continue;
    }
    double decay = decay_of(s, side, wish->index);
    double away = wish->reach * decay;
    away = axis == PK_V ? fmax(away, pk_section_bend_height(s, wish)) : away;
    *(end == 0 ? &w->from : &w->to) += end == 0 ? -away : away;
    w->outer_step = fmin(w->outer_step, decay / STEPS_PER_DECAY);
  }
  w->outer_step = isfinite(w->outer_step) ? fmax(w->step, w->outer_step) : 2 * w->step;
  if (s->mirror[axis]) {
    w->from = s->centre[axis];
    w->low = wish->plane[axis];
    w->layer[0] = (pk_layer){0};
  }
}

static picket_status lay_axis(const pk_section_survey *s, const pk_section_wish *wish, int axis,
                              pk_axis *out) {
  picket_context *context = s->problem->context;
  double *line = NULL;
  int count = 0;
  picket_status status = pk_planes_lines(s->problem->context, s->block, axis, &line, &count);
  if (status != PICKET_OK) {
    return status;
  }
  double wavelength = 2 * PI / s->k0;
  pk_axis_wish w = {
      .step = wavelength / (STEPS_PER_WAVELENGTH * sqrt(s->top * s->top - s->cut * s->cut)),
      .outer_step = INFINITY, /* far out a mode varies with its decay only */
      .growth = GROWTH,
      .least_intervals = 1};
  const pk_section_block *block = s->block;
  if (!pk_planes_are_rectangular(block)) {
    double size = fmin(block->high_um[0] - block->low_um[0], block->high_um[1] - block->low_um[1]);
    w.step = fmin(w.step, size / STEPS_PER_SHAPE);
  }
  w.step = wish->step > 0 ? fmin(w.step, wish->step) : w.step;
  place_ends(s, wish, axis, &w);
  double *chosen = PK_NEW(context, count + 2, double);
  if (chosen) {
    w.lines = chosen;
    w.line_count = choose_lines(s->block, axis, &w, count, line, chosen);
    status = pk_axis_lay(context, &w, out);
  } else {
    status = PICKET_ERROR_MEMORY;
  }
  pk_free(context, chosen);
  pk_free(context, line);
  return status;
}

picket_status pk_section_survey_lay(const pk_section_survey *s, const pk_section_wish *wish,
                                    pk_axis *x, pk_axis *y) {
  picket_status status = lay_axis(s, wish, PK_U, x);
  if (status == PICKET_OK) {
    status = lay_axis(s, wish, PK_V, y);
    if (status != PICKET_OK) {
      pk_axis_clear(s->problem->context, x);
    }
  }
  return status;
}

/* --- Law -------------------------------------------------------------------------------------- */

/* The smallest exponent of all corners; negative where one is not known. */
static double smallest_exponent(const pk_section_survey *s, const pk_corner_list *list) {
  double smallest = 1;
  for (int i = 0; i < list->count; i++) {
    pk_sectors sectors = {.count = 4};
    for (int q = 0; q < 4; q++) {
      sectors.angle[q] = QUARTER_TURN;
      sectors.permittivity[q] = creal(s->permittivity[list->corner[i].medium[q]]);
    }
    double complex alpha[PK_CORNER_EXPONENTS];
    if (pk_corner_exponents(&sectors, alpha) < 1) {
      return -1;
    }
    smallest = fmin(smallest, creal(alpha[0]));
  }
  return smallest;
}

picket_status pk_section_survey_law(const pk_section_survey *s, const pk_axis *x, const pk_axis *y,
                                    pk_error_law *out) {
  pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1};
  law.smooth = pk_planes_are_rectangular(s->block) ? 1 : 0;
  double least = s->top;
  for (int m = 0; m < s->media; m++) {
    least = s->block->used[m] ? fmin(least, sqrt(cabs(s->permittivity[m]))) : least;
  }
  double ratio = least * least / (s->top * s->top);
  law.share = law.smooth ? 0 : SHARE * (1 - ratio) / (1 + ratio);
  law.share_order = 2;
  law.curved = law.smooth ? 0 : 1;
  double alpha = 1;
  for (int i = 0; i < pk_planes_count(s->block); i++) {
    pk_corner_list list;
    picket_status status =
        pk_corner_list_take(s->problem->context, pk_planes_get(s->block, i), x, y, &list);
    if (status != PICKET_OK) {
      return status;
    }
    alpha = fmin(alpha, smallest_exponent(s, &list));
    law.no_bar = list.lost_count > 0 ? NOTE_LOST : law.no_bar;
    law.curved = list.other_count > 0 ? 2 : law.curved;
    pk_corner_list_clear(s->problem->context, &list);
  }
  if (alpha < 0 && !law.no_bar) {
    law.no_bar = NOTE_METAL;
  } else if (alpha < 1 - WEAK && law.smooth && !law.no_bar) {
    law = (pk_error_law){.count = 3, .exponent = {2, 4 - 2 * alpha, 4}, .smooth = 1, .corners = 1};
  }
  *out = law;
  return PICKET_OK;
}
