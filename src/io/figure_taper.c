/* A row tooth by tooth: Bloch index, size of the mode, and the share that the next tooth takes
 * over, one panel under the other, a column for each polarization. Teeth that meet a stop band are
 * hatched, those that radiate or have no numbers are shaded; a mark under a tooth stands for any
 * other warning.
 *
 * Data: taper_<i> has a line "tooth index bar size_um bar share bar warnings" for each tooth. */
#include "io/figure_script.h"

enum {
  TOP = 116,
  PANEL = 150,
  BETWEEN = 20,
  AXIS = 58,
  LEFT = 92,
  RIGHT = 868,
  APART = 92,
  PANELS = 3,
  KEY_TOP = 86
};

static void put_data(pk_figure *f, int i) {
  const picket_taper_answer *answer = &f->result->taper[i];
  pk_put(f,
         "$taper_%d << END\n# tooth index uncertainty size_um uncertainty share uncertainty "
         "warnings\n",
         i);
  for (int t = 0; t < answer->tooth_count; t++) {
    const picket_taper_tooth *tooth = &answer->teeth[t];
    pk_put(f, "%d", tooth->number);
    pk_put_bar(f, tooth->bloch_index, 1);
    pk_put_bar(f, tooth->mode_size_um, 1);
    pk_put_bar(f, tooth->overlap_next, 1);
    pk_put(f, " %d\n", tooth->warnings);
  }
  pk_put(f, "END\n");
}

static const int STOP = PICKET_TAPER_STOP_BAND | PICKET_TAPER_PAST_BAND;
static const int OTHER = PICKET_TAPER_SMALL_FEATURE | PICKET_TAPER_ABRUPT;

/* Shades of teeth, and marks; which there are: stop band, radiating or failed, other. */
static void put_warnings(pk_figure *f, int i, bool seen[3]) {
  const picket_taper_answer *answer = &f->result->taper[i];
  for (int t = 0; t < answer->tooth_count; t++) {
    const picket_taper_tooth *tooth = &answer->teeth[t];
    bool stop = tooth->warnings & STOP;
    bool lost = tooth->failed || (tooth->warnings & PICKET_TAPER_RADIATING);
    if (stop || lost) {
      pk_put(f, "set object rectangle from %g,graph 0 to %g,graph 1 behind fc rgb '%s' %s\n",
             tooth->number - 0.5, tooth->number + 0.5, stop ? PK_SLATE : PK_MIST,
             stop ? "fs transparent pattern 4 noborder" : "fs solid 1 noborder");
    }
    if (tooth->warnings & OTHER) {
      pk_put(f, "set label '' at %d,graph 0.06 point pt 9 ps 0.8 lc rgb '" PK_RUST "' front\n",
             tooth->number);
    }
    seen[0] = seen[0] || stop;
    seen[1] = seen[1] || lost;
    seen[2] = seen[2] || (tooth->warnings & OTHER);
  }
}

static void put_key(pk_figure *f, const bool seen[3]) {
  if (seen[0]) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_SLATE
              "' fs transparent pattern 4 title 'meets a stop band'");
  }
  if (seen[1]) {
    pk_put(f, ", keyentry with boxes fc rgb '" PK_MIST "' fs solid 1 title 'radiates or failed'");
  }
  if (seen[2]) {
    pk_put(f, ", keyentry with points pt 9 ps 0.8 lc rgb '" PK_RUST
              "' title 'abrupt or small feature'");
  }
}

static bool has_values(const picket_taper_answer *answer, int panel) {
  bool any = false;
  for (int t = 0; t < answer->tooth_count; t++) {
    const picket_taper_tooth *tooth = &answer->teeth[t];
    const picket_quantity all[PANELS] = {tooth->bloch_index, tooth->mode_size_um,
                                         tooth->overlap_next};
    any = any || isfinite(all[panel].value);
  }
  return any;
}

static void put_column(pk_figure *f, int i, int left, int right) {
  static const char *const label[PANELS] = {"Bloch index (1)", "mode size, 4σ (µm)",
                                            "share to the next (1)"};
  const picket_taper_answer *answer = &f->result->taper[i];
  bool seen[3] = {false, false, false};
  put_data(f, i);
  pk_put(f, "set xrange [0.5:%g]\n", answer->tooth_count + 0.5);
  pk_figure_tics(f, "x", 0.5, answer->tooth_count + 0.5, right - left);
  pk_put(f, answer->tooth_count <= 8 ? "set xtics 1\n" : "");
  pk_put(f, "set label 10 '%s' at graph 0,1 offset 0,1.2 left\n",
         pk_word_polarization(answer->polarization));
  put_warnings(f, i, seen);
  pk_put(f, "set key at screen %.4f,%.4f right center horizontal samplen 2\n",
         (double)right / PK_FIGURE_WIDTH, 1 - (double)KEY_TOP / f->height);
  for (int p = 0; p < PANELS; p++) {
    int top = TOP + p * (PANEL + BETWEEN), column = 2 + 2 * p;
    pk_figure_place(f, left, right, top, top + PANEL);
    pk_figure_range(f, has_values(answer, p));
    pk_put(f, p < PANELS - 1 ? "set format x ''\nset xlabel\n"
                             : "set format x '%%g'\nset xlabel 'tooth' offset 0,0.2\n");
    pk_put(f, "set ylabel '%s' offset 1,0\n", label[p]);
    pk_put(f,
           "plot $taper_%d using 1:%d with linespoints %s, $taper_%d using "
           "1:($%d-$%d):(0):(2*$%d) " PK_BARS " lc rgb '" PK_INK "'",
           i, column, pk_figure_look(0), i, column, column + 1, column + 1);
    if (p == 0) {
      put_key(f, seen);
    }
    pk_put(f, "\nset key off\nunset label 1\nunset label 2\nunset label 10\n");
  }
  pk_put(f, "unset object\nunset label\n");
}

picket_status pk_figure_taper(pk_figure *f) {
  const picket_result *result = f->result;
  int known = 0, columns = result->count;
  for (int i = 0; i < columns; i++) {
    for (int t = 0; t < result->taper[i].tooth_count; t++) {
      known += isfinite(result->taper[i].teeth[t].bloch_index.value);
    }
  }
  if (known == 0) {
    return pk_fail(result->context, PICKET_ERROR_UNSUPPORTED,
                   "figure: no tooth has an index that could be drawn");
  }
  pk_figure_open(f, "The row tooth by tooth", TOP + PANELS * PANEL + (PANELS - 1) * BETWEEN + AXIS);
  pk_put(f, "set multiplot\nset offsets 0,0,graph 0.1,graph 0.1\n");
  int width = (RIGHT - LEFT - APART * (columns - 1)) / columns;
  for (int i = 0; i < columns; i++) {
    int left = LEFT + i * (width + APART);
    put_column(f, i, left, left + width);
  }
  pk_put(f, "unset multiplot\n");
  return PICKET_OK;
}
