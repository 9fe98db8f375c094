/* Prints the matrices A and B of one cell at one Bloch phase, and the lowest eigenvalues of A v = λ
 * B v as the solver finds them, for test_matrix.py:
 *
 *   print_matrix ey|hy
 *
 *   size N
 *   a ROW COLUMN RE IM      one line for each stored entry
 *   b ROW RE IM             the diagonal
 *   lambda VALUE RESIDUAL   rising */
#include <stdio.h>

#include "unit/cells.h"

enum { MODES = 8 };

/* A lattice without symmetry: a rectangle, a disc and a triangle, rows shifted by a third. */
static test_cell painted(pk_polarization polarization) {
  static const double INDEX[] = {1.444, 3.476, 2.0};
  static const double TRIANGLE[3][2] = {{-0.14, -0.2}, {0.02, -0.18}, {-0.06, 0.05}};
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.3, 0.5, 1.0 / 3, 3, INDEX);
  cell_rect(&c, 1, 0.04, 0.02, 0.15, 0.22);
  cell_disc(&c, 2, -0.08, 0.11, 0.16);
  cell_polygon(&c, 1, 3, TRIANGLE);
  pk_cell_grid_wish wish = {.steps_per_pitch = 8};
  cell_lay(&c, &wish);
  cell_open(&c, polarization, 1, 4);
  return c;
}

static void print_matrices(const test_cell *c, pk_phase phase) {
  const pk_pattern *p = pk_operator_pattern(c->op);
  double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
  assert_non_null(values);
  pk_operator_values(c->op, phase, 0, values);
  printf("size %lld\n", (long long)p->n);
  for (int64_t column = 0; column < p->n; column++) {
    for (int64_t s = p->start[column]; s < p->start[column + 1]; s++) {
      printf("a %lld %lld %.17g %.17g\n", (long long)p->row[s], (long long)column, creal(values[s]),
             cimag(values[s]));
    }
    double complex mass = pk_operator_mass(c->op)[column];
    printf("b %lld %.17g %.17g\n", (long long)column, creal(mass), cimag(mass));
  }
  free(values);
}

int main(int count, char **words) {
  if (count != 2 || (strcmp(words[1], "ey") != 0 && strcmp(words[1], "hy") != 0)) {
    fprintf(stderr, "print_matrix ey|hy\n");
    return 2;
  }
  test_cell c = painted(words[1][0] == 'e' ? PK_EY : PK_HY);
  pk_phase phase = pk_phase_at(&c.cell, 0.37, 0.61);
  print_matrices(&c, phase);
  pk_mode modes[MODES];
  int found = 0;
  if (pk_solver_modes(c.solver, phase, -3, MODES, NULL, modes, &found) != PICKET_OK) {
    fprintf(stderr, "%s\n", picket_context_message(c.context));
    return 1;
  }
  for (int i = 0; i < found; i++) {
    printf("lambda %.17g %.3g\n", creal(modes[i].lambda), modes[i].residual);
  }
  pk_modes_clear(c.context, found, modes);
  cell_close(&c);
  return 0;
}
