/* Four modes of a plain section, in units of one factorisation of the same real matrix: a silicon
 * wire of 900 × 220 nm in oxide, which guides more than four, all of it, without use of its mirror
 * planes. The shift stands a little above the first mode, as the study puts it once that is known.
 *
 * A section is factored once for its modes, so its factorisation has the analysis (the ordering) in
 * it. The ratio to the numeric phase alone is printed, too. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "meter.h"
#include "section/modes.h"

static const double PI = 3.141592653589793238;

enum { MODES = 4, MEDIA = 2 };

/* Above the index of silicon, where no mode is, for the first search; then this part of the
 * distance from oxide above the first mode, in n². */
static const double FIRST_SHIFT = 3.48, OXIDE = 1.444, MARGIN = 0.15;

typedef struct bench {
  picket_context *context;
  pk_section *section;
  double k0, shift;
  double *values;
} bench;

static void must(const bench *b, picket_status status) {
  if (status != PICKET_OK) {
    fprintf(stderr, "benchmark: %s\n", picket_context_message(b->context));
    exit(1);
  }
}

/* Walls 1 µm away from the wire, growing steps, lines on its sides. */
static void lay(const bench *b, double half, int m, pk_axis *out) {
  const double lines[2] = {-half, half};
  pk_axis base = {0};
  pk_axis_wish wish = {.low = PK_END_ZERO,
                       .high = PK_END_ZERO,
                       .from = -half - 1,
                       .to = half + 1,
                       .line_count = 2,
                       .lines = lines,
                       .step = 0.08,
                       .inner_from = -half,
                       .inner_to = half,
                       .outer_step = 0.25,
                       .growth = 0.3,
                       .least_intervals = 1};
  must(b, pk_axis_lay(b->context, &wish, &base));
  must(b, pk_axis_divide(b->context, &base, m, out));
  pk_axis_clear(b->context, &base);
}

static void bench_open(bench *b, int m) {
  static const pk_place nowhere = {NULL, 0, 0};
  const pk_frame frame = {
      .from = {-50, -INFINITY}, .to = {50, INFINITY}, .periodic = {false, false}};
  pk_geometry *geometry = NULL;
  pk_axis x = {0}, y = {0};
  *b = (bench){.k0 = 2 * PI / 1.55};
  must(b, picket_context_create(NULL, &b->context));
  must(b, pk_geometry_create(b->context, &frame, &geometry));
  must(b, pk_geometry_add_rect(geometry, nowhere, 1, (double[2]){0, 0}, (double[2]){0.9, 0.22}));
  lay(b, 0.45, m, &x);
  lay(b, 0.11, m, &y);
  const pk_section_plan plan = {geometry, &x, &y, MEDIA, true, 0};
  must(b, pk_section_create(b->context, &plan, &b->section));
  double complex permittivity[3 * MEDIA];
  for (int c = 0; c < 3; c++) {
    permittivity[c * MEDIA] = OXIDE * OXIDE;
    permittivity[c * MEDIA + 1] = 3.4757 * 3.4757;
  }
  must(b, pk_section_load(b->section, permittivity));
  b->shift = b->k0 * b->k0 * FIRST_SHIFT * FIRST_SHIFT;
  pk_section_mode first;
  int found = 0;
  must(b, pk_section_modes(b->section, b->k0, b->shift, 1, &first, &found));
  const double known = creal(first.beta_square);
  b->shift = known + MARGIN * (known - b->k0 * b->k0 * OXIDE * OXIDE);
  pk_section_modes_clear(b->context, found, &first);
  const pk_pattern *pattern = pk_section_pattern(b->section);
  b->values = PK_NEW(b->context, pattern->start[pattern->n], double);
  must(b, b->values ? PICKET_OK : PICKET_ERROR_MEMORY);
  pk_section_values_real(b->section, b->k0, b->shift, b->values);
  pk_axis_clear(b->context, &x);
  pk_axis_clear(b->context, &y);
  pk_geometry_free(geometry);
}

static void bench_close(bench *b) {
  pk_free(b->context, b->values);
  pk_section_free(b->section);
  picket_context_free(b->context);
}

static double time_factor(const bench *b, double *numeric) {
  pk_factor *factor = NULL;
  double from = meter_cpu_seconds();
  must(b, pk_factor_create(b->context, pk_section_pattern(b->section), PK_REAL, &factor));
  double between = meter_cpu_seconds();
  must(b, pk_factor_real(factor, b->values));
  double to = meter_cpu_seconds();
  pk_factor_free(factor);
  *numeric = to - between;
  return to - from;
}

static double time_modes(const bench *b) {
  pk_section_mode modes[MODES];
  int found = 0;
  double from = meter_cpu_seconds();
  must(b, pk_section_modes(b->section, b->k0, b->shift, MODES, modes, &found));
  double spent = meter_cpu_seconds() - from;
  if (found != MODES) {
    fprintf(stderr, "benchmark: %d of %d modes of the section converged\n", found, MODES);
  }
  pk_section_modes_clear(b->context, found, modes);
  return spent;
}

static void run(int m) {
  bench b;
  double whole[REPETITIONS], numeric[REPETITIONS];
  bench_open(&b, m);
  time_modes(&b); /* what is set up once, before the clock */
  for (int i = 0; i < REPETITIONS; i++) {
    double phase, unit = time_factor(&b, &phase), spent = time_modes(&b);
    whole[i] = spent / unit;
    numeric[i] = spent / phase;
  }
  const int64_t n = pk_section_size(b.section);
  const meter_line lines[] = {
      {"four modes of a section / factorisation", "wire", meter_median(whole), 3.2, true, n},
      {"four modes of a section / numeric phase of the factorisation", "wire",
       meter_median(numeric), 3.2, true, n}};
  for (size_t i = 0; i < sizeof lines / sizeof *lines; i++) {
    meter_print(&lines[i]);
  }
  bench_close(&b);
}

int main(void) {
  pk_dense_warm_up();
  run(4);
  run(8);
  return 0;
}
