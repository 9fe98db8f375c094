/* Prints the matrix of one section and its uppermost modes, for test_section.py:
 *
 *   size N
 *   k0 VALUE
 *   t ROW COLUMN RE IM           one line for each stored entry of T, T h = β² h
 *   square RE IM RESIDUAL        β², falling
 *   line AXIS NUMBER AT          grid lines (axis 0: x), electric walls at all ends */
#include <stdio.h>
#include <stdlib.h>

#include "unit/section/plane.h"

enum { WANTED = 4 };

static void print_lines(const pk_axis *axis, int name) {
  for (int i = 0; i <= axis->intervals; i++) {
    printf("line %d %d %.17g\n", name, i, axis->line[i]);
  }
}

int main(void) {
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 1};
  const double k0 = 2 * PI / 1.55;
  plane p = plane_of(index, 0);
  plane_rect(&p, 1, 0, 0, 0.45, 0.22);
  ruler r = {PK_END_ZERO, PK_END_ZERO, -0.8, 0.9, 0.225, 0.1, 0.2, 2, {-0.225, 0.225}};
  lay_ruler(p.context, &r, &p.x);
  r.lines[0] = -0.11;
  r.lines[1] = r.inner = 0.11;
  lay_ruler(p.context, &r, &p.y);
  pk_section *section = plane_section(&p, 1, false);
  const pk_pattern *pattern = pk_section_pattern(section);
  double complex *values = malloc((size_t)pattern->start[pattern->n] * sizeof *values);
  assert_non_null(values);
  pk_section_values(section, k0, 0, values);
  printf("size %lld\nk0 %.17g\n", (long long)pattern->n, k0);
  for (int64_t column = 0; column < pattern->n; column++) {
    for (int64_t s = pattern->start[column]; s < pattern->start[column + 1]; s++) {
      printf("t %lld %lld %.17g %.17g\n", (long long)pattern->row[s], (long long)column,
             creal(values[s]), cimag(values[s]));
    }
  }
  free(values);
  print_lines(&p.x, 0);
  print_lines(&p.y, 1);
  pk_section_mode modes[WANTED];
  int found = 0;
  if (pk_section_modes(section, k0, 12.1 * k0 * k0, WANTED, modes, &found) != PICKET_OK) {
    fprintf(stderr, "%s\n", picket_context_message(p.context));
    return 1;
  }
  for (int i = 0; i < found; i++) {
    printf("square %.17g %.17g %.3g\n", creal(modes[i].beta_square), cimag(modes[i].beta_square),
           modes[i].residual);
  }
  pk_section_modes_clear(p.context, found, modes);
  pk_section_free(section);
  plane_close(&p);
  return 0;
}
