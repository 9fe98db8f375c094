/* The stop bands on an axis of wavelengths, a row for each polarization: a dark box from edge to
 * edge with bars at its ends, over the operating band; under it the clearance as an arrow, on it
 * the estimate of the centre as a diamond. All numbers are in the lines under the picture, for on
 * the axis there is no room that could be counted on.
 *
 * Rows are counted from the top, so row i lies at y = -i. Data, nm: edges_<i> has a line
 * "y order short bar long bar" for each stop band, clearance_<i> "y from to value bar",
 * estimate_<i> "y centre". */
#include <stdio.h>

#include "io/figure_script.h"

enum {
  PANEL_TOP = 92,
  ROW = 104,
  AXIS = 58, /* under the panel: numbers and label of the axis */
  LEFT = 84,
  RIGHT = 880,
  MOST_LINES = 12, /* of numbers under the picture */
  ORDER_ROOM = 56, /* dots that the label of an order takes */
  CLEARANCE_LETTERS = 36
};

static const double BOX = 0.22; /* half the height of a box, in rows */
static const double ORDER_AT = 0.33;
static const double ARROW_AT = 0.33;
static const double MARGIN = 0.12; /* of the range, left free at both ends */

typedef struct view {
  double from, to; /* nm */
} view;

static void widen(view *v, double nm) {
  if (isfinite(nm)) {
    v->from = fmin(v->from, nm);
    v->to = fmax(v->to, nm);
  }
}

/* False if there is nothing to show. */
static bool find_view(const picket_result *result, view *v) {
  *v = (view){INFINITY, -INFINITY};
  for (int i = 0; i < result->count; i++) {
    const picket_edges_answer *answer = &result->edges[i];
    for (int b = 0; b < answer->band_count; b++) {
      widen(v, PK_NM_OF_UM * answer->bands[b].short_um.value);
      widen(v, PK_NM_OF_UM * answer->bands[b].long_um.value);
    }
    widen(v, PK_NM_OF_UM * answer->estimate.centre_um);
    if (answer->operating.given) {
      widen(v, PK_NM_OF_UM * answer->operating.from_um);
      widen(v, PK_NM_OF_UM * answer->operating.to_um);
    }
  }
  if (!(v->from <= v->to)) {
    return false;
  }
  double margin = fmax(MARGIN * (v->to - v->from), 0.002 * v->to);
  v->from -= margin;
  v->to += margin;
  return true;
}

static const picket_stop_band *first_band(const picket_edges_answer *answer) {
  for (int b = 0; b < answer->band_count; b++) {
    if (answer->bands[b].order == 1) {
      return &answer->bands[b];
    }
  }
  return NULL;
}

static bool has_clearance(const picket_edges_answer *answer) {
  const picket_stop_band *first = first_band(answer);
  return first && answer->operating.given && isfinite(answer->operating.clearance_um.value) &&
         isfinite(first->long_um.value);
}

static void put_data(pk_figure *f, int i) {
  const picket_edges_answer *answer = &f->result->edges[i];
  pk_put(f, "$edges_%d << END\n# y order short_nm uncertainty long_nm uncertainty\n", i);
  for (int b = 0; b < answer->band_count; b++) {
    const picket_stop_band *band = &answer->bands[b];
    pk_put(f, "%d %d", -i, band->order);
    pk_put_bar(f, band->short_um, PK_NM_OF_UM);
    pk_put_bar(f, band->long_um, PK_NM_OF_UM);
    pk_put(f, "\n");
  }
  if (answer->band_count == 0) {
    pk_put(f, "NaN NaN NaN NaN NaN NaN\n");
  }
  pk_put(f, "END\n$clearance_%d << END\n# y from_nm to_nm clearance_nm uncertainty\n", i);
  if (has_clearance(answer)) {
    pk_put(f, "%d", -i);
    pk_put_value(f, PK_NM_OF_UM * first_band(answer)->long_um.value);
    pk_put_value(f, PK_NM_OF_UM * answer->operating.from_um);
    pk_put_bar(f, answer->operating.clearance_um, PK_NM_OF_UM);
    pk_put(f, "\n");
  } else {
    pk_put(f, "NaN NaN NaN NaN NaN\n");
  }
  pk_put(f, "END\n$estimate_%d << END\n# y centre_nm\n%d", i, -i);
  pk_put_value(f, PK_NM_OF_UM * answer->estimate.centre_um);
  pk_put(f, "\nEND\n");
}

