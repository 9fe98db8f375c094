/* See power.h. */
#include "operator/power.h"

#include "operator/operator_private.h"

/* The line on which a layer starts touches stretched intervals, so it stays outside. */
pk_power_window pk_power_window_of(const pk_operator *op) {
  pk_power_window window = {0, op->nv - 1};
  int first = pk_axis_first_line(&op->v);
  const pk_axis *v = &op->v;
  double tolerance = 1e-9 * (v->line[v->intervals] - v->line[0]);
  double low = v->line[0] + v->layer[0].thickness + tolerance;
  double high = v->line[v->intervals] - v->layer[1].thickness - tolerance;
  while (v->layer[0].thickness > 0 && window.low < window.high &&
         v->line[window.low + first] < low) {
    window.low++;
  }
  while (v->layer[1].thickness > 0 && window.high > window.low &&
         v->line[window.high + first] > high) {
    window.high--;
  }
  return window;
}

static double complex wrap(pk_phase phase, int wu, int wv) {
  double complex factor = wu > 0 ? phase.xi : wu < 0 ? 1 / phase.xi : 1;
  return wv > 0 ? factor * phase.chi : wv < 0 ? factor / phase.chi : factor;
}

/* Flux r → c. The reverse term is seen from r, too: its phase factors cancel against those of the
 * conjugate only for |ξ| = 1, so it is taken with u_c in the frame of r. */
static double flux(const pk_operator *op, pk_phase phase, int64_t slot, int64_t r, int64_t c,
                   const double complex *u) {
  double complex uc = wrap(phase, op->wu[slot], op->wv[slot]) * u[c];
  double complex a = op->stiff[slot];
  return -0.5 * cimag(conj(u[r]) * a * uc - conj(uc) * a * u[r]);
}

static bool inside(pk_power_window w, int iv) {
  return iv >= w.low && iv <= w.high;
}

/* Fluxes through the cell boundary and through the window's lines. */
static void add_fluxes(const pk_operator *op, pk_phase phase, pk_power_window w,
                       const double complex *u, pk_power *power) {
  for (int64_t c = 0; c < op->pattern.n; c++) {
    int cv = (int)(c % op->nv);
    for (int64_t s = op->pattern.start[c]; s < op->pattern.start[c + 1]; s++) {
      int64_t r = op->pattern.row[s];
      int rv = (int)(r % op->nv);
      if (!inside(w, rv)) {
        continue;
      }
      if (op->wu[s] == -1 && inside(w, cv)) {
        power->forward -= flux(op, phase, s, r, c, u);
      }
      if (!inside(w, cv) && op->wv[s] == 0) {
        power->radiated[cv > w.high] += flux(op, phase, s, r, c, u);
      }
    }
  }
}

/* k0² Im B |u|² of the nodes and -½ Im A (terms of the edges that make a lossy A not Hermitian), by
 * closing the balance of every node of the window. */
static double absorbed_in(const pk_operator *op, pk_phase phase, double k0, pk_power_window w,
                          const double complex *u) {
  double sum = 0;
  for (int64_t c = 0; c < op->pattern.n; c++) {
    if (!inside(w, (int)(c % op->nv))) {
      continue;
    }
    double size = creal(u[c] * conj(u[c]));
    sum += k0 * k0 * cimag(op->mass[c]) * size;
    for (int64_t s = op->pattern.start[c]; s < op->pattern.start[c + 1]; s++) {
      int64_t r = op->pattern.row[s];
      if (!inside(w, (int)(r % op->nv))) {
        continue;
      }
      if (r == c) {
        sum -= cimag(op->stiff[s]) * size;
        continue;
      }
      double complex uc = wrap(phase, op->wu[s], op->wv[s]) * u[c];
      sum -= cimag(op->stiff[s]) * creal(conj(u[r]) * uc);
    }
  }
  return sum;
}

pk_power pk_power_balance(const pk_operator *op, pk_phase phase, double k0, pk_power_window window,
                          const double complex *u) {
  pk_power power = {0};
  add_fluxes(op, phase, window, u, &power);
  power.absorbed = absorbed_in(op, phase, k0, window, u);
  return power;
}
