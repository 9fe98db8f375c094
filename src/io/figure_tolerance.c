/* What each number that spreads does by itself, as a bar about the nominal value, the longest on
 * top: by its sensitivity, over three standard deviations to each side or over its range; with the
 * requirement, and the worst corner as a mark. Bars are straight lines' worth: the worst corner, a
 * direct solve of all numbers at once, shows what curvature adds.
 *
 * Data, in the unit of the quantity: reach_<i> has a line "y from to bar-of-from bar-of-to" for
 * each number, worst_<i> "y value bar". */
#include <stdio.h>

#include "io/figure_script.h"

enum {
  TOP = 110,
  ROW = 34,
  LEFT = 262,
  RIGHT = 868,
  AXIS = 88, /* under a panel: numbers, label, and the heading of the next */
  MOST_ROWS = 12,
  PATH_LETTERS = 29
};

static const double SIGMAS = 3;
static const double MARGIN = 0.08;

typedef struct reach {
  const picket_tolerance_sensitivity *of;
  double from, to;         /* of the quantity */
  double from_bar, to_bar; /* of the sensitivity, over the same way */
} reach;

static reach reach_of(const picket_tolerance_answer *answer,
                      const picket_tolerance_sensitivity *one) {
  bool normal = isfinite(one->sigma);
  double down = normal ? -SIGMAS * one->sigma : one->from - one->nominal;
  double up = normal ? SIGMAS * one->sigma : one->to - one->nominal;
  return (reach){one, answer->nominal.value + one->per_unit.value * down,
                 answer->nominal.value + one->per_unit.value * up,
                 fabs(one->per_unit.uncertainty * down), fabs(one->per_unit.uncertainty * up)};
}

static double length_of(const reach *r) {
  double length = fabs(r->to - r->from);
  return isfinite(length) ? length : 0;
}

/* The longest first, MOST_ROWS of them; how many. */
static int sort_reaches(const picket_tolerance_answer *answer, reach out[MOST_ROWS]) {
  int count = 0;
  for (int i = 0; i < answer->sensitivity_count; i++) {
    reach r = reach_of(answer, &answer->sensitivities[i]);
    int at = count < MOST_ROWS ? count++ : MOST_ROWS - 1;
    if (at == MOST_ROWS - 1 && i >= MOST_ROWS && length_of(&r) <= length_of(&out[at])) {
      continue;
    }
    for (; at > 0 && length_of(&out[at - 1]) < length_of(&r); at--) {
      out[at] = out[at - 1];
    }
    out[at] = r;
  }
  return count;
}

static void put_data(pk_figure *f, int i, const reach *rows, int count) {
  const picket_tolerance_answer *answer = &f->result->tolerance[i];
  pk_put(f, "$reach_%d << END\n# y from to uncertainty_from uncertainty_to\n", i);
  for (int r = 0; r < count; r++) {
    pk_put(f, "%d", -r);
    pk_put_value(f, rows[r].from);
    pk_put_value(f, rows[r].to);
    pk_put_value(f, rows[r].from_bar);
    pk_put_value(f, rows[r].to_bar);
    pk_put(f, "\n");
  }
  pk_put(f, "END\n$worst_%d << END\n# y value uncertainty\n1", i);
  pk_put_bar(f, answer->worst_value, 1);
  pk_put(f, "\nEND\n");
}

/* The range of everything that is drawn. */
static void find_range(const picket_tolerance_answer *answer, const reach *rows, int count,
                       double *low, double *high) {
  const double others[] = {answer->nominal.value, answer->worst_value.value, answer->at_least,
                           answer->at_most};
  *low = INFINITY;
  *high = -INFINITY;
  for (int i = 0; i < 4; i++) { /* fmin and fmax leave out what is NaN */
    *low = fmin(*low, others[i]);
    *high = fmax(*high, others[i]);
  }
  for (int r = 0; r < count; r++) {
    *low = fmin(*low, fmin(rows[r].from, rows[r].to));
    *high = fmax(*high, fmax(rows[r].from, rows[r].to));
  }
  double margin = *high > *low ? MARGIN * (*high - *low) : fmax(fabs(*high) * 0.01, 1e-6);
  *low -= margin;
  *high += margin;
}

static void put_requirement(pk_figure *f, const picket_tolerance_answer *answer, double low,
                            double high) {
  for (int side = 0; side < 2; side++) {
    double limit = side ? answer->at_most : answer->at_least;
    if (isfinite(limit)) {
      pk_put(f,
             "set object rectangle from %.10g,graph 0 to %.10g,graph 1 behind fc rgb '" PK_MIST
             "' fs solid 1 noborder\n"
             "set arrow from %.10g,graph 0 to %.10g,graph 1 nohead front lw 1.6 dt (8,4) lc rgb "
             "'" PK_RUST "'\n",
             side ? limit : low, side ? high : limit, limit, limit);
    }
  }
  pk_put(f, "set arrow from %.10g,graph 0 to %.10g,graph 1 nohead front lw 1 lc rgb '" PK_INK "'\n",
         answer->nominal.value, answer->nominal.value);
}

