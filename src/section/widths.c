/* See widths.h. Sums over the cells between lines; S_z is taken in their middles. */
#include "section/widths.h"

#include <math.h>

#include "base/memory.h"
#include "section/climb.h"
#include "section/overlap.h"

static const double FALL = 0.13533528323661270; /* e⁻² */

/* Less than this is chance likeness: a mode with a node through its middle. */
static const double LEAST_OVERLAP = 0.01;

static const double STRIDE[2] = {0.2, 0.2}; /* of the logarithms of diameters */

static double length_of(const pk_section_whole *w, pk_axis_name axis, int i) {
  return w->line[axis][i + 1] - w->line[axis][i];
}

static double complex at(const pk_section_whole *w, pk_whole_name name, int i, int j) {
  return w->field[name][(ptrdiff_t)i * pk_whole_count(w, name, PK_V) + j];
}

/* Re E_x h_y* at (i+½, j) and -Re E_y h_x* at (i, j+½): both without jumps along the axis on whose
 * lines they lie. */
static double flow_x(const pk_section_whole *w, int i, int j) {
  return creal(at(w, PK_WHOLE_EX, i, j) * conj(at(w, PK_WHOLE_HY, i, j)));
}

static double flow_y(const pk_section_whole *w, int i, int j) {
  return -creal(at(w, PK_WHOLE_EY, i, j) * conj(at(w, PK_WHOLE_HX, i, j)));
}

static double flow(const pk_section_whole *w, int i, int j) {
  return 0.5 * (flow_x(w, i, j) + flow_x(w, i, j + 1) + flow_y(w, i, j) + flow_y(w, i + 1, j));
}

/* --- Moments ---------------------------------------------------------------------------------- */

static void take_moments(const pk_section_whole *w, pk_section_widths *out, double *peak) {
  double power = 0, first[2] = {0}, second[2] = {0};
  *peak = 0;
  for (int i = 0; i + 1 < w->lines[PK_U]; i++) {
    double width = length_of(w, PK_U, i), x = w->middle[PK_U][i];
    for (int j = 0; j + 1 < w->lines[PK_V]; j++) {
      double height = length_of(w, PK_V, j), y = w->middle[PK_V][j];
      double s = flow(w, i, j), part = width * height * s;
      *peak = fmax(*peak, s);
      power += part;
      first[0] += part * x;
      first[1] += part * y;
      /* The mean of x² over a cell. */
      second[0] += part * (x * x + width * width / 12);
      second[1] += part * (y * y + height * height / 12);
    }
  }
  double variance[2];
  for (int axis = 0; axis < 2; axis++) {
    out->centroid[axis] = first[axis] / power;
    variance[axis] = second[axis] / power - out->centroid[axis] * out->centroid[axis];
    out->rms_along[axis] = 4 * sqrt(variance[axis]);
  }
  out->rms = sqrt(8 * (variance[0] + variance[1]));
}

void pk_section_centre(const pk_section_whole *w, double centroid[2], double rms_along[2]) {
  pk_section_widths moments = {0};
  double peak;
  take_moments(w, &moments, &peak);
  for (int axis = 0; axis < 2; axis++) {
    centroid[axis] = moments.centroid[axis];
    rms_along[axis] = moments.rms_along[axis];
  }
}

/* --- Slopes ----------------------------------------------------------------------------------- */

/* Samples of a component along an axis. */
typedef struct row {
  const double complex *value;
  ptrdiff_t stride;
  int count;
  const double *place;
} row;

static double complex slope(const row *r, int i) {
  return (r->value[(i + 1) * r->stride] - r->value[i * r->stride]) /
         (r->place[i + 1] - r->place[i]);
}

static double complex beyond(const row *r, int near, int far, double to) {
  double a = 0.5 * (r->place[near] + r->place[near + 1]);
  double b = 0.5 * (r->place[far] + r->place[far + 1]);
  double complex s = slope(r, near);
  return s + (to - a) / (a - b) * (s - slope(r, far));
}

static double square(double complex v) {
  return creal(v) * creal(v) + cimag(v) * cimag(v);
}

/* ∫|∂f|² along a row. Between lines a slope is plain; across a line on which an interface may lie
 * it has a jump, so that the slopes on its two sides are continued to it. */
