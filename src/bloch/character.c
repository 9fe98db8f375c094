/* See character.h.
 *
 * Harmonic m of a wave is a_m(x) = (1/Λ) ∫ u exp(-i(k + 2πm/Λ) z) dz; the main one has the largest
 * ∫|a_m|² dx. A wave is written with the wavenumber of its main harmonic: that is the one an
 * effective index speaks of. */
#include "bloch/character.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"

enum { FARTHEST_HARMONIC = 6 };

static const double PI = 3.141592653589793238;

/* Lateral values below this part of the largest one do not make a node. */
static const double NODE_LEVEL = 0.12;
/* Re kΛ/π is taken for a whole number within this, or within this part of Im kΛ/π: absorbing layers
 * push a decaying wave off the boundary a little. */
static const double BOUNDARY = 1e-6;
static const double BOUNDARY_PART = 1e-3;

void pk_harmonic_shape(const pk_operator *op, double complex k, const double complex *u,
                       double complex *shape) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  memset(shape, 0, (size_t)nv * sizeof *shape);
  for (int iu = 0; iu < nu; iu++) {
    double z, length;
    pk_operator_line(op, PK_U, iu, &z, &length);
    double complex wave = length * cexp(-I * k * z);
    for (int iv = 0; iv < nv; iv++) {
      shape[iv] += wave * u[(int64_t)iu * nv + iv];
    }
  }
}

/* ∫ |shape|² dx between two coordinates. */
static double norm_between(const pk_operator *op, const double complex *shape, double low,
                           double high) {
  double sum = 0;
  for (int iv = 0; iv < pk_operator_lines(op, PK_V); iv++) {
    double x, width;
    pk_operator_line(op, PK_V, iv, &x, &width);
    if (x >= low && x <= high) {
      sum += width * creal(shape[iv] * conj(shape[iv]));
    }
  }
  return sum;
}

/* Sign changes of the shape, turned so that its largest value is real, inside the structure. */
static int count_nodes(const pk_operator *op, const double complex *shape, const double range[2]) {
  int nv = pk_operator_lines(op, PK_V);
  double complex largest = 0;
  for (int iv = 0; iv < nv; iv++) {
    double x, width;
    pk_operator_line(op, PK_V, iv, &x, &width);
    if (x >= range[0] && x <= range[1] && cabs(shape[iv]) > cabs(largest)) {
      largest = shape[iv];
    }
  }
  int nodes = 0, sign = 0;
  for (int iv = 0; iv < nv && largest != 0; iv++) {
    double x, width;
    pk_operator_line(op, PK_V, iv, &x, &width);
    double value = creal(shape[iv] / largest);
    if (x < range[0] || x > range[1] || fabs(value) < NODE_LEVEL) {
      continue;
    }
    int now = value > 0 ? 1 : -1;
    nodes += sign != 0 && now != sign;
    sign = now;
  }
  return nodes;
}

static double share_inside(const pk_operator *op, const pk_character_request *request,
                           const double complex *u) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  double half = 0.5 * (request->structure[1] - request->structure[0]);
  double all = 0, inside = 0;
  for (int iv = 0; iv < nv; iv++) {
    double x, width, sum = 0;
    pk_operator_line(op, PK_V, iv, &x, &width);
    for (int iu = 0; iu < nu; iu++) {
      double z, length;
      pk_operator_line(op, PK_U, iu, &z, &length);
      double complex value = u[(int64_t)iu * nv + iv];
      sum += length * creal(value * conj(value));
    }
    all += width * sum;
    if (x > request->structure[0] - half && x < request->structure[1] + half) {
      inside += width * sum;
    }
  }
  return inside / all;
}

static void find_main_harmonic(const pk_operator *op, const pk_character_request *request,
                               double complex folded, const pk_wave *wave, double complex *shape,
                               pk_character *c) {
  double best = -1, step = 2 * PI / request->pitch_um;
  for (int m = -FARTHEST_HARMONIC; m <= FARTHEST_HARMONIC; m++) {
    pk_harmonic_shape(op, folded + m * step, wave->right, shape);
    double size = norm_between(op, shape, request->structure[0], request->structure[1]);
    /* In a stop band +k and -k weigh the same: the positive one is meant. */
    bool same = size > best * (1 - 1e-3) && size < best * (1 + 1e-3);
    if (same ? creal(folded) + m * step > creal(c->k) : size > best) {
      best = fmax(best, size);
      c->harmonic = m;
      c->k = folded + m * step;
    }
  }
  pk_harmonic_shape(op, c->k, wave->right, shape);
  c->nodes = count_nodes(op, shape, request->structure);
}

picket_status pk_character_of(picket_context *context, const pk_operator *op,
                              const pk_character_request *request, const pk_wave *wave,
                              pk_character *out) {
  double complex *shape = PK_NEW(context, pk_operator_lines(op, PK_V), double complex);
  if (!shape) {
    return PICKET_ERROR_MEMORY;
  }
  pk_character c = {0};
  pk_phase phase = request->phase;
  phase.xi = wave->xi;
  double complex folded = -I * clog(wave->xi) / request->pitch_um;
  find_main_harmonic(op, request, folded, wave, shape, &c);
  pk_free(context, shape);
  double half_turns = creal(c.k) * request->pitch_um / PI;
  double decay = fabs(cimag(c.k)) * request->pitch_um / PI;
  c.at_boundary = fabs(half_turns - round(half_turns)) < fmax(BOUNDARY, BOUNDARY_PART * decay) &&
                  round(half_turns) != 0 && fabs(cimag(c.k)) > PK_LOSSLESS * request->k0;
  c.inside = share_inside(op, request, wave->right);
  c.power = pk_power_balance(op, phase, request->k0, pk_power_window_of(op), wave->right);
  picket_status status;
  double complex layers =
      pk_operator_layer_form(context, op, phase, request->k0, wave->left, wave->right, &status);
  double complex turn =
      I * request->pitch_um * pk_operator_phase_form(op, phase, 1, 0, wave->left, wave->right);
  c.layer_share = layers == 0 ? 0 : cabs(layers / turn) / request->k0;
  *out = c;
  return status;
}
