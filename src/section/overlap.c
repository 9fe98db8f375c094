/* See overlap.h. Columns are fields along y at one x, [rows]. */
#include "section/overlap.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

static const double PI = 3.141592653589793238;

/* Values at a place from up to this many neighbours: cubic. */
enum { TAPS = 4 };

typedef struct pk_overlap_stencil {
  int first;
  double weight[TAPS]; /* all zero outside the plane */
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

/* Lagrange's interpolation at a coordinate, exact at the places themselves. */
static void make_stencil(const pk_section_whole *w, pk_whole_name name, pk_axis_name axis,
                         double at, stencil *out) {
  const double *place = pk_whole_places(w, name, axis);
  int count = pk_whole_count(w, name, axis), taps = count < TAPS ? count : TAPS;
  memset(out, 0, sizeof *out);
  if (at < w->line[axis][0] || at > w->line[axis][w->lines[axis] - 1]) {
    return;
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
}

/* What one integral needs besides its fields: h is taken at r + shift, and the product multiplied
 * by exp(i slope·(r + phase_shift)). */
typedef struct crossing {
  const pk_section_whole *e, *h;
  double shift[2], slope[2], phase_shift[2];
} crossing;

static double complex phase_at(const crossing *c, pk_axis_name axis, double at) {
  return cexp(I * c->slope[axis] * (at + c->phase_shift[axis]));
}

/* ∫ E_c conj(h_d) exp(…) for components that share their places. */
static double complex cross_one(const pk_overlap *o, const crossing *c, pk_whole_name e_name,
                                pk_whole_name h_name) {
  const double *x = pk_whole_places(c->e, e_name, PK_U), *y = pk_whole_places(c->e, e_name, PK_V);
  int columns = pk_whole_count(c->e, e_name, PK_U), rows = pk_whole_count(c->e, e_name, PK_V);
  int h_rows = pk_whole_count(c->h, h_name, PK_V);
  for (int j = 0; j < rows; j++) {
    make_stencil(c->h, h_name, PK_V, y[j] + c->shift[PK_V], &o->stencil[j]);
    o->phase[j] = width_at(c->e, e_name, PK_V, j) * phase_at(c, PK_V, y[j]);
  }
  double complex sum = 0;
  for (int i = 0; i < columns; i++) {
    stencil s;
    make_stencil(c->h, h_name, PK_U, x[i] + c->shift[PK_U], &s);
    const double complex *h = c->h->field[h_name] + (ptrdiff_t)s.first * h_rows;
    const double complex *e = c->e->field[e_name] + (ptrdiff_t)i * rows;
    for (int j = 0; j < h_rows; j++) {
      o->column[j] = 0;
      for (int k = 0; k < TAPS; k++) {
        o->column[j] += s.weight[k] != 0 ? s.weight[k] * h[(ptrdiff_t)k * h_rows + j] : 0;
      }
    }
    double complex part = 0;
    for (int j = 0; j < rows; j++) {
      double complex value = 0;
      const stencil *t = &o->stencil[j];
      for (int k = 0; k < TAPS; k++) {
        value += t->weight[k] != 0 ? t->weight[k] * o->column[t->first + k] : 0;
      }
      part += o->phase[j] * e[j] * conj(value);
    }
    sum += width_at(c->e, e_name, PK_U, i) * phase_at(c, PK_U, x[i]) * part;
  }
  return sum;
}

/* ∫ (E × h*)_z exp(…) */
static double complex cross(const pk_overlap *o, const crossing *c) {
  return cross_one(o, c, PK_WHOLE_EX, PK_WHOLE_HY) - cross_one(o, c, PK_WHOLE_EY, PK_WHOLE_HX);
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
  o.stencil = PK_NEW(o.context, rows, stencil);
  o.column = PK_NEW(o.context, rows, double complex);
  o.phase = PK_NEW(o.context, rows, double complex);
  if (!o.stencil || !o.column || !o.phase) {
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
    pk_free(o->context, o->stencil);
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
