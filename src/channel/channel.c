/* See channel.h: making a channel and giving it its media. */
#include "channel/channel.h"

#include <assert.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

static const double TWO_PI = 6.283185307179586477;

double complex pk_channel_beta(const pk_channel *c, double complex k, int h) {
  return k + TWO_PI * (c->low + h) / c->pitch;
}

/* --- Making ----------------------------------------------------------------------------------- */

static picket_status copy_axis(picket_context *context, const pk_axis *from, pk_axis *to) {
  *to = *from;
  to->line = pk_copy(context, from->line, (size_t)from->intervals + 1, sizeof *to->line);
  to->length = pk_copy(context, from->length, (size_t)from->intervals, sizeof *to->length);
  return to->line && to->length ? PICKET_OK : PICKET_ERROR_MEMORY;
}

static bool real_lengths(const pk_axis *axis) {
  for (int i = 0; i < axis->intervals; i++) {
    if (cimag(axis->length[i]) != 0) {
      return false;
    }
  }
  return true;
}

static picket_status take_widths(picket_context *context, const pk_axis *axis, int n,
                                 double **width, double complex **dual) {
  *width = PK_NEW(context, n, double);
  *dual = PK_NEW(context, n, double complex);
  if (!*width || !*dual) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < n; i++) {
    double low, high;
    pk_axis_dual(axis, i + pk_axis_first_line(axis), &low, &high, &(*dual)[i]);
    (*width)[i] = high - low;
  }
  return PICKET_OK;
}

static picket_status take_axes(pk_channel *c, const pk_channel_plan *plan) {
  picket_status status = copy_axis(c->context, plan->x, &c->x);
  if (status == PICKET_OK) {
    status = copy_axis(c->context, plan->y, &c->y);
  }
  if (status != PICKET_OK) {
    return status;
  }
  c->mx = c->x.intervals;
  c->my = c->y.intervals;
  c->nx = pk_axis_unknowns(&c->x);
  c->ny = pk_axis_unknowns(&c->y);
  c->real_axes = real_lengths(&c->x) && real_lengths(&c->y);
  status = take_widths(c->context, &c->x, c->nx, &c->width_x, &c->dual_x);
  return status == PICKET_OK ? take_widths(c->context, &c->y, c->ny, &c->width_y, &c->dual_y)
                             : status;
}

static picket_status build(pk_channel *c, const pk_channel_plan *plan) {
  c->permittivity = PK_NEW(c->context, 3 * c->media, double complex);
  picket_status status = c->permittivity ? take_axes(c, plan) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = pk_channel_take_slices(c, plan);
  }
  if (status == PICKET_OK) {
    status = pk_channel_take_places(c);
  }
  if (status == PICKET_OK) {
    status = pk_channel_take_blocks(c);
  }
  return status == PICKET_OK ? pk_channel_take_pattern(c) : status;
}

picket_status pk_channel_create(picket_context *context, const pk_channel_plan *plan,
                                pk_channel **out) {
  assert(plan->slices > 0 && plan->pitch > 0 && plan->low <= plan->high);
  pk_channel *c = PK_NEW(context, 1, pk_channel);
  if (!c) {
    return PICKET_ERROR_MEMORY;
  }
  c->context = pk_context_hold(context);
  c->pitch = plan->pitch;
  c->media = plan->media;
  c->low = plan->low;
  c->count = plan->high - plan->low + 1;
  picket_status status = build(c, plan);
  if (status != PICKET_OK) {
    pk_channel_free(c);
    return status;
  }
  *out = c;
  return PICKET_OK;
}

static void free_slices(pk_channel *c) {
  for (int k = 0; k < c->classes; k++) {
    if (c->sites) {
      pk_sites_free(c->section[k], &c->sites[k]);
    }
    pk_section_free(c->section[k]);
  }
  pk_free(c->context, c->section);
  pk_free(c->context, c->sites);
  pk_free(c->context, c->coefficient);
  pk_free(c->context, c->from);
  pk_free(c->context, c->class_of);
}

void pk_channel_free(pk_channel *c) {
  if (!c) {
    return;
  }
  picket_context *context = c->context;
  pk_channel_drop_factors(c);
  free_slices(c);
  pk_axis_clear(context, &c->x);
  pk_axis_clear(context, &c->y);
  pk_free(context, c->dual_x);
  pk_free(context, c->dual_y);
  pk_free(context, c->width_x);
  pk_free(context, c->width_y);
  pk_free(context, c->volume);
  pk_free(context, c->area);
  pk_free(context, c->block_of);
  pk_free(context, c->curl);
  pk_blocks_free(c, c->block);
  pk_free(context, c->node);
  pk_free(context, c->permittivity);
  pk_site_graph_free(context, &c->graph);
  pk_free(context, c->pattern.start);
  pk_free(context, c->pattern.row);
  pk_free(context, c);
  pk_context_release(context);
}

/* --- Numbers ---------------------------------------------------------------------------------- */

int64_t pk_channel_size(const pk_channel *c) {
  return c->n;
}

double pk_channel_pitch(const pk_channel *c) {
  return c->pitch;
}

double pk_channel_origin(const pk_channel *c) {
  return c->origin;
}

bool pk_channel_is_mirrored(const pk_channel *c) {
  return c->mirrored;
}

bool pk_channel_is_real(const pk_channel *c) {
  return c->is_real;
}

const pk_pattern *pk_channel_pattern(const pk_channel *c) {
  return &c->pattern;
}

bool pk_channel_uses(const pk_channel *c, int medium) {
  for (int k = 0; k < c->classes; k++) {
    if (pk_section_uses(c->section[k], medium)) {
      return true;
    }
  }
  return false;
}

picket_status pk_channel_load(pk_channel *c, const double complex *permittivity) {
  picket_status status = PICKET_OK;
  for (int k = 0; k < c->classes && status == PICKET_OK; k++) {
    status = pk_sites_fill(c->section[k], permittivity, &c->sites[k]);
  }
  if (status == PICKET_OK) {
    status = pk_blocks_fill(c, c->sites, c->block);
  }
  if (status != PICKET_OK) {
    return status;
  }
  c->lossless = c->real_axes;
  for (int m = 0; m < 3 * c->media; m++) {
    c->permittivity[m] = permittivity[m];
    c->lossless = c->lossless && cimag(permittivity[m]) == 0;
  }
  c->is_real = c->lossless && c->mirrored;
  return PICKET_OK;
}
