/* Index and group index over the wavelength, one panel over the other, for Bloch modes, modes of a
 * section and modes of films alike: a curve for each mode, with its bars. For Bloch modes there is
 * a column for each polarization, with the regime of the lowest mode shaded and the estimate
 * dashed. A section at a single wavelength is shown as its map, with the modes as levels beside it.
 *
 * Data, nm: <kind>_<answer>_<order> has a line "wavelength index bar group-index bar" for each
 * wavelength at which there is a mode of that order; estimate_<answer> "wavelength index". */
#include <stdio.h>

#include "io/figure_script.h"

enum {
  TOP = 116,
  PANEL = 230,
  BETWEEN = 22, /* one panel and the next below it */
  AXIS = 58,
  LEFT = 92,
  RIGHT = 868,
  APART = 92,
  MOST_ORDERS = PK_CURVES,
  KEY_TOP = 86,
  LEVEL_LEFT = 640, /* the panel of levels */
  LEVEL_RIGHT = 700,
  LEVEL_HEIGHT = 400,
  LEVEL_STEP = 17, /* between two labels of levels */
  MOST_LEVELS = 20
};

static const double ALONE = 0.01; /* of the wavelength, shown on both sides of a single one */

/* What the three kinds have in common. */
typedef struct reading {
  double wavelength_um;
  int order;
  picket_quantity index, group_index;
} reading;

/* Reading m of point p of answer i; false past the last one. */
typedef bool (*reader)(const picket_result *result, int i, int p, int m, reading *out);

static bool read_index(const picket_result *result, int i, int p, int m, reading *out) {
  const picket_index_point *point = &result->index[i].points[p];
  if (m < point->mode_count) {
    const picket_bloch_mode *mode = &point->modes[m];
    *out = (reading){point->wavelength_um, mode->order, mode->bloch_index, mode->group_index};
  }
  return m < point->mode_count;
}

static bool read_modes(const picket_result *result, int i, int p, int m, reading *out) {
  const picket_modes_point *point = &result->modes[i].points[p];
  if (m < point->mode_count) {
    const picket_section_mode *mode = &point->modes[m];
    *out = (reading){point->wavelength_um, mode->order, mode->index, mode->group_index};
  }
  return m < point->mode_count;
}

static bool read_slab(const picket_result *result, int i, int p, int m, reading *out) {
  const picket_slab_point *point = &result->slab[i].points[p];
  if (m < point->mode_count) {
    const picket_slab_mode *mode = &point->modes[m];
    *out = (reading){point->wavelength_um, mode->order, mode->index, mode->group_index};
  }
  return m < point->mode_count;
}

typedef struct view {
  const char *kind;
  reader read;
  int (*points)(const picket_result *result, int i);
  const char *(*word)(const picket_result *result, int i); /* over a column; null: none */
  double from_nm, to_nm;
  bool has[MOST_ORDERS]; /* orders that any point has, of the answer at hand */
} view;

static int index_points(const picket_result *result, int i) {
  return result->index[i].point_count;
}
static int modes_points(const picket_result *result, int i) {
  return result->modes[i].point_count;
}
static int slab_points(const picket_result *result, int i) {
  return result->slab[i].point_count;
}
static const char *index_word(const picket_result *result, int i) {
  return pk_word_polarization(result->index[i].polarization);
}
static const char *slab_word(const picket_result *result, int i) {
  return pk_word_slab_polarization(result->slab[i].polarization);
}

/* Range of all wavelengths, and which orders answer i has; false if it has none. */
static bool look(const picket_result *result, int i, view *v) {
  reading r;
  bool any = false;
  for (int o = 0; o < MOST_ORDERS; o++) {
    v->has[o] = false;
  }
  for (int p = 0; p < v->points(result, i); p++) {
    for (int m = 0; v->read(result, i, p, m, &r); m++) {
      if (r.order >= 0 && r.order < MOST_ORDERS && isfinite(r.index.value)) {
        v->has[r.order] = any = true;
        v->from_nm = fmin(v->from_nm, PK_NM_OF_UM * r.wavelength_um);
        v->to_nm = fmax(v->to_nm, PK_NM_OF_UM * r.wavelength_um);
      }
    }
  }
  return any;
}

