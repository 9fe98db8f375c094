/* See search.h. */
#include "bloch/search.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "bloch/columns.h"

enum { MOST_WAVES = 80 }; /* looked at closely; those that change least come first */

/* Waves of the layers and of the open sides have less than this of their energy near the structure
 * (measured 0.00 to 0.1; modes 0.4 to 1.0). */
static const double LEAST_INSIDE = 0.2;

/* Sensitivity to the layers above which a wave is one of theirs: layer waves measured above 2e-2,
 * bound modes that reach into the layers up to 1e-2; see PK_LAYER_SHARE_SURE. */
static const double MOST_LAYER_SHARE = 2e-2;

/* Im k/k0 above which the sign of the decay tells forward from backward; below, the layers of a
 * first look may blur it, and the power flow tells. */
static const double SURE_DECAY = 1e-3;

/* A wave whose phase hardly advances is below cut-off, not a mode. */
static const double LEAST_INDEX = 0.05;

static double least_inside(const pk_character_request *request) {
  return request->least_inside > 0 ? request->least_inside : LEAST_INSIDE;
}

static bool column_is_inside(const pk_operator *op, const pk_character_request *request,
                             const double complex *column) {
  double half = 0.5 * (request->structure[1] - request->structure[0]);
  double all = 0, inside = 0;
  for (int iv = 0; iv < pk_operator_lines(op, PK_V); iv++) {
    double x, width;
    pk_operator_line(op, PK_V, iv, &x, &width);
    double size = width * creal(column[iv] * conj(column[iv]));
    all += size;
    if (x > request->structure[0] - half && x < request->structure[1] + half) {
      inside += size;
    }
  }
  /* One column sees only a cut through the mode: ask half of what the whole must show. */
  return inside > 0.5 * least_inside(request) * all;
}

static bool is_mode(const pk_character_request *request, const pk_character *c) {
  double decay = cimag(c->k) / request->k0;
  bool forward = fabs(decay) > SURE_DECAY ? decay > 0 : c->power.forward > 0;
  bool advances = fabs(creal(c->k)) > LEAST_INDEX * request->k0;
  return forward && advances && c->inside > least_inside(request) &&
         c->layer_share < MOST_LAYER_SHARE;
}

static void log_wave(picket_context *context, const pk_character_request *request,
                     const pk_character *c, bool kept) {
  pk_log(context, PICKET_LOG_DETAIL,
         "wave n = %.6f%+.2ei: harmonic %d, nodes %d, inside %.3f, layers %.1e, %s",
         creal(c->k) / request->k0, cimag(c->k) / request->k0, c->harmonic, c->nodes, c->inside,
         c->layer_share, kept ? "kept" : "left out");
}

/* By nodes, then by falling index. */
static bool stands_before(const pk_found_wave *a, const pk_found_wave *b) {
  if (a->character.nodes != b->character.nodes) {
    return a->character.nodes < b->character.nodes;
  }
  return creal(a->character.k) > creal(b->character.k);
}

static void insert(pk_found_wave *list, int *count, int capacity, picket_context *context,
                   const pk_found_wave *wave) {
  int at = *count;
  if (at == capacity) {
    if (!stands_before(wave, &list[capacity - 1])) {
      pk_wave dropped = wave->wave;
      pk_wave_clear(context, &dropped);
      return;
    }
    pk_wave_clear(context, &list[--at].wave);
  } else {
    (*count)++;
  }
  while (at > 0 && stands_before(wave, &list[at - 1])) {
    list[at] = list[at - 1];
    at--;
  }
  list[at] = *wave;
}

typedef struct hunt {
  picket_context *context;
  pk_solver *solver;
  const pk_character_request *request;
  int capacity;
  pk_found_wave *found;
  int count;
} hunt;

static picket_status look_at(hunt *h, const pk_columns *columns, const pk_column_modes *modes,
                             int i) {
  const pk_operator *op = pk_solver_operator(h->solver);
  if (!column_is_inside(op, h->request, modes->mode[i].right)) {
    return PICKET_OK;
  }
  pk_found_wave wave = {0};
  picket_status status = pk_columns_waves(columns, h->solver, modes, i, 1, &wave.wave);
  if (status == PICKET_ERROR_NUMERIC) {
    pk_message_clear(h->context); /* not verified, so not reported */
    return PICKET_OK;
  }
  if (status == PICKET_OK) {
    status = pk_character_of(h->context, op, h->request, &wave.wave, &wave.character);
  }
  if (status != PICKET_OK) {
    pk_wave_clear(h->context, &wave.wave);
    return status;
  }
  bool kept = is_mode(h->request, &wave.character);
  log_wave(h->context, h->request, &wave.character, kept);
  if (kept) {
    insert(h->found, &h->count, h->capacity, h->context, &wave);
  } else {
    pk_wave_clear(h->context, &wave.wave);
  }
  return PICKET_OK;
}

picket_status pk_wave_search(pk_solver *solver, const pk_character_request *request, int capacity,
                             pk_found_wave *found, int *count) {
  hunt h = {pk_solver_context(solver), solver, request, capacity, found, 0};
  pk_columns *columns = NULL;
  pk_column_modes modes = {0};
  picket_status status = pk_columns_reduce(h.context, pk_solver_operator(solver), request->phase,
                                           request->k0, &columns);
  if (status == PICKET_OK) {
    status = pk_columns_modes(columns, PK_COLUMNS_REACH, &modes);
  }
  int looked = modes.count < MOST_WAVES ? modes.count : MOST_WAVES;
  for (int i = 0; status == PICKET_OK && i < looked; i++) {
    status = look_at(&h, columns, &modes, i);
  }
  pk_column_modes_clear(&modes);
  pk_columns_free(columns);
  if (status != PICKET_OK) {
    pk_found_waves_clear(h.context, h.count, found);
    return status;
  }
  *count = h.count;
  return PICKET_OK;
}

void pk_found_waves_clear(picket_context *context, int count, pk_found_wave *found) {
  for (int i = 0; i < count; i++) {
    pk_wave_clear(context, &found[i].wave);
  }
}
