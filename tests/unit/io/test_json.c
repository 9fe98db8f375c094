/* Results as JSON: the fields of the contract, nulls for what is missing, and numbers that read
 * back as the same double. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "io/write.h"
#include "unit/io/handmade.h"
#include "unit/short_memory.h"

static picket_context *context;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

/* Takes the white space between tokens out of a document. */
static void squeeze(char *text) {
  char *to = text;
  bool inside = false;
  for (const char *from = text; *from; from++) {
    if (*from == '"' && (from == text || from[-1] != '\\')) {
      inside = !inside;
    }
    if (inside || (*from != ' ' && *from != '\n')) {
      *to++ = *from;
    }
  }
  *to = '\0';
}

/* Frees the result. */
static void expect(picket_result *result, const char *expected) {
  char *text = NULL;
  assert_int_equal(pk_json_write(result, &text), PICKET_OK);
  squeeze(text);
  char start[64];
  snprintf(start, sizeof start, "{\"picket\":\"%s\",", picket_version());
  assert_memory_equal(text, start, strlen(start));
  assert_string_equal(text + strlen(start), expected);
  pk_free(context, text);
  pk_result_free(result);
}

static void edges(void **state) {
  (void)state;
  expect(handmade_edges(context, "row"),
         "\"command\":\"edges\",\"name\":\"row\",\"accuracy\":0.25,"
         "\"complete\":true,\"shortfall\":null,\"results\":[{\"polarization\":\"hy\","
         "\"stop_bands\":[{\"order\":1,\"short_nm\":{\"value\":1250.0,\"uncertainty\":125.0},"
         "\"long_nm\":{\"value\":1500.0,\"uncertainty\":250.0},\"attenuation_db_per_pitch\":"
         "{\"value\":3.5,\"uncertainty\":null,\"note\":\"not converged\"},\"confined\":false,"
         "\"short_confined\":true,\"long_confined\":false}],\"operating\":{\"from_nm\":1750.0,"
         "\"to_nm\":2000.0,\"regime\":\"subwavelength\",\"clearance_nm\":{\"value\":250.0,"
         "\"uncertainty\":250.0}},\"estimate\":{\"method\":\"by hand\",\"centre_nm\":1375.0,"
         "\"error_nm\":{\"value\":0.0,\"uncertainty\":125.0}}},{\"polarization\":\"ey\","
         "\"stop_bands\":[],\"operating\":null,\"estimate\":{\"method\":null,\"centre_nm\":null,"
         "\"error_nm\":{\"value\":null,\"uncertainty\":null,\"note\":\"none applies\"}}}]}");
}

static void confined_needs_both_edges(void **state) {
  (void)state;
  for (int i = 0; i < 4; i++) {
    picket_result *result = handmade_edges(context, "row");
    picket_stop_band *band = (picket_stop_band *)result->edges[0].bands;
    band->short_confined = i & 1;
    band->long_confined = i & 2;
    char *text = NULL;
    assert_int_equal(pk_json_write(result, &text), PICKET_OK);
    squeeze(text);
    assert_int_equal(strstr(text, "\"confined\":true") != NULL, i == 3);
    pk_free(context, text);
    pk_result_free(result);
  }
}

static void bands(void **state) {
  (void)state;
  expect(handmade_bands(context, "Γ"),
         "\"command\":\"bands\",\"name\":\"\",\"accuracy\":0.25,"
         "\"complete\":true,\"shortfall\":null,\"results\":[{\"polarization\":\"ey\",\"points\":["
         "{\"k\":[0.0,0.0],\"label\":\"Γ\",\"frequency\":[{\"value\":0.0,\"uncertainty\":0.0},"
         "{\"value\":0.5,\"uncertainty\":0.0625}]},{\"k\":[1.0,0.5],\"label\":null,\"frequency\":["
         "{\"value\":0.25,\"uncertainty\":0.0625},{\"value\":null,\"uncertainty\":null,\"note\":"
         "\"above the light line\"}]}],\"gaps\":[{\"below\":1,\"from\":{\"value\":0.25,"
         "\"uncertainty\":0.0625},\"to\":{\"value\":0.5,\"uncertainty\":0.0625}}]}]}");
}

static void index_points(void **state) {
  (void)state;
  expect(handmade_index(context),
         "\"command\":\"index\",\"name\":\"row\",\"accuracy\":0.25,"
         "\"complete\":true,\"shortfall\":null,\"results\":[{\"polarization\":\"hy\",\"points\":["
         "{\"wavelength_nm\":1500.0,\"modes\":[{\"order\":0,"
         "\"bloch_index\":{\"value\":2.5,\"uncertainty\":0.5},"
         "\"group_index\":{\"value\":3.5,\"uncertainty\":null,\"note\":\"no bar\"},"
         "\"dispersion_ps_per_nm_km\":{\"value\":-64.0,\"uncertainty\":8.0},"
         "\"loss_db_per_cm\":{\"value\":4.0,\"uncertainty\":1.0},"
         "\"loss_db_per_pitch\":{\"value\":0.25,\"uncertainty\":0.125},"
         "\"absorption_db_per_cm\":{\"value\":0.0,\"uncertainty\":0.0},"
         "\"radiation_db_per_cm\":{\"value\":4.0,\"uncertainty\":2.0},"
         "\"radiation_per_mm\":{\"value\":8.0,\"uncertainty\":4.0},"
         "\"upward_share\":{\"value\":0.5,\"uncertainty\":0.25},\"regime\":\"radiating\","
         "\"radiated\":[{\"order\":-1,\"side\":\"high\",\"angle_deg\":0.0,\"share\":1.0}]}],"
         "\"estimate\":2.75},"
         "{\"wavelength_nm\":2000.0,\"modes\":[],\"estimate\":null,\"note\":\"no mode\"},"
         "{\"wavelength_nm\":4000.0,\"modes\":[],\"estimate\":null,"
         "\"note\":\"out of range, here\",\"failed\":true}]}]}");
}

