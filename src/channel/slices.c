/* The slices of a channel: which are the same, their Fourier coefficients, and the mirror plane.
 *
 * A function of z that is f_c in the slices of class c has the coefficients
 *   f_n = (1/Λ) ∫ f exp(-2πi n (z - z0)/Λ) dz = Σ_c f_c C_cn,
 *   C_cn = Σ over its slices [a, b] of (exp(-2πi n (a - z0)/Λ) - exp(-2πi n (b - z0)/Λ)) / (2πi n),
 * the origin z0 in the mirror plane, where there is one: all C_cn are then real. */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

static const double PI = 3.141592653589793238;

/* Walls closer than this share of the pitch are one place: that of coordinates in files. */
static const double SAME = 1e-9;

/* Slices of one period, neighbours of one class merged. */
typedef struct sequence {
  picket_context *context;
  double pitch;
  int count;
  double *from; /* [count] */
  double *to;   /* [count] */
  int *class;   /* [count] */
} sequence;

static void sequence_close(sequence *s) {
  if (s->context) {
    pk_free(s->context, s->from);
    pk_free(s->context, s->to);
    pk_free(s->context, s->class);
  }
}

static bool same_marks(const uint64_t *a, const uint64_t *b, int count) {
  return memcmp(a, b, (size_t)count * sizeof *a) == 0;
}

static picket_status make_section(pk_channel *channel, const pk_channel_plan *plan, int slice,
                                  pk_section **out) {
  pk_section_plan section = {.geometry = plan->geometry[slice],
                             .x = plan->x,
                             .y = plan->y,
                             .media = plan->media,
                             .correct_corners = plan->correct_corners};
  return pk_section_create(channel->context, &section, out);
}

/* The class of the section of a slice: one of those that are kept, or the next one. */
static int class_of(const pk_channel *c, const pk_section *section, uint64_t *marks) {
  int sites = pk_section_site_count(section);
  uint64_t *mine = marks + (size_t)c->classes * (size_t)sites;
  pk_section_marks(section, mine);
  int class = 0;
  while (class < c->classes && !same_marks(mine, marks + (size_t) class * (size_t)sites, sites)) {
    class ++;
  }
  return class;
}

static picket_status take_classes(pk_channel *c, const pk_channel_plan *plan, int *class) {
  uint64_t *marks = NULL;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < plan->slices; i++) {
    pk_section *section = NULL;
    status = make_section(c, plan, i, &section);
    if (status == PICKET_OK && !marks) {
      marks = PK_NEW(c->context, (size_t)plan->slices * (size_t)pk_section_site_count(section),
                     uint64_t);
      status = marks ? PICKET_OK : PICKET_ERROR_MEMORY;
    }
    if (status == PICKET_OK) {
      class[i] = class_of(c, section, marks);
      if (class[i] == c->classes) {
        c->section[c->classes++] = section;
        section = NULL;
      }
    }
    pk_section_free(section);
  }
  pk_free(c->context, marks);
  return status;
}

/* Neighbours of one class become one slice; the first and the last are neighbours too. */
static picket_status merge(const pk_channel *c, const pk_channel_plan *plan, const int *class,
                           sequence *out) {
  sequence s = {.context = c->context, .pitch = plan->pitch};
  s.from = PK_NEW(s.context, plan->slices, double);
  s.to = PK_NEW(s.context, plan->slices, double);
  s.class = PK_NEW(s.context, plan->slices, int);
  if (!s.from || !s.to || !s.class) {
    sequence_close(&s);
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < plan->slices; i++) {
    assert(plan->from[i + 1] > plan->from[i]);
    if (s.count == 0 || s.class[s.count - 1] != class[i]) {
      s.from[s.count] = plan->from[i];
      s.class[s.count++] = class[i];
    }
    s.to[s.count - 1] = plan->from[i + 1];
  }
  if (s.count > 1 && s.class[0] == s.class[s.count - 1]) {
    s.from[0] = s.from[--s.count] - s.pitch;
  }
  *out = s;
  return PICKET_OK;
}

