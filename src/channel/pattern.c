/* The pattern of T and its values.
 *
 * Sites are neighbours where they share a component of Ce or an oblique node; unknowns of
 * neighbours couple where they are of one harmonic, and all harmonics do at a site or node that
 * varies along z. Harmonics innermost, a column of unknowns holds for each neighbour either one
 * entry or `count`. */
#include <assert.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "channel/channel_private.h"

typedef struct link {
  int column, site;
  bool full;
} link;

typedef struct links {
  picket_context *context;
  int count, capacity;
  link *list;
} links;

/* By column, site, and full ones first. */
static int compare(const void *a, const void *b) {
  const link *p = a, *q = b;
  if (p->column != q->column) {
    return p->column < q->column ? -1 : 1;
  }
  return p->site != q->site ? (p->site < q->site ? -1 : 1) : q->full - p->full;
}

static void add(links *l, int column, int site, bool full) {
  assert(l->count < l->capacity);
  l->list[l->count++] = (link){column, site, full};
}

static void link_curl(links *l, const pk_curl *curl) {
  for (int a = 0; a < curl->count; a++) {
    for (int b = 0; b < curl->count; b++) {
      add(l, curl->site[a], curl->site[b], false);
    }
  }
}

static void link_node(links *l, const pk_node *node, bool full) {
  for (int a = 0; a < node->x_count; a++) {
    for (int b = 0; b < node->y_count; b++) {
      add(l, node->x_site[a], node->y_site[b], full);
      add(l, node->y_site[b], node->x_site[a], full);
    }
  }
}

/* Sorted, each once. */
static picket_status make_links(const pk_channel *c, links *out) {
  links l = {.context = c->context};
  l.capacity = c->site_count + PK_CURL_TERMS * PK_CURL_TERMS * c->curl_count + 8 * c->node_count;
  l.list = PK_NEW(c->context, l.capacity, link);
  if (!l.list) {
    return PICKET_ERROR_MEMORY;
  }
  for (int s = 0; s < c->site_count; s++) {
    add(&l, s, s, c->block[c->block_of[s]].varied);
  }
  for (int r = 0; r < c->curl_count; r++) {
    link_curl(&l, &c->curl[r]);
  }
  for (int i = 0; i < c->node_count; i++) {
    link_node(&l, &c->node[i], c->block[c->node[i].block].varied);
  }
  qsort(l.list, (size_t)l.count, sizeof *l.list, compare);
  int kept = 0;
  for (int i = 0; i < l.count; i++) {
    if (kept == 0 || l.list[i].column != l.list[kept - 1].column ||
        l.list[i].site != l.list[kept - 1].site) {
      l.list[kept++] = l.list[i];
    }
  }
  l.count = kept;
  *out = l;
  return PICKET_OK;
}

static picket_status make_graph(pk_channel *c, const links *l) {
  pk_site_graph *g = &c->graph;
  g->start = PK_NEW(c->context, c->site_count + 1, int);
  g->site = PK_NEW(c->context, l->count, int);
  g->full = PK_NEW(c->context, l->count, bool);
  g->offset = PK_NEW(c->context, l->count, int);
  g->height = PK_NEW(c->context, c->site_count, int);
  g->base = PK_NEW(c->context, c->site_count, int64_t);
  if (!g->start || !g->site || !g->full || !g->offset || !g->height || !g->base) {
    return PICKET_ERROR_MEMORY;
  }
  int64_t base = 0;
  int i = 0;
  for (int s = 0; s < c->site_count; s++) {
    g->base[s] = base;
    for (; i < l->count && l->list[i].column == s; i++) {
      g->site[i] = l->list[i].site;
      g->full[i] = l->list[i].full;
      g->offset[i] = g->height[s];
      g->height[s] += g->full[i] ? c->count : 1;
    }
    g->start[s + 1] = i;
    base += (int64_t)g->height[s] * c->count;
  }
  return PICKET_OK;
}

void pk_site_graph_free(picket_context *context, pk_site_graph *g) {
  pk_free(context, g->start);
  pk_free(context, g->site);
  pk_free(context, g->full);
  pk_free(context, g->offset);
  pk_free(context, g->height);
  pk_free(context, g->base);
}

