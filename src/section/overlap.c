/* See overlap.h. Columns are fields along y at one x, [rows]. */
#include "section/overlap.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

static const double PI = 3.141592653589793238;

/* Values at a place from up to this many neighbours: cubic. */
enum { TAPS = 4 };

/* A place of E is divided into at most this many pieces along an axis, for a finer h. */
enum { MOST_PIECES = 16 };
static const double SAME = 1e-6; /* spacings that differ by less are equal */

/* Of the field: a larger step between neighbours is one at an interface. */
static const double JUMP = 0.3;

typedef struct stencil {
  int first;
  double weight[TAPS];
} stencil;

/* The part of the plane that a place stands for. */
static double width_at(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis, int i) {
  const double *line = w->line[axis];
  int last = w->lines[axis] - 1;
  if (pk_whole_on_middles(name, axis)) {
    return line[i + 1] - line[i];
  }
  return 0.5 * (line[i < last ? i + 1 : last] - line[i > 0 ? i - 1 : 0]);
}

/* Lagrange's interpolation at a coordinate, exact at the places themselves; false outside. */
static bool make_stencil(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis,
                         double at, stencil *out) {
  const double *place = pk_whole_places(w, name, axis);
  int count = pk_whole_count(w, name, axis), taps = count < TAPS ? count : TAPS;
  memset(out, 0, sizeof *out);
  if (at < w->line[axis][0] || at > w->line[axis][w->lines[axis] - 1]) {
    return false;
  }
  int low = 0, high = count;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    *(place[middle] <= at ? &low : &high) = middle;
  }
  int first = low - (taps - 1) / 2;
  first = first < 0 ? 0 : first > count - taps ? count - taps : first;
  out->first = first;
  for (int k = 0; k < taps; k++) {
    double weight = 1;
    for (int m = 0; m < taps; m++) {
      weight *= m == k ? 1 : (at - place[first + m]) / (place[first + k] - place[first + m]);
    }
    out->weight[k] = weight;
  }
  return true;
}

/* What one integral needs besides its fields: h is taken at r + shift, and the product multiplied
 * by exp(i slope·(r + phase_shift)). */
typedef struct crossing {
  const pk_section_whole *e, *h;
  pk_whole_name e_name, h_name;
  double shift[2], slope[2], phase_shift[2];
} crossing;

/* A piece of the part of the plane that a place of E stands for. */
typedef struct pk_overlap_sample {
  int place;
  double away;            /* its middle from the place, where E is taken to be straight */
  double complex measure; /* its width, and the phase */
  stencil h;
} sample;

static double spacing_at(const pk_section_whole *w, pk_axis_name axis, double at) {
  int low = 0, high = w->lines[axis] - 1;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    *(w->line[axis][middle] <= at ? &low : &high) = middle;
  }
  return w->line[axis][low + 1] - w->line[axis][low];
}

/* Pieces along an axis, as many to a place as resolve h; one at the place itself where h is not
 * finer than E. Where there is no h there are none. Returns how many. */
static int lay_samples(const crossing *c, pk_axis_name axis, sample *out) {
  const double *place = pk_whole_places(c->e, c->e_name, axis);
  const double *line = c->e->line[axis];
  int last = c->e->lines[axis] - 1, total = 0;
  bool middles = pk_whole_on_middles(c->e_name, axis);
  for (int i = 0; i < pk_whole_count(c->e, c->e_name, axis); i++) {
    double low = middles || i == 0 ? line[i] : 0.5 * (line[i - 1] + line[i]);
    double high = middles ? line[i + 1] : i == last ? line[i] : 0.5 * (line[i] + line[i + 1]);
    double ratio = (high - low) / spacing_at(c->h, axis, place[i] + c->shift[axis]);
    int pieces = ratio > MOST_PIECES ? MOST_PIECES : (int)ceil(ratio - SAME);
    pieces = pieces < 1 ? 1 : pieces;
    for (int k = 0; k < pieces; k++) {
      double width = (high - low) / pieces;
      double at = pieces == 1 ? place[i] : low + (k + 0.5) * width;
      sample *s = &out[total];
      if (make_stencil(c->h, c->h_name, axis, at + c->shift[axis], &s->h)) {
        s->place = i;
        s->away = at - place[i];
        s->measure = width * cexp(I * c->slope[axis] * (at + c->phase_shift[axis]));
        total++;
      }
    }
  }
  return total;
}