static bool same_place(const sequence *s, double a, double b) {
  return fabs(remainder(a - b, s->pitch)) < SAME * s->pitch;
}

static bool mirrors(const sequence *s, double centre) {
  for (int i = 0; i < s->count; i++) {
    bool found = s->count == 1;
    for (int k = 0; !found && k < s->count; k++) {
      found = s->class[k] == s->class[i] && same_place(s, 2 * centre - s->from[i], s->to[k]) &&
              same_place(s, 2 * centre - s->to[i], s->from[k]);
    }
    if (!found) {
      return false;
    }
  }
  return true;
}

/* A mirror plane lies in the middle of a slice, or on a wall, which then has one class on both
 * sides and is none after merging. Planes come in pairs half a pitch apart: that nearest to 0. */
static bool find_mirror(const sequence *s, double *origin) {
  bool found = false;
  for (int i = 0; i < 2 * s->count; i++) {
    double middle = s->count == 1 ? 0 : 0.5 * (s->from[i / 2] + s->to[i / 2]);
    double centre = remainder(middle + (i % 2 == 0 ? 0 : 0.5 * s->pitch), s->pitch);
    if (mirrors(s, centre) && (!found || fabs(centre) < fabs(*origin))) {
      *origin = centre;
      found = true;
    }
  }
  return found;
}

/* C_n of a slice. */
static double complex coefficient(const sequence *s, int slice, double origin, int n) {
  double from = s->from[slice] - origin, to = s->to[slice] - origin;
  if (s->count == 1) {
    return n == 0;
  }
  if (n == 0) {
    return (to - from) / s->pitch;
  }
  double half = PI * n * (to - from) / s->pitch;
  return sin(half) / (PI * n) * cexp(-I * PI * n * (from + to) / s->pitch);
}

static void sum_coefficients(pk_channel *c, const sequence *s) {
  int most = c->count - 1;
  for (int i = 0; i < s->count; i++) {
    double complex *row = c->coefficient + (ptrdiff_t)s->class[i] * (2 * most + 1) + most;
    for (int n = -most; n <= most; n++) {
      row[n] += coefficient(s, i, c->origin, n);
    }
  }
  for (int i = 0; c->mirrored && i < c->classes * (2 * most + 1); i++) {
    c->coefficient[i] = creal(c->coefficient[i]);
  }
}

static void take_origin(pk_channel *c, const pk_channel_plan *plan, const sequence *s) {
  if (isnan(plan->origin)) {
    c->origin = 0;
    c->mirrored = find_mirror(s, &c->origin);
  } else {
    c->origin = plan->origin;
    c->mirrored = mirrors(s, c->origin);
  }
}

picket_status pk_channel_take_slices(pk_channel *c, const pk_channel_plan *plan) {
  int *class = PK_NEW(c->context, plan->slices, int);
  c->section = PK_NEW(c->context, plan->slices, pk_section *);
  sequence s = {0};
  picket_status status = class && c->section ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = take_classes(c, plan, class);
  }
  if (status == PICKET_OK) {
    status = merge(c, plan, class, &s);
  }
  if (status == PICKET_OK) {
    c->coefficient = PK_NEW(c->context, (ptrdiff_t)c->classes * (2 * c->count - 1), double complex);
    c->sites = PK_NEW(c->context, c->classes, pk_sites);
    status = c->coefficient && c->sites ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    take_origin(c, plan, &s);
    sum_coefficients(c, &s);
    c->slices = s.count;
    c->from = s.from; /* taken over */
    c->class_of = s.class;
    s.from = NULL;
    s.class = NULL;
  }
  sequence_close(&s);
  for (int i = 0; status == PICKET_OK && i < c->classes; i++) {
    status = pk_sites_create(c->section[i], &c->sites[i]);
  }
  pk_free(c->context, class);
  return status;
}