/* Labels of orders where there is room since the last one, and the clearance. */
static void put_labels(pk_figure *f, int i, const view *v) {
  const picket_edges_answer *answer = &f->result->edges[i];
  double dots = (RIGHT - LEFT) / (v->to - v->from);
  double last = INFINITY; /* orders rise, wavelengths fall */
  for (int b = 0; b < answer->band_count; b++) {
    double from = PK_NM_OF_UM * answer->bands[b].short_um.value;
    double to = PK_NM_OF_UM * answer->bands[b].long_um.value;
    double centre = isfinite(from) && isfinite(to) ? (from + to) / 2 : isfinite(from) ? from : to;
    if (isfinite(centre) && (fabs(last - centre) * dots > ORDER_ROOM || !isfinite(last))) {
      pk_put(f, "set label 'order %d' at %.10g,%.10g center front font ',11'\n",
             answer->bands[b].order, centre, -i + ORDER_AT);
      last = centre;
    }
  }
  if (!has_clearance(answer)) {
    return;
  }
  double from = PK_NM_OF_UM * first_band(answer)->long_um.value;
  double to = PK_NM_OF_UM * answer->operating.from_um;
  double half = CLEARANCE_LETTERS / 2.0 * PK_LETTER / dots;
  double middle = fmin(fmax((from + to) / 2, v->from + half), v->to - half);
  pk_put(f, "set label 'clearance %s nm' at %.10g,%.10g center front font ',11'\n",
         pk_figure_quantity(answer->operating.clearance_um, PK_NM_OF_UM).text, middle,
         -i - ARROW_AT - 0.14);
}

static void say_band(pk_figure *f, int rows, const picket_edges_answer *answer,
                     const picket_stop_band *band) {
  char line[256];
  pk_words from = pk_figure_quantity(band->short_um, PK_NM_OF_UM);
  pk_words to = pk_figure_quantity(band->long_um, PK_NM_OF_UM);
  int length =
      snprintf(line, sizeof line, "%s, order %d: %s to %s nm",
               pk_word_polarization(answer->polarization), band->order, from.text, to.text);
  if (band->order == 1 && isfinite(answer->estimate.centre_um)) {
    snprintf(line + length, sizeof line - (size_t)length, "; estimate %.6g nm, off by %s nm",
             PK_NM_OF_UM * answer->estimate.centre_um,
             pk_figure_quantity(answer->estimate.error_um, PK_NM_OF_UM).text);
  }
  pk_figure_say(f, rows, line);
}

static int count_bands(const picket_result *result) {
  int count = 0;
  for (int i = 0; i < result->count; i++) {
    count += result->edges[i].band_count;
  }
  return count;
}

static void say_numbers(pk_figure *f, int rows) {
  int left = rows;
  bool all = count_bands(f->result) <= rows;
  for (int i = 0; i < f->result->count; i++) {
    const picket_edges_answer *answer = &f->result->edges[i];
    for (int b = 0; b < answer->band_count && left > (all ? 0 : 1); b++, left--) {
      say_band(f, rows, answer, &answer->bands[b]);
    }
  }
  if (!all) {
    pk_figure_say(f, rows, "further orders are in the table (--csv)");
  }
}

static void put_operating(pk_figure *f) {
  double from = 0, to = 0;
  if (!pk_figure_light(f->problem, &from, &to)) {
    return;
  }
  if (from < to) {
    pk_put(f,
           "set object rectangle from %.10g,graph 0 to %.10g,graph 1 behind fillcolor rgb '" PK_SAND
           "' fillstyle solid 1 border lc rgb '" PK_FAINT "'\n",
           from, to);
  } else {
    pk_put(f,
           "set arrow from %.10g,graph 0 to %.10g,graph 1 nohead back lw 4 lc rgb '" PK_SAND "'\n",
           from, from);
  }
}