static double slope_squares(const row *r, bool across_lines, const double *line) {
  double sum = 0;
  for (int i = 0; i + 1 < r->count; i++) {
    double length = r->place[i + 1] - r->place[i], value = square(slope(r, i));
    if (across_lines && i >= 2 && i + 3 < r->count) {
      double to = line[i + 1];
      value = 0.5 * (square(beyond(r, i - 1, i - 2, to)) + square(beyond(r, i + 1, i + 2, to)));
    }
    sum += length * value;
  }
  return sum;
}

/* Weight of a place across the direction of the slope: its part of the plane. */
static double weight_of(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis, int i) {
  if (pk_whole_on_middles(name, axis)) {
    return length_of(w, axis, i);
  }
  int last = w->lines[axis] - 1;
  double before = i > 0 ? length_of(w, axis, i - 1) : 0;
  return 0.5 * (before + (i < last ? length_of(w, axis, i) : 0));
}

static double slopes(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis) {
  pk_axis_name other = axis == PK_U ? PK_V : PK_U;
  int rows = pk_whole_count(w, name, PK_V);
  double sum = 0;
  for (int k = 0; k < pk_whole_count(w, name, other); k++) {
    row r = {.value = w->field[name] + (axis == PK_U ? k : (ptrdiff_t)k * rows),
             .stride = axis == PK_U ? rows : 1,
             .count = pk_whole_count(w, name, axis),
             .place = pk_whole_places(w, name, axis)};
    sum += weight_of(w, name, other, k) *
           slope_squares(&r, pk_whole_on_middles(name, axis), w->line[axis]);
  }
  return sum;
}

static double squares(const pk_section_whole *w, pk_whole_name name) {
  double sum = 0;
  for (int i = 0; i < pk_whole_count(w, name, PK_U); i++) {
    double width = weight_of(w, name, PK_U, i);
    for (int j = 0; j < pk_whole_count(w, name, PK_V); j++) {
      sum += width * weight_of(w, name, PK_V, j) * square(at(w, name, i, j));
    }
  }
  return sum;
}

static void take_petermann(const pk_section_whole *w, pk_section_widths *out) {
  double field = squares(w, PK_WHOLE_HX) + squares(w, PK_WHOLE_HY), all = 0;
  for (int axis = 0; axis < 2; axis++) {
    double s =
        slopes(w, PK_WHOLE_HX, (pk_axis_name)axis) + slopes(w, PK_WHOLE_HY, (pk_axis_name)axis);
    out->petermann_along[axis] = 2 * sqrt(field / s);
    all += s;
  }
  out->petermann = 2 * sqrt(2 * field / all);
}

/* --- 1/e² ------------------------------------------------------------------------------------- */

/* The interval of `place` that holds a coordinate, and how far into it. */
static int find(const double *place, int count, double to, double *part) {
  int low = 0, high = count - 1;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    *(place[middle] <= to ? &low : &high) = middle;
  }
  *part = fmin(1, fmax(0, (to - place[low]) / (place[low + 1] - place[low])));
  return low;
}

/* S_z in the middle i of an axis, on the line through the centroid: between lines and between
 * middles of the other axis. */
static double flow_along(const pk_section_whole *w, pk_axis_name axis, int i, const double *to) {
  pk_axis_name other = axis == PK_U ? PK_V : PK_U;
  double p, q;
  int line = find(w->line[other], w->lines[other], to[other], &p);
  int middle = find(w->middle[other], w->lines[other] - 1, to[other], &q);
  double sum = 0;
  for (int k = 0; k < 2; k++) {
    double on_line = k == 0 ? 1 - p : p, on_middle = 0.5 * (k == 0 ? 1 - q : q);
    int l = line + k, m = middle + k;
    sum += axis == PK_U
               ? on_line * flow_x(w, i, l) + on_middle * (flow_y(w, i, m) + flow_y(w, i + 1, m))
               : on_line * flow_y(w, l, i) + on_middle * (flow_x(w, m, i) + flow_x(w, m, i + 1));
  }
  return sum;
}

