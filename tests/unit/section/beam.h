/* Fields of Gaussian beams on grids laid by hand. */
#ifndef PICKET_TESTS_SECTION_BEAM_H
#define PICKET_TESTS_SECTION_BEAM_H

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include <math.h>

#include "base/memory.h"
#include "section/unfold.h"

typedef struct beam {
  double diameter[2], centre[2];
  double index;       /* of its medium */
  pk_axis_name along; /* of its E */
  double half, step;  /* of the grid, about the origin; every second interval is 1.2 times wider */
} beam;

static inline picket_status beam_places(const beam *b, pk_section_whole *w) {
  int intervals = 2 * (int)(2 * b->half / (2.2 * b->step)); /* even */
  for (int a = 0; a < 2; a++) {
    w->lines[a] = intervals + 1;
    w->line[a] = PK_NEW(w->context, intervals + 1, double);
    w->middle[a] = PK_NEW(w->context, intervals, double);
    if (!w->line[a] || !w->middle[a]) {
      return PICKET_ERROR_MEMORY;
    }
    for (int i = 0; i <= intervals; i++) {
      w->line[a][i] = -b->half + b->step * (1.1 * i - (i % 2 ? 0.1 : 0));
    }
    for (int i = 0; i < intervals; i++) {
      w->middle[a][i] = 0.5 * (w->line[a][i] + w->line[a][i + 1]);
    }
  }
  return PICKET_OK;
}

static inline picket_status beam_field(const beam *b, pk_whole_name name, double scale,
                                       pk_section_whole *w) {
  const double *x = pk_whole_places(w, name, PK_U), *y = pk_whole_places(w, name, PK_V);
  int columns = pk_whole_count(w, name, PK_U), rows = pk_whole_count(w, name, PK_V);
  w->field[name] = PK_NEW(w->context, columns * rows, double complex);
  if (!w->field[name]) {
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < columns; i++) {
    for (int j = 0; j < rows; j++) {
      double u = 2 * (x[i] - b->centre[0]) / b->diameter[0];
      double v = 2 * (y[j] - b->centre[1]) / b->diameter[1];
      w->field[name][i * rows + j] = scale * exp(-u * u - v * v);
    }
  }
  return PICKET_OK;
}

static inline picket_status beam_take(picket_context *context, const beam *b, pk_section_whole *w) {
  *w = (pk_section_whole){.context = context};
  bool x = b->along == PK_U;
  const double scale[PK_WHOLE_NAMES] = {[PK_WHOLE_EX] = x,
                                        [PK_WHOLE_EY] = !x,
                                        [PK_WHOLE_HX] = x ? 0 : -b->index,
                                        [PK_WHOLE_HY] = x ? b->index : 0};
  picket_status status = beam_places(b, w);
  for (int c = 0; status == PICKET_OK && c < PK_WHOLE_NAMES; c++) {
    status = beam_field(b, (pk_whole_name)c, scale[c], w);
  }
  if (status != PICKET_OK) {
    pk_section_whole_clear(w);
  }
  return status;
}

#endif