/* ∂E at a place: of the slopes to both neighbours the mean, the smaller one where E jumps. */
static double complex slope_of(const double complex *e, ptrdiff_t stride, const double *place,
                               int i, int count) {
  if (i == 0 || i == count - 1) {
    return 0;
  }
  double complex below = e[0] - e[-stride], above = e[stride] - e[0];
  double a = cabs(below), b = cabs(above), size = cabs(e[0]);
  double before = place[i] - place[i - 1], after = place[i + 1] - place[i];
  if (fmax(a, b) > JUMP * size) {
    return a / before < b / after ? below / before : above / after;
  }
  return (below + above) / (before + after);
}

/* h at one x, along y. */
static void take_column(const pk_overlap *o, const crossing *c, const stencil *s) {
  int rows = pk_whole_count(c->h, c->h_name, PK_V);
  const double complex *h = c->h->field[c->h_name] + (ptrdiff_t)s->first * rows;
  for (int j = 0; j < rows; j++) {
    o->column[j] = 0;
    for (int k = 0; k < TAPS; k++) {
      o->column[j] += s->weight[k] != 0 ? s->weight[k] * h[(ptrdiff_t)k * rows + j] : 0;
    }
  }
}

/* ∫ E_c conj(h_d) exp(…) for components that share their places. */
static double complex cross_one(const pk_overlap *o, const crossing *c) {
  const double *x = pk_whole_places(c->e, c->e_name, PK_U);
  const double *y = pk_whole_places(c->e, c->e_name, PK_V);
  int columns = pk_whole_count(c->e, c->e_name, PK_U), rows = pk_whole_count(c->e, c->e_name, PK_V);
  sample *along_x = o->sample[PK_U], *along_y = o->sample[PK_V];
  int across = lay_samples(c, PK_U, along_x), up = lay_samples(c, PK_V, along_y);
  double complex sum = 0;
  for (int p = 0; p < across; p++) {
    const sample *u = &along_x[p];
    double complex part = 0;
    take_column(o, c, &u->h);
    for (int q = 0; q < up; q++) {
      const sample *v = &along_y[q];
      const double complex *e = c->e->field[c->e_name] + (ptrdiff_t)u->place * rows + v->place;
      double complex here = *e, h = 0;
      here += u->away != 0 ? u->away * slope_of(e, rows, x, u->place, columns) : 0;
      here += v->away != 0 ? v->away * slope_of(e, 1, y, v->place, rows) : 0;
      for (int k = 0; k < TAPS; k++) {
        h += v->h.weight[k] != 0 ? v->h.weight[k] * o->column[v->h.first + k] : 0;
      }
      part += v->measure * here * conj(h);
    }
    sum += u->measure * part;
  }
  return sum;
}

/* ∫ (E × h*)_z exp(…) */
static double complex cross(const pk_overlap *o, const crossing *c) {
  crossing x = *c, y = *c;
  x.e_name = PK_WHOLE_EX;
  x.h_name = PK_WHOLE_HY;
  y.e_name = PK_WHOLE_EY;
  y.h_name = PK_WHOLE_HX;
  return cross_one(o, &x) - cross_one(o, &y);
}

static double squares(const pk_section_whole *w, pk_whole_name name) {
  int columns = pk_whole_count(w, name, PK_U), rows = pk_whole_count(w, name, PK_V);
  double sum = 0;
  for (int i = 0; i < columns; i++) {
    double width = width_at(w, name, PK_U, i);
    for (int j = 0; j < rows; j++) {
      double complex h = w->field[name][(ptrdiff_t)i * rows + j];
      sum += width * width_at(w, name, PK_V, j) * creal(h * conj(h));
    }
  }
  return sum;
}