/* The summit of the parabola through three logarithms, where they belong to one smooth hump. */
static double summit(const double *s, const double *x, int i, int count) {
  if (i == 0 || i == count - 1 || fmin(s[i - 1], s[i + 1]) < 0.5 * s[i]) {
    return s[i];
  }
  double a = (log(s[i]) - log(s[i - 1])) / (x[i] - x[i - 1]);
  double b = (log(s[i + 1]) - log(s[i])) / (x[i + 1] - x[i]);
  double bend = (b - a) / (x[i + 1] - x[i - 1]);
  double middle = a + bend * (x[i] - x[i - 1]); /* slope at x_i */
  return bend < 0 ? s[i] * exp(fmin(-middle * middle / (4 * bend), log(2))) : s[i];
}

/* Where log s falls to a level between an outer and an inner place; straight, as tails are. */
static double crossing(const double *s, const double *x, int outer, int inner, double level) {
  if (s[outer] <= 0) {
    return 0.5 * (x[outer] + x[inner]);
  }
  double t = log(s[inner] / level) / log(s[inner] / s[outer]);
  return x[inner] + t * (x[outer] - x[inner]);
}

static double fall(const double *s, const double *x, int count, double peak) {
  int top = 0, low = 0, high = count - 1;
  for (int i = 1; i < count; i++) {
    top = s[i] > s[top] ? i : top;
  }
  double level = FALL * summit(s, x, top, count);
  if (!(s[top] > FALL * peak)) {
    return NAN;
  }
  while (s[low] < level) {
    low++;
  }
  while (s[high] < level) {
    high--;
  }
  if (low == 0 || high == count - 1) {
    return NAN;
  }
  return crossing(s, x, high + 1, high, level) - crossing(s, x, low - 1, low, level);
}

static picket_status take_falls(const pk_section_whole *w, double peak, pk_section_widths *out) {
  for (int axis = 0; axis < 2; axis++) {
    int count = w->lines[axis] - 1;
    double *s = PK_NEW(w->context, count, double);
    if (!s) {
      return PICKET_ERROR_MEMORY;
    }
    for (int i = 0; i < count; i++) {
      s[i] = flow_along(w, (pk_axis_name)axis, i, out->centroid);
    }
    out->fall_along[axis] = fall(s, w->middle[axis], count, peak);
    pk_free(w->context, s);
  }
  return PICKET_OK;
}

/* --- Beams ------------------------------------------------------------------------------------ */

typedef struct search {
  const pk_overlap *overlap;
  pk_gaussian beam;
  bool round;
} search;

/* at: logarithms of the diameters. */
static double height(const double *diameters, void *user) {
  search *s = user;
  s->beam.diameter[0] = exp(diameters[0]);
  s->beam.diameter[1] = exp(diameters[s->round ? 0 : 1]);
  return pk_overlap_likeness(s->overlap, &s->beam);
}

static void take_beams(const pk_overlap *o, pk_section_widths *out) {
  search s = {.overlap = o, .round = true};
  double best = -1;
  for (int axis = 0; axis < 2; axis++) {
    s.beam.centre[axis] = out->centroid[axis];
  }
  for (int along = 0; along < 2; along++) {
    double diameter = log(out->rms);
    s.beam.along = (pk_axis_name)along;
    double found = pk_climb(1, &diameter, STRIDE, height, &s);
    if (found > best) {
      best = found;
      out->beam = exp(diameter);
      out->beam_polarization = s.beam.along;
    }
  }
  s.beam.along = out->beam_polarization;
  s.round = false;
  double diameter[2] = {log(out->rms_along[0]), log(out->rms_along[1])};
  double oval = pk_climb(2, diameter, STRIDE, height, &s);
  bool like = best > LEAST_OVERLAP;
  out->beam = like ? out->beam : NAN;
  out->beam_overlap = like ? best : NAN;
  for (int axis = 0; axis < 2; axis++) {
    out->oval_along[axis] = like ? exp(diameter[axis]) : NAN;
  }
  out->oval_overlap = like ? oval : NAN;
}

picket_status pk_section_widths_take(const pk_section_whole *w, pk_section_widths *out) {
  pk_section_widths found = {0};
  pk_overlap overlap = {0};
  double peak;
  take_moments(w, &found, &peak);
  take_petermann(w, &found);
  picket_status status = take_falls(w, peak, &found);
  if (status == PICKET_OK) {
    status = pk_overlap_open(w, NULL, &overlap);
  }
  if (status == PICKET_OK) {
    take_beams(&overlap, &found);
    *out = found;
  }
  pk_overlap_close(&overlap);
  return status;
}
