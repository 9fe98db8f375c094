/* The places of a channel on the staggered grid: sites of e, components of Ce, oblique nodes.
 *
 *   h_x (i, j+½):   ∂y e_z - β e_y      h_y (i+½, j):  β e_x - ∂x e_z
 *   h_z (i+½, j+½): ∂x e_y - ∂y e_x
 *
 * up to factors of i. W of a component and the volume of a site are the stretched areas between the
 * neighbouring lines or half lines, so that Cᵀ W C is the product of adjoint curls. */
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

static int site_x(const pk_channel *c, int i, int j) {
  return i < 0 || j < 0 ? -1 : i * c->ny + j;
}

static int site_y(const pk_channel *c, int i, int j) {
  return i < 0 || j < 0 ? -1 : c->first_y + i * c->my + j;
}

static int site_z(const pk_channel *c, int i, int j) {
  return i < 0 || j < 0 ? -1 : c->first_z + i * c->ny + j;
}

/* e vanishes where there is no site. */
static void put(pk_curl *curl, int site, double complex plain, double turn) {
  if (site >= 0) {
    curl->site[curl->count] = site;
    curl->plain[curl->count] = plain;
    curl->turn[curl->count++] = turn;
  }
}

static pk_curl curl_x(const pk_channel *c, int i, int j) {
  pk_curl curl = {.weight = c->dual_x[i] * c->y.length[j]};
  double complex slope = 1 / c->y.length[j];
  put(&curl, site_z(c, i, pk_line_index(&c->y, j + 1)), slope, 0);
  put(&curl, site_z(c, i, pk_line_index(&c->y, j)), -slope, 0);
  put(&curl, site_y(c, i, j), 0, -1);
  return curl;
}

static pk_curl curl_y(const pk_channel *c, int i, int j) {
  pk_curl curl = {.weight = c->x.length[i] * c->dual_y[j]};
  double complex slope = 1 / c->x.length[i];
  put(&curl, site_x(c, i, j), 0, 1);
  put(&curl, site_z(c, pk_line_index(&c->x, i + 1), j), -slope, 0);
  put(&curl, site_z(c, pk_line_index(&c->x, i), j), slope, 0);
  return curl;
}

static pk_curl curl_z(const pk_channel *c, int i, int j) {
  pk_curl curl = {.weight = c->x.length[i] * c->y.length[j]};
  double complex along_x = 1 / c->x.length[i], along_y = 1 / c->y.length[j];
  put(&curl, site_y(c, pk_line_index(&c->x, i + 1), j), along_x, 0);
  put(&curl, site_y(c, pk_line_index(&c->x, i), j), -along_x, 0);
  put(&curl, site_x(c, i, pk_line_index(&c->y, j + 1)), -along_y, 0);
  put(&curl, site_x(c, i, pk_line_index(&c->y, j)), along_y, 0);
  return curl;
}

static picket_status take_curls(pk_channel *c) {
  int count = c->nx * c->my + c->mx * c->ny + c->mx * c->my;
  c->curl = PK_NEW(c->context, count, pk_curl);
  if (!c->curl) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < c->nx; i++) {
    for (int j = 0; j < c->my; j++) {
      c->curl[c->curl_count++] = curl_x(c, i, j);
    }
  }
  for (int i = 0; i < c->mx; i++) {
    for (int j = 0; j < c->ny; j++) {
      c->curl[c->curl_count++] = curl_y(c, i, j);
    }
  }
  for (int i = 0; i < c->mx; i++) {
    for (int j = 0; j < c->my; j++) {
      c->curl[c->curl_count++] = curl_z(c, i, j);
    }
  }
  return PICKET_OK;
}

static double width_of(const pk_axis *axis, int interval) {
  return axis->line[interval + 1] - axis->line[interval];
}

