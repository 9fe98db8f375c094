/* See axis.h.
 *
 * The spacing between two neighbouring lines a < b follows the size function
 *   h(s) = min(cap, h_a + g (s - a), h_b + g (b - s)),
 * with h_a and h_b limited by the short intervals on either side; interval ends are placed at equal
 * steps of ∫ ds / h(s). */
#include "grid/axis.h"

#include <assert.h>
#include <math.h>

#include "base/memory.h"

enum { SAMPLES = 256 }; /* of the integral of 1/h: 1e-5 of an interval, and only a placement */

/* Lines closer than this part of the step are one line: averaging is exact without snapping, and
 * slivers would ruin the conditioning of the matrix. */
static const double SLIVER = 2e-3;

typedef struct layout {
  int count;    /* marks: both ends and the lines between */
  double *mark; /* rising */
  double *step; /* spacing at each mark */
} layout;

static void layout_clear(picket_context *context, layout *l) {
  pk_free(context, l->mark);
  pk_free(context, l->step);
}

static void add_mark(const pk_axis_wish *wish, double s, layout *l) {
  double sliver = SLIVER * wish->step;
  if (s - l->mark[l->count - 1] > sliver && wish->to - s > sliver) {
    l->mark[l->count++] = s;
  }
}

/* Ends, starts of absorbing layers, and the lines between. */
static picket_status layout_marks(picket_context *context, const pk_axis_wish *wish, layout *l) {
  l->mark = PK_NEW(context, wish->line_count + 4, double);
  l->step = PK_NEW(context, wish->line_count + 4, double);
  if (!l->mark || !l->step) {
    return PICKET_ERROR_MEMORY;
  }
  l->mark[l->count++] = wish->from;
  add_mark(wish, wish->from + wish->layer[0].thickness, l);
  for (int i = 0; i < wish->line_count; i++) {
    add_mark(wish, wish->lines[i], l);
  }
  add_mark(wish, wish->to - wish->layer[1].thickness, l);
  l->mark[l->count++] = wish->to;
  return PICKET_OK;
}

static double cap_between(const pk_axis_wish *wish, double a, double b) {
  bool inner = b > wish->inner_from && a < wish->inner_to;
  bool low = wish->low_step > 0 && b <= wish->inner_from;
  return inner ? wish->step : low ? wish->low_step : wish->outer_step;
}

/* The spacing at each mark: not above the caps of its neighbours nor a share of their lengths, and
 * growing no faster than allowed from mark to mark. */
static void layout_steps(const pk_axis_wish *wish, layout *l) {
  int last = l->count - 1;
  for (int i = 0; i <= last; i++) {
    double step = INFINITY;
    for (int k = i - 1; k <= i; k++) {
      if (k >= 0 && k < last) {
        double length = l->mark[k + 1] - l->mark[k];
        step = fmin(step, fmin(cap_between(wish, l->mark[k], l->mark[k + 1]),
                               length / wish->least_intervals));
      }
    }
    l->step[i] = step;
  }
  if (wish->low == PK_END_PERIODIC) {
    l->step[0] = l->step[last] = fmin(l->step[0], l->step[last]);
  }
  for (int pass = 0; pass < 2; pass++) {
    for (int i = 1; i <= last; i++) {
      double grown = wish->growth * (l->mark[i] - l->mark[i - 1]);
      l->step[i] = fmin(l->step[i], l->step[i - 1] + grown);
    }
    for (int i = last - 1; i >= 0; i--) {
      double grown = wish->growth * (l->mark[i + 1] - l->mark[i]);
      l->step[i] = fmin(l->step[i], l->step[i + 1] + grown);
    }
    if (wish->low == PK_END_PERIODIC) {
      l->step[0] = l->step[last] = fmin(l->step[0], l->step[last]);
    }
  }
}

static double size_at(const pk_axis_wish *wish, const layout *l, int k, double s) {
  double a = l->mark[k], b = l->mark[k + 1];
  double h = fmin(l->step[k] + wish->growth * (s - a), l->step[k + 1] + wish->growth * (b - s));
  return fmin(h, cap_between(wish, a, b));
}

