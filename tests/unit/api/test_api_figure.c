/* Scripts of pictures: texts of a file stay texts, nonsense is refused, memory that runs out leaves
 * nothing behind. What is drawn is held against the tables in tests/cli/test_figure.py. */
#include <picket.h>
#include <string.h>

#include "unit/io/handmade.h"
#include "unit/short_memory.h"

static const char GOOD[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: [1500, 1550], polarization: ey}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n";

static picket_context *context;
static picket_problem *problem;

static int set_up(void **state) {
  (void)state;
  if (picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, GOOD, strlen(GOOD), "test", &problem);
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  return 0;
}

static const char *script_of(picket_result *result, const picket_figure_options *options) {
  const char *script = NULL;
  assert_int_equal(picket_result_figure_get(result, problem, options, &script), PICKET_OK);
  assert_non_null(script);
  return script;
}

/* Every kind of result that can be made by hand or at once. */
static void every_kind(void **state) {
  (void)state;
  picket_result *all[] = {handmade_edges(context, "row"), handmade_bands(context, "X"),
                          handmade_index(context), handmade_slab(context), NULL};
  const char *words[] = {"$edges_1 << END", "$gaps_0 << END", "$index_0_", "$slab_0_0 << END",
                         "$cell_shapes << END"};
  assert_int_equal(picket_summary_find(problem, &all[4]), PICKET_OK);
  for (int i = 0; i < 5; i++) {
    assert_non_null(strstr(script_of(all[i], NULL), words[i]));
    picket_result_free(all[i]);
  }
}

static void each_format_has_its_terminal(void **state) {
  (void)state;
  static const char *const words[] = {"set terminal svg noenhanced",
                                      "set terminal pngcairo noenhanced",
                                      "set terminal pdfcairo noenhanced"};
  picket_result *result = handmade_edges(context, "row");
  picket_figure_options options;
  picket_figure_options_init(&options);
  for (int format = PICKET_FIGURE_SVG; format <= PICKET_FIGURE_PDF; format++) {
    options.format = (picket_figure_format)format;
    assert_non_null(strstr(script_of(result, &options), words[format]));
    assert_null(strstr(script_of(result, &options), "set output"));
  }
  options.output = "|`x`\n~.svg";
  assert_non_null(
      strstr(script_of(result, &options), "set output \"./\\174\\140x\\140\\012\\176.svg\"\n"));
  picket_result_free(result);
}

/* No byte with a meaning stands in the script as it came, and a line ends where we end it. */
static void names_are_texts(void **state) {
  (void)state;
  picket_result *result =
      handmade_edges(context, "a\"'\\`@$1\n0\r\t\x7f\xff\xc0\x80\xe2\x80\xae{x}_^%!#&]]>é");
  const char *script = script_of(result, NULL);
  const char *title = strstr(script, "set label 1 \"");
  assert_non_null(title);
  static const char expected[] =
      "set label 1 "
      "\"a\\042\\047\\134\\140\\100\\044\\061\\134n0\\134r\\134t\\134u007f\\134xff\\134xc0"
      "\\134x80\\134u202e\\173x\\175_\\136\\045\\041\\043\\046\\135\\135⁠>é\" at screen";
  assert_memory_equal(title, expected, sizeof expected - 1);
  picket_result_free(result);
}

static void a_long_name_is_cut_between_characters(void **state) {
  (void)state;
  enum { BYTES = 10000 };
  char *name = malloc(2 * BYTES + 1);
  assert_non_null(name);
  for (int i = 0; i < BYTES; i++) {
    memcpy(name + 2 * i, "é", 2);
  }
  name[2 * BYTES] = '\0';
  picket_result *result = handmade_edges(context, name);
  const char *title = strstr(script_of(result, NULL), "set label 1 \"");
  char expected[2 * 90 + 32] = "set label 1 \"";
  memcpy(expected + 13, name, 2 * 90);
  strcpy(expected + 13 + 2 * 90, "…\" at");
  assert_memory_equal(title, expected, strlen(expected));
  picket_result_free(result);
  free(name);
}

static void partial_results_say_so(void **state) {
  (void)state;
  picket_result *result = handmade_edges(context, "row");
  assert_int_equal(pk_result_fall_short(result, "no time"), PICKET_OK);
  assert_non_null(strstr(script_of(result, NULL), "\"PARTIAL RESULT. Stop bands"));
  picket_result_free(result);
}

static void nonsense(void **state) {
  (void)state;
  const char *script = "untouched";
  picket_result *result = handmade_edges(context, "row");
  picket_context *other = NULL;
  picket_problem *stranger = NULL;
  assert_int_equal(picket_context_create(NULL, &other), PICKET_OK);
  assert_int_equal(picket_problem_read_text(other, GOOD, strlen(GOOD), "test", &stranger),
                   PICKET_OK);
  picket_figure_options options;
  picket_figure_options_init(NULL);
  picket_figure_options_init(&options);
  options.format = (picket_figure_format)3;
  assert_int_equal(picket_result_figure_get(NULL, problem, NULL, &script), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_result_figure_get(result, NULL, NULL, &script), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_result_figure_get(result, problem, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_result_figure_get(result, stranger, NULL, &script),
                   PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_result_figure_get(result, problem, &options, &script),
                   PICKET_ERROR_ARGUMENT);
  options.size = 1;
  assert_int_equal(picket_result_figure_get(result, problem, &options, &script),
                   PICKET_ERROR_ARGUMENT);
  assert_string_equal(script, "untouched");
  picket_problem_free(stranger);
  picket_context_free(other);
  picket_result_free(result);
}

static void nothing_to_draw(void **state) {
  (void)state;
  const char *script = "untouched";
  picket_result *result = handmade_edges(context, "row");
  result->edges[0].band_count = 0;
  result->edges[0].operating.given = false;
  result->edges[0].estimate.centre_um = NAN;
  assert_int_equal(picket_result_figure_get(result, problem, NULL, &script),
                   PICKET_ERROR_UNSUPPORTED);
  assert_non_null(strstr(picket_context_message(context), "neither"));
  assert_string_equal(script, "untouched");
  picket_result_free(result);
}

/* Each allocation of a map, the picture with the most of them, fails once. */
static void out_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status == PICKET_ERROR_MEMORY; n++) {
    short_memory memory = {0};
    picket_context *small = short_memory_context(&memory);
    picket_problem *own = NULL;
    picket_result *result = NULL;
    const char *script = NULL;
    assert_non_null(small);
    assert_int_equal(picket_problem_read_text(small, GOOD, strlen(GOOD), "test", &own), PICKET_OK);
    assert_int_equal(picket_summary_find(own, &result), PICKET_OK);
    memory.fail_at = memory.asked + n;
    status = picket_result_figure_get(result, own, NULL, &script);
    assert_true(status == PICKET_OK || status == PICKET_ERROR_MEMORY);
    assert_true((status == PICKET_OK) == (script != NULL));
    picket_result_free(result);
    picket_problem_free(own);
    picket_context_free(small);
    assert_int_equal(memory.living, 0);
    assert_true(n < 1000);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(every_kind),
      cmocka_unit_test(each_format_has_its_terminal),
      cmocka_unit_test(names_are_texts),
      cmocka_unit_test(a_long_name_is_cut_between_characters),
      cmocka_unit_test(partial_results_say_so),
      cmocka_unit_test(nonsense),
      cmocka_unit_test(nothing_to_draw),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