picket_status pk_overlap_open(const pk_section_whole *a, const pk_section_whole *b,
                              pk_overlap *out) {
  pk_overlap o = {.context = a->context, .a = a, .b = b};
  int rows = a->lines[PK_V];
  rows = b && b->lines[PK_V] > rows ? b->lines[PK_V] : rows;
  for (int axis = 0; axis < 2; axis++) {
    int places = a->lines[axis];
    places = b && b->lines[axis] > places ? b->lines[axis] : places;
    o.sample[axis] = PK_NEW(o.context, MOST_PIECES * places, sample);
  }
  o.column = PK_NEW(o.context, rows, double complex);
  o.phase = PK_NEW(o.context, rows, double complex);
  if (!o.sample[0] || !o.sample[1] || !o.column || !o.phase) {
    pk_overlap_close(&o);
    return PICKET_ERROR_MEMORY;
  }
  o.a_power = cross(&o, &(crossing){.e = a, .h = a});
  o.a_field = squares(a, PK_WHOLE_HX) + squares(a, PK_WHOLE_HY);
  if (b) {
    o.b_power = cross(&o, &(crossing){.e = b, .h = b});
  }
  *out = o;
  return PICKET_OK;
}

void pk_overlap_close(pk_overlap *o) {
  if (o->context) {
    pk_free(o->context, o->sample[0]);
    pk_free(o->context, o->sample[1]);
    pk_free(o->context, o->column);
    pk_free(o->context, o->phase);
  }
  memset(o, 0, sizeof *o);
}

/* Round-off may leave a part below nothing. */
static double share(double complex forth, double complex back, double complex a_power,
                    double b_power) {
  return fmax(0, creal(forth * back / a_power) / b_power);
}

double pk_overlap_modes(const pk_overlap *o, const pk_placement *p) {
  crossing forth = {.e = o->a, .h = o->b}, back = {.e = o->b, .h = o->a};
  for (int axis = 0; axis < 2; axis++) {
    forth.shift[axis] = forth.phase_shift[axis] = -p->offset[axis];
    forth.slope[axis] = -p->slope[axis]; /* of the conjugate */
    back.shift[axis] = p->offset[axis];
    back.slope[axis] = p->slope[axis];
  }
  return share(cross(o, &forth), cross(o, &back), o->a_power, creal(o->b_power));
}

/* ∫|g|² */
static double beam_power(const pk_gaussian *g) {
  return PI / 8 * g->diameter[0] * g->diameter[1];
}

static double complex beam_at(const pk_gaussian *g, pk_axis_name axis, double at) {
  double d = at - g->centre[axis], w = 0.5 * g->diameter[axis];
  return exp(-d * d / (w * w)) * cexp(I * g->slope[axis] * d);
}

/* ∫ f conj(g) of one component with the beam. */
static double complex with_beam(const pk_overlap *o, const pk_gaussian *g, pk_whole_name name) {
  const double *x = pk_whole_places(o->a, name, PK_U), *y = pk_whole_places(o->a, name, PK_V);
  int columns = pk_whole_count(o->a, name, PK_U), rows = pk_whole_count(o->a, name, PK_V);
  for (int j = 0; j < rows; j++) {
    o->phase[j] = width_at(o->a, name, PK_V, j) * conj(beam_at(g, PK_V, y[j]));
  }
  double complex sum = 0;
  for (int i = 0; i < columns; i++) {
    const double complex *f = o->a->field[name] + (ptrdiff_t)i * rows;
    double complex part = 0;
    for (int j = 0; j < rows; j++) {
      part += f[j] * o->phase[j];
    }
    sum += width_at(o->a, name, PK_U, i) * conj(beam_at(g, PK_U, x[i])) * part;
  }
  return sum;
}

double pk_overlap_likeness(const pk_overlap *o, const pk_gaussian *g) {
  double complex sum = with_beam(o, g, g->along == PK_U ? PK_WHOLE_HY : PK_WHOLE_HX);
  return creal(sum * conj(sum)) / (o->a_field * beam_power(g));
}

/* The impedance of the beam's medium cancels: with E = g along x, h = n g along y. */
double pk_overlap_beam(const pk_overlap *o, const pk_gaussian *g) {
  bool x = g->along == PK_U;
  double complex forth = with_beam(o, g, x ? PK_WHOLE_EX : PK_WHOLE_EY);
  double complex back = conj(with_beam(o, g, x ? PK_WHOLE_HY : PK_WHOLE_HX));
  return share(forth, x ? back : -back, o->a_power, beam_power(g));
}
