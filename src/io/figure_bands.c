/* Bands over a path of wavenumbers, a panel for each polarization: the operating band and complete
 * gaps as ranges of frequency, what lies above the light line of the open sides shaded.
 *
 * The light line: a wave in the denser side n along z has f = pitch/λ = |k_z| / (2 n(λ)), k_z in
 * π/pitch and in the first zone; n depends on λ, so it is iterated.
 *
 * Data: bands_<i> has a line "place kz kx frequency bar frequency bar ..." for each wavenumber,
 * gaps_<i> "below from bar to bar", light_line_<i> "place frequency". `place` is the length of the
 * path so far, or k_z itself on a path along z. */
#include <stdio.h>

#include "io/figure_script.h"
#include "study/bragg.h"

enum { TOP = 92, PANEL = 400, AXIS = 58, LEFT = 84, RIGHT = 868, APART = 84, MOST_LINES = 8 };
enum { LABEL_LETTERS = 12, ROUNDS = 60, CLOSE = 14 /* dots between the labels of the path */ };

static const double USUAL_UM = 1.55;
static const double HEADROOM = 1.05;

typedef struct path {
  double pitch_um, span_um; /* span: 1 if nothing is said of it; k_x is then 0 */
  bool along_z;             /* k_z rises all the way: it is its own place */
  int denser[2];            /* materials of the open sides; -1: none */
} path;

static bool rises_along_z(const picket_bands_answer *answer) {
  bool rises = true;
  for (int p = 0; p < answer->point_count; p++) {
    const picket_band_point *point = &answer->points[p];
    rises = rises && point->kx == 0 && (p == 0 || point->kz > answer->points[p - 1].kz);
  }
  return rises;
}

/* The media far from a channel: above and below, if what lies far out at its sides is one of these.
 * Films that run out to the sides guide waves of their own, and there is no simple line. */
static void find_far_media(const pk_channel_block *channel, int denser[2]) {
  const pk_section_block *outline = &channel->outline;
  double middle = outline->low_um[1] <= outline->high_um[1]
                      ? (outline->low_um[1] + outline->high_um[1]) / 2
                      : 0;
  for (int i = 0; i < channel->slices; i++) {
    const pk_frame *frame = pk_geometry_frame(channel->slice[i]);
    const double far[2] = {0.99 * frame->to[0], 0.99 * frame->to[1]};
    if (!isfinite(far[0]) || !isfinite(far[1])) {
      return;
    }
    int below = pk_geometry_medium_at(channel->slice[i], 0, -far[1]);
    int above = pk_geometry_medium_at(channel->slice[i], 0, far[1]);
    for (int side = -1; side <= 1; side += 2) {
      int beside = pk_geometry_medium_at(channel->slice[i], side * far[0], middle);
      bool plain = beside == below || beside == above;
      if (!plain || (i > 0 && (below != denser[0] || above != denser[1]))) {
        denser[0] = denser[1] = -1;
        return;
      }
    }
    denser[0] = below;
    denser[1] = above;
  }
}

static path find_path(const pk_figure *f, const picket_bands_answer *answer) {
  const pk_problem *problem = f->problem;
  path p = {.span_um = 1, .along_z = rises_along_z(answer), .denser = {-1, -1}};
  if (problem->has_cell) {
    p.pitch_um = problem->cell.pitch_um;
    p.span_um = problem->cell.span_um > 0 ? problem->cell.span_um : 1;
    if (problem->cell.lateral == PK_LATERAL_OPEN) {
      pk_geometry_side_media(problem->cell.geometry, PK_V, &p.denser[0], &p.denser[1]);
    }
  } else {
    p.pitch_um = problem->channel.pitch_um;
    find_far_media(&problem->channel, p.denser);
  }
  return p;
}

/* Frequency of the light line; NaN where a side is not known or there is none. */
static picket_status light_line(const pk_figure *f, const path *p, double kz, double *frequency) {
  double zone = fabs(remainder(kz, 2));
  double lowest = INFINITY;
  picket_status status = PICKET_OK;
  for (int side = 0; side < 2 && p->denser[side] >= 0 && status == PICKET_OK; side++) {
    double wavelength_um = USUAL_UM, found = zone > 0 ? NAN : 0;
    for (int i = 0; i < ROUNDS && zone > 0 && status == PICKET_OK; i++) {
      double permittivity = NAN;
      status = pk_permittivity_at(f->problem, p->denser[side], wavelength_um, &permittivity);
      if (!(permittivity > 0)) { /* unknown there: the line goes on with the last index known */
        break;
      }
      found = zone / (2 * sqrt(permittivity));
      wavelength_um = p->pitch_um / found;
    }
    lowest = fmin(lowest, isnan(found) ? INFINITY : found);
  }
  *frequency = isfinite(lowest) ? lowest : NAN;
  return status;
}

