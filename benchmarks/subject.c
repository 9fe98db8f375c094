/* See subject.h. */
#include "subject.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

enum { LOW = 0, HIGH = 1, MEDIA = 2 };

static const double INDEX[MEDIA] = {1.45, 2.85}; /* oxide, and the slab index of 220 nm silicon */

const char *subject_name(subject_shape shape) {
  return shape == TEETH ? "teeth" : "pillars";
}

void subject_must(const subject *s, picket_status status) {
  if (status != PICKET_OK) {
    fprintf(stderr, "benchmark: %s\n", s->context ? picket_context_message(s->context) : "memory");
    exit(1);
  }
}

static void paint(subject *s, subject_shape shape) {
  bool lattice = shape == PILLARS;
  s->cell.pitch_um = lattice ? 0.6 : 0.3;
  s->cell.span_um = lattice ? 0.6 : 2.4;
  s->cell.lateral = lattice ? PK_LATERAL_PERIODIC : PK_LATERAL_ELECTRIC;
  double u = 0.5 * s->cell.pitch_um, v = 0.5 * s->cell.span_um;
  pk_frame frame = {{-u, -v}, {u, v}, {true, lattice}, 0, LOW};
  subject_must(s, pk_geometry_create(s->context, &frame, &s->cell.geometry));
  const double centre[2] = {0, 0};
  const double size[2] = {lattice ? 0.24 : 0.15, lattice ? 0.24 : 0.6};
  subject_must(s, pk_geometry_add_rect(s->cell.geometry, (pk_place){0}, HIGH, centre, size));
}

void subject_open(subject *s, subject_shape shape, double unknowns) {
  *s = (subject){0};
  subject_must(s, picket_context_create(NULL, &s->context));
  paint(s, shape);
  pk_cell_grid_wish wish = {
      .steps_per_pitch = round(sqrt(unknowns * s->cell.pitch_um / s->cell.span_um)),
      .zero_walls = true};
  subject_must(s, pk_cell_grid_lay(s->context, &s->cell, &wish, &s->grid));
  pk_operator_plan plan = {.polarization = PK_EY,
                           .geometry = s->cell.geometry,
                           .u = &s->grid.u,
                           .v = &s->grid.v,
                           .media = MEDIA};
  subject_must(s, pk_operator_create(s->context, &plan, &s->op));
  subject_load(s, false);
  subject_must(s, pk_solver_create(s->context, s->op, &s->solver));
}

void subject_close(subject *s) {
  pk_solver_free(s->solver);
  pk_operator_free(s->op);
  pk_cell_grid_clear(s->context, &s->grid);
  pk_geometry_free(s->cell.geometry);
  picket_context_free(s->context);
}

void subject_load(subject *s, bool lossy) {
  double complex permittivity[MEDIA];
  for (int m = 0; m < MEDIA; m++) {
    permittivity[m] = INDEX[m] * INDEX[m] + (lossy ? 1e-18 * I : 0);
  }
  pk_operator_load(s->op, permittivity);
}