static picket_status take_volumes(pk_channel *c) {
  c->volume = PK_NEW(c->context, c->site_count, double complex);
  c->area = PK_NEW(c->context, c->site_count, double);
  if (!c->volume || !c->area) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < c->mx; i++) {
    for (int j = 0; j < c->ny; j++) {
      c->volume[site_x(c, i, j)] = c->x.length[i] * c->dual_y[j];
      c->area[site_x(c, i, j)] = width_of(&c->x, i) * c->width_y[j];
    }
  }
  for (int i = 0; i < c->nx; i++) {
    for (int j = 0; j < c->my; j++) {
      c->volume[site_y(c, i, j)] = c->dual_x[i] * c->y.length[j];
      c->area[site_y(c, i, j)] = c->width_x[i] * width_of(&c->y, j);
    }
    for (int j = 0; j < c->ny; j++) {
      c->volume[site_z(c, i, j)] = c->dual_x[i] * c->dual_y[j];
      c->area[site_z(c, i, j)] = c->width_x[i] * c->width_y[j];
    }
  }
  return PICKET_OK;
}

/* ½ of the lengths beside the node: halves of ¼ h_x h_y, which D of e_x holds of e_y. */
static pk_node node_at(const pk_channel *c, int i, int j) {
  pk_node node = {.site = c->site_count + i * c->ny + j};
  for (int side = 0; side < 2; side++) {
    int k = side == 0 ? pk_interval_below(&c->x, i) : pk_interval_above(&c->x, i);
    if (k >= 0) {
      node.x_site[node.x_count] = site_x(c, k, j);
      node.plain_x_length[node.x_count] = 0.5 * width_of(&c->x, k);
      node.x_length[node.x_count++] = 0.5 * c->x.length[k];
    }
    int l = side == 0 ? pk_interval_below(&c->y, j) : pk_interval_above(&c->y, j);
    if (l >= 0) {
      node.y_site[node.y_count] = site_y(c, i, l);
      node.plain_y_length[node.y_count] = 0.5 * width_of(&c->y, l);
      node.y_length[node.y_count++] = 0.5 * c->y.length[l];
    }
  }
  return node;
}

static bool oblique(const pk_channel *c, const uint64_t *marks, int at) {
  size_t stride = (size_t)pk_section_site_count(c->section[0]);
  for (int k = 0; k < c->classes; k++) {
    if (marks[(size_t)k * stride + (size_t)(c->site_count + at)] != 0) {
      return true;
    }
  }
  return false;
}

static picket_status take_nodes(pk_channel *c) {
  uint64_t *marks = NULL;
  picket_status status = pk_channel_take_marks(c, &marks);
  c->node = PK_NEW(c->context, c->nx * c->ny, pk_node);
  if (status != PICKET_OK || !c->node) {
    pk_free(c->context, marks);
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < c->nx; i++) {
    for (int j = 0; j < c->ny; j++) {
      if (oblique(c, marks, i * c->ny + j)) {
        c->node[c->node_count++] = node_at(c, i, j);
      }
    }
  }
  pk_free(c->context, marks);
  return PICKET_OK;
}

picket_status pk_channel_take_marks(const pk_channel *c, uint64_t **out) {
  size_t count = (size_t)pk_section_site_count(c->section[0]);
  uint64_t *marks = PK_NEW(c->context, (size_t)c->classes * count, uint64_t);
  if (!marks) {
    return PICKET_ERROR_MEMORY;
  }
  for (int k = 0; k < c->classes; k++) {
    pk_section_marks(c->section[k], marks + (size_t)k * count);
  }
  *out = marks;
  return PICKET_OK;
}

picket_status pk_channel_take_places(pk_channel *c) {
  c->first_y = c->mx * c->ny;
  c->first_z = c->first_y + c->nx * c->my;
  c->site_count = c->first_z + c->nx * c->ny;
  c->n = (int64_t)c->site_count * c->count;
  picket_status status = take_volumes(c);
  if (status == PICKET_OK) {
    status = take_curls(c);
  }
  return status == PICKET_OK ? take_nodes(c) : status;
}
