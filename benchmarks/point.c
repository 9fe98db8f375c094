/* One Bloch point, in units of one numeric factorisation of its complex matrix:
 *
 *   ten modes at ξ = exp(0.7iπ), symbolic factor kept
 *   ten modes at the zone edge ξ = -1 in real arithmetic, and the same through complex arithmetic
 *   one wave near a guess of ξ that is 1e-3 off, with and without a guess of its field
 *
 * Every piece of work is repeated in turn; a ratio is the median over the repetitions of the ratio
 * of neighbouring times. */
#include <math.h>
#include <stdio.h>

#include "bloch/wavenumber.h"
#include "dense/dense.h"
#include "meter.h"
#include "subject.h"

static const double PI = 3.141592653589793238;

enum { MODES = 10 };

static const double SHIFT = 16; /* λ = k0²: near the first bands of both subjects, 1/µm² */

typedef struct bench {
  subject s;
  pk_phase inside, edge; /* 0.7 of the way to the zone edge, and there */
  double k0;             /* of the lowest mode inside */
  double complex *field; /* [n] of a mode at a neighbouring phase */
} bench;

static double time_factor(bench *b) {
  pk_factor *factor;
  double from = meter_cpu_seconds();
  subject_must(&b->s, pk_solver_factor(b->s.solver, b->inside, SHIFT, &factor));
  return meter_cpu_seconds() - from;
}

static double time_modes(bench *b, pk_phase phase, bool lossy) {
  pk_mode modes[MODES];
  int found = 0;
  subject_load(&b->s, lossy);
  double from = meter_cpu_seconds();
  subject_must(&b->s, pk_solver_modes(b->s.solver, phase, SHIFT, MODES, NULL, modes, &found));
  double spent = meter_cpu_seconds() - from;
  pk_modes_clear(b->s.context, found, modes);
  subject_load(&b->s, false);
  return spent;
}

static double time_wave(bench *b, const double complex *start) {
  pk_wave wave;
  double complex guess = b->inside.xi * cexp(1e-3 * I);
  double from = meter_cpu_seconds();
  subject_must(&b->s, pk_wave_near(b->s.solver, b->inside, b->k0, guess, start, &wave));
  double spent = meter_cpu_seconds() - from;
  if (cabs(wave.xi - b->inside.xi) > 1e-8) {
    fprintf(stderr, "benchmark: another wave than the wanted one was found\n");
  }
  pk_wave_clear(b->s.context, &wave);
  return spent;
}

/* The lowest mode inside gives the frequency; its neighbour at a phase 0.03 away the guess. */
static void prepare(bench *b, subject_shape shape, double unknowns) {
  pk_mode mode;
  int found;
  subject_open(&b->s, shape, unknowns);
  b->inside = (pk_phase){cexp(0.7 * I * PI), 1, 0};
  b->edge = (pk_phase){-1, 1, 0};
  subject_must(&b->s, pk_solver_modes(b->s.solver, b->inside, 0, 1, NULL, &mode, &found));
  b->k0 = sqrt(creal(mode.lambda));
  pk_modes_clear(b->s.context, found, &mode);
  pk_phase beside = {b->inside.xi * cexp(0.03 * I), 1, 0};
  subject_must(&b->s, pk_solver_modes(b->s.solver, beside, 0, 1, NULL, &mode, &found));
  b->field = mode.field;
  time_modes(b, b->edge, false); /* symbolic factors of both scalars, and BLAS, before the clock */
}

static void run(subject_shape shape, double unknowns) {
  bench b;
  double ten[REPETITIONS], real[REPETITIONS], near[REPETITIONS], blind[REPETITIONS];
  prepare(&b, shape, unknowns);
  for (int i = 0; i < REPETITIONS; i++) {
    double unit = time_factor(&b);
    ten[i] = time_modes(&b, b.inside, false) / unit;
    double real_time = time_modes(&b, b.edge, false);
    real[i] = time_modes(&b, b.edge, true) / real_time;
    unit = time_factor(&b);
    near[i] = time_wave(&b, b.field) / unit;
    blind[i] = time_wave(&b, NULL) / unit;
  }
  const char *name = subject_name(shape);
  int64_t n = pk_operator_size(b.s.op);
  meter_line lines[] = {
      {"ten modes at one phase / factorisation", name, meter_median(ten), 2.5, true, n},
      {"zone edge: complex / real", name, meter_median(real), 1.8, false, n},
      {"one wave near a guess and its field / factorisation", name, meter_median(near), 1.4, true,
       n},
      {"one wave near a guess / factorisation", name, meter_median(blind), 1.4, true, n}};
  for (size_t i = 0; i < sizeof lines / sizeof *lines; i++) {
    meter_print(&lines[i]);
  }
  pk_mode kept = {.field = b.field};
  pk_modes_clear(b.s.context, 1, &kept);
  subject_close(&b.s);
}

int main(void) {
  pk_dense_warm_up();
  for (subject_shape shape = TEETH; shape < SUBJECT_SHAPES; shape++) {
    run(shape, 1e4);
    run(shape, 4e4);
  }
  return 0;
}
