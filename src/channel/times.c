/* Products with the parts of T, without the matrix: Cᵀ W C and M, harmonic by harmonic and site by
 * site. */
#include <assert.h>

#include "channel/channel_private.h"

static double complex coefficient(const pk_curl *curl, pk_curl_part part, int term,
                                  double complex beta) {
  return part == PK_CURL_WHOLE ? curl->plain[term] + curl->turn[term] * beta : curl->turn[term];
}

static double complex gather(const pk_channel *c, const pk_curl *curl, pk_curl_part part,
                             double complex beta, int h, const double complex *e) {
  double complex sum = 0;
  for (int t = 0; t < curl->count; t++) {
    sum += coefficient(curl, part, t, beta) * e[(int64_t)curl->site[t] * c->count + h];
  }
  return sum;
}

void pk_channel_curl(const pk_channel *c, double complex k, pk_curl_part part,
                     const double complex *e, double complex *h) {
  for (int r = 0; r < c->curl_count; r++) {
    for (int m = 0; m < c->count; m++) {
      h[(int64_t)r * c->count + m] = gather(c, &c->curl[r], part, pk_channel_beta(c, k, m), m, e);
    }
  }
}

void pk_channel_curl_times(const pk_channel *c, double complex k, pk_curl_part left,
                           pk_curl_part right, double complex factor, const double complex *x,
                           double complex *y) {
  for (int r = 0; r < c->curl_count; r++) {
    const pk_curl *curl = &c->curl[r];
    for (int m = 0; m < c->count; m++) {
      double complex beta = pk_channel_beta(c, k, m);
      double complex flow = factor * curl->weight * gather(c, curl, right, beta, m, x);
      for (int t = 0; t < curl->count; t++) {
        y[(int64_t)curl->site[t] * c->count + m] += coefficient(curl, left, t, beta) * flow;
      }
    }
  }
}

/* y += factor × block x at one pair of sites. */
static void block_times(const pk_channel *c, const pk_block *block, bool transposed,
                        double complex factor, const double complex *x, double complex *y) {
  int count = c->count;
  if (!block->varied) {
    for (int h = 0; h < count; h++) {
      y[h] += factor * block->scalar * x[h];
    }
    return;
  }
  for (int h = 0; h < count; h++) {
    for (int r = 0; r < count; r++) {
      y[r] += factor * block->matrix[transposed ? r * count + h : h * count + r] * x[h];
    }
  }
}

static void node_times(const pk_channel *c, const pk_node *node, const pk_block *block,
                       bool transposed, double complex factor, const double complex *x,
                       double complex *y) {
  for (int a = 0; a < node->x_count; a++) {
    for (int b = 0; b < node->y_count; b++) {
      double complex weight = factor * node->x_length[a] * node->y_length[b];
      int64_t u = (int64_t)node->x_site[a] * c->count, v = (int64_t)node->y_site[b] * c->count;
      block_times(c, block, transposed, weight, x + v, y + u);
      block_times(c, block, transposed, weight, x + u, y + v);
    }
  }
}

void pk_channel_mass_times(const pk_channel *c, const pk_block *block, bool transposed,
                           double complex factor, const double complex *x, double complex *y) {
  for (int s = 0; s < c->site_count; s++) {
    int64_t at = (int64_t)s * c->count;
    block_times(c, &block[c->block_of[s]], transposed, factor * c->volume[s], x + at, y + at);
  }
  for (int i = 0; i < c->node_count; i++) {
    node_times(c, &c->node[i], &block[c->node[i].block], transposed, factor, x, y);
  }
}

double complex pk_channel_curl_form(const pk_channel *c, double complex k, pk_curl_part left,
                                    pk_curl_part right, const double complex *l,
                                    const double complex *r) {
  double complex sum = 0;
  for (int i = 0; i < c->curl_count; i++) {
    const pk_curl *curl = &c->curl[i];
    double complex part = 0;
    for (int m = 0; m < c->count; m++) {
      double complex beta = pk_channel_beta(c, k, m);
      part += gather(c, curl, left, beta, m, l) * gather(c, curl, right, beta, m, r);
    }
    sum += curl->weight * part;
  }
  return sum;
}

/* lᵀ block r at one pair of sites. */
static double complex block_form(const pk_channel *c, const pk_block *block,
                                 const double complex *l, const double complex *r) {
  double complex sum = 0;
  for (int h = 0; h < c->count; h++) {
    if (!block->varied) {
      sum += block->scalar * l[h] * r[h];
      continue;
    }
    double complex part = 0;
    for (int m = 0; m < c->count; m++) {
      part += l[m] * block->matrix[h * c->count + m];
    }
    sum += part * r[h];
  }
  return sum;
}

static double complex node_form(const pk_channel *c, const pk_node *node, const pk_block *block,
                                const double complex *l, const double complex *r) {
  double complex sum = 0;
  for (int a = 0; a < node->x_count; a++) {
    for (int b = 0; b < node->y_count; b++) {
      int64_t u = (int64_t)node->x_site[a] * c->count, v = (int64_t)node->y_site[b] * c->count;
      sum += node->x_length[a] * node->y_length[b] *
             (block_form(c, block, l + u, r + v) + block_form(c, block, l + v, r + u));
    }
  }
  return sum;
}

double complex pk_channel_block_form(const pk_channel *c, const pk_block *block,
                                     const double complex *l, const double complex *r) {
  double complex sum = 0;
  for (int s = 0; s < c->site_count; s++) {
    int64_t at = (int64_t)s * c->count;
    sum += c->volume[s] * block_form(c, &block[c->block_of[s]], l + at, r + at);
  }
  for (int i = 0; i < c->node_count; i++) {
    sum += node_form(c, &c->node[i], &block[c->node[i].block], l, r);
  }
  return sum;
}
