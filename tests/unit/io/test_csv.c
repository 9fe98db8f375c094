/* Results as comma-separated values: columns with their units, empty fields for what is missing,
 * RFC 4180 quoting. */
#include <stdio.h>
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

/* Frees the result. */
static void expect(picket_result *result, const char *expected) {
  char *text = NULL;
  assert_int_equal(pk_csv_write(result, &text), PICKET_OK);
  assert_string_equal(text, expected);
  pk_free(context, text);
  pk_result_free(result);
}

static const char EDGES_HEADER[] =
    "polarization,order,short_nm,short_uncertainty_nm,short_confined,long_nm,long_uncertainty_nm,"
    "long_confined,attenuation_db_per_pitch,attenuation_uncertainty_db_per_pitch,"
    "operating_from_nm,operating_to_nm,regime,clearance_nm,clearance_uncertainty_nm,"
    "estimate_centre_nm,estimate_error_nm,estimate_error_uncertainty_nm\n";

static void edges(void **state) {
  (void)state;
  char expected[1000];
  snprintf(expected, sizeof expected,
           "%shy,1,1250,125,true,1500,250,false,3.5,,1750,2000,subwavelength,250,250,1375,0,125\n",
           EDGES_HEADER);
  expect(handmade_edges(context, "row"), expected);
}

static void edges_without_an_operating_band(void **state) {
  (void)state;
  picket_result *result = handmade_edges(context, "row");
  char expected[1000];
  result->edges[0].operating.given = false;
  snprintf(expected, sizeof expected, "%shy,1,1250,125,true,1500,250,false,3.5,,,,,,,1375,0,125\n",
           EDGES_HEADER);
  expect(result, expected);
}

static void index_points(void **state) {
  (void)state;
  expect(handmade_index(context),
         "polarization,wavelength_nm,order,bloch_index,bloch_index_uncertainty,group_index,"
         "group_index_uncertainty,dispersion_ps_per_nm_km,dispersion_ps_per_nm_km_uncertainty,"
         "loss_db_per_cm,loss_db_per_cm_uncertainty,loss_db_per_pitch,"
         "loss_db_per_pitch_uncertainty,absorption_db_per_cm,absorption_db_per_cm_uncertainty,"
         "radiation_db_per_cm,radiation_db_per_cm_uncertainty,radiation_per_mm,"
         "radiation_per_mm_uncertainty,upward_share,upward_share_uncertainty,regime,estimate,"
         "failed,note\n"
         "hy,1500,0,2.5,0.5,3.5,,-64,8,4,1,0.25,0.125,0,0,4,2,8,4,0.5,0.25,radiating,2.75,false,\n"
         "hy,2000,,,,,,,,,,,,,,,,,,,,,,false,no mode\n"
         "hy,4000,,,,,,,,,,,,,,,,,,,,,,true,\"out of range, here\"\n");
}

static void bands(void **state) {
  (void)state;
  expect(handmade_bands(context, "Γ"),
         "polarization,point,label,kz_pi_per_pitch,kx_pi_per_lateral_span,"
         "band_1_pitch_per_wavelength,band_1_uncertainty,band_2_pitch_per_wavelength,"
         "band_2_uncertainty\n"
         "ey,0,Γ,0,0,0,0,0.5,0.0625\n"
         "ey,1,,1,0.5,0.25,0.0625,,\n");
}

/* RFC 4180, 2.5 to 2.7: fields with commas, quotes or line breaks stand in quotes, quotes double.
 */
static void odd_labels_are_quoted(void **state) {
  (void)state;
  static const char *const labels[][2] = {{"a,b", "\"a,b\""},
                                          {"say \"Γ\"", "\"say \"\"Γ\"\"\""},
                                          {"two\nlines", "\"two\nlines\""},
                                          {" edge ", "\" edge \""},
                                          {"\"", "\"\"\"\""},
                                          {"", ""}};
  for (size_t i = 0; i < sizeof labels / sizeof *labels; i++) {
    picket_result *result = handmade_bands(context, labels[i][0]);
    char *text = NULL;
    char row[100];
    snprintf(row, sizeof row, "\ney,0,%s,0,0,", labels[i][1]);
    assert_int_equal(pk_csv_write(result, &text), PICKET_OK);
    assert_non_null(strstr(text, row));
    pk_free(context, text);
    pk_result_free(result);
  }
}

static void slab(void **state) {
  (void)state;
  expect(handmade_slab(context),
         "polarization,wavelength_nm,order,index,index_uncertainty,group_index,"
         "group_index_uncertainty\n"
         "te,1500,0,2.5,0.5,3.5,0.5\n");
}

static void summary(void **state) {
  (void)state;
  expect(handmade_summary(context),
         "name,value,unit,text\ncell.pitch,300,nm,\ncell.lateral,,,open\n");
}

/* Enough rows to outgrow the first block of memory several times. */
static void a_long_table_is_whole(void **state) {
  (void)state;
  enum { POINTS = 3000 };
  picket_result *result = handmade(context, PK_RESULT_SLAB, "", 0.25);
  picket_slab_point *points = PK_NEW(context, POINTS, picket_slab_point);
  result->slab = PK_NEW(context, 1, picket_slab_answer);
  result->slab[0] = (picket_slab_answer){PICKET_TM, POINTS, points, NULL, 0};
  result->count = 1;
  for (int i = 0; i < POINTS; i++) {
    picket_slab_mode *mode = PK_NEW(context, 1, picket_slab_mode);
    mode->index = with_bar(1.0 / 3, 0);
    points[i] = (picket_slab_point){1 + i, 1, mode};
  }
  char *text = NULL;
  int rows = 0;
  assert_int_equal(pk_csv_write(result, &text), PICKET_OK);
  for (const char *c = text; *c; c++) {
    rows += *c == '\n';
  }
  assert_int_equal(rows, POINTS + 1);
  assert_string_equal(strstr(text, "tm,3000000,"), "tm,3000000,0,0.3333333333333333,0,0,0\n");
  pk_free(context, text);
  pk_result_free(result);
}

static void out_of_memory(void **state) {
  (void)state;
  short_memory memory = {0};
  picket_context *scarce = short_memory_context(&memory);
  picket_result *result = handmade_edges(scarce, "row");
  memory.fail_at = memory.asked + 1;
  char *text = NULL;
  assert_int_equal(pk_csv_write(result, &text), PICKET_ERROR_MEMORY);
  assert_null(text);
  assert_int_equal(pk_csv_write(result, &text), PICKET_OK);
  pk_free(scarce, text);
  pk_result_free(result);
  picket_context_free(scarce);
  assert_int_equal(memory.living, 0);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(edges),         cmocka_unit_test(edges_without_an_operating_band),
      cmocka_unit_test(bands),         cmocka_unit_test(odd_labels_are_quoted),
      cmocka_unit_test(slab),          cmocka_unit_test(index_points),
      cmocka_unit_test(summary),       cmocka_unit_test(a_long_table_is_whole),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
