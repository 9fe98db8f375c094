/* Profiles: what the box of a site holds all along z.
 *
 * Averages over a box and products along z do not commute. A box that is half tooth and half
 * cladding in one slice and all cladding in the next has two parts, of which one varies along z and
 * one does not, so the parts must be known in all slices together:
 *   - where one slice only is mixed, its parts are those of the box;
 *   - where interfaces lie on grid lines, the quarters or halves of the box between the lines
 *     through the site hold one medium each;
 *   - elsewhere (oblique interfaces of several slices in one box) parts with equal media are taken
 *     to lie in one place, the rest in the order of the media. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

static const double NONE = 1e-13; /* as fractions in pk_box */

pk_kind pk_channel_kind(const pk_channel *c, int site) {
  return (pk_kind)((site >= c->first_y) + (site >= c->first_z) + (site >= c->site_count));
}

/* --- Joining ---------------------------------------------------------------------------------- */

/* What a box holds in one slice. */
typedef struct content {
  int count;
  int medium[PK_BOX_MEDIA];
  double fraction[PK_BOX_MEDIA];
} content;

typedef struct parts {
  int count, classes;
  int *medium;      /* [PK_PROFILE_PARTS][classes] */
  double *fraction; /* [PK_PROFILE_PARTS] */
} parts;

/* Moves `amount` of part p of `from`, which has medium m in the next class, to `to`. */
static void move(parts *from, int p, int class, int m, double amount, parts *to) {
  if (amount <= NONE || to->count == PK_PROFILE_PARTS) {
    return; /* 64 parts hold all but boxes that no grid should have */
  }
  int *medium = to->medium + to->count * to->classes;
  memcpy(medium, from->medium + p * from->classes, (size_t) class * sizeof *medium);
  medium[class] = m;
  to->fraction[to->count++] = amount;
  from->fraction[p] -= amount;
}

static bool has(const parts *from, int p, int class, int medium) {
  for (int k = 0; k < class; k++) {
    if (from->medium[p * from->classes + k] == medium) {
      return true;
    }
  }
  return false;
}

/* Joins the content of the next class to parts that are known in the classes before it: first what
 * is of equal media, then the rest in order. */
static void join(parts *from, int class, content held, parts *to) {
  to->count = 0;
  for (int round = 0; round < 2; round++) {
    for (int p = 0; p < from->count; p++) {
      for (int m = 0; m < held.count; m++) {
        if (round == 1 || has(from, p, class, held.medium[m])) {
          double amount = fmin(from->fraction[p], held.fraction[m]);
          move(from, p, class, held.medium[m], amount, to);
          held.fraction[m] -= amount;
        }
      }
    }
  }
}

/* Parts of a box with these contents of the classes; `spare` is work. */
static void join_all(const content *held, parts *out, parts *spare) {
  out->count = held[0].count;
  for (int p = 0; p < out->count; p++) {
    out->medium[p * out->classes] = held[0].medium[p];
    out->fraction[p] = held[0].fraction[p];
  }
  for (int k = 1; k < out->classes; k++) {
    join(out, k, held[k], spare);
    parts swap = *out;
    *out = *spare;
    *spare = swap;
  }
}

/* Adds weight × parts to a profile, equal ones together. */
static void add(const parts *from, double weight, pk_profile *to) {
  size_t bytes = (size_t)from->classes * sizeof *from->medium;
  for (int p = 0; p < from->count; p++) {
    const int *medium = from->medium + p * from->classes;
    int at = 0;
    while (at < to->count && memcmp(to->medium + at * from->classes, medium, bytes) != 0) {
      at++;
    }
    if (at == PK_PROFILE_PARTS) {
      continue;
    }
    if (at == to->count) {
      memcpy(to->medium + at * from->classes, medium, bytes);
      to->fraction[to->count++] = 0;
    }
    to->fraction[at] += weight * from->fraction[p];
  }
}

/* --- Boxes ------------------------------------------------------------------------------------ */

/* An extent of the box, cut in two at the line through the site. */
typedef struct cuts {
  int count;
  double at[3];
} cuts;

static cuts around_line(const pk_axis *axis, int index) {
  cuts s = {.count = 0};
  double low, high;
  double complex length;
  int line = index + pk_axis_first_line(axis);
  pk_axis_dual(axis, line, &low, &high, &length);
  s.at[s.count++] = low;
  if (axis->line[line] > low && axis->line[line] < high) {
    s.at[s.count++] = axis->line[line];
  }
  s.at[s.count++] = high;
  return s;
}

static cuts of_interval(const pk_axis *axis, int interval) {
  return (cuts){2, {axis->line[interval], axis->line[interval + 1]}};
}

static void extents(const pk_channel *c, int site, cuts *x, cuts *y) {
  switch (pk_channel_kind(c, site)) {
    case PK_KIND_X:
      *x = of_interval(&c->x, site / c->ny);
      *y = around_line(&c->y, site % c->ny);
      break;
    case PK_KIND_Y:
      site -= c->first_y;
      *x = around_line(&c->x, site / c->my);
      *y = of_interval(&c->y, site % c->my);
      break;
    case PK_KIND_Z:
    case PK_KIND_XY:
      site -= c->first_z;
      *x = around_line(&c->x, site / c->ny);
      *y = around_line(&c->y, site % c->ny);
      break;
  }
}