/* False if no answer has a mode. */
static bool look_at_all(const picket_result *result, view *v) {
  bool any = false;
  v->from_nm = INFINITY;
  v->to_nm = -INFINITY;
  for (int i = 0; i < result->count; i++) {
    any = look(result, i, v) || any;
  }
  if (any && v->from_nm == v->to_nm) {
    v->from_nm *= 1 - ALONE;
    v->to_nm *= 1 + ALONE;
  }
  return any;
}

static void put_curve(pk_figure *f, int i, int order, const view *v) {
  reading r;
  pk_put(f, "$%s_%d_%d << END\n# wavelength_nm index uncertainty group_index uncertainty\n",
         v->kind, i, order);
  for (int p = 0; p < v->points(f->result, i); p++) {
    for (int m = 0; v->read(f->result, i, p, m, &r); m++) {
      if (r.order == order) {
        pk_put_value(f, PK_NM_OF_UM * r.wavelength_um);
        pk_put_bar(f, r.index, 1);
        pk_put_bar(f, r.group_index, 1);
        pk_put(f, "\n");
      }
    }
  }
  pk_put(f, "END\n");
}

static bool put_estimate(pk_figure *f, int i) {
  bool any = false;
  if (f->result->kind != PK_RESULT_INDEX) {
    return false;
  }
  const picket_index_answer *answer = &f->result->index[i];
  pk_put(f, "$estimate_%d << END\n# wavelength_nm index\n", i);
  for (int p = 0; p < answer->point_count; p++) {
    any = any || isfinite(answer->points[p].estimate);
    pk_put_value(f, PK_NM_OF_UM * answer->points[p].wavelength_um);
    pk_put_value(f, answer->points[p].estimate);
    pk_put(f, "\n");
  }
  pk_put(f, "END\n");
  return any;
}

static picket_regime regime_at(const picket_index_answer *answer, int p) {
  const picket_index_point *point = &answer->points[p];
  return point->mode_count > 0 ? point->modes[0].regime : PICKET_REGIME_UNKNOWN;
}

/* Stop bands and radiating stretches, from half way to the neighbours; which of them there are. */
static void put_regimes(pk_figure *f, int i, const view *v, bool seen[2]) {
  const picket_index_answer *answer = &f->result->index[i];
  int first = 0;
  for (int p = 1; p <= answer->point_count; p++) {
    picket_regime regime = regime_at(answer, first);
    if (p < answer->point_count && regime_at(answer, p) == regime) {
      continue;
    }
    const picket_index_point *all = answer->points;
    double from = first == 0
                      ? v->from_nm
                      : PK_NM_OF_UM * (all[first - 1].wavelength_um + all[first].wavelength_um) / 2;
    double to = p == answer->point_count
                    ? v->to_nm
                    : PK_NM_OF_UM * (all[p - 1].wavelength_um + all[p].wavelength_um) / 2;
    bool stop = regime == PICKET_REGIME_STOP_BAND, radiating = regime == PICKET_REGIME_RADIATING;
    if (stop || radiating) {
      pk_put(f, "set object rectangle from %.10g,graph 0 to %.10g,graph 1 behind fc rgb '%s' %s\n",
             from, to, stop ? PK_SLATE : PK_MIST,
             stop ? "fs transparent pattern 4 noborder" : "fs solid 1 noborder");
      seen[radiating] = true;
    }
    first = p;
  }
}

/* Whether any group index is known; if not, gnuplot needs a range. */
static bool has_group_index(const picket_result *result, int i, const view *v) {
  reading r;
  bool any = false;
  for (int p = 0; p < v->points(result, i); p++) {
    for (int m = 0; v->read(result, i, p, m, &r); m++) {
      any = any || (r.order >= 0 && r.order < MOST_ORDERS && isfinite(r.group_index.value));
    }
  }
  return any;
}

/* One panel; the key with the upper one. `column` of the data: 2 for the index, 4 for the group
 * index. */