static double place_of(const picket_bands_answer *answer, const path *p, int point) {
  if (p->along_z) {
    return answer->points[point].kz;
  }
  double length = 0;
  for (int i = 1; i <= point; i++) {
    const picket_band_point *a = &answer->points[i - 1], *b = &answer->points[i];
    length += hypot(b->kz - a->kz, (b->kx - a->kx) * p->pitch_um / p->span_um);
  }
  return length;
}

static picket_status put_data(pk_figure *f, int i, const path *p) {
  const picket_bands_answer *answer = &f->result->bands[i];
  pk_put(f, "$bands_%d << END\n# place kz kx, then frequency and uncertainty of each band\n", i);
  for (int k = 0; k < answer->point_count; k++) {
    pk_put_value(f, place_of(answer, p, k));
    pk_put_value(f, answer->points[k].kz);
    pk_put_value(f, answer->points[k].kx);
    for (int b = 0; b < answer->band_count; b++) {
      pk_put_bar(f, answer->points[k].frequency[b], 1);
    }
    pk_put(f, "\n");
  }
  pk_put(f, "END\n$gaps_%d << END\n# below from uncertainty to uncertainty\n", i);
  for (int g = 0; g < answer->gap_count; g++) {
    pk_put(f, "%d", answer->gaps[g].below);
    pk_put_bar(f, answer->gaps[g].from, 1);
    pk_put_bar(f, answer->gaps[g].to, 1);
    pk_put(f, "\n");
  }
  pk_put(f, "%sEND\n$light_line_%d << END\n# place frequency\n",
         answer->gap_count ? "" : "NaN NaN NaN NaN NaN\n", i);
  picket_status status = PICKET_OK;
  for (int k = 0; k < answer->point_count && status == PICKET_OK; k++) {
    double frequency = NAN;
    status = light_line(f, p, answer->points[k].kz, &frequency);
    pk_put_value(f, place_of(answer, p, k));
    pk_put_value(f, frequency);
    pk_put(f, "\n");
  }
  pk_put(f, "END\n");
  return status;
}

/* Labels of the path where there is room for them, or numbers. */
static void put_places(pk_figure *f, const picket_bands_answer *answer, const path *p, int dots) {
  double whole = place_of(answer, p, answer->point_count - 1);
  double first = place_of(answer, p, 0), last = -INFINITY;
  bool any = false;
  for (int k = 0; k < answer->point_count; k++) {
    double place = place_of(answer, p, k);
    if (answer->points[k].label && (place - last) * dots > CLOSE * (whole - first)) {
      pk_put(f, any ? ", " : "set xtics (");
      f->in_format = true;
      pk_put_text(f, "", answer->points[k].label, LABEL_LETTERS);
      f->in_format = false;
      pk_put(f, " %.10g", place);
      last = place;
      any = true;
    }
  }
  pk_put(f, any ? ")\nset grid xtics lt 1 lc rgb '#b8b8b8' lw 0.5\n" : "");
  if (!any) {
    pk_figure_tics(f, "x", first, whole, dots);
    pk_put(f, "unset grid\n");
  }
  pk_put(f, "set xrange [%.10g:%.10g]\nset xlabel '%s' offset 0,0.2\n", first,
         whole > first ? whole : first + 1,
         p->along_z ? "Bloch wavenumber k_z (π/pitch)" : "along the path of wavenumbers (π/pitch)");
}

static double highest_of(const picket_result *result) {
  double highest = 0;
  for (int i = 0; i < result->count; i++) {
    const picket_bands_answer *answer = &result->bands[i];
    for (int k = 0; k < answer->point_count; k++) {
      for (int b = 0; b < answer->band_count; b++) {
        highest = fmax(highest, answer->points[k].frequency[b].value);
      }
    }
  }
  return highest;
}

static bool has_gaps(const picket_result *result) {
  int gaps = 0;
  for (int i = 0; i < result->count; i++) {
    gaps += result->bands[i].gap_count;
  }
  return gaps > 0;
}

