/* What each refinement of the scheme is worth: the error of a frequency at a fixed wavenumber on
 * grids of 16 to 64 steps in a pitch, and how fast it falls.
 *
 *   point samples   the permittivity at each site, interfaces anywhere: a staircase
 *   plain averages  the mean of ε over the box of each site, whatever the direction of the field
 *   tensor          hy: ⟨1/ε⟩ across an interface and ⟨ε⟩⁻¹ along it
 *   on grid lines   the same with grid lines on the interfaces
 *   corrected       the same with the weights at corners corrected
 *   extrapolated    the last of these on three or four grids, with the known exponents
 *
 * Cases with values that no grid went into: a segmented guide by a boundary-integral method with
 * panels graded to the corners, a square lattice of rods by cylindrical waves (from the project's
 * reference cases, 1e-11 and better). The lines of the first three lie evenly and at no simple
 * distance from the interfaces, and are one more in a pitch than the column says. Prints a table in
 * Markdown; the order is that of the mean-square line through the errors in both logarithms, and
 * none where they change sign. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "bloch/phase.h"
#include "bloch/solver.h"
#include "geometry/cell.h"
#include "grid/cell_grid.h"
#include "operator/corner_exponent.h"
#include "operator/operator_private.h"
#include "study/extrapolate.h"

static const double HALF_PI = 1.57079632679489661923;

enum { SIZES = 5, AROUND = 0, FILL = 1, MEDIA = 2 };
static const int STEPS[SIZES] = {16, 24, 32, 48, 64}; /* in a pitch */
enum { SHOWN = 3 };
static const int SHOW[SHOWN] = {0, 2, 4};

/* The base grid of a family has 8 steps, as in the library. */
enum { BASE = 8 };

typedef enum scheme { POINTS, PLAIN, TENSOR, ON_LINES, CORRECTED, SCHEMES } scheme;

typedef struct subject {
  const char *name;
  pk_polarization polarization;
  bool disc; /* else a rectangle between walls */
  double pitch, span, length, width;
  double index[MEDIA];
  double frequency, kz; /* pitch/λ of the lowest band at kz, in π/pitch: exact */
} subject;

/* Rectangles: walls so far that the field has fallen to 1e-9 there. The wavenumber is that of the
 * Bloch index 2.070987030965829 (ey), 1.8063517079189992 (hy) at 1550 nm. */
static const subject SUBJECTS[] = {
    {"rectangle",
     PK_EY,
     false,
     0.24,
     4.56,
     0.12,
     0.45,
     {1.444, 2.85},
     0.24 / 1.55,
     2 * 2.070987030965829 * 0.24 / 1.55},
    {"rectangle",
     PK_HY,
     false,
     0.24,
     5.52,
     0.12,
     0.45,
     {1.444, 2.85},
     0.24 / 1.55,
     2 * 1.8063517079189992 * 0.24 / 1.55},
    {"disc", PK_EY, true, 1, 1, 0.4, 0.4, {1, 2.98328677803526}, 0.2747059060746502, 1},
    {"disc", PK_HY, true, 1, 1, 0.4, 0.4, {1, 2.98328677803526}, 0.41756724392118383, 1}};
enum { SUBJECT_COUNT = sizeof SUBJECTS / sizeof *SUBJECTS };

static picket_context *context;

static void must(picket_status status) {
  if (status != PICKET_OK) {
    fprintf(stderr, "benchmark: %s\n", picket_context_message(context));
    exit(1);
  }
}

/* Where evenly spaced lines meet no interface, nor the middle between two lines does. */
static const double ASIDE[2] = {0.0571, 0.0293}; /* in pitches */

static pk_cell paint(const subject *s, bool aside) {
  pk_cell cell = {.pitch_um = s->pitch,
                  .span_um = s->span,
                  .lateral = s->disc ? PK_LATERAL_PERIODIC : PK_LATERAL_ELECTRIC};
  double u = 0.5 * s->pitch, v = 0.5 * s->span;
  pk_frame frame = {{-u, -v}, {u, v}, {true, s->disc}, 0, AROUND};
  must(pk_geometry_create(context, &frame, &cell.geometry));
  double centre[2] = {aside ? ASIDE[0] * s->pitch : 0, aside ? ASIDE[1] * s->pitch : 0};
  const double size[2] = {s->length, s->width};
  must(s->disc ? pk_geometry_add_disc(cell.geometry, (pk_place){0}, FILL, centre, s->length)
               : pk_geometry_add_rect(cell.geometry, (pk_place){0}, FILL, centre, size));
  return cell;
}

