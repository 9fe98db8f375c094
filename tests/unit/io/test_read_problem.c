/* The problem file as a whole: top-level keys, numbers, defaults, and that nothing a file can hold
 * brings the reader down. */
#include <math.h>
#include <stdlib.h>

#include "reading.h"
#include "unit/short_memory.h"

static const bad_text bad_files[] = {
    REFUSED("1:1", "has no \"format\"", "name: a\n"),
    REFUSED("1:9", "format is 2, must be 1", "format: 2\n"),
    REFUSED("1:9", "format is \"1\", must be 1", "format: \"1\"\n"),
    REFUSED("1:9", "format is 1.0, must be 1", "format: 1.0\n"),
    REFUSED("1:9", "format is a list, must be a whole number", "format: [1]\n"),
    REFUSED("2:1", "unknown key \"cel\"; did you mean \"cell\"?", FORMAT "cel: {}\n"),
    REFUSED("2:1", "unknown key \"qqqqqqqq\"; allowed: format, name, light",
            FORMAT "qqqqqqqq: {}\n"),
    REFUSED("2:7", "name is a list, must be a text", FORMAT "name: [a]\n"),
    REFUSED("2:6", "name is empty, must be a text", FORMAT "name:\n"),
    REFUSED("2:16", "temperature_c is -273.15, must be above -273.15 and at most 1000 degrees C",
            FORMAT "temperature_c: -273.15\n"),
    REFUSED("2:16", "temperature_c is 1001, must be above", FORMAT "temperature_c: 1001\n"),
    REFUSED("2:16", "temperature_c is .inf, must be above", FORMAT "temperature_c: .inf\n"),
    REFUSED("2:16", "temperature_c is \"nan\", must be a plain decimal number",
            FORMAT "temperature_c: nan\n"),
    REFUSED("2:16", "temperature_c is \".nan\", must be a plain decimal number",
            FORMAT "temperature_c: .nan\n"),
};

static const bad_text bad_numbers[] = {
    REFUSED("3:18", "cell.pitch_nm is \"220nm\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 220nm, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"0x10\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 0x10, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"010\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 010, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"1_000\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 1_000, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"1e\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 1e, cladding: oxide, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"--1\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: --1, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"1.2.3\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: 1.2.3, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is \"~\", must be a plain decimal number",
            MATERIALS "cell: {pitch_nm: ~, cladding: oxide, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
    REFUSED("4:13", "cell.pitch_nm is \"3,5\", must be a plain decimal number",
            MATERIALS "cell:\n"
                      "  pitch_nm: 3,5\n"
                      "  cladding: oxide\n"
                      "  shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]\n"),
    REFUSED("3:18", "cell.pitch_nm is 1e400, must be above 0 and at most 1000000 nm",
            MATERIALS "cell: {pitch_nm: 1e400, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is the text \"300\", must be a number without quotes",
            MATERIALS "cell: {pitch_nm: \"300\", cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is a block, must be a number",
            MATERIALS "cell: {pitch_nm: {}, cladding: oxide, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
    REFUSED("4:12", "cell.pitch_nm is empty, must be a number",
            MATERIALS "cell:\n"
                      "  pitch_nm:\n"
                      "  cladding: oxide\n"
                      "  shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]\n"),
};

static void refuses_bad_files(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_files);
}

static void refuses_bad_numbers(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_numbers);
}

/* Everything this version understands, in an order in which nothing stands above what needs it. */
static const char whole[] =
    "slab: {substrate: oxide, films: [{fill: silicon, thickness_nm: 220}], cover: oxide}\n"
    "path:\n"
    "  - {at: [0, 0], label: \"\xce\x93\"}\n"
    "  - {at: [1, 0.5]}\n"
    "cell:\n"
    "  shapes:\n"
    "    - rect: {fill: guide, length_nm: 150, width_nm: 450, at_nm: [10, -20]}\n"
    "    - disc: {fill: resin, diameter_nm: 120}\n"
    "    - polygon: {fill: glass, corners_nm: [[-75, 300], [75, 300], [60, 400], [-60, 400]]}\n"
    "    - stripe: {fill: silicon, across: x, from_nm: -500, to_nm: -400}\n"
    "  lateral: periodic\n"
    "  lateral_span_nm: 1200\n"
    "  lateral_shift: 0.5\n"
    "  cladding: oxide\n"
    "  pitch_nm: 300\n"
    "materials:\n"
    "  guide: {slab: {substrate: oxide, films: [{fill: silicon, thickness_nm: 220}], cover: oxide, "
    "polarization: te}}\n"
    "  resin: {constant: {index: 1.5, dn_dt_per_k: -1.0e-4}}\n"
    "  glass: {sellmeier: {b: [0.7], c_um: [0.1]}}\n"
    "  silicon: {catalogue: silicon}\n"
    "  oxide: {constant: {index: 1.45}}\n"
    "temperature_c: 35.5\n"
    "light: {wavelength_nm: 1550, polarization: ey}\n"
    "name: bus section\n"
    "format: 1\n";

