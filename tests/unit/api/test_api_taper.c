/* Rows through the public face: closed forms, plain guides, monotone facts, warnings, arguments. */
#include <picket/edges.h>
#include <picket/index.h>
#include <picket/taper.h>
#include <string.h>

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

#define MEDIA(light)                      \
  "format: 1\nmaterials:\n"               \
  "  oxide: {constant: {index: 1.444}}\n" \
  "  core: {constant: {index: 3.476}}\n"  \
  "  guide: {constant: {index: 2.8}}\n"   \
  "light: {polarization: " light "}\n"

#define STACK                                                                                \
  MEDIA("ey")                                                                                \
  "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, " \
  "across: "                                                                                 \
  "z, from_nm: 0, to_nm: 60}}]}\n"

/* Teeth of a bus; the numbers that change come behind. */
#define BUS                                                                               \
  MEDIA("hy")                                                                             \
  "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: guide, length_nm: 150, " \
  "width_nm: "                                                                            \
  "450}}]}\n"

/* A guide without teeth. */
#define PLAIN                                                                             \
  MEDIA("both")                                                                           \
  "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: guide, length_nm: 300, " \
  "width_nm: "                                                                            \
  "450}}]}\n"

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context) == PICKET_OK ? 0 : -1;
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static picket_problem *read(const char *text) {
  picket_problem *problem = NULL;
  if (picket_problem_read_text(context, text, strlen(text), NULL, &problem) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  return problem;
}

/* Answer i; the caller frees the result. */
static picket_taper_answer find(const char *text, double accuracy, picket_result **result, int i) {
  picket_problem *problem = read(text);
  picket_options options;
  picket_taper_answer answer;
  picket_options_init(&options);
  options.accuracy = accuracy;
  if (picket_taper_find(problem, &options, result) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  picket_problem_free(problem);
  assert_int_equal(picket_taper_get(*result, i, &answer), PICKET_OK);
  return answer;
}

/* The middle of three teeth from 60 to 140 nm has 100 nm: with halves of 100 nm the Bloch index at
 * 1550 nm is 2.78665517 (Yeh, Yariv & Hong 1977, closed form). A stack has nothing across, so
 * neighbours have all in common. */
static void a_stack(void **state) {
  (void)state;
  picket_result *result = NULL;
  picket_taper_answer row =
      find(STACK
           "taper: {teeth: 3, at_nm: 1550, changes: [{vary: cell.shapes.0.to_nm, from: 60, "
           "to: 140}]}\n",
           1e-6, &result, 0);
  assert_int_equal(picket_taper_count(result), 1);
  assert_true(picket_result_complete(result));
  assert_int_equal(row.tooth_count, 3);
  assert_int_equal(row.change_count, 1);
  assert_string_equal(row.changes[0].vary, "cell.shapes.0.to_nm");
  assert_near(row.length_um, 0.6, 1e-12);
  assert_near(row.wavelength_um, 1.55, 1e-12);
  assert_true(isnan(row.fibre_um));
  const picket_taper_tooth *middle = &row.teeth[1];
  assert_int_equal(middle->number, 2);
  assert_near(middle->at_um, 0.3, 1e-12);
  assert_near(middle->values[0], 100, 1e-12);
  assert_near(middle->bloch_index.value, 2.78665517, 3e-6);
  assert_near(middle->smallest_feature_um, 0.1, 1e-9);
  assert_near(middle->overlap_next.value, 1, 1e-14);
  assert_near(row.transmission.value, 1, 1e-14);
  assert_true(isnan(middle->mode_size_um.value));
  assert_non_null(middle->mode_size_um.note);
  assert_non_null(row.fibre_share.note);
  assert_non_null(row.teeth[2].overlap_next.note);
  for (int i = 0; i < 3; i++) {
    assert_int_equal(row.teeth[i].failed, 0);
    assert_int_equal(row.teeth[i].warnings, 0);
    assert_true(i == 0 || row.teeth[i].bloch_index.value > row.teeth[i - 1].bloch_index.value);
  }
  picket_result_free(result);
}

/* A stack of one medium is that medium: where two meet, Fresnel's ((3 - 2)/(3 + 2))². */
static void fresnel(void **state) {
  (void)state;
  picket_result *result = NULL;
  picket_taper_answer row =
      find(MEDIA("ey") "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: "
                       "{fill: core, across: z, from_nm: -100, to_nm: 100}}]}\n"
                       "taper: {teeth: 2, at_nm: 1550, changes: [{vary: "
                       "materials.core.constant.index, from: 2, to: 3}]}\n",
           1e-4, &result, 0);
  assert_near(row.teeth[0].bloch_index.value, 2, 1e-4);
  assert_near(row.teeth[1].bloch_index.value, 3, 1e-4);
  assert_near(row.teeth[0].reflection_next.value, 0.04, 1e-9);
  assert_true(row.teeth[0].reflection_next.uncertainty < 1e-9);
  assert_non_null(row.teeth[1].reflection_next.note);
  picket_result_free(result);
}

/* Both ends are the same guide without teeth, whatever the pitch is called: nothing is lost. */
static void plain_guides(void **state) {
  (void)state;
  static const char *const rows[] = {
      PLAIN
      "taper: {teeth: 3, at_nm: 1550, changes: [{vary: cell.shapes.0.length_nm, from: 300, "
      "to: 300}]}\n",
      PLAIN
      "taper: {teeth: 3, at_nm: 1550, changes: [{vary: cell.pitch_nm, from: 210, to: 330}, "
      "{vary: cell.shapes.0.length_nm, from: 210, to: 330}]}\n"};
  for (int r = 0; r < 2; r++) {
    for (int p = 0; p < 2; p++) {
      picket_result *result = NULL;
      picket_taper_answer row = find(rows[r], 1e-4, &result, p);
      assert_int_equal(picket_taper_count(result), 2);
      for (int i = 0; i < 3; i++) {
        assert_int_equal(row.teeth[i].warnings, 0);
        assert_near(row.teeth[i].bloch_index.value, row.teeth[0].bloch_index.value,
                    row.teeth[0].bloch_index.uncertainty + row.teeth[i].bloch_index.uncertainty);
        if (i < 2) {
          assert_near(row.teeth[i].overlap_next.value, 1, 1e-9);
          assert_near(row.teeth[i].reflection_next.value, 0, 1e-9);
          assert_near(row.teeth[i].adiabatic, 0, 1e-4);
        }
      }
      assert_near(row.transmission.value, 1, 2e-9);
      picket_result_free(result);
    }
  }
}

/* The even mode of a film of index 2.8 in 1.444: u = cos κx inside, falling as exp(-γx) outside;
 * κ tan(κw/2) = γ (ey), γ n₁²/n₂² (hy). */
typedef struct film {
  double half, kappa, gamma;
  bool hy;
} film;

static film film_of(double width_um, bool hy) {
  const double n1 = 2.8, n2 = 1.444, k0 = 2 * 3.141592653589793238 / 1.55;
  double most = k0 * sqrt(n1 * n1 - n2 * n2), half = 0.5 * width_um;
  double low = 0, high = fmin(most, 0.5 * 3.141592653589793238 / half);
  for (int i = 0; i < 100; i++) {
    double k = 0.5 * (low + high), gamma = sqrt(most * most - k * k);
    if (k * tan(k * half) < gamma * (hy ? n1 * n1 / (n2 * n2) : 1)) {
      low = k;
    } else {
      high = k;
    }
  }
  return (film){half, low, sqrt(most * most - low * low), hy};
}

/* E and h of the power E h but for factors: u twice (ey), u/ε and u (hy). */
static double film_field(const film *f, double x, bool electric) {
  double u =
      x < f->half ? cos(f->kappa * x) : cos(f->kappa * f->half) * exp(-f->gamma * (x - f->half));
  return electric && f->hy ? u / (x < f->half ? 2.8 * 2.8 : 1.444 * 1.444) : u;
}

/* ∫E_a h_b x^power over both halves; middles of intervals that end at both walls, 1e-7 and better.
 */
static double film_product(const film *a, const film *b, int power) {
  const double end[] = {0, fmin(a->half, b->half), fmax(a->half, b->half), 5};
  double sum = 0;
  for (int part = 0; part < 3; part++) {
    double step = (end[part + 1] - end[part]) / 4000;
    for (int i = 0; i < 4000; i++) {
      double x = end[part] + (i + 0.5) * step;
      sum += 2 * step * film_field(a, x, true) * film_field(b, x, false) * pow(x, power);
    }
  }
  return sum;
}

/* Guides without teeth, of 450 and 420 nm: overlap, reflection, size from the modes of a film. With
 * fields of unit power h of ey and E of hy carry the index. */
static void two_films(void **state) {
  (void)state;
  for (int p = 0; p < 2; p++) {
    picket_result *result = NULL;
    picket_taper_answer row = find(PLAIN
                                   "taper: {teeth: 2, at_nm: 1550, changes: [{vary: "
                                   "cell.shapes.0.width_nm, from: 450, to: 420}]}\n",
                                   1e-4, &result, p);
    const film a = film_of(0.45, p == 1), b = film_of(0.42, p == 1);
    const film h_a = {a.half, a.kappa, a.gamma, false}, h_b = {b.half, b.kappa, b.gamma, false};
    double both = film_product(&h_a, &h_b, 0);
    double lost = 1 - both * both / (film_product(&h_a, &h_a, 0) * film_product(&h_b, &h_b, 0));
    double ab = film_product(&a, &b, 0), ba = film_product(&b, &a, 0);
    double na = row.teeth[0].bloch_index.value, nb = row.teeth[1].bloch_index.value;
    double there = p == 1 ? na * ab : nb * ab, back = p == 1 ? nb * ba : na * ba;
    double r = (back - there) / (back + there);
    double size = 4 * sqrt(film_product(&a, &a, 2) / film_product(&a, &a, 0));
    const picket_taper_tooth *t = &row.teeth[0];
    assert_near(1 - t->overlap_next.value, lost, t->overlap_next.uncertainty + 2e-7);
    assert_true(t->overlap_next.uncertainty < 0.02 * lost);
    assert_near(t->reflection_next.value, r * r, t->reflection_next.uncertainty + 1e-2 * r * r);
    assert_near(t->mode_size_um.value, size, t->mode_size_um.uncertainty + 1e-6);
    assert_true(t->mode_size_um.uncertainty < 3e-3 * size);
    picket_result_free(result);
  }
}

static const char NARROWING[] = BUS
    "rules: {smallest_feature_nm: 160}\n"
    "taper: {teeth: 4, at_nm: 1550, fibre: {gaussian_um: 3}, changes: [{vary: "
    "cell.shapes.0.width_nm, from: 450, to: 330}, {vary: cell.shapes.0.length_nm, from: 150, to: "
    "130, law: power, exponent: 2}]}\n";

/* A narrower tooth guides less: index falls, mode grows, more in common with a wide beam. What is
 * said of a tooth is what the other questions say of its cell. */
static void a_narrowing_row(void **state) {
  (void)state;
  picket_result *result = NULL, *index = NULL, *edges = NULL;
  picket_taper_answer row = find(NARROWING, 1e-3, &result, 0);
  double product = 1;
  for (int i = 0; i < 4; i++) {
    const picket_taper_tooth *t = &row.teeth[i];
    assert_int_equal(t->warnings & PICKET_TAPER_SMALL_FEATURE, PICKET_TAPER_SMALL_FEATURE);
    assert_near(t->values[0], 450 - 40 * i, 1e-9);
    assert_near(t->values[1], 150 - 20.0 * i * i / 9, 1e-9);
    if (i > 0) {
      const picket_taper_tooth *before = &row.teeth[i - 1];
      assert_true(t->bloch_index.value < before->bloch_index.value);
      assert_true(t->clearance_um.value > before->clearance_um.value);
      assert_true(t->mode_size_um.value > before->mode_size_um.value);
      assert_true(t->fibre_share.value > before->fibre_share.value);
      assert_true(before->overlap_next.value > 0.99 && before->overlap_next.value < 1);
      assert_true(before->overlap_next.uncertainty < 1e-3);
      assert_true(before->adiabatic > 0);
      product *= before->overlap_next.value;
    }
    assert_near(t->next_index, 1.444, 1e-9);
  }
  assert_near(row.transmission.value, product, 1e-12);
  assert_near(row.fibre_share.value, row.teeth[3].fibre_share.value, 0);
  picket_problem *problem = read(NARROWING);
  picket_options options;
  picket_index_answer n;
  picket_edges_answer e;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  picket_problem_set_number(problem, "cell.shapes.0.width_nm", row.teeth[2].values[0]);
  picket_problem_set_number(problem, "cell.shapes.0.length_nm", row.teeth[2].values[1]);
  picket_problem_set(problem, "light", "{polarization: hy, wavelength_nm: 1550}");
  assert_int_equal(picket_index_find(problem, &options, &index), PICKET_OK);
  assert_int_equal(picket_index_get(index, 0, &n), PICKET_OK);
  assert_near(n.points[0].modes[0].bloch_index.value, row.teeth[2].bloch_index.value, 0);
  assert_near(n.points[0].modes[0].group_index.value, row.teeth[2].group_index.value, 0);
  assert_int_equal(picket_edges_find(problem, &options, &edges), PICKET_OK);
  assert_int_equal(picket_edges_get(edges, 0, &e), PICKET_OK);
  assert_near(e.operating.clearance_um.value, row.teeth[2].clearance_um.value, 0);
  picket_result_free(edges);
  picket_result_free(index);
  picket_result_free(result);
  picket_problem_free(problem);
}

/* The length-scale criterion by hand from what the row says of its teeth, and its scaling: half of
 * the change from tooth to tooth is half as abrupt (to the curvature of the size along the row) and
 * loses a quarter at a joint. */
static void half_the_step(void **state) {
  (void)state;
  picket_result *coarse = NULL, *fine = NULL;
  picket_taper_answer a = find(BUS
                               "taper: {teeth: 2, at_nm: 1550, changes: [{vary: "
                               "cell.shapes.0.width_nm, from: 450, to: 410}]}\n",
                               1e-3, &coarse, 0);
  picket_taper_answer b = find(BUS
                               "taper: {teeth: 3, at_nm: 1550, changes: [{vary: "
                               "cell.shapes.0.width_nm, from: 450, to: 410}]}\n",
                               1e-3, &fine, 0);
  const picket_taper_tooth *first = &a.teeth[0], *second = &a.teeth[1];
  double beat = 1.55 / (0.5 * (first->bloch_index.value + second->bloch_index.value) - 1.444);
  double radius = 0.25 * (first->mode_size_um.value + second->mode_size_um.value);
  double slope = 0.5 * (second->mode_size_um.value - first->mode_size_um.value) / 0.3;
  assert_near(first->adiabatic, slope * beat / radius, 1e-9);
  double steps = 0.5 * (b.teeth[0].adiabatic + b.teeth[1].adiabatic);
  assert_near(steps / first->adiabatic, 0.5, 0.02);
  double lost = 0.5 * (2 - b.teeth[0].overlap_next.value - b.teeth[1].overlap_next.value);
  assert_near(lost / (1 - first->overlap_next.value), 0.25, 0.03);
  assert_true(b.transmission.value > a.transmission.value);
  picket_result_free(coarse);
  picket_result_free(fine);
}

/* Past, in and below the stop band; and backwards the row has the same joints. */
static void into_the_band(void **state) {
  (void)state;
  picket_result *result = NULL, *back = NULL;
  picket_taper_answer row = find(BUS
                                 "taper: {teeth: 4, at_nm: 1550, changes: [{vary: "
                                 "cell.pitch_nm, from: 300, to: 440}]}\n",
                                 1e-3, &result, 0);
  picket_taper_answer mirror = find(BUS
                                    "taper: {teeth: 4, at_nm: 1550, changes: [{vary: "
                                    "cell.pitch_nm, from: 440, to: 300}]}\n",
                                    1e-3, &back, 0);
  int stopped = 0;
  for (int i = 0; i < 4; i++) {
    const picket_taper_tooth *t = &row.teeth[i], *m = &mirror.teeth[3 - i];
    bool in = t->regime == PICKET_REGIME_STOP_BAND;
    assert_int_equal(t->warnings & PICKET_TAPER_STOP_BAND, in ? PICKET_TAPER_STOP_BAND : 0);
    assert_near(t->bloch_index.value, m->bloch_index.value, 0);
    if (in) {
      stopped++;
      assert_true(t->clearance_um.value < 0);
      assert_true(isnan(t->mode_size_um.value));
      assert_non_null(t->mode_size_um.note);
    }
    if (i < 3 && !isnan(t->overlap_next.value)) {
      assert_true(t->overlap_next.value <= 1);
      assert_near(t->overlap_next.value, mirror.teeth[2 - i].overlap_next.value, 1e-12);
      assert_near(t->reflection_next.value, mirror.teeth[2 - i].reflection_next.value, 1e-12);
      /* What is reflected grows with the group index. */
      assert_true(i == 0 || t->reflection_next.value > row.teeth[i - 1].reflection_next.value);
    }
  }
  assert_int_equal(row.teeth[0].warnings & PICKET_TAPER_STOP_BAND, 0);
  assert_true(stopped >= 1);
  assert_true(isnan(row.transmission.value));
  assert_non_null(row.transmission.note);
  picket_result_free(result);
  picket_result_free(back);
}

static void refuse(const char *text, picket_status status, const char *words) {
  picket_result *result = NULL;
  picket_problem *problem = read(text);
  assert_int_equal(picket_taper_find(problem, NULL, &result), status);
  assert_null(result);
  if (!strstr(picket_context_message(context), words)) {
    fail_msg("%s: not %s", picket_context_message(context), words);
  }
  picket_problem_free(problem);
}

static void arguments(void **state) {
  (void)state;
  picket_result *result = NULL;
  picket_taper_answer answer;
  picket_problem *problem = read(STACK);
  assert_int_equal(picket_taper_find(NULL, NULL, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_taper_find(problem, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_taper_find_resumable(problem, NULL, NULL, &result),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_taper_find_resumable(problem, NULL, "", &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_taper_find_resumable(NULL, NULL, "x", &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_taper_count(NULL), 0);
  assert_int_equal(picket_taper_get(NULL, 0, &answer), PICKET_ERROR_ARGUMENT);
  assert_null(result);
  picket_problem_free(problem);
  refuse(STACK, PICKET_ERROR_INPUT, "no \"taper\"");
  refuse(MEDIA("ey") "taper: {teeth: 3, at_nm: 1550, changes: [{vary: "
                     "materials.core.constant.index, from: 2, to: 3}]}\n",
         PICKET_ERROR_INPUT, "needs a \"cell\"");
  /* The tooth grows out of its cell on the way. */
  refuse(STACK
         "taper: {teeth: 5, at_nm: 1550, changes: [{vary: cell.shapes.0.to_nm, from: 60, to: "
         "-60}]}\n",
         PICKET_ERROR_INPUT, "tooth 3 of the 5");
  assert_string_equal(picket_taper_law_name(PICKET_TAPER_COSINE), "cosine");
  assert_string_equal(picket_taper_law_name((picket_taper_law)9), "unknown");
  assert_string_equal(picket_taper_warning_name(PICKET_TAPER_ABRUPT), "abrupt");
  assert_string_equal(picket_taper_warning_name((picket_taper_warning)3), "unknown");
}

/* Two processes give the same digits as one. */
static void jobs(void **state) {
  (void)state;
  static const char row[] = STACK
      "taper: {teeth: 5, at_nm: 1550, changes: [{vary: cell.shapes.0.to_nm, from: 60, to: 140, "
      "law: "
      "cosine}]}\n";
  const char *text[2];
  picket_result *result[2] = {NULL, NULL};
  for (int k = 0; k < 2; k++) {
    picket_problem *problem = read(row);
    picket_options options;
    picket_options_init(&options);
    options.accuracy = 1e-3;
    options.jobs = k + 1;
    assert_int_equal(picket_taper_find(problem, &options, &result[k]), PICKET_OK);
    text[k] = picket_result_json(result[k]);
    picket_problem_free(problem);
  }
  assert_string_equal(text[0], text[1]);
  picket_result_free(result[0]);
  picket_result_free(result[1]);
}

static picket_status whole_run(short_memory *memory, const char *text) {
  picket_context *own = short_memory_context(memory);
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  if (!own) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = picket_problem_read_text(own, text, strlen(text), NULL, &problem);
  if (status == PICKET_OK) {
    status = picket_taper_find(problem, &options, &result);
  }
  if (status == PICKET_OK) {
    status =
        picket_result_json(result) && picket_result_csv(result) ? PICKET_OK : PICKET_ERROR_MEMORY;
  } else {
    assert_null(result);
  }
  picket_result_free(result);
  picket_problem_free(problem);
  picket_context_free(own);
  return status;
}

/* Every allocation fails once: out of memory or, where an optional part can do without, an answer;
 * nothing is lost. The reading at every allocation, the rest at every n-th. */
static void memory_runs_out(void **state) {
  (void)state;
  static const char *const texts[] = {
      STACK
      "taper: {teeth: 2, at_nm: 1550, changes: [{vary: cell.shapes.0.to_nm, from: 60, to: "
      "140}]}\n",
      PLAIN
      "taper: {teeth: 2, at_nm: 1550, fibre: {gaussian_um: 3}, changes: [{vary: "
      "cell.shapes.0.width_nm, from: 450, to: 440}]}\n"};
  static const long stride[] = {4999, 29989};
  for (int t = 0; t < 2; t++) {
    short_memory whole = {0};
    assert_int_equal(whole_run(&whole, texts[t]), PICKET_OK);
    assert_int_equal(whole.living, 0);
    for (long at = 1; at <= whole.asked; at += at < 300 || at > whole.asked - 100 ? 1 : stride[t]) {
      short_memory memory = {.fail_at = at};
      picket_status status = whole_run(&memory, texts[t]);
      assert_true(status == PICKET_ERROR_MEMORY || status == PICKET_OK);
      assert_int_equal(memory.living, 0);
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_stack),
      cmocka_unit_test(fresnel),
      cmocka_unit_test(two_films),
      cmocka_unit_test(plain_guides),
      cmocka_unit_test(a_narrowing_row),
      cmocka_unit_test(half_the_step),
      cmocka_unit_test(into_the_band),
      cmocka_unit_test(arguments),
      cmocka_unit_test(jobs),
      cmocka_unit_test(memory_runs_out),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
