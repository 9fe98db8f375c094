/* CSV tables of an index: every line that is wrong is named by file, line and column. */
#include <stdlib.h>

#include "reading.h"
#include "unit/near.h"
#include "unit/short_memory.h"

#define HEADER "wavelength_nm,n,k\n"
#define ROWS "1400,3.5,0\n1500,3.49,0\n1600,3.48,0.1\n"
#define LAST "1700,3.47,2e-4\n"

/* One folder and one file for all tests of this program. */
static char folder[] = "/tmp/picket-test-XXXXXX";
static char path[64];

static int make_folder(void **state) {
  (void)state;
  if (!mkdtemp(folder)) {
    return -1;
  }
  snprintf(path, sizeof path, "%s/t.csv", folder);
  return 0;
}

static int remove_folder(void **state) {
  (void)state;
  return remove(path) | remove(folder);
}

static void write_table(const char *text, size_t length) {
  FILE *file = fopen(path, "wb");
  assert_non_null(file);
  assert_int_equal(fwrite(text, 1, length, file), length);
  assert_int_equal(fclose(file), 0);
}

static const pk_place named_at = {"a.yaml", 7, 20};

static void reads_a_table(void **state) {
  (void)state;
  static const char *const texts[] = {
      HEADER ROWS LAST,
      HEADER ROWS "1700,3.47,2e-4", /* no newline at the end */
      "wavelength_nm,n,k\r\n1400,3.5,0\r\n1500,3.49,0\r\n1600,3.48,0.1\r\n1700,3.47,2e-4\r\n",
      "\xef\xbb\xbf" HEADER ROWS LAST,
      " wavelength_nm,n,k \n 1400 , 3.5,\t0\n1500,3.49,0\n1600,3.48,0.1\n1700,3.47,2e-4 \n",
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
    pk_index_table table;
    write_table(texts[i], strlen(texts[i]));
    assert_int_equal(pk_read_index_table(context, named_at, path, &table), PICKET_OK);
    assert_int_equal(table.count, 4);
    assert_near(table.wavelength_um[0], 1.4, 0);
    assert_near(table.wavelength_um[3], 1.7, 0);
    assert_near(table.n[1], 3.49, 0);
    assert_near(table.k[2], 0.1, 0);
    assert_near(table.k[3], 2e-4, 0);
    pk_index_table_clear(context, &table);
  }
  picket_context_free(context);
}

static const struct {
  const char *place, *words, *text;
} bad_tables[] = {
    {":1:1: ", "the first line of the table must be: wavelength_nm,n,k", ""},
    {":1:1: ", "the first line of the table must be", ROWS LAST},
    {":1:1: ", "the first line of the table must be", "wavelength_um,n,k\n" ROWS LAST},
    {":1:1: ", "the first line of the table must be", "wavelength_nm,n\n" ROWS LAST},
    {":1:1: ", "the first line of the table must be", "# mine\n" HEADER ROWS LAST},
    {": ", "the table has 0 rows, must have 4 to 100000", HEADER},
    {": ", "the table has 3 rows, must have 4 to 100000", HEADER ROWS},
    {":5:1: ", "wavelength_nm is 1600, must be above the 1600 of the row before",
     HEADER ROWS "1600,3,0\n" LAST},
    {":5:1: ", "wavelength_nm is 1550, must be above the 1600 of the row before",
     HEADER ROWS "1550,3,0\n" LAST},
    {":5:6: ", "n is 0, must be above 0 to 1000", HEADER ROWS "1700,0,0\n"},
    {":5:6: ", "n is -3, must be above 0 to 1000", HEADER ROWS "1700,-3,0\n"},
    {":5:8: ", "k is -0.1, must be from 0 to 1000", HEADER ROWS "1700,3,-0.1\n"},
    {":5:1: ", "wavelength_nm is 1.7, must be from 10 to 1e+06", HEADER ROWS "1.7,3,0\n"},
    {":5:6: ", "the row must have three numbers", HEADER ROWS "1700,3\n"},
    {":5:8: ", "the row must have three numbers", HEADER ROWS "1700,3,0,1\n"},
    {":5:1: ", "the row must have three numbers", HEADER ROWS "\n" LAST},
    {":5:1: ", "the row must have three numbers", HEADER ROWS "1700;3;0\n"},
    {":5:6: ", "\"\" must be a plain decimal number", HEADER ROWS "1700,,0\n"},
    {":5:6: ", "\"nan\" must be a plain decimal number", HEADER ROWS "1700,nan,0\n"},
    {":5:6: ", "\".inf\" must be a plain decimal number", HEADER ROWS "1700,.inf,0\n"},
    {":5:6: ", "\"1e400\" must be a plain decimal number", HEADER ROWS "1700,1e400,0\n"},
    {":5:1: ", "\"1700nm\" must be a plain decimal number", HEADER ROWS "1700nm,3,0\n"},
    {":5:6: ", "byte 0xff is not UTF-8 text", HEADER ROWS "1700,\xff,0\n"},
};