static picket_status read(picket_context *context, const char *text, pk_document **document,
                          pk_problem **problem) {
  picket_status status = pk_document_read_text(context, text, strlen(text), "good.yaml", document);
  return status == PICKET_OK ? pk_problem_read(context, *document, problem) : status;
}

static void understands_a_whole_file(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = NULL;
  assert_int_equal(read(context, whole, &document, &p), PICKET_OK);
  assert_string_equal(picket_context_message(context), "");
  assert_string_equal(p->name, "bus section");
  assert_true(p->temperature_c == 35.5);
  assert_true(p->light.given && p->has_cell && p->path.given && p->slab.given);
  assert_int_equal(pk_materials_count(p->materials), 5);
  assert_int_equal(p->cell.cladding, pk_materials_find(p->materials, "oxide"));
  assert_int_equal(pk_geometry_shape_count(p->cell.geometry), 4);
  assert_int_equal(p->cell_place.line, 6);
  assert_string_equal(p->cell_place.file, "good.yaml");
  assert_true(p->smallest_um > 0 && p->smallest_um <= 0.15);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

static void fills_in_defaults(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = NULL;
  assert_int_equal(read(context, FORMAT, &document, &p), PICKET_OK);
  assert_string_equal(p->name, "");
  assert_true(p->temperature_c == 20);
  assert_true(p->light.wanted[PK_EY] && p->light.wanted[PK_HY]);
  assert_false(p->light.given || p->has_cell || p->path.given || p->slab.given);
  assert_int_equal(p->light.count, 0);
  assert_int_equal(pk_materials_count(p->materials), 0);
  assert_true(isinf(p->smallest_um));
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

/* libyaml's own allocations do not come through the context and are not made to fail here. */
static void survives_every_failed_allocation(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0, 0, 0};
    picket_context *context = short_memory_context(&memory);
    pk_document *document = NULL;
    pk_problem *problem = NULL;
    memory.fail_at = memory.asked + n;
    status = read(context, whole, &document, &problem);
    assert_int_equal(status, problem ? PICKET_OK : PICKET_ERROR_MEMORY);
    if (!problem) {
      assert_non_null(strstr(picket_context_message(context), "memory is out"));
    }
    assert_true(status != PICKET_OK || n > 100);
    pk_problem_free(problem);
    pk_document_free(document);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
}

/* Reads a text and checks what holds for any: a known status, a message for a failure, no leak. */
static void read_anything(const char *text, size_t length, int counts[2]) {
  short_memory memory = {0, 0, 0};
  picket_context *context = short_memory_context(&memory);
  picket_status status = understand(context, text, length);
  bool failed = status != PICKET_OK;
  assert_true(!failed || status == PICKET_ERROR_INPUT || status == PICKET_ERROR_UNSUPPORTED ||
              status == PICKET_ERROR_FILE);
  assert_int_equal(failed, picket_context_message(context)[0] != '\0');
  counts[failed]++;
  picket_context_free(context);
  assert_int_equal(memory.living, 0);
}

/* A small generator of our own, so that the texts are the same everywhere (numbers of the linear
 * congruential generator in Knuth's MMIX). */
static unsigned draw(uint64_t *seed, unsigned below) {
  *seed = *seed * 6364136223846793005u + 1442695040888963407u;
  return (unsigned)(*seed >> 33) % below;
}

static void stands_random_changes(void **state) {
  (void)state;
  static const char pieces[] = ":-,[]{}#&*!|>'\"%@`~ \n\t.0123456789einfa\x80\xff";
  uint64_t seed = 1;
  int counts[2] = {0, 0};
  char text[sizeof whole];
  for (int round = 0; round < 3000; round++) {
    memcpy(text, whole, sizeof whole);
    unsigned changes = 1 + draw(&seed, 3);
    for (unsigned i = 0; i < changes; i++) {
      text[draw(&seed, sizeof whole - 1)] = pieces[draw(&seed, sizeof pieces - 1)];
    }
    read_anything(text, sizeof whole - 1, counts);
  }
  /* Some changes hit a comment, a label or a digit and leave a sound file. */
  assert_true(counts[0] > 30 && counts[1] > 1000);
}

static void stands_random_bytes_and_truncation(void **state) {
  (void)state;
  uint64_t seed = 2;
  int counts[2] = {0, 0};
  for (size_t length = 0; length < sizeof whole; length += 3) {
    read_anything(whole, length, counts);
  }
  for (int round = 0; round < 1000; round++) {
    char text[64];
    unsigned length = draw(&seed, sizeof text);
    for (unsigned i = 0; i < length; i++) {
      text[i] = (char)(round % 2 ? 32 + draw(&seed, 95) : draw(&seed, 256));
    }
    read_anything(text, length, counts);
  }
  /* At most the last two truncated texts are whole. */
  assert_true(counts[0] <= 2 && counts[1] > 1000);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_files),
      cmocka_unit_test(refuses_bad_numbers),
      cmocka_unit_test(understands_a_whole_file),
      cmocka_unit_test(fills_in_defaults),
      cmocka_unit_test(survives_every_failed_allocation),
      cmocka_unit_test(stands_random_changes),
      cmocka_unit_test(stands_random_bytes_and_truncation),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