static void put_rows(pk_figure *f, const reach *rows, int count) {
  pk_put(f, "set ytics scale 0 (\"worst corner\" 1");
  f->in_format = true;
  for (int r = 0; r < count; r++) {
    pk_put(f, ", ");
    pk_put_text(f, "", rows[r].of->vary, PATH_LETTERS);
    pk_put(f, " %d", -r);
  }
  f->in_format = false;
  pk_put(f, ")\nset yrange [%g:1.6]\n", 0.5 - count);
}

static void put_plot(pk_figure *f, int i) {
  const picket_tolerance_answer *answer = &f->result->tolerance[i];
  pk_put(f,
         "plot $reach_%d using (($2+$3)/2):1:2:3:($1-0.3):($1+0.3) with boxxyerror fc rgb "
         "'" PK_SLATE "' title 'alone (3σ or range)'",
         i);
  for (int end = 2; end <= 3; end++) {
    pk_put(f, ", \\\n  $reach_%d using ($%d-$%d):1:(2*$%d):(0) " PK_BARS " lc rgb '" PK_INK "'", i,
           end, end + 2, end + 2);
  }
  pk_put(f,
         ", \\\n  $worst_%d using 2:1 with points pt 9 ps 1.2 lc rgb '" PK_INK
         "' title 'worst corner'",
         i);
  if (isfinite(answer->at_least) || isfinite(answer->at_most)) {
    pk_put(f, ", keyentry with lines lw 1.6 dt (8,4) lc rgb '" PK_RUST "' title 'requirement'");
  }
  pk_put(f, "\n");
}

static void say(pk_figure *f, int rows, const picket_tolerance_answer *answer) {
  char line[256];
  int length =
      snprintf(line, sizeof line, "%s: nominal %s %s, worst corner %s %s", answer->polarization,
               pk_figure_quantity(answer->nominal, 1).text, answer->unit,
               pk_figure_quantity(answer->worst_value, 1).text, answer->unit);
  if (isfinite(answer->yield.value.value) && length > 0 && length < (int)sizeof line) {
    snprintf(line + length, sizeof line - (size_t)length, "; yield %s of %d samples",
             pk_figure_quantity(answer->yield.value, 1).text, answer->yield.samples);
  }
  pk_figure_say(f, rows, line);
}

static void draw_panel(pk_figure *f, int i, int top) {
  const picket_tolerance_answer *answer = &f->result->tolerance[i];
  reach rows[MOST_ROWS];
  double low = 0, high = 0;
  int count = sort_reaches(answer, rows);
  find_range(answer, rows, count, &low, &high);
  put_data(f, i, rows, count);
  pk_figure_place(f, LEFT, RIGHT, top, top + ROW * (count + 1));
  put_requirement(f, answer, low, high);
  put_rows(f, rows, count);
  pk_figure_tics(f, "x", low, high, RIGHT - LEFT);
  pk_put(f, "set xrange [%.10g:%.10g]\nset xlabel '%s (%s)' offset 0,0.2 noenhanced\n", low, high,
         answer->quantity, answer->unit[0] ? answer->unit : "1");
  pk_put(f, "set label 10 '%s' at graph 0,1 offset 0,0.8 left\n", answer->polarization);
  if (i == 0) {
    pk_put(f, "set key at screen %.4f,%.4f right center horizontal samplen 2\n",
           (double)RIGHT / PK_FIGURE_WIDTH, 1 - 76.0 / f->height);
  }
  put_plot(f, i);
  pk_put(f, "set key off\nunset object\nunset arrow\n");
  pk_figure_said(f);
}

picket_status pk_figure_tolerance(pk_figure *f) {
  const picket_result *result = f->result;
  int height = TOP, drawn = 0;
  for (int i = 0; i < result->count; i++) {
    int count = result->tolerance[i].sensitivity_count;
    drawn += count > 0 && isfinite(result->tolerance[i].nominal.value);
    height += ROW * ((count < MOST_ROWS ? count : MOST_ROWS) + 1) + AXIS;
  }
  if (drawn < result->count || drawn == 0) {
    return pk_fail(result->context, PICKET_ERROR_UNSUPPORTED,
                   "figure: the quantity has no nominal value about which to draw");
  }
  pk_figure_open(f, "What each number does to the quantity", height + 18 * result->count + 8);
  for (int i = 0; i < result->count; i++) {
    say(f, result->count, &result->tolerance[i]);
  }
  pk_put(f, "set multiplot\n");
  int top = TOP;
  for (int i = 0; i < result->count; i++) {
    int count = result->tolerance[i].sensitivity_count;
    draw_panel(f, i, top);
    top += ROW * ((count < MOST_ROWS ? count : MOST_ROWS) + 1) + AXIS;
  }
  pk_put(f, "unset multiplot\n");
  return PICKET_OK;
}