/* Cumulative ∫ ds/h over segment k at SAMPLES + 1 points, by the midpoint rule. */
static double segment_integral(const pk_axis_wish *wish, const layout *l, int k,
                               double *cumulated) {
  double a = l->mark[k], ds = (l->mark[k + 1] - a) / SAMPLES;
  cumulated[0] = 0;
  for (int i = 0; i < SAMPLES; i++) {
    cumulated[i + 1] = cumulated[i] + ds / size_at(wish, l, k, a + (i + 0.5) * ds);
  }
  return cumulated[SAMPLES];
}

static int segment_intervals(const pk_axis_wish *wish, double integral) {
  int n = (int)ceil(integral - 0.02);
  return n > wish->least_intervals ? n : wish->least_intervals;
}

/* Fills line[0..n-1] of segment k, its end belongs to the next segment. */
static void segment_fill(const layout *l, int k, int n, const double *cumulated, double *line) {
  double a = l->mark[k], ds = (l->mark[k + 1] - a) / SAMPLES;
  int at = 0;
  for (int i = 0; i < n; i++) {
    double goal = cumulated[SAMPLES] * i / n;
    while (at < SAMPLES - 1 && cumulated[at + 1] < goal) {
      at++;
    }
    double part = (goal - cumulated[at]) / (cumulated[at + 1] - cumulated[at]);
    line[i] = a + (at + part) * ds;
  }
}

static picket_status axis_allocate(picket_context *context, int intervals, pk_axis *axis) {
  axis->intervals = intervals;
  axis->line = PK_NEW(context, intervals + 1, double);
  axis->length = PK_NEW(context, intervals, double complex);
  return axis->line && axis->length ? PICKET_OK : PICKET_ERROR_MEMORY;
}

/* 1 + i strength t² at the middle of an interval: the midpoint rule keeps second order. */
static double complex stretch_at(const pk_axis *axis, double s) {
  double depth[2] = {axis->line[0] + axis->layer[0].thickness - s,
                     s - (axis->line[axis->intervals] - axis->layer[1].thickness)};
  double complex stretch = 1;
  for (int e = 0; e < 2; e++) {
    if (axis->layer[e].thickness > 0 && depth[e] > 0) {
      double t = depth[e] / axis->layer[e].thickness;
      stretch += I * axis->layer[e].strength * t * t;
    }
  }
  return stretch;
}

static void axis_lengths(pk_axis *axis) {
  for (int i = 0; i < axis->intervals; i++) {
    double a = axis->line[i], b = axis->line[i + 1];
    axis->length[i] = (b - a) * stretch_at(axis, 0.5 * (a + b));
  }
}

static picket_status fill_axis(picket_context *context, const pk_axis_wish *wish, const layout *l,
                               pk_axis *axis) {
  double cumulated[SAMPLES + 1];
  int total = 0;
  for (int k = 0; k + 1 < l->count; k++) {
    total += segment_intervals(wish, segment_integral(wish, l, k, cumulated));
  }
  picket_status status = axis_allocate(context, total, axis);
  int at = 0;
  for (int k = 0; status == PICKET_OK && k + 1 < l->count; k++) {
    int n = segment_intervals(wish, segment_integral(wish, l, k, cumulated));
    segment_fill(l, k, n, cumulated, axis->line + at);
    at += n;
  }
  if (status == PICKET_OK) {
    axis->line[total] = wish->to;
    axis_lengths(axis);
  }
  return status;
}

picket_status pk_axis_lay(picket_context *context, const pk_axis_wish *wish, pk_axis *out) {
  assert(wish->to > wish->from && wish->step > 0 && wish->outer_step > 0);
  pk_axis axis = {.low = wish->low, .high = wish->high, .layer = {wish->layer[0], wish->layer[1]}};
  layout l = {0};
  picket_status status = layout_marks(context, wish, &l);
  if (status == PICKET_OK) {
    layout_steps(wish, &l);
    status = fill_axis(context, wish, &l, &axis);
  }
  layout_clear(context, &l);
  if (status != PICKET_OK) {
    pk_axis_clear(context, &axis);
    return status;
  }
  *out = axis;
  return PICKET_OK;
}

static int insert_sorted(double *values, int count, double value) {
  int at = count;
  while (at > 0 && values[at - 1] > value) {
    values[at] = values[at - 1];
    at--;
  }
  values[at] = value;
  return count + 1;
}