static void put_panel(pk_figure *f, int i, const view *v, int column, bool estimate,
                      const bool seen[2]) {
  bool upper = column == 2, any = false;
  pk_put(f, "plot");
  for (int order = 0; order < MOST_ORDERS; order++) {
    if (v->has[order]) {
      pk_put(f, "%s $%s_%d_%d using 1:%d with linespoints %s", any ? ", \\\n " : "", v->kind, i,
             order, column, pk_figure_look(order));
      pk_put(f, upper ? " title 'order %d'" : " notitle", order);
      pk_put(f, ", $%s_%d_%d using 1:($%d-$%d):(0):(2*$%d) " PK_BARS " lc rgb '" PK_INK "'",
             v->kind, i, order, column, column + 1, column + 1);
      any = true;
    }
  }
  if (upper && estimate) {
    pk_put(f,
           ", \\\n  $estimate_%d using 1:2 with lines lc rgb '" PK_RUST
           "' lw 1.8 dt (5,4) title 'estimate'",
           i);
  }
  if (upper && seen[0]) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_SLATE
              "' fs transparent pattern 4 title 'stop band'");
  }
  if (upper && seen[1]) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_MIST "' fs solid 1 title 'radiating'");
  }
  pk_put(f, "\n");
}

static void put_column(pk_figure *f, int i, view *v, int left, int right) {
  bool seen[2] = {false, false};
  if (!look(f->result, i, v)) {
    return;
  }
  for (int order = 0; order < MOST_ORDERS; order++) {
    if (v->has[order]) {
      put_curve(f, i, order, v);
    }
  }
  bool estimate = put_estimate(f, i);
  if (f->result->kind == PK_RESULT_INDEX) {
    put_regimes(f, i, v, seen);
  }
  pk_figure_tics(f, "x", v->from_nm, v->to_nm, right - left);
  pk_figure_place(f, left, right, TOP, TOP + PANEL);
  pk_put(f, "set key at screen %.4f,%.4f right center horizontal samplen 2.4\n",
         (double)right / PK_FIGURE_WIDTH, 1 - (double)KEY_TOP / f->height);
  pk_put(f, "set format x ''\nset xlabel\nset ylabel '%s' offset 1,0\n",
         f->result->kind == PK_RESULT_INDEX ? "Bloch index (1)" : "index (1)");
  if (v->word) {
    pk_put(f, "set label 10 '%s' at graph 0,1 offset 0,1.5 left\n", v->word(f->result, i));
  }
  pk_figure_range(f, true);
  put_panel(f, i, v, 2, estimate, seen);
  pk_put(f, "unset label 1\nunset label 2\nunset label 10\nset key off\n");
  pk_figure_place(f, left, right, TOP + PANEL + BETWEEN, TOP + 2 * PANEL + BETWEEN);
  pk_put(f,
         "set format x '%%g'\nset xlabel 'vacuum wavelength (nm)' offset 0,0.2\n"
         "set ylabel 'group index (1)' offset 1,0\n");
  pk_figure_range(f, has_group_index(f->result, i, v));
  put_panel(f, i, v, 4, false, seen);
  pk_put(f, "unset object\n");
}

static picket_status draw(pk_figure *f, view *v, const char *shows) {
  int columns = f->result->count;
  if (!look_at_all(f->result, v)) {
    return pk_fail(f->result->context, PICKET_ERROR_UNSUPPORTED,
                   "figure: no wavelength has a mode that could be drawn");
  }
  double from = v->from_nm, to = v->to_nm;
  pk_figure_open(f, shows, TOP + 2 * PANEL + BETWEEN + AXIS);
  pk_put(f,
         "set multiplot\nset xrange [%.10g:%.10g]\n"
         "set offsets 0,0,graph 0.08,graph 0.08\n",
         from, to);
  int width = (RIGHT - LEFT - APART * (columns - 1)) / columns;
  for (int i = 0; i < columns; i++) {
    int left = LEFT + i * (width + APART);
    put_column(f, i, v, left, left + width);
    v->from_nm = from;
    v->to_nm = to;
  }
  pk_put(f, "unset multiplot\n");
  return PICKET_OK;
}

picket_status pk_figure_index(pk_figure *f) {
  view v = {.kind = "index", .read = read_index, .points = index_points, .word = index_word};
  return draw(f, &v, "Bloch index and group index");
}

