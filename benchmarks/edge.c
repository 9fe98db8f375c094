/* The time to a band edge that is known to 1e-5, of the whole library and of the plain scheme.
 *
 *   edge FILE                 one line of JSON: seconds of both, see below
 *   edge FILE MATRIX STEPS    writes the plain scheme's matrix for compare_edge.py
 *
 * Ours is picket_edges_find as a user calls it, at the least accuracy that gives both edges of the
 * first stop band a bar of 1e-5: what it says of itself. The plain scheme is of second order away
 * from corners: tensor averages on even lines, no lines on interfaces, no corners corrected, no
 * mirror plane used, walls where the field has fallen to 1e-4. It is refined by the square root of
 * 2 until its long edge is off by 1e-5 at most, held against ours at 1e-6: it is told when to stop,
 * and where to start looking. Either looks for the same: both edges and the attenuation between. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <picket.h>

#include "api/problem_private.h"
#include "base/memory.h"
#include "bloch/media.h"
#include "bloch/solver.h"
#include "bloch/stop_band.h"
#include "dense/dense.h"
#include "grid/cell_grid.h"
#include "meter.h"

static const double PI = 3.141592653589793238;
static const double GOAL = 1e-5;

/* Of the walls from the teeth, in decay lengths. */
static const double REACH = 9;

enum { SIZES = 5, TIMES = 3 };
static const int STEPS[SIZES] = {25, 51, 101, 201, 401}; /* odd: a tooth is no whole number */

static picket_context *context;

static void must(picket_status status) {
  if (status != PICKET_OK) {
    fprintf(stderr, "benchmark: %s\n", picket_context_message(context));
    exit(1);
  }
}

/* --- Ours ---------------------------------------------------------------------------------------
 */

/* The long edge, µm; *bar the larger relative bar of the two edges, *seconds of CPU. */
static double find_edge(picket_problem *problem, double accuracy, double *bar, double *seconds) {
  picket_options options;
  picket_result *result = NULL;
  picket_edges_answer answer;
  picket_options_init(&options);
  options.accuracy = accuracy;
  double from = meter_cpu_seconds();
  must(picket_edges_find(problem, &options, &result));
  *seconds = meter_cpu_seconds() - from;
  must(picket_edges_get(result, 0, &answer));
  const picket_stop_band *band = &answer.bands[0];
  *bar = fmax(band->long_um.uncertainty / band->long_um.value,
              band->short_um.uncertainty / band->short_um.value);
  double edge = band->long_um.value;
  picket_result_free(result);
  return edge;
}

/* The least accuracy whose bars meet the goal. */
static double least_accuracy(picket_problem *problem) {
  static const double TRIED[] = {1e-4, 5e-5, 2e-5, 1e-5};
  double bar = INFINITY, seconds;
  int i = 0;
  for (; i < 3; i++) {
    find_edge(problem, TRIED[i], &bar, &seconds);
    if (bar <= GOAL) {
      break;
    }
  }
  return TRIED[i];
}

/* --- The plain scheme ---------------------------------------------------------------------------
 */

typedef struct plain {
  int side[2]; /* media at the open sides */
  pk_media media;
  pk_cell_grid grid;
  pk_operator *op;
  pk_solver *solver;
} plain;

static pk_axis even_axis(double from, double to, int intervals, pk_end end) {
  pk_axis_wish wish = {.low = end,
                       .high = end,
                       .from = from,
                       .to = to,
                       .step = (to - from) / intervals,
                       .inner_from = from,
                       .inner_to = to,
                       .outer_step = (to - from) / intervals,
                       .growth = 1,
                       .least_intervals = 1};
  pk_axis axis;
  must(pk_axis_lay(context, &wish, &axis));
  return axis;
}

static void plain_open(const pk_problem *problem, double edge, int steps, plain *out) {
  const pk_cell *cell = &problem->cell;
  double low = 0, high = 0, half = 0.5 * cell->pitch_um, k0 = 2 * PI / edge;
  *out = (plain){.grid = {.copies = 1}};
  pk_geometry_extent(cell->geometry, PK_V, &low, &high);
  pk_geometry_side_media(cell->geometry, PK_V, &out->side[0], &out->side[1]);
  pk_medium around;
  must(pk_materials_at(problem->materials, out->side[0], edge, problem->temperature_c, &around));
  double along = PI / cell->pitch_um;
  double reach = REACH / sqrt(along * along - k0 * k0 * creal(around.permittivity));
  int across = (int)lround(steps * (high - low + 2 * reach) / cell->pitch_um);
  out->grid.u = even_axis(-half, half, steps, PK_END_PERIODIC);
  out->grid.v = even_axis(low - reach, high + reach, across, PK_END_ZERO);
  pk_operator_plan plan = {.polarization = PK_HY,
                           .geometry = cell->geometry,
                           .u = &out->grid.u,
                           .v = &out->grid.v,
                           .media = pk_materials_count(problem->materials)};
  must(pk_operator_create(context, &plan, &out->op));
  must(pk_media_open(context, problem->materials, problem->temperature_c, out->op, &out->media));
  must(pk_media_set(&out->media, k0, out->op));
  must(pk_solver_create(context, out->op, &out->solver));
}

