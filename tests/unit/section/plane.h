/* Sections painted by hand on hand-laid grids. Every step asserts that it worked. */
#ifndef PICKET_TESTS_SECTION_PLANE_H
#define PICKET_TESTS_SECTION_PLANE_H

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include <complex.h>
#include <string.h>

#include "base/memory.h"
#include "section/forms.h"
#include "study/extrapolate.h"

static const double PI = 3.141592653589793238;
static const pk_place nowhere = {NULL, 0, 0};

enum { PLANE_MEDIA = 3 };

typedef struct plane {
  picket_context *context;
  pk_geometry *geometry;
  double complex permittivity[3 * PLANE_MEDIA];
  pk_axis x, y; /* base axes */
  double curvature;
} plane;

static inline void plane_media(plane *p, const double complex *index) {
  for (int m = 0; m < PLANE_MEDIA; m++) {
    for (int c = 0; c < 3; c++) {
      p->permittivity[c * PLANE_MEDIA + m] = index[m] * index[m];
    }
  }
}

static inline plane plane_in(picket_context *context, const double complex index[PLANE_MEDIA],
                             double x_period) {
  plane p = {.context = context};
  double side = x_period > 0 ? 0.5 * x_period : 50;
  pk_frame frame = {
      .from = {-side, -INFINITY}, .to = {side, INFINITY}, .periodic = {x_period > 0, false}};
  assert_int_equal(pk_geometry_create(context, &frame, &p.geometry), PICKET_OK);
  plane_media(&p, index);
  return p;
}

static inline plane plane_of(const double complex index[PLANE_MEDIA], double x_period) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  return plane_in(context, index, x_period);
}

static inline void plane_rect(plane *p, int medium, double x, double y, double width,
                              double height) {
  assert_int_equal(pk_geometry_add_rect(p->geometry, nowhere, medium, (double[2]){x, y},
                                        (double[2]){width, height}),
                   PICKET_OK);
}

static inline void plane_disc(plane *p, int medium, double diameter) {
  assert_int_equal(pk_geometry_add_disc(p->geometry, nowhere, medium, (double[2]){0, 0}, diameter),
                   PICKET_OK);
}

static inline void plane_stripe(plane *p, int medium, double from, double to) {
  assert_int_equal(pk_geometry_add_stripe(p->geometry, nowhere, medium, PK_V, from, to), PICKET_OK);
}

/* An axis with lines at `lines`, fine up to `inner` on both sides of 0. */
typedef struct ruler {
  pk_end low, high;
  double from, to, inner, step, outer_step;
  int count;
  double lines[4];
} ruler;

static inline void lay_growing(picket_context *context, const ruler *r, double growth,
                               pk_axis *out) {
  pk_axis_wish wish = {.low = r->low,
                       .high = r->high,
                       .from = r->from,
                       .to = r->to,
                       .line_count = r->count,
                       .lines = r->lines,
                       .step = r->step,
                       .inner_from = -r->inner,
                       .inner_to = r->inner,
                       .outer_step = r->outer_step,
                       .growth = growth,
                       .least_intervals = 1};
  assert_int_equal(pk_axis_lay(context, &wish, out), PICKET_OK);
}

static inline void lay_ruler(picket_context *context, const ruler *r, pk_axis *out) {
  lay_growing(context, r, 0.2, out);
}

/* Member m, loaded. */
static inline pk_section *plane_section(plane *p, int m, bool correct) {
  pk_axis x = {0}, y = {0};
  pk_section *section = NULL;
  assert_int_equal(pk_axis_divide(p->context, &p->x, m, &x), PICKET_OK);
  assert_int_equal(pk_axis_divide(p->context, &p->y, m, &y), PICKET_OK);
  pk_section_plan plan = {p->geometry, &x, &y, PLANE_MEDIA, correct, p->curvature};
  assert_int_equal(pk_section_create(p->context, &plan, &section), PICKET_OK);
  assert_int_equal(pk_section_load(section, p->permittivity), PICKET_OK);
  pk_axis_clear(p->context, &x);
  pk_axis_clear(p->context, &y);
  return section;
}

static inline void plane_close(plane *p) {
  pk_axis_clear(p->context, &p->x);
  pk_axis_clear(p->context, &p->y);
  pk_geometry_free(p->geometry);
  picket_context_free(p->context);
}

/* Indices of the uppermost modes of member m. */
static inline void plane_indices(plane *p, int m, bool correct, double k0, double top, int count,
                                 double *indices) {
  pk_section *section = plane_section(p, m, correct);
  pk_section_mode modes[16];
  int found = 0;
  assert_int_equal(
      pk_section_modes(section, k0, k0 * k0 * top * top * 1.0001, count, modes, &found), PICKET_OK);
  assert_int_equal(found, count);
  for (int i = 0; i < count; i++) {
    indices[i] = creal(modes[i].beta) / k0;
    assert_true(modes[i].residual < PK_SECTION_RESIDUAL);
  }
  pk_section_modes_clear(p->context, found, modes);
  pk_section_free(section);
}

#endif
