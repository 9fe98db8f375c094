/* The same Bloch point for another solver to compare with: writes the matrices of ten modes at
 * ξ = exp(0.7iπ), then times our own solution and prints it for compare_scipy.py.
 *
 *   peer FILE UNKNOWNS SHAPE     shape 0 teeth, 1 pillars
 *
 * FILE: int64 n, entries, start[n + 1], row[entries]; complex128 A[entries] (compressed columns),
 * B[n] (diagonal). Standard output: one line of JSON. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "meter.h"
#include "subject.h"

enum { MODES = 10 };

static const double PI = 3.141592653589793238;
static const double SHIFT = 16; /* as in point.c */

static void write_block(FILE *file, const void *data, size_t size, int64_t count) {
  if (fwrite(data, size, (size_t)count, file) != (size_t)count) {
    fprintf(stderr, "benchmark: cannot write the matrix\n");
    exit(1);
  }
}

static void write_matrix(subject *s, pk_phase phase, const char *name) {
  const pk_pattern *pattern = pk_operator_pattern(s->op);
  int64_t n = pattern->n, entries = pattern->start[n];
  double complex *values = PK_NEW(s->context, entries, double complex);
  FILE *file = fopen(name, "wb");
  if (!values || !file) {
    fprintf(stderr, "benchmark: cannot write %s\n", name);
    exit(1);
  }
  pk_operator_values(s->op, phase, 0, values);
  write_block(file, &n, sizeof n, 1);
  write_block(file, &entries, sizeof entries, 1);
  write_block(file, pattern->start, sizeof *pattern->start, n + 1);
  write_block(file, pattern->row, sizeof *pattern->row, entries);
  write_block(file, values, sizeof *values, entries);
  write_block(file, pk_operator_mass(s->op), sizeof(double complex), n);
  fclose(file);
  pk_free(s->context, values);
}

static void solve(subject *s, pk_phase phase) {
  double seconds[REPETITIONS], lambda[MODES], worst = 0;
  int found = 0;
  /* One more than counted: the first makes the symbolic factor, which a sweep makes once. */
  for (int i = -1; i < REPETITIONS; i++) {
    pk_mode modes[MODES];
    double from = meter_cpu_seconds();
    subject_must(s, pk_solver_modes(s->solver, phase, SHIFT, MODES, NULL, modes, &found));
    seconds[i < 0 ? 0 : i] = meter_cpu_seconds() - from;
    for (int k = 0; k < found; k++) {
      lambda[k] = creal(modes[k].lambda);
      worst = fmax(worst, modes[k].residual);
    }
    pk_modes_clear(s->context, found, modes);
  }
  printf("{\"seconds\": %.6g, \"shift\": %.17g, \"unknowns\": %lld, \"residual\": %.2e, ",
         meter_median(seconds), SHIFT, (long long)pk_operator_size(s->op), worst);
  printf("\"levels\": [");
  for (int k = 0; k < found; k++) {
    printf("%s%.17g", k ? ", " : "", lambda[k]);
  }
  printf("]}\n");
}

int main(int count, char **words) {
  if (count != 4) {
    fprintf(stderr, "usage: peer FILE UNKNOWNS SHAPE\n");
    return 2;
  }
  subject s;
  pk_phase phase = {cexp(0.7 * I * PI), 1, 0};
  pk_dense_warm_up();
  subject_open(&s, atoi(words[3]) == 0 ? TEETH : PILLARS, atof(words[2]));
  write_matrix(&s, phase, words[1]);
  solve(&s, phase);
  subject_close(&s);
  return 0;
}
