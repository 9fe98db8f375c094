/* match: what a mode shares with a beam or with a mode of another section. */
#include <math.h>
#include <stdio.h>

#include "cli/text.h"

static const double NM_PER_UM = 1000;
static const double DEGREES = 57.29577951308232; /* of a radian */

static void print_coupling(pk_text_table *t, pk_notes *notes, const picket_match_point *point,
                           const char *name, const picket_coupling *c) {
  pk_table_cell(t, "%.10g", NM_PER_UM * point->wavelength_um);
  pk_table_cell(t, "%s", name);
  pk_table_quantity(t, notes, c->share, 100);
  pk_table_quantity(t, notes, c->share_db, 1);
  pk_table_quantity(t, notes, c->offset_x_um, NM_PER_UM);
  pk_table_quantity(t, notes, c->offset_y_um, NM_PER_UM);
}

static void print_table(const picket_match_answer *answer, pk_notes *notes) {
  pk_text_table t = {.columns = 6};
  const char *const head[] = {"wavelength, nm", "placed", "coupled, %", "dB",
                              "offset x, nm",   "y, nm"};
  for (int i = 0; i < t.columns; i++) {
    pk_table_cell(&t, "%s", head[i]);
  }
  for (int p = 0; p < answer->point_count; p++) {
    const picket_match_point *point = &answer->points[p];
    if (point->note) {
      continue;
    }
    bool given = answer->request.offset_given;
    print_coupling(&t, notes, point, given ? "as asked" : "as in the files", &point->coupling);
    if (!given) {
      print_coupling(&t, notes, point, "best", &point->best);
    }
  }
  pk_table_print(&t);
}

static void print_modes(const picket_match_answer *answer) {
  for (int p = 0; p < answer->point_count; p++) {
    const picket_match_point *point = &answer->points[p];
    if (point->note) {
      printf("  nothing at %.10g nm: %s\n", NM_PER_UM * point->wavelength_um, point->note);
    } else if (p == 0 && answer->with) {
      printf("  mode %d, index %s, with mode %d of \"%s\", index %s\n", answer->request.mode,
             pk_quantity_show(point->index, 1).text, point->mode_b, answer->with,
             pk_quantity_show(point->index_b, 1).text);
    } else if (p == 0) {
      printf(
          "  mode %d, index %s, with a Gaussian beam of mode-field diameter %g x %g um,\n"
          "  its E along %s\n",
          answer->request.mode, pk_quantity_show(point->index, 1).text,
          answer->request.gaussian_x_um, answer->request.gaussian_y_um,
          point->along == PICKET_MATCH_ALONG_X ? "x" : "y");
    }
  }
}

void pk_match_print(const pk_arguments *arguments, const picket_result *result) {
  (void)arguments;
  pk_notes seen = {0};
  picket_match_answer answer;
  if (picket_match_get(result, 0, &answer) != PICKET_OK) {
    return;
  }
  print_table(&answer, &seen);
  print_modes(&answer);
  if (answer.request.tilt_x_rad != 0 || answer.request.tilt_y_rad != 0) {
    printf("  tilted by %g and %g degrees towards x and y\n", DEGREES * answer.request.tilt_x_rad,
           DEGREES * answer.request.tilt_y_rad);
  }
  printf("  Not included: reflection where the two meet, of a facet too.\n\n");
  pk_notes_print(&seen);
}