static void refuses_bad_tables(void **state) {
  (void)state;
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof bad_tables / sizeof *bad_tables; i++) {
    pk_index_table table = {-1, NULL, NULL, NULL};
    char start[100];
    write_table(bad_tables[i].text, strlen(bad_tables[i].text));
    picket_status status = pk_read_index_table(context, named_at, path, &table);
    snprintf(start, sizeof start, "%s%s%s", path, bad_tables[i].place, bad_tables[i].words);
    const char *message = picket_context_message(context);
    if (status != PICKET_ERROR_INPUT || strncmp(message, start, strlen(start)) != 0) {
      fail_msg("%s\ngave: %s\nnot: %s", bad_tables[i].text, message, start);
    }
    assert_int_equal(table.count, -1); /* untouched */
  }
  picket_context_free(context);
}

static void refuses_bytes_of_zero(void **state) {
  (void)state;
  static const char text[] = HEADER ROWS "1700,3\0,0\n";
  picket_context *context = plain_context();
  pk_index_table table;
  write_table(text, sizeof text - 1);
  assert_int_equal(pk_read_index_table(context, named_at, path, &table), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), ":5:7: the control character 0x00"));
  picket_context_free(context);
}

static void refuses_too_many_rows(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_index_table table;
  FILE *file = fopen(path, "wb");
  assert_non_null(file);
  fputs(HEADER, file);
  for (int i = 0; i < 100001; i++) {
    fprintf(file, "%d,2,0\n", 100 + i);
  }
  fclose(file);
  assert_int_equal(pk_read_index_table(context, named_at, path, &table), PICKET_ERROR_INPUT);
  assert_non_null(
      strstr(picket_context_message(context), ":100002:1: the table has more than 100000 rows"));
  picket_context_free(context);
}

static void says_who_named_a_missing_table(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_index_table table;
  assert_int_equal(pk_read_index_table(context, named_at, "no_such.csv", &table),
                   PICKET_ERROR_FILE);
  assert_string_equal(picket_context_message(context),
                      "a.yaml:7:20: \"no_such.csv\" cannot be read: there is no such file");
  picket_context_free(context);
}

static void survives_every_failed_allocation(void **state) {
  (void)state;
  write_table(HEADER ROWS LAST, strlen(HEADER ROWS LAST));
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0, 0, 0};
    picket_context *context = short_memory_context(&memory);
    pk_index_table table = {0, NULL, NULL, NULL};
    memory.fail_at = memory.asked + n;
    status = pk_read_index_table(context, named_at, path, &table);
    assert_int_equal(status, table.count ? PICKET_OK : PICKET_ERROR_MEMORY);
    assert_true(status != PICKET_OK || n == 5); /* the text and three columns */
    pk_index_table_clear(context, &table);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(reads_a_table),
      cmocka_unit_test(refuses_bad_tables),
      cmocka_unit_test(refuses_bytes_of_zero),
      cmocka_unit_test(refuses_too_many_rows),
      cmocka_unit_test(says_who_named_a_missing_table),
      cmocka_unit_test(survives_every_failed_allocation),
  };
  return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
