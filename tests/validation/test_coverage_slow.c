/* Are the error bars honest? Two hundred random cells are solved at the lowest accuracy and on the
 * finest grids that the time allows; a bar that does not cover the difference is a made-up one, and
 * a bar much larger than the difference is of no use.
 *
 * Cells of one or two rectangles, contrast 1.4 to 3.5, duty 0.15 to 0.85, both polarizations, sides
 * open, periodic or walls. Open cells answer with the edges of their first stop band, closed ones
 * with two bands at two wavenumbers. The numbers are drawn from a fixed seed. */
#include <math.h>
#include <picket.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
/* cmocka wants some of the above first, so this one keeps its place. */
/* clang-format off */
#include <cmocka.h>
/* clang-format on */

enum { CELLS = 200, MOST_VALUES = 4, TEXT = 2048 };

static const char *const SIDES[] = {"open", "periodic", "electric", "magnetic"};

/* The finer answer: as accurate as this many unknowns allow. Asking for less where sides are open
 * keeps them from reaching so far that few unknowns are left for the tooth. */
static const double FINE_UNKNOWNS[2] = {10000, 10000}; /* closed, open */
static const double FINE_ACCURACY[2] = {1e-8, 1e-5};

/* A difference counts where the bar of the finer value is this small beside the coarser one's. */
static const double DECISIVE = 0.3;

typedef struct cell {
  int side; /* of SIDES */
  char text[TEXT];
} cell;

typedef struct tally {
  int values, decided, outside;
  double *ratio; /* [decided] bar / difference */
  double worst;
} tally;

/* Uniform in [low, high); the multiplier is the one of Knuth's MMIX. */
static double random_in(uint64_t *state, double low, double high) {
  *state = *state * 6364136223846793005u + 1442695040888963407u;
  return low + (high - low) * ((double)(*state >> 11) / 9007199254740992.0);
}

static void add(char *text, const char *format, ...) {
  size_t used = strlen(text);
  va_list values;
  va_start(values, format);
  vsnprintf(text + used, TEXT - used, format, values);
  va_end(values);
}

static cell draw(uint64_t *state) {
  /* Open cells take six times as long: one in eight. */
  cell c = {.side = random_in(state, 0, 8) < 1 ? 0 : (int)random_in(state, 1, 4)};
  int shapes = 1 + (int)random_in(state, 0, 2);
  double pitch = random_in(state, 200, 500), span = pitch * random_in(state, 0.8, 1.6);
  double around = random_in(state, 1, 1.6);
  add(c.text, "format: 1\nlight: {polarization: %s}\nmaterials:\n",
      random_in(state, 0, 1) < 0.5 ? "ey" : "hy");
  add(c.text, "  around: {constant: {index: %.6f}}\n", around);
  for (int i = 0; i < shapes; i++) {
    add(c.text, "  fill%d: {constant: {index: %.6f}}\n", i, around * random_in(state, 1.4, 3.5));
  }
  add(c.text, "cell:\n  pitch_nm: %.3f\n  cladding: around\n  lateral: %s\n", pitch, SIDES[c.side]);
  if (c.side > 0) {
    add(c.text, "  lateral_span_nm: %.3f\n", span);
  }
  add(c.text, "  shapes:\n");
  for (int i = 0; i < shapes; i++) {
    double length = pitch * random_in(state, 0.15, 0.85), width = span * random_in(state, 0.2, 0.7);
    double z = i * pitch * random_in(state, -0.2, 0.2),
           x = i * span * random_in(state, -0.15, 0.15);
    add(c.text,
        "    - rect: {fill: fill%d, length_nm: %.3f, width_nm: %.3f, at_nm: [%.3f, %.3f]}\n", i,
        length, width, z, x);
  }
  if (c.side > 0) {
    double k_x = c.side == 1 ? 0.3 : 0; /* walls admit no wavenumber across */
    add(c.text, "path: [{at: [0.4, %g]}, {at: [1, %g]}]\n", k_x, k_x);
  }
  return c;
}

static int take_edges(const picket_result *result, picket_quantity *values) {
  picket_edges_answer answer;
  assert_int_equal(picket_edges_get(result, 0, &answer), PICKET_OK);
  values[0] = answer.bands[0].long_um;
  values[1] = answer.bands[0].short_um;
  return 2;
}