picket_status pk_axis_lay_repeated(picket_context *context, const pk_axis_wish *wish, int copies,
                                   pk_axis *out) {
  double repeat = (wish->to - wish->from) / copies;
  double *lines = PK_NEW(context, wish->line_count, double);
  if (!lines) {
    return PICKET_ERROR_MEMORY;
  }
  int count = 0;
  for (int i = 0; i < wish->line_count; i++) {
    double offset = fmod(wish->lines[i] - wish->from, repeat);
    count = insert_sorted(lines, count, wish->from + offset);
  }
  pk_axis_wish one = *wish;
  one.to = wish->from + repeat;
  one.lines = lines;
  one.line_count = count;
  pk_axis part = {0}, axis = {.low = wish->low, .high = wish->high};
  picket_status status = pk_axis_lay(context, &one, &part);
  if (status == PICKET_OK) {
    status = axis_allocate(context, part.intervals * copies, &axis);
  }
  for (int c = 0; status == PICKET_OK && c < copies; c++) {
    for (int i = 0; i < part.intervals; i++) {
      axis.line[c * part.intervals + i] = part.line[i] + c * repeat;
    }
  }
  if (status == PICKET_OK) {
    axis.line[axis.intervals] = wish->to;
    axis_lengths(&axis);
    *out = axis;
  } else {
    pk_axis_clear(context, &axis);
  }
  pk_axis_clear(context, &part);
  pk_free(context, lines);
  return status;
}

picket_status pk_axis_divide(picket_context *context, const pk_axis *base, int m, pk_axis *out) {
  pk_axis axis = {.low = base->low, .high = base->high, .layer = {base->layer[0], base->layer[1]}};
  picket_status status = axis_allocate(context, base->intervals * m, &axis);
  if (status != PICKET_OK) {
    pk_axis_clear(context, &axis);
    return status;
  }
  for (int i = 0; i < base->intervals; i++) {
    double a = base->line[i], b = base->line[i + 1];
    for (int k = 0; k < m; k++) {
      axis.line[i * m + k] = a + (b - a) * k / m;
    }
  }
  axis.line[axis.intervals] = base->line[base->intervals];
  axis_lengths(&axis);
  *out = axis;
  return PICKET_OK;
}

static double moved_place(int count, const double *marks, const double *moved, double s) {
  if (s <= marks[0]) {
    return s + moved[0] - marks[0];
  }
  for (int i = 0; i + 1 < count; i++) {
    if (s <= marks[i + 1]) {
      double part = (s - marks[i]) / (marks[i + 1] - marks[i]);
      return moved[i] + part * (moved[i + 1] - moved[i]);
    }
  }
  return s + moved[count - 1] - marks[count - 1];
}

picket_status pk_axis_move(picket_context *context, const pk_axis *axis, int count,
                           const double *marks, const double *moved, pk_axis *out) {
  pk_axis copy = {.low = axis->low, .high = axis->high, .layer = {axis->layer[0], axis->layer[1]}};
  picket_status status = axis_allocate(context, axis->intervals, &copy);
  if (status != PICKET_OK) {
    pk_axis_clear(context, &copy);
    return status;
  }
  for (int i = 0; i <= axis->intervals; i++) {
    copy.line[i] = moved_place(count, marks, moved, axis->line[i]);
  }
  axis_lengths(&copy);
  *out = copy;
  return PICKET_OK;
}

void pk_axis_clear(picket_context *context, pk_axis *axis) {
  pk_free(context, axis->line);
  pk_free(context, axis->length);
  axis->line = NULL;
  axis->length = NULL;
  axis->intervals = 0;
}

int pk_axis_first_line(const pk_axis *axis) {
  return axis->low == PK_END_ZERO ? 1 : 0;
}

int pk_axis_unknowns(const pk_axis *axis) {
  int last = axis->high == PK_END_FREE ? axis->intervals : axis->intervals - 1;
  return last - pk_axis_first_line(axis) + 1;
}

void pk_axis_dual(const pk_axis *axis, int line, double *low, double *high,
                  double complex *length) {
  double centre = axis->line[line];
  *low = *high = centre;
  *length = 0;
  bool wraps = axis->low == PK_END_PERIODIC;
  if (line > 0 || wraps) {
    int below = line > 0 ? line - 1 : axis->intervals - 1;
    *low = centre - 0.5 * (axis->line[below + 1] - axis->line[below]);
    *length += 0.5 * axis->length[below];
  }
  if (line < axis->intervals) {
    *high = centre + 0.5 * (axis->line[line + 1] - axis->line[line]);
    *length += 0.5 * axis->length[line];
  }
}