picket_status pk_figure_slab(pk_figure *f) {
  view v = {.kind = "slab", .read = read_slab, .points = slab_points, .word = slab_word};
  return draw(f, &v, "Index and group index of the films");
}

/* --- A section at one wavelength ----------------------------------------------------------------
 */

/* Levels from the highest index downwards, each with a label that keeps its distance from the one
 * above it. */
static void put_levels(pk_figure *f, const picket_modes_point *point, int count, double low,
                       double high) {
  double dots = LEVEL_HEIGHT / (high - low), last = -INFINITY;
  for (int m = 0; m < count; m++) {
    const picket_section_mode *mode = &point->modes[m];
    double at = (high - mode->index.value) * dots; /* from the top of the panel */
    double label = fmax(at, last + LEVEL_STEP);
    last = label;
    pk_put(f,
           "set arrow from graph 1,first %.10g to screen %.4f,%.4f nohead lw 0.6 lc rgb '" PK_FAINT
           "'\n",
           mode->index.value, (LEVEL_RIGHT + 14.0) / PK_FIGURE_WIDTH,
           1 - (TOP + label) / f->height);
    pk_put(f, "set label '%d: %s' at screen %.4f,%.4f left font ',11'\n", mode->order,
           pk_figure_quantity(mode->index, 1).text, (LEVEL_RIGHT + 18.0) / PK_FIGURE_WIDTH,
           1 - (TOP + label) / f->height);
  }
}

static void put_level_plot(pk_figure *f, const picket_modes_point *point, int count) {
  double low = INFINITY, high = -INFINITY;
  pk_put(f, "$levels << END\n# order index uncertainty\n");
  for (int m = 0; m < count; m++) {
    pk_put(f, "%d", point->modes[m].order);
    pk_put_bar(f, point->modes[m].index, 1);
    pk_put(f, "\n");
    low = fmin(low, point->modes[m].index.value);
    high = fmax(high, point->modes[m].index.value);
  }
  double room = high > low ? 0.12 * (high - low) : 0.02 * high;
  low -= room;
  high += room;
  pk_put(f,
         "END\nunset object\nunset label 1\nunset label 2\nset border 3\nset xrange [0:1]\n"
         "set yrange [%.10g:%.10g]\nunset xtics\nset xlabel\nset ylabel 'index (1)' offset 1,0\n",
         low, high);
  for (int l = 20; l < 40; l++) {
    pk_put(f, "unset label %d\n", l); /* of the map's key */
  }
  pk_figure_tics(f, "y", low, high, LEVEL_HEIGHT);
  pk_figure_place(f, LEVEL_LEFT, LEVEL_RIGHT, TOP, TOP + LEVEL_HEIGHT);
  put_levels(f, point, count, low, high);
  pk_put(f,
         "plot $levels using (0):2:(1):(0) with vectors nohead lw 2 lc rgb '#16325c', \\\n"
         "  $levels using (0.5):($2-$3):(0):(2*$3) " PK_BARS " lc rgb '" PK_INK "'\n");
}

static picket_status draw_levels(pk_figure *f, const picket_modes_point *point) {
  int count = point->mode_count < MOST_LEVELS ? point->mode_count : MOST_LEVELS;
  char shows[PK_LABEL_MOST];
  snprintf(shows, sizeof shows, "The section and the indices of its modes at %.8g nm",
           PK_NM_OF_UM * point->wavelength_um);
  pk_figure_open(f, shows, TOP + LEVEL_HEIGHT + AXIS);
  pk_map map = pk_map_of_section(&f->problem->section, LEFT, TOP, LEVEL_LEFT - 330, LEVEL_HEIGHT);
  pk_put(f, "set multiplot\n");
  picket_status status = pk_map_put(f, &map, true);
  put_level_plot(f, point, count);
  pk_put(f, "unset multiplot\n");
  return status;
}

picket_status pk_figure_modes(pk_figure *f) {
  const picket_modes_answer *answer = &f->result->modes[0];
  if (answer->point_count == 1 && answer->points[0].mode_count > 0) {
    return draw_levels(f, &answer->points[0]);
  }
  view v = {.kind = "modes", .read = read_modes, .points = modes_points};
  return draw(f, &v, "Index and group index of the modes, by falling index");
}
