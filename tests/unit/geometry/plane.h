/* Short ways to paint planes in the tests of this room, and a source of random numbers. */
#ifndef TEST_GEOMETRY_PLANE_H
#define TEST_GEOMETRY_PLANE_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/context.h"
#include "base/memory.h"
#include "geometry/geometry.h"

static const pk_place nowhere = {NULL, 0, 0};

/* cmocka compares in single precision, which would hide any error below 1e-7. */
#define assert_near(value, expected, tolerance)                                       \
  do {                                                                                \
    double near_value = (value), near_expected = (expected);                          \
    if (!(fabs(near_value - near_expected) <= (tolerance))) {                         \
      fail_msg("%s is %.17g, not %.17g within %g", #value, near_value, near_expected, \
               (double)(tolerance));                                                  \
    }                                                                                 \
  } while (0)

/* Memory that counts blocks and can fail at the n-th request. */
typedef struct memory_watch {
  long alive, requests, fail_at;
} memory_watch;

static inline void *watch_allocate(size_t bytes, void *user) {
  memory_watch *watch = user;
  if (++watch->requests == watch->fail_at) {
    return NULL;
  }
  watch->alive++;
  return malloc(bytes);
}

static inline void watch_release(void *pointer, void *user) {
  memory_watch *watch = user;
  if (pointer) {
    watch->alive--;
  }
  free(pointer);
}

static inline picket_context *context_new(memory_watch *watch) {
  picket_context_options options;
  picket_context_options_init(&options);
  if (watch) {
    options.allocate = watch_allocate;
    options.release = watch_release;
    options.memory_user = watch;
  }
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(&options, &context), PICKET_OK);
  return context;
}

/* The plane holds the context: freeing the plane is enough. */
static inline pk_geometry *plane_of(const pk_frame *frame) {
  picket_context *context = context_new(NULL);
  pk_geometry *plane = NULL;
  assert_int_equal(pk_geometry_create(context, frame, &plane), PICKET_OK);
  picket_context_free(context);
  return plane;
}

/* A cell: u periodic in ±pitch/2, v open. Background 0. */
static inline pk_geometry *cell_plane(double pitch) {
  pk_frame frame = {
      .from = {-pitch / 2, -INFINITY}, .to = {pitch / 2, INFINITY}, .periodic = {true, false}};
  return plane_of(&frame);
}

/* An open square ±half. Background 0. */
static inline pk_geometry *open_plane(double half) {
  pk_frame frame = {.from = {-half, -half}, .to = {half, half}};
  return plane_of(&frame);
}

static inline pk_geometry *lattice_plane(double u, double v, double shift) {
  pk_frame frame = {
      .from = {-u / 2, -v / 2}, .to = {u / 2, v / 2}, .periodic = {true, true}, .shift = shift};
  return plane_of(&frame);
}

static inline void rect(pk_geometry *plane, int medium, double u, double v, double width,
                        double height) {
  assert_int_equal(
      pk_geometry_add_rect(plane, nowhere, medium, (double[2]){u, v}, (double[2]){width, height}),
      PICKET_OK);
}

static inline void disc(pk_geometry *plane, int medium, double u, double v, double diameter) {
  assert_int_equal(pk_geometry_add_disc(plane, nowhere, medium, (double[2]){u, v}, diameter),
                   PICKET_OK);
}

static inline void polygon(pk_geometry *plane, int medium, int count, const double (*corners)[2]) {
  assert_int_equal(pk_geometry_add_polygon(plane, nowhere, medium, count, corners), PICKET_OK);
}

static inline void stripe(pk_geometry *plane, int medium, pk_axis_name across, double from,
                          double to) {
  assert_int_equal(pk_geometry_add_stripe(plane, nowhere, medium, across, from, to), PICKET_OK);
}

static inline pk_box box_of(const pk_geometry *plane, double u0, double v0, double u1, double v1) {
  pk_box box;
  assert_int_equal(pk_geometry_box(plane, (double[2]){u0, v0}, (double[2]){u1, v1}, &box),
                   PICKET_OK);
  return box;
}

static inline double fraction_of(const pk_box *box, int medium) {
  for (int i = 0; i < box->count; i++) {
    if (box->medium[i] == medium) {
      return box->fraction[i];
    }
  }
  return 0;
}

static inline double share(const pk_geometry *plane, int medium, double u0, double v0, double u1,
                           double v1) {
  pk_box box = box_of(plane, u0, v0, u1, v1);
  return fraction_of(&box, medium);
}

/* Uniform in [low, high); the multiplier is the one of Knuth's MMIX. */
static inline double random_in(uint64_t *state, double low, double high) {
  *state = *state * 6364136223846793005u + 1442695040888963407u;
  return low + (high - low) * ((double)(*state >> 11) / 9007199254740992.0);
}

/* Shapes of all kinds over each other, some across the boundary, media 1 to 4. */
static inline void paint_at_random(pk_geometry *plane, double half, int shapes, uint64_t *state) {
  for (int i = 0; i < shapes; i++) {
    int medium = 1 + (int)random_in(state, 0, 4);
    double u = random_in(state, -half, half);
    double v = random_in(state, -half, half);
    double a = random_in(state, 0.05, 0.9) * half;
    double b = random_in(state, 0.05, 0.9) * half;
    int kind = (int)random_in(state, 0, 3);
    if (kind == 0) {
      rect(plane, medium, u, v, a, b);
    } else if (kind == 1) {
      disc(plane, medium, u, v, a);
    } else { /* a star, which is never self-crossing */
      double corners[8][2];
      for (int k = 0; k < 8; k++) {
        double radius = (k % 2 ? 0.4 : 1) * a / 2;
        double angle = k * 3.14159265358979323846 / 4 + b;
        corners[k][0] = u + radius * cos(angle);
        corners[k][1] = v + radius * sin(angle);
      }
      polygon(plane, medium, 8, (const double(*)[2])corners);
    }
  }
}

#endif
