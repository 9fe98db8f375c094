/* See widths.h. Sums over the cells between lines; S_z is taken in their middles. */
#include "section/widths.h"

#include <math.h>

#include "base/memory.h"
#include "section/climb.h"
#include "section/overlap.h"
#include "section/section_private.h"

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

/* The part of an axis that a place stands for. */
static double weight_of(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis, int i) {
  if (pk_whole_on_middles(name, axis)) {
    return length_of(w, axis, i);
  }
  int last = w->lines[axis] - 1;
  double before = i > 0 ? length_of(w, axis, i - 1) : 0;
  return 0.5 * (before + (i < last ? length_of(w, axis, i) : 0));
}

/* --- Moments ---------------------------------------------------------------------------------- */

typedef struct moments {
  double power, first[2], second[2];
} moments;

/* Sums of one part of S_z where it lives: such sums over a smooth field err far less than h². */
static void add_moments(const pk_section_whole *w, pk_whole_name name, moments *m) {
  const double *x = pk_whole_places(w, name, PK_U), *y = pk_whole_places(w, name, PK_V);
  for (int i = 0; i < pk_whole_count(w, name, PK_U); i++) {
    double width = weight_of(w, name, PK_U, i);
    for (int j = 0; j < pk_whole_count(w, name, PK_V); j++) {
      double s = name == PK_WHOLE_EX ? flow_x(w, i, j) : flow_y(w, i, j);
      double part = width * weight_of(w, name, PK_V, j) * s;
      m->power += part;
      m->first[0] += part * x[i];
      m->first[1] += part * y[j];
      m->second[0] += part * x[i] * x[i];
      m->second[1] += part * y[j] * y[j];
    }
  }
}

static void take_moments(const pk_section_whole *w, pk_section_widths *out) {
  moments m = {0};
  double variance[2];
  add_moments(w, PK_WHOLE_EX, &m);
  add_moments(w, PK_WHOLE_EY, &m);
  for (int axis = 0; axis < 2; axis++) {
    out->centroid[axis] = m.first[axis] / m.power;
    variance[axis] = m.second[axis] / m.power - out->centroid[axis] * out->centroid[axis];
    out->rms_along[axis] = 4 * sqrt(variance[axis]);
  }
  out->rms = sqrt(8 * (variance[0] + variance[1]));
}

static double peak_of(const pk_section_whole *w) {
  double peak = 0;
  for (int i = 0; i + 1 < w->lines[PK_U]; i++) {
    for (int j = 0; j + 1 < w->lines[PK_V]; j++) {
      peak = fmax(peak, flow(w, i, j));
    }
  }
  return peak;
}

void pk_section_centre(const pk_section_whole *w, double centroid[2], double rms_along[2]) {
  pk_section_widths all = {0};
  take_moments(w, &all);
  for (int axis = 0; axis < 2; axis++) {
    centroid[axis] = all.centroid[axis];
    rms_along[axis] = all.rms_along[axis];
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

static double square(double complex v) {
  return creal(v) * creal(v) + cimag(v) * cimag(v);
}

/* ∫|∂f|² along a row. */
static double slope_squares(const row *r) {
  double sum = 0;
  for (int i = 0; i + 1 < r->count; i++) {
    sum += (r->place[i + 1] - r->place[i]) * square(slope(r, i));
  }
  return sum;
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
    sum += weight_of(w, name, other, k) * slope_squares(&r);
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

static void take_petermann(const pk_section_whole *w, const double kinks[2],
                           pk_section_widths *out) {
  double field = squares(w, PK_WHOLE_HX) + squares(w, PK_WHOLE_HY), all = 0;
  for (int axis = 0; axis < 2; axis++) {
    double s =
        slopes(w, PK_WHOLE_HX, (pk_axis_name)axis) + slopes(w, PK_WHOLE_HY, (pk_axis_name)axis);
    s += kinks ? kinks[axis] : 0;
    out->petermann_along[axis] = 2 * sqrt(field / s);
    all += s;
  }
  out->petermann = 2 * sqrt(2 * field / all);
}

static double step_of(const double complex *e, int below, int above) {
  return below < 0 || above < 0 ? 0 : square(e[above] - e[below]);
}

void pk_section_kinks(const pk_section *s, double k0, const pk_section_fields *f, double kinks[2]) {
  kinks[0] = kinks[1] = 0;
  for (int i = 0; i < s->nx; i++) {
    int left = pk_interval_below(&s->x, i), right = pk_interval_above(&s->x, i);
    for (int j = 0; j < s->ny; j++) {
      int down = pk_interval_below(&s->y, j), up = pk_interval_above(&s->y, j);
      double part = 0.25 * k0 * k0 * s->width_x[i] * s->width_y[j] * square(f->ez[i * s->ny + j]);
      kinks[0] += part * step_of(s->sites.x, left < 0 ? -1 : left * s->ny + j,
                                 right < 0 ? -1 : right * s->ny + j);
      kinks[1] += part * step_of(s->sites.y, down < 0 ? -1 : i * s->my + down,
                                 up < 0 ? -1 : i * s->my + up);
    }
  }
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

picket_status pk_section_widths_take(const pk_section_whole *w, const double kinks[2],
                                     pk_section_widths *out) {
  pk_section_widths found = {0};
  pk_overlap overlap = {0};
  take_moments(w, &found);
  take_petermann(w, kinks, &found);
  picket_status status = take_falls(w, peak_of(w), &found);
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