static pk_axis even_axis(double size, int intervals, pk_end end) {
  pk_axis_wish wish = {.low = end,
                       .high = end,
                       .from = -0.5 * size,
                       .to = 0.5 * size,
                       .step = size / intervals,
                       .inner_from = -0.5 * size,
                       .inner_to = 0.5 * size,
                       .outer_step = size / intervals,
                       .growth = 1,
                       .least_intervals = 1};
  pk_axis axis;
  must(pk_axis_lay(context, &wish, &axis));
  return axis;
}

/* Lines on the interfaces (a family of the base grid), or even ones. */
static pk_cell_grid lay(const subject *s, const pk_cell *cell, scheme by, int steps) {
  pk_cell_grid base = {.copies = 1}, grid;
  pk_end end = s->disc ? PK_END_PERIODIC : PK_END_ZERO;
  if (by >= ON_LINES) {
    pk_cell_grid_wish wish = {.steps_per_pitch = BASE, .zero_walls = true};
    must(pk_cell_grid_lay(context, cell, &wish, &base));
    must(pk_cell_grid_divide(context, &base, steps / BASE, &grid));
    pk_cell_grid_clear(context, &base);
    return grid;
  }
  steps++; /* odd: half a pitch is no whole number of steps, as nothing is by chance */
  base.u = even_axis(s->pitch, steps, PK_END_PERIODIC);
  base.v = even_axis(s->span, (int)lround(steps * s->span / s->pitch), end);
  return base;
}

/* The medium in the middle of a site: of a node, or of the edge from it along an axis. */
static int medium_at(const pk_operator *op, const pk_cell *cell, int64_t node, int along) {
  double at[2], length;
  pk_operator_line(op, PK_U, (int)(node / op->nv), &at[0], &length);
  pk_operator_line(op, PK_V, (int)(node % op->nv), &at[1], &length);
  if (along >= 0) {
    const pk_axis *axis = along == PK_U ? &op->u : &op->v;
    at[along] += 0.5 * (axis->line[1] - axis->line[0]); /* even */
  }
  return pk_geometry_medium_at(cell->geometry, at[0], at[1]);
}

/* Takes the averages of an operator away: the medium in the middle of each site is left. */
static void sample_points(pk_operator *op, const pk_cell *cell) {
  for (int64_t p = 0; op->node_mixture && p < pk_operator_size(op); p++) {
    op->node_mixture[p] = medium_at(op, cell, p, -1);
  }
  for (int64_t i = 0; i < op->edge_count; i++) {
    pk_edge *edge = &op->edge[i];
    edge->mixture = medium_at(op, cell, edge->p, edge->along);
  }
  op->cross_count = 0;
}

/* Takes the direction of interfaces away: ⟨ε⟩ alone is left. */
static void forget_interfaces(pk_operator *op) {
  for (int i = 0; i < op->mixtures.count; i++) {
    for (int k = 0; k < 3; k++) {
      op->mixtures.list[i].facing[k] = 0;
    }
  }
}

static double lowest(pk_operator *op, const pk_cell *cell, const subject *s) {
  pk_solver *solver;
  pk_mode mode;
  int found;
  double exact = 4 * HALF_PI * s->frequency / s->pitch;
  must(pk_solver_create(context, op, &solver));
  must(pk_solver_modes(solver, pk_phase_at(cell, s->kz, 0), 0.85 * exact * exact, 1, NULL, &mode,
                       &found));
  double k0 = sqrt(creal(mode.lambda));
  pk_modes_clear(context, found, &mode);
  pk_solver_free(solver);
  return k0 / exact - 1;
}

/* The relative error of the frequency. */
static double error_of(const subject *s, scheme by, int steps) {
  /* A disc has no interfaces that lines could lie on. */
  pk_cell cell = paint(s, by < ON_LINES || s->disc);
  pk_cell_grid grid = lay(s, &cell, by, steps);
  pk_operator_plan plan = {.polarization = s->polarization,
                           .geometry = cell.geometry,
                           .u = &grid.u,
                           .v = &grid.v,
                           .media = MEDIA};
  pk_operator *op;
  must(pk_operator_create(context, &plan, &op));
  if (by == POINTS) {
    sample_points(op, &cell);
  } else if (by == PLAIN) {
    forget_interfaces(op);
  } else if (by == CORRECTED) {
    must(pk_operator_correct_corners(op, cell.geometry));
  }
  const double complex permittivity[MEDIA] = {s->index[0] * s->index[0], s->index[1] * s->index[1]};
  must(pk_operator_load(op, permittivity));
  double error = lowest(op, &cell, s);
  pk_operator_free(op);
  pk_cell_grid_clear(context, &grid);
  pk_geometry_free(cell.geometry);
  return error;
}

