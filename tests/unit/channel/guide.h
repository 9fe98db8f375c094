/* Channels of one rectangular core with teeth, by hand on hand-laid grids. Every step asserts that
 * it worked. */
#ifndef PICKET_TESTS_CHANNEL_GUIDE_H
#define PICKET_TESTS_CHANNEL_GUIDE_H

#include "channel/fields.h"
#include "channel/forms.h"
#include "channel/modes.h"
#include "unit/section/plane.h"

/* Slices of the guide: walls in z, and the plane of each. The axes are those of plane[0]. */
enum { GUIDE_SLICES = 4 };
typedef struct guide {
  double pitch;
  int slices;
  double from[GUIDE_SLICES + 1];
  plane plane[GUIDE_SLICES];
} guide;

/* The channel of member m of the axes with harmonics low..high, loaded with the media of plane 0.
 */
static inline pk_channel *guide_channel_at(const guide *g, int m, int low, int high, bool correct,
                                           double origin) {
  const plane *p = &g->plane[0];
  pk_axis x = {0}, y = {0};
  const pk_geometry *geometry[GUIDE_SLICES];
  for (int i = 0; i < g->slices; i++) {
    geometry[i] = g->plane[i].geometry;
  }
  assert_int_equal(pk_axis_divide(p->context, &p->x, m, &x), PICKET_OK);
  assert_int_equal(pk_axis_divide(p->context, &p->y, m, &y), PICKET_OK);
  pk_channel_plan plan = {.pitch = g->pitch,
                          .slices = g->slices,
                          .from = g->from,
                          .geometry = geometry,
                          .x = &x,
                          .y = &y,
                          .media = PLANE_MEDIA,
                          .correct_corners = correct,
                          .low = low,
                          .high = high,
                          .origin = origin};
  pk_channel *channel = NULL;
  assert_int_equal(pk_channel_create(p->context, &plan, &channel), PICKET_OK);
  assert_int_equal(pk_channel_load(channel, p->permittivity), PICKET_OK);
  pk_axis_clear(p->context, &x);
  pk_axis_clear(p->context, &y);
  return channel;
}

static inline pk_channel *guide_channel(const guide *g, int m, int low, int high) {
  return guide_channel_at(g, m, low, high, true, NAN);
}

static inline void guide_close(guide *g) {
  for (int i = 1; i < g->slices; i++) {
    pk_geometry_free(g->plane[i].geometry);
  }
  plane_close(&g->plane[0]);
}

/* A quarter of a core of 450 × 220 nm (medium 1) in medium 0: teeth of the given length about
 * z = 0, or, for a length of the pitch, the core itself. */
static inline guide guide_of_teeth(const double complex index[PLANE_MEDIA], double pitch,
                                   double tooth, pk_end at_x, pk_end at_y, double reach) {
  guide g = {.pitch = pitch, .slices = tooth < pitch ? 2 : 1};
  g.from[0] = -0.5 * tooth;
  g.from[1] = 0.5 * tooth;
  g.from[g.slices] = g.from[0] + pitch;
  plane p = plane_of(index, 0);
  plane_rect(&p, 1, 0, 0, 0.45, 0.22);
  lay_growing(p.context,
              &(ruler){at_x, PK_END_ZERO, 0, 0.225 + reach, 0.225, 0.08, 0.25, 1, {0.225}}, 0.3,
              &p.x);
  lay_growing(p.context, &(ruler){at_y, PK_END_ZERO, 0, 0.11 + reach, 0.11, 0.08, 0.25, 1, {0.11}},
              0.3, &p.y);
  g.plane[0] = p;
  if (g.slices > 1) {
    g.plane[1] = plane_in(p.context, index, 0);
  }
  return g;
}

/* The mode at k nearest to a guess of k0. */
static inline pk_channel_mode guide_mode_at_k(pk_channel *channel, double k, double k0) {
  pk_channel_mode mode = {0};
  int found = 0;
  assert_int_equal(pk_channel_modes_at_k(channel, k, k0 * k0 * (1 - 1e-6), 1, NULL, &mode, &found),
                   PICKET_OK);
  assert_int_equal(found, 1);
  assert_true(mode.residual <= PK_CHANNEL_RESIDUAL);
  return mode;
}

static inline pk_channel_mode guide_wave(pk_channel *channel, double k0, double complex guess) {
  pk_channel_mode mode = {0};
  int found = 0;
  assert_int_equal(pk_channel_waves(channel, k0, guess, 1, NULL, &mode, &found), PICKET_OK);
  assert_int_equal(found, 1);
  assert_true(mode.residual <= PK_CHANNEL_RESIDUAL);
  return mode;
}

#endif