/* The key names what there is. */
static void put_key(pk_figure *f) {
  bool band = false, estimate = false;
  for (int i = 0; i < f->result->count; i++) {
    band = band || f->result->edges[i].band_count > 0;
    estimate = estimate || isfinite(f->result->edges[i].estimate.centre_um);
  }
  double from = 0, to = 0;
  pk_put(f, "plot NaN");
  if (band) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_SLATE "' title 'stop band'");
  }
  if (pk_figure_light(f->problem, &from, &to)) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_SAND "' title '%s'",
           from < to ? "operating band" : "operating wavelength");
  }
  if (estimate) {
    pk_put(f, ", keyentry with points pt 13 ps 1.6 lc rgb '" PK_RUST "' title 'estimated centre'");
  }
}

static void put_plot(pk_figure *f) {
  put_key(f);
  for (int i = 0; i < f->result->count; i++) {
    pk_put(f,
           ", \\\n  $edges_%d using (($3+$5)/2):1:3:5:($1-%g):($1+%g) with boxxyerror fc rgb "
           "'" PK_SLATE "'",
           i, BOX, BOX);
    for (int edge = 3; edge <= 5; edge += 2) { /* columns of the two edges */
      pk_put(f,
             ", \\\n  $edges_%d using %d:1:(0):(%g) with vectors nohead lw 2 lc rgb '" PK_INK "'",
             i, edge, BOX);
      pk_put(f,
             ", \\\n  $edges_%d using %d:1:(0):(-%g) with vectors nohead lw 2 lc rgb '" PK_INK "'",
             i, edge, BOX);
      pk_put(f, ", \\\n  $edges_%d using ($%d-$%d):1:(2*$%d):(0) " PK_BARS " lc rgb '#ffffff'", i,
             edge, edge + 1, edge + 1);
    }
    pk_put(f,
           ", \\\n  $clearance_%d using 2:($1-%g):($3-$2):(0) with vectors heads size screen "
           "0.008,20 filled lw 1.4 lc rgb '" PK_INK "'",
           i, ARROW_AT);
    pk_put(f, ", \\\n  $estimate_%d using 2:1 with points pt 13 ps 2.2 lc rgb '#ffffff'", i);
    pk_put(f, ", \\\n  $estimate_%d using 2:1 with points pt 13 ps 1.5 lc rgb '" PK_RUST "'", i);
  }
  pk_put(f, "\n");
}

picket_status pk_figure_edges(pk_figure *f) {
  const picket_result *result = f->result;
  view v;
  if (!find_view(result, &v)) {
    return pk_fail(result->context, PICKET_ERROR_UNSUPPORTED,
                   "figure: there is neither a stop band nor an operating band to draw");
  }
  int rows = count_bands(result);
  rows = rows > MOST_LINES ? MOST_LINES : rows;
  int bottom = PANEL_TOP + ROW * result->count;
  pk_figure_open(f, "Stop bands and the operating band", bottom + AXIS + 18 * rows + 14);
  pk_figure_place(f, LEFT, RIGHT, PANEL_TOP, bottom);
  for (int i = 0; i < result->count; i++) {
    put_data(f, i);
  }
  pk_put(f, "set xlabel 'vacuum wavelength (nm)' offset 0,0.2\nset xrange [%.10g:%.10g]\n", v.from,
         v.to);
  pk_put(f, "set yrange [%g:0.55]\nset ytics scale 0 (", 0.4 - result->count);
  for (int i = 0; i < result->count; i++) {
    pk_put(f, "%s'%s' %d", i ? ", " : "", pk_word_polarization(result->edges[i].polarization), -i);
  }
  pk_put(f, ")\nset key at screen %.4f,%.4f right center horizontal samplen 2\n",
         (double)RIGHT / PK_FIGURE_WIDTH, 1 - 74.0 / f->height);
  put_operating(f);
  for (int i = 0; i < result->count; i++) {
    put_labels(f, i, &v);
  }
  say_numbers(f, rows);
  put_plot(f);
  return PICKET_OK;
}