static void put_plot(pk_figure *f, int i, const path *p, double top) {
  const picket_bands_answer *answer = &f->result->bands[i];
  double from = 0, to = 0;
  pk_put(f, "plot $light_line_%d using 1:2:(%.10g) with filledcurves fc rgb '" PK_MIST "'%s", i,
         top, p->denser[0] >= 0 ? " title 'above the light line'" : "");
  if (pk_figure_light(f->problem, &from, &to)) {
    double low = PK_NM_OF_UM * p->pitch_um / to, high = PK_NM_OF_UM * p->pitch_um / from;
    pk_put(f,
           ", \\\n  '+' using 1:(%.10g):(%.10g) with filledcurves fc rgb '" PK_SAND
           "' fs solid 1 border lc rgb '" PK_FAINT "' title '%s'",
           low, high, low < high ? "operating band" : "operating wavelength");
  }
  if (answer->gap_count > 0) {
    pk_put(f,
           ", \\\n  $gaps_%d using (0):(0):(-1e9):(1e9):2:4 with boxxyerror fc rgb '" PK_SLATE
           "' fs transparent pattern 4 border lc rgb '" PK_SLATE "' title 'gap'",
           i);
  }
  if (answer->gap_count == 0 && has_gaps(f->result)) { /* the key holds for all panels */
    pk_put(f, ", keyentry with boxes fc rgb '" PK_SLATE
              "' fs transparent pattern 4 border lc rgb '" PK_SLATE "' title 'gap'");
  }
  pk_put(f, ", \\\n  $light_line_%d using 1:2 with lines lc rgb '" PK_FAINT "' dt (6,4) lw 1.2", i);
  for (int b = 0; b < answer->band_count; b++) {
    pk_put(f,
           ", \\\n  $bands_%d using 1:%d with linespoints lc rgb '#16325c' lw 1.6 pt 7 ps 0.3"
           ", $bands_%d using 1:($%d-$%d):(0):(2*$%d) " PK_BARS " lc rgb '#16325c'",
           i, 4 + 2 * b, i, 4 + 2 * b, 5 + 2 * b, 5 + 2 * b);
  }
  pk_put(f, "\n");
}

static void say_gaps(pk_figure *f, int rows, double pitch_nm) {
  char line[256];
  int left = rows;
  for (int i = 0; i < f->result->count; i++) {
    const picket_bands_answer *answer = &f->result->bands[i];
    for (int g = 0; g < answer->gap_count && left > 0; g++, left--) {
      const picket_gap *gap = &answer->gaps[g];
      snprintf(line, sizeof line, "%s, gap above band %d: %s to %s, %.6g to %.6g nm",
               pk_word_polarization(answer->polarization), gap->below,
               pk_figure_quantity(gap->from, 1).text, pk_figure_quantity(gap->to, 1).text,
               pitch_nm / gap->to.value, pitch_nm / gap->from.value);
      pk_figure_say(f, rows, line);
    }
  }
}

static picket_status draw(pk_figure *f, double top) {
  int columns = f->result->count, width = (RIGHT - LEFT - APART * (columns - 1)) / columns;
  picket_status status = PICKET_OK;
  pk_put(f, "set multiplot\nset yrange [0:%.10g]\nset ylabel 'frequency (pitch/λ)' offset 1,0\n",
         top);
  pk_figure_tics(f, "y", 0, top, PANEL);
  for (int i = 0; i < columns && status == PICKET_OK; i++) {
    const picket_bands_answer *answer = &f->result->bands[i];
    path p = find_path(f, answer);
    int left = LEFT + i * (width + APART);
    pk_figure_place(f, left, left + width, TOP, TOP + PANEL);
    put_places(f, answer, &p, width);
    pk_put(f, "set label 10 '%s' at graph 0,1 offset 0,0.8 left\n",
           pk_word_polarization(answer->polarization));
    if (i == 0) {
      pk_put(f, "set key at screen %.4f,%.4f right center horizontal samplen 1.6\n",
             (double)RIGHT / PK_FIGURE_WIDTH, 1 - 47.0 / f->height);
    }
    status = put_data(f, i, &p);
    put_plot(f, i, &p, top);
    pk_put(f, "set key off\n");
    pk_figure_said(f);
  }
  pk_put(f, "unset multiplot\n");
  return status;
}

picket_status pk_figure_bands(pk_figure *f) {
  double top = HEADROOM * highest_of(f->result);
  if (!(top > 0) || !isfinite(top)) {
    return pk_fail(f->result->context, PICKET_ERROR_UNSUPPORTED,
                   "figure: no band has a frequency that could be drawn");
  }
  int rows = 0;
  for (int i = 0; i < f->result->count; i++) {
    rows += f->result->bands[i].gap_count;
  }
  rows = rows < MOST_LINES ? rows : MOST_LINES;
  pk_figure_open(f, "Bands and complete gaps", TOP + PANEL + AXIS + 18 * rows + (rows ? 14 : 0));
  path p = find_path(f, &f->result->bands[0]);
  say_gaps(f, rows, PK_NM_OF_UM * p.pitch_um);
  return draw(f, top);
}