static picket_status expand(pk_channel *c) {
  const pk_site_graph *g = &c->graph;
  int last = c->site_count - 1, count = c->count;
  int64_t entries = g->base[last] + (int64_t)g->height[last] * count;
  c->pattern.n = c->n;
  c->pattern.start = PK_NEW(c->context, c->n + 1, int64_t);
  c->pattern.row = PK_NEW(c->context, entries, int64_t);
  if (!c->pattern.start || !c->pattern.row) {
    return PICKET_ERROR_MEMORY;
  }
  int64_t at = 0;
  for (int s = 0; s < c->site_count; s++) {
    for (int h = 0; h < count; h++) {
      for (int k = g->start[s]; k < g->start[s + 1]; k++) {
        int64_t first = (int64_t)g->site[k] * count;
        for (int r = g->full[k] ? 0 : h; r < (g->full[k] ? count : h + 1); r++) {
          c->pattern.row[at++] = first + r;
        }
      }
      c->pattern.start[(int64_t)s * count + h + 1] = at;
    }
  }
  assert(at == entries);
  return PICKET_OK;
}

picket_status pk_channel_take_pattern(pk_channel *c) {
  links l = {0};
  picket_status status = make_links(c, &l);
  if (status == PICKET_OK) {
    status = make_graph(c, &l);
  }
  if (status == PICKET_OK) {
    status = expand(c);
  }
  pk_free(c->context, l.list);
  return status;
}

/* --- Values ----------------------------------------------------------------------------------- */

static int edge_of(const pk_site_graph *g, int site, int column) {
  int low = g->start[column], high = g->start[column + 1];
  while (high - low > 1) {
    int middle = (low + high) / 2;
    *(g->site[middle] > site ? &high : &low) = middle;
  }
  assert(g->site[low] == site);
  return low;
}

/* Where values go: those of one of the two kinds. */
typedef struct target {
  double complex *values;
  double *real;
} target;

static void add_to(const target *t, int64_t at, double complex value) {
  if (t->real) {
    t->real[at] += creal(value);
  } else {
    t->values[at] += value;
  }
}

static int64_t slot(const pk_channel *c, int column, int edge, int row_harmonic, int harmonic) {
  const pk_site_graph *g = &c->graph;
  return g->base[column] + (int64_t)harmonic * g->height[column] + g->offset[edge] +
         (g->full[edge] ? row_harmonic : 0);
}

static void add_curl(const pk_channel *c, double complex k, const pk_curl *curl, const target *t) {
  for (int b = 0; b < curl->count; b++) {
    for (int a = 0; a < curl->count; a++) {
      int edge = edge_of(&c->graph, curl->site[a], curl->site[b]);
      for (int h = 0; h < c->count; h++) {
        double complex beta = pk_channel_beta(c, k, h);
        double complex left = curl->plain[a] + curl->turn[a] * beta;
        double complex right = curl->plain[b] + curl->turn[b] * beta;
        add_to(t, slot(c, curl->site[b], edge, h, h), curl->weight * left * right);
      }
    }
  }
}

/* Adds factor × a block between two sites. */
static void add_block(const pk_channel *c, const pk_block *block, int site, int column,
                      double complex factor, const target *t) {
  int edge = edge_of(&c->graph, site, column), count = c->count;
  for (int h = 0; h < count; h++) {
    if (!block->varied) {
      add_to(t, slot(c, column, edge, h, h), factor * block->scalar);
    }
    for (int r = 0; block->varied && r < count; r++) {
      add_to(t, slot(c, column, edge, r, h), factor * block->matrix[h * count + r]);
    }
  }
}

static void add_node(const pk_channel *c, const pk_node *node, double complex factor,
                     const target *t) {
  const pk_block *block = &c->block[node->block];
  for (int a = 0; a < node->x_count; a++) {
    for (int b = 0; b < node->y_count; b++) {
      double complex weight = factor * node->x_length[a] * node->y_length[b];
      add_block(c, block, node->x_site[a], node->y_site[b], weight, t);
      add_block(c, block, node->y_site[b], node->x_site[a], weight, t);
    }
  }
}

static void add_all(const pk_channel *c, double complex k, double complex k0_square,
                    const target *t) {
  for (int r = 0; r < c->curl_count; r++) {
    add_curl(c, k, &c->curl[r], t);
  }
  for (int s = 0; s < c->site_count; s++) {
    add_block(c, &c->block[c->block_of[s]], s, s, -k0_square * c->volume[s], t);
  }
  for (int i = 0; i < c->node_count; i++) {
    add_node(c, &c->node[i], -k0_square, t);
  }
}

void pk_channel_values(const pk_channel *c, double complex k, double complex k0_square,
                       double complex *values) {
  memset(values, 0, (size_t)c->pattern.start[c->n] * sizeof *values);
  add_all(c, k, k0_square, &(target){.values = values});
}

void pk_channel_values_real(const pk_channel *c, double k, double k0_square, double *values) {
  assert(c->is_real);
  memset(values, 0, (size_t)c->pattern.start[c->n] * sizeof *values);
  add_all(c, k, k0_square, &(target){.real = values});
}