static void slab(void **state) {
  (void)state;
  expect(handmade_slab(context),
         "\"command\":\"slab\",\"name\":\"film\",\"accuracy\":0.25,"
         "\"complete\":true,\"shortfall\":null,\"results\":[{\"polarization\":\"te\",\"points\":["
         "{\"wavelength_nm\":1500.0,\"modes\":[{\"order\":0,\"index\":{\"value\":2.5,"
         "\"uncertainty\":0.5},\"group_index\":{\"value\":3.5,\"uncertainty\":0.5}}]},"
         "{\"wavelength_nm\":2000.0,\"modes\":[]}]}]}");
}

static void summary(void **state) {
  (void)state;
  expect(handmade_summary(context),
         "\"command\":\"check\",\"name\":\"n\",\"accuracy\":null,"
         "\"complete\":true,\"shortfall\":null,\"results\":[{\"name\":\"cell.pitch\",\"value\":"
         "300.0,\"unit\":\"nm\",\"text\":null},{\"name\":\"cell.lateral\",\"value\":null,"
         "\"unit\":null,\"text\":\"open\"}]}");
}

static void partial_results_are_marked(void **state) {
  (void)state;
  picket_result *result = handmade_slab(context);
  char *text = NULL;
  result->complete = false;
  result->shortfall = pk_text_copy(context, "half of it");
  assert_int_equal(pk_json_write(result, &text), PICKET_OK);
  squeeze(text);
  assert_non_null(strstr(text, "\"complete\":false,\"shortfall\":\"half of it\""));
  pk_free(context, text);
  pk_result_free(result);
}

/* A quote, a backslash, a line break and a control character must leave a document that is whole.
 */
static void odd_names_are_escaped(void **state) {
  (void)state;
  picket_result *result = handmade_edges(context, "a\"b\\c\nd\x01, \"x\": [1]");
  char *text = NULL;
  assert_int_equal(pk_json_write(result, &text), PICKET_OK);
  assert_non_null(strstr(text, "\"name\": \"a\\\"b\\\\c\\nd\\u0001, \\\"x\\\": [1]\","));
  pk_free(context, text);
  pk_result_free(result);
}

static void numbers_read_back_as_themselves(void **state) {
  (void)state;
  const double values[] = {0.1,
                           1.0 / 3,
                           2.8477822434317562,
                           1e-300,
                           5e-324,
                           1.7976931348623157e308,
                           1e21 / 7,
                           123456789.12345679,
                           -0.0};
  for (size_t i = 0; i < sizeof values / sizeof *values; i++) {
    picket_result *result = handmade_slab(context);
    ((picket_slab_mode *)result->slab[0].points[0].modes)[0].index = with_bar(values[i], 0);
    char *text = NULL;
    assert_int_equal(pk_json_write(result, &text), PICKET_OK);
    const char *at = strstr(text, "\"index\": {");
    assert_non_null(at);
    at = strstr(at, "\"value\": ");
    assert_non_null(at);
    assert_true(strtod(at + strlen("\"value\": "), NULL) == values[i]);
    pk_free(context, text);
    pk_result_free(result);
  }
}

static void infinities_are_null(void **state) {
  (void)state;
  picket_result *result = handmade_slab(context);
  ((picket_slab_mode *)result->slab[0].points[0].modes)[0].index = with_bar(INFINITY, -INFINITY);
  char *text = NULL;
  assert_int_equal(pk_json_write(result, &text), PICKET_OK);
  squeeze(text);
  assert_non_null(strstr(text, "\"index\":{\"value\":null,\"uncertainty\":null,\"note\":null}"));
  pk_free(context, text);
  pk_result_free(result);
}

static void out_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0};
    picket_context *scarce = short_memory_context(&memory);
    picket_result *result = handmade_edges(scarce, "row");
    memory.fail_at = memory.asked + n;
    char *text = NULL;
    status = pk_json_write(result, &text);
    assert_true(status == PICKET_OK ? n > 1 : status == PICKET_ERROR_MEMORY && !text);
    pk_free(scarce, text);
    pk_result_free(result);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(edges),
      cmocka_unit_test(confined_needs_both_edges),
      cmocka_unit_test(bands),
      cmocka_unit_test(slab),
      cmocka_unit_test(index_points),
      cmocka_unit_test(summary),
      cmocka_unit_test(partial_results_are_marked),
      cmocka_unit_test(odd_names_are_escaped),
      cmocka_unit_test(numbers_read_back_as_themselves),
      cmocka_unit_test(infinities_are_null),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