static int take_bands(const picket_result *result, picket_quantity *values) {
  picket_bands_answer answer;
  assert_int_equal(picket_bands_get(result, 0, &answer), PICKET_OK);
  for (int i = 0; i < MOST_VALUES; i++) {
    values[i] = answer.points[i / 2].frequency[i % 2];
  }
  return MOST_VALUES;
}

/* The values of a cell; 0 if it has no answer (it guides nothing, or needs too many unknowns). */
static int solve(picket_context *context, const cell *c, const picket_options *options,
                 picket_quantity *values) {
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  assert_int_equal(
      picket_problem_read_text(context, c->text, strlen(c->text), "a random cell", &problem),
      PICKET_OK);
  picket_status status = c->side == 0 ? picket_edges_find(problem, options, &result)
                                      : picket_bands_find(problem, options, &result);
  int count = 0;
  if (status == PICKET_OK) {
    count = c->side == 0 ? take_edges(result, values) : take_bands(result, values);
  } else if (status != PICKET_ERROR_NO_MODE && status != PICKET_ERROR_NUMERIC) {
    fail_msg("%s\n%s", picket_context_message(context), c->text);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  return count;
}

static void compare(const cell *c, picket_quantity coarse, picket_quantity fine, tally *t) {
  if (isnan(coarse.uncertainty) || isnan(fine.uncertainty)) {
    return; /* declined, or an edge that is not confined */
  }
  t->values++;
  if (fine.uncertainty > DECISIVE * coarse.uncertainty) {
    return;
  }
  double off = fabs(coarse.value - fine.value);
  t->ratio[t->decided++] = coarse.uncertainty / fmax(off, 1e-15 * fabs(fine.value));
  t->worst = fmax(t->worst, off / coarse.uncertainty);
  if (off > coarse.uncertainty) {
    t->outside++;
    print_message("%.10g is off by %.2g with a bar of %.2g\n%s", coarse.value, off,
                  coarse.uncertainty, c->text);
  }
}

static int by_size(const void *a, const void *b) {
  double x = *(const double *)a, y = *(const double *)b;
  return (x > y) - (x < y);
}

static void bars_cover_and_are_not_wild(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  picket_options low, high;
  picket_options_init(&low);
  picket_options_init(&high);
  low.accuracy = 1e-2;
  low.points = high.points = 1;
  tally t = {.ratio = calloc(CELLS * MOST_VALUES, sizeof *t.ratio)};
  assert_non_null(t.ratio);
  uint64_t seed = 1;
  int cells = 0;
  for (int i = 0; i < CELLS; i++) {
    cell c = draw(&seed);
    low.count = high.count = c.side == 0 ? 1 : 2;
    high.accuracy = FINE_ACCURACY[c.side == 0];
    high.unknowns = FINE_UNKNOWNS[c.side == 0];
    picket_quantity coarse[MOST_VALUES], fine[MOST_VALUES];
    int count = solve(context, &c, &low, coarse);
    int same = count > 0 ? solve(context, &c, &high, fine) : 0;
    for (int k = 0; k < same; k++) {
      compare(&c, coarse[k], fine[k], &t);
    }
    cells += same > 0;
  }
  picket_context_free(context);
  qsort(t.ratio, (size_t)t.decided, sizeof *t.ratio, by_size);
  double median = t.decided > 0 ? t.ratio[t.decided / 2] : NAN;
  print_message(
      "%d cells, %d values, %d compared: %d outside their bars, worst %.2f of it, median "
      "bar %.1f errors\n",
      cells, t.values, t.decided, t.outside, t.worst, median);
  free(t.ratio);
  assert_true(cells >= 0.8 * CELLS);
  assert_true(t.decided >= 0.6 * t.values && t.decided > 300);
  assert_true(t.outside <= 0.01 * t.decided);
  assert_true(median < 20);
}

int main(void) {
  const struct CMUnitTest tests[] = {cmocka_unit_test(bars_cover_and_are_not_wild)};
  return cmocka_run_group_tests(tests, NULL, NULL);
}