struct pk_profiler {
  const pk_channel *channel;
  const pk_channel_plan *plan;
  content *held; /* [classes] */
  parts parts, spare;
};

static picket_status add_piece(pk_profiler *w, const double low[2], const double high[2],
                               double weight, pk_profile *out) {
  for (int k = 0; k < w->channel->classes; k++) {
    pk_box box;
    const pk_geometry *geometry = w->plan->geometry[w->channel->example[k]];
    picket_status status = pk_geometry_box(geometry, low, high, &box);
    if (status != PICKET_OK) {
      return status;
    }
    w->held[k].count = box.count;
    memcpy(w->held[k].medium, box.medium, sizeof box.medium);
    memcpy(w->held[k].fraction, box.fraction, sizeof box.fraction);
  }
  join_all(w->held, &w->parts, &w->spare);
  add(&w->parts, weight, out);
  return PICKET_OK;
}

static picket_status by_pieces(pk_profiler *w, int site, pk_profile *out) {
  cuts x, y;
  extents(w->channel, site, &x, &y);
  double area = (x.at[x.count - 1] - x.at[0]) * (y.at[y.count - 1] - y.at[0]);
  picket_status status = PICKET_OK;
  for (int i = 0; i + 1 < x.count; i++) {
    for (int j = 0; status == PICKET_OK && j + 1 < y.count; j++) {
      double low[2] = {x.at[i], y.at[j]}, high[2] = {x.at[i + 1], y.at[j + 1]};
      double weight = (high[0] - low[0]) * (high[1] - low[1]) / area;
      status = add_piece(w, low, high, weight, out);
    }
  }
  return status;
}

/* --- Profiles --------------------------------------------------------------------------------- */

picket_status pk_profiler_create(const pk_channel *c, const pk_channel_plan *plan,
                                 pk_profiler **out) {
  pk_profiler *w = PK_NEW(c->context, 1, pk_profiler);
  if (!w) {
    return PICKET_ERROR_MEMORY;
  }
  w->channel = c;
  w->plan = plan;
  w->held = PK_NEW(c->context, c->classes, content);
  parts *list[2] = {&w->parts, &w->spare};
  bool ready = w->held != NULL;
  for (int i = 0; i < 2; i++) {
    list[i]->classes = c->classes;
    list[i]->medium = PK_NEW(c->context, PK_PROFILE_PARTS * c->classes, int);
    list[i]->fraction = PK_NEW(c->context, PK_PROFILE_PARTS, double);
    ready = ready && list[i]->medium && list[i]->fraction;
  }
  if (!ready) {
    pk_profiler_free(w);
    return PICKET_ERROR_MEMORY;
  }
  *out = w;
  return PICKET_OK;
}

void pk_profiler_free(pk_profiler *w) {
  if (w) {
    picket_context *context = w->channel->context;
    pk_free(context, w->held);
    pk_free(context, w->parts.medium);
    pk_free(context, w->parts.fraction);
    pk_free(context, w->spare.medium);
    pk_free(context, w->spare.fraction);
    pk_free(context, w);
  }
}

/* Contents and the mean facing of a site, with how many slices are mixed and whether any of them
 * is so by an oblique interface. */
static void take_contents(pk_profiler *w, int site, pk_profile *out, int *mixed, bool *oblique) {
  const pk_channel *c = w->channel;
  *mixed = 0;
  *oblique = false;
  memset(out->facing, 0, sizeof out->facing);
  for (int k = 0; k < c->classes; k++) {
    const pk_mixture *mixture = pk_section_mixture(c->section[k], site);
    w->held[k].count = mixture->count;
    memcpy(w->held[k].medium, mixture->medium, sizeof mixture->medium);
    memcpy(w->held[k].fraction, mixture->fraction, sizeof mixture->fraction);
    *mixed += mixture->count > 1;
    for (int i = 0; mixture->count > 1 && i < 3; i++) {
      out->facing[i] += mixture->facing[i];
    }
    *oblique = *oblique || mixture->facing[1] != 0;
  }
  for (int i = 0; *mixed > 0 && i < 3; i++) {
    out->facing[i] /= *mixed;
  }
}

picket_status pk_profiler_take(pk_profiler *w, int site, pk_profile *out) {
  const pk_channel *c = w->channel;
  int mixed;
  bool oblique;
  int place = site < c->site_count ? site : site - (c->site_count - c->first_z);
  out->count = 0;
  take_contents(w, place, out, &mixed, &oblique);
  if (mixed > 1 && !oblique) {
    return by_pieces(w, place, out);
  }
  join_all(w->held, &w->parts, &w->spare);
  add(&w->parts, 1, out);
  return PICKET_OK;
}
