/* All Bloch waves of a cell at one frequency, in units of the dense eigenproblem of its lateral
 * size: a random complex matrix of order nv with right eigenvectors. The reduction to a column and
 * the waves of the column are timed together. */
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "bloch/columns.h"
#include "dense/dense.h"
#include "meter.h"
#include "subject.h"

static const double K0 = 4.05; /* 1/µm: 1.55 µm of vacuum wavelength */

static double time_columns(subject *s) {
  pk_columns *columns = NULL;
  pk_column_modes modes = {0};
  pk_phase phase = {1, 1, 0};
  double from = meter_cpu_seconds();
  subject_must(s, pk_columns_reduce(s->context, s->op, phase, K0, &columns));
  subject_must(s, pk_columns_modes(columns, PK_COLUMNS_REACH, &modes));
  double spent = meter_cpu_seconds() - from;
  pk_column_modes_clear(&modes);
  pk_columns_free(columns);
  return spent;
}

static double complex noise(void) {
  double re = (double)rand() / RAND_MAX - 0.5, im = (double)rand() / RAND_MAX - 0.5;
  return re + I * im;
}

static double time_dense(subject *s, int n) {
  double complex *a = PK_NEW(s->context, (size_t)n * (size_t)n, double complex);
  double complex *right = PK_NEW(s->context, (size_t)n * (size_t)n, double complex);
  double complex *values = PK_NEW(s->context, n, double complex);
  if (!a || !right || !values) {
    subject_must(s, PICKET_ERROR_MEMORY);
  }
  srand(20220);
  for (int i = 0; i < n * n; i++) {
    a[i] = noise();
  }
  double from = meter_cpu_seconds();
  subject_must(s, pk_dense_general(s->context, n, a, values, NULL, right));
  double spent = meter_cpu_seconds() - from;
  pk_free(s->context, a);
  pk_free(s->context, right);
  pk_free(s->context, values);
  return spent;
}

int main(void) {
  pk_dense_warm_up();
  for (int size = 0; size < 2; size++) {
    subject s;
    double ratio[REPETITIONS];
    subject_open(&s, TEETH, size ? 2e4 : 5e3);
    subject_load(&s, false);
    int lateral = pk_operator_lines(s.op, PK_V);
    for (int i = 0; i < REPETITIONS; i++) {
      double unit = time_dense(&s, lateral);
      ratio[i] = time_columns(&s) / unit;
    }
    meter_line line = {"all waves at one frequency / dense eigenproblem of the lateral size",
                       subject_name(TEETH),
                       meter_median(ratio),
                       2.5,
                       true,
                       lateral};
    meter_print(&line);
    subject_close(&s);
  }
  return 0;
}