static void plain_close(plain *p) {
  pk_media_close(&p->media);
  pk_solver_free(p->solver);
  pk_operator_free(p->op);
  pk_cell_grid_clear(context, &p->grid);
}

/* The long edge on this grid. */
static double plain_edge(plain *p, double pitch, double edge) {
  pk_stop_band band;
  pk_stop_band_request request = {.pitch_um = pitch,
                                  .last_order = 1,
                                  .k0_start = 2 * PI / edge,
                                  .open = true,
                                  .side_medium = {p->side[0], p->side[1]},
                                  .look_inside = true};
  must(pk_stop_bands(p->solver, &p->media, &request, &band));
  return 2 * PI / band.edge[0].k0;
}

typedef struct refined {
  double seconds, last_seconds, error;
  int steps;
  long long unknowns;
} refined;

static refined refine(const pk_problem *problem, double edge) {
  refined r = {.error = INFINITY};
  for (int i = 0; i < SIZES && r.error > GOAL; i++) {
    plain p;
    double from = meter_cpu_seconds();
    plain_open(problem, edge, STEPS[i], &p);
    r.error = fabs(plain_edge(&p, problem->cell.pitch_um, edge) / edge - 1);
    r.last_seconds = meter_cpu_seconds() - from;
    r.seconds += r.last_seconds;
    r.steps = STEPS[i];
    r.unknowns = (long long)pk_operator_size(p.op);
    plain_close(&p);
  }
  return r;
}

/* --- Output -------------------------------------------------------------------------------------
 */

static void write_block(FILE *file, const void *data, size_t size, int64_t count) {
  if (fwrite(data, size, (size_t)count, file) != (size_t)count) {
    fprintf(stderr, "benchmark: cannot write the matrix\n");
    exit(1);
  }
}

/* As peer.c. */
static void write_matrix(const plain *p, const char *name) {
  const pk_pattern *pattern = pk_operator_pattern(p->op);
  int64_t n = pattern->n, entries = pattern->start[n];
  double complex *values = PK_NEW(context, entries, double complex);
  FILE *file = fopen(name, "wb");
  if (!values || !file) {
    fprintf(stderr, "benchmark: cannot write %s\n", name);
    exit(1);
  }
  pk_operator_values(p->op, (pk_phase){-1, 1, 0}, 0, values);
  write_block(file, &n, sizeof n, 1);
  write_block(file, &entries, sizeof entries, 1);
  write_block(file, pattern->start, sizeof *pattern->start, n + 1);
  write_block(file, pattern->row, sizeof *pattern->row, entries);
  write_block(file, values, sizeof *values, entries);
  write_block(file, pk_operator_mass(p->op), sizeof(double complex), n);
  fclose(file);
  pk_free(context, values);
}

static double middle(const double *t) {
  return fmax(fmin(t[0], t[1]), fmin(fmax(t[0], t[1]), t[2]));
}

static void compare(picket_problem *problem, const pk_problem *understood, double edge) {
  double ours[TIMES], bar;
  double accuracy = least_accuracy(problem);
  for (int i = 0; i < TIMES; i++) {
    find_edge(problem, accuracy, &bar, &ours[i]);
  }
  refined r = refine(understood, edge);
  printf(
      "{\"seconds\": %.6g, \"bar\": %.2g, \"plain_seconds\": %.6g, "
      "\"last_plain_seconds\": %.6g, \"plain_error\": %.2g, \"plain_steps\": %d, "
      "\"plain_unknowns\": %lld, \"edge_um\": %.12g}\n",
      middle(ours), bar, r.seconds, r.last_seconds, r.error, r.steps, r.unknowns, edge);
}

int main(int count, char **words) {
  if (count != 2 && count != 4) {
    fprintf(stderr, "usage: edge FILE [MATRIX STEPS]\n");
    return 2;
  }
  picket_problem *problem;
  const pk_problem *understood;
  must(picket_context_create(NULL, &context));
  must(picket_problem_read_file(context, words[1], &problem));
  must(pk_problem_understand(problem, &understood));
  pk_dense_warm_up();
  double bar, seconds, edge = find_edge(problem, 1e-6, &bar, &seconds);
  if (count == 2) {
    compare(problem, understood, edge);
  } else {
    plain p;
    plain_open(understood, edge, atoi(words[3]), &p);
    write_matrix(&p, words[2]);
    plain_close(&p);
  }
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}