/* Minus the slope of the line through the errors, both in logarithms. */
static double order_of(const double errors[SIZES]) {
  double x = 0, y = 0, xx = 0, xy = 0;
  for (int i = 0; i < SIZES; i++) {
    double a = log(STEPS[i]), b = log(fabs(errors[i]));
    x += a;
    y += b;
    xx += a * a;
    xy += a * b;
  }
  return -(SIZES * xy - x * y) / (SIZES * xx - x * x);
}

static const char *word(const subject *s) {
  return s->polarization == PK_EY ? "ey" : "hy";
}

static void print_row(const subject *s, const char *name, const double errors[SIZES]) {
  printf("| %s, %s | %s |", s->name, word(s), name);
  for (int i = 0; i < SHOWN; i++) {
    printf(" %.1e |", fabs(errors[SHOW[i]]));
  }
  bool one_sign = true;
  for (int i = 1; i < SIZES; i++) {
    one_sign = one_sign && errors[i] * errors[0] > 0;
  }
  if (one_sign) {
    printf(" %.1f |\n", order_of(errors));
  } else {
    printf(" none |\n"); /* nothing to put a line through */
  }
  fflush(stdout);
}

/* Members 2, 3, 4 and 4, 6, 8 of the family: the finest grid of each is that of its column. Where
 * interfaces cut the cells a fourth grid tells scatter from law. */
static void print_extrapolated(const subject *s, const double errors[SIZES]) {
  pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = !s->disc};
  if (!s->disc && s->polarization == PK_HY) {
    double in = s->index[FILL] * s->index[FILL], out = s->index[AROUND] * s->index[AROUND];
    pk_sectors corner = {4, {HALF_PI, HALF_PI, HALF_PI, HALF_PI}, {in, out, out, out}};
    double complex alpha[PK_CORNER_EXPONENTS];
    pk_corner_exponents(&corner, alpha);
    law.count = 3;
    law.exponent[1] = 4 - 2 * creal(alpha[0]);
    law.exponent[2] = 4;
    law.corners = 1;
  }
  int m[SIZES];
  for (int i = 0; i < SIZES; i++) {
    m[i] = STEPS[i] / BASE;
  }
  int grids = s->disc ? 4 : 3;
  picket_quantity fine = pk_extrapolate(&law, grids, m + SIZES - grids, errors + SIZES - grids);
  picket_quantity coarse = pk_extrapolate(&law, 3, m, errors);
  printf("| %s, %s | extrapolated | | %.1e | %.1e | |\n", s->name, word(s), fabs(coarse.value),
         fabs(fine.value));
}

static void run(const subject *s) {
  static const char *const NAME[SCHEMES] = {"point samples", "plain averages", "tensor averages",
                                            "averages on grid lines", "corners corrected"};
  double errors[SIZES];
  for (scheme by = POINTS; by < SCHEMES; by++) {
    bool needless = (by == TENSOR && s->polarization == PK_EY) || (by >= ON_LINES && s->disc) ||
                    (by == CORRECTED && s->polarization == PK_EY);
    if (needless) {
      continue; /* the same as the scheme before */
    }
    for (int i = 0; i < SIZES; i++) {
      errors[i] = error_of(s, by, STEPS[i]);
    }
    print_row(s, NAME[by], errors);
  }
  for (int i = 0; s->disc && i < SIZES; i++) {
    errors[i] = error_of(s, ON_LINES, STEPS[i]); /* grids of one family */
  }
  print_extrapolated(s, errors);
}

int main(void) {
  must(picket_context_create(NULL, &context));
  printf("| cell | scheme | 16 steps | 32 steps | 64 steps | order |\n");
  printf("| --- | --- | --- | --- | --- | --- |\n");
  for (int i = 0; i < SUBJECT_COUNT; i++) {
    run(&SUBJECTS[i]);
  }
  picket_context_free(context);
  return 0;
}
