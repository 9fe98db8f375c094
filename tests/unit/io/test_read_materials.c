/* materials: every kind, in any order. */
#include <complex.h>
#include <stdlib.h>

#include "reading.h"
#include "unit/near.h"

static const bad_text bad_materials[] = {
    REFUSED("2:12", "materials must be a block of names", FORMAT "materials: [a]\n"),
    REFUSED("3:6",
            "materials.a is a value, must be a block of keys (catalogue, constant, sellmeier, "
            "table, slab, layered)",
            FORMAT "materials:\n"
                   "  a: glass\n"),
    REFUSED("3:6", "materials.a has 0 kinds, must have exactly one of: catalogue",
            FORMAT "materials:\n"
                   "  a: {}\n"),
    REFUSED("3:6", "materials.a has 2 kinds, must have exactly one of",
            FORMAT "materials:\n"
                   "  a: {constant: {index: 1}, catalogue: silica}\n"),
    REFUSED("3:7", "unknown key \"constnt\" in materials.a; did you mean \"constant\"?",
            FORMAT "materials:\n"
                   "  a: {constnt: {index: 1}}\n"),
    REFUSED("3:17", "materials.a.constant has no \"index\"",
            FORMAT "materials:\n"
                   "  a: {constant: {}}\n"),
    REFUSED("3:25", "materials.a.constant.index is 0, must be above 0",
            FORMAT "materials:\n"
                   "  a: {constant: {index: 0}}\n"),
    REFUSED("3:25", "materials.a.constant.index is -1.5, must be above 0",
            FORMAT "materials:\n"
                   "  a: {constant: {index: -1.5}}\n"),
    REFUSED("3:42", "materials.a.constant.extinction is -0.1, must be at least 0",
            FORMAT "materials:\n"
                   "  a: {constant: {index: 1.5, extinction: -0.1}}\n"),
    REFUSED("3:43", "materials.a.constant.dn_dt_per_k is 2, must be",
            FORMAT "materials:\n"
                   "  a: {constant: {index: 1.5, dn_dt_per_k: 2}}\n"),
    REFUSED("3:22", "materials.a.sellmeier.b has 0 elements, must be a list of 1 to 8 numbers",
            FORMAT "materials:\n"
                   "  a: {sellmeier: {b: [], c_um: []}}\n"),
    REFUSED("3:36", "materials.a.sellmeier.c_um has 1 element, must be a list of 2 numbers",
            FORMAT "materials:\n"
                   "  a: {sellmeier: {b: [1, 2], c_um: [0.1]}}\n"),
    REFUSED("3:34", "materials.a.sellmeier.c_um.0 is -0.1, must be at least 0",
            FORMAT "materials:\n"
                   "  a: {sellmeier: {b: [1], c_um: [-0.1]}}\n"),
    REFUSED("3:22", "materials.a.sellmeier.b has 9 elements",
            FORMAT "materials:\n"
                   "  a: {sellmeier: {b: [1,2,3,4,5,6,7,8,9], c_um: [0.1]}}\n"),
    REFUSED("3:18", "materials.a.catalogue is a list, must be a text",
            FORMAT "materials:\n"
                   "  a: {catalogue: [silicon]}\n"),
    REFUSED("3:18", "silicon",
            FORMAT "materials:\n"
                   "  a: {catalogue: silicn}\n"),
    REFUSED_AS(PICKET_ERROR_FILE, "3:20",
               "\"no_such_file.csv\" cannot be read: there is no such file",
               FORMAT "materials:\n"
                      "  a: {table: {csv: no_such_file.csv}}\n"),
    REFUSED_AS(PICKET_ERROR_FILE, "3:20", "\".\" cannot be read: it is a folder",
               FORMAT "materials:\n"
                      "  a: {table: {csv: .}}\n"),
    REFUSED("3:3", "materials.a is made of itself",
            FORMAT "materials:\n"
                   "  a: {slab: {substrate: a, films: [{fill: a, thickness_nm: 220}], cover: a, "
                   "polarization: te}}\n"),
    REFUSED("3:3", "materials.a is made of itself",
            FORMAT "materials:\n"
                   "  a: {slab: {substrate: c, films: [{fill: b, thickness_nm: 220}], cover: c, "
                   "polarization: te}}\n"
                   "  b: {slab: {substrate: c, films: [{fill: a, thickness_nm: 220}], cover: c, "
                   "polarization: te}}\n"
                   "  c: {constant: {index: 1}}\n"),
    REFUSED("3:19",
            "slab.substrate is \"oxde\", which is not in materials; did you mean \"oxide\"?",
            MATERIALS
            "slab: {substrate: oxde, films: [{fill: si, thickness_nm: 220}], cover: oxide}\n"),
    REFUSED("2:19", "slab.substrate is \"oxide\", but the file defines no materials",
            FORMAT
            "slab: {substrate: oxide, films: [{fill: si, thickness_nm: 220}], cover: oxide}\n"),
};

static void refuses_bad_materials(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_materials);
}

static void check_index(const pk_problem *p, const char *name, double n, double k, double t_c) {
  pk_medium medium;
  int material = pk_materials_find(p->materials, name);
  assert_true(material >= 0);
  assert_int_equal(pk_materials_at(p->materials, material, 1.55, t_c, &medium), PICKET_OK);
  double complex index = csqrt(medium.permittivity);
  /* A square and a root of a number below 4. */
  assert_near(creal(index), n, 1e-14);
  assert_near(cimag(index), k, 1e-14);
}

static void understands_formulas(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        FORMAT
                        "materials:\n"
                        "  a: {constant: {index: 1.5}}\n"
                        "  b: {constant: {index: 1.5, extinction: 0.25, dn_dt_per_k: -1.0e-3}}\n"
                        "  c: {sellmeier: {b: [1.25], c_um: [0]}}\n"
                        "  silicon: {catalogue: silicon}\n",
                        &document);
  assert_int_equal(pk_materials_count(p->materials), 4);
  check_index(p, "a", 1.5, 0, 20);
  check_index(p, "b", 1.5, 0.25, 20);
  check_index(p, "b", 1.4, 0.25, 120);
  check_index(p, "c", 1.5, 0, 20); /* 1 + 1.25 = 1.5 squared, without a resonance */
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

/* A slab may name a material below it, and a slab of slabs too. */
static void takes_any_order(void **state) {
  (void)state;
  static const char *const texts[] = {
      FORMAT
      "materials:\n"
      "  outer: {slab: {substrate: oxide, films: [{fill: inner, thickness_nm: 300}], "
      "cover: oxide, polarization: te}}\n"
      "  inner: {slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], "
      "cover: oxide, polarization: te}}\n"
      "  oxide: {constant: {index: 1.45}}\n"
      "  core: {constant: {index: 3.5}}\n",
      FORMAT
      "materials:\n"
      "  core: {constant: {index: 3.5}}\n"
      "  oxide: {constant: {index: 1.45}}\n"
      "  inner: {slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], "
      "cover: oxide, polarization: te}}\n"
      "  outer: {slab: {substrate: oxide, films: [{fill: inner, thickness_nm: 300}], "
      "cover: oxide, polarization: te}}\n",
  };
  picket_context *context = plain_context();
  double complex found[2];
  for (int i = 0; i < 2; i++) {
    pk_document *document = NULL;
    pk_problem *p = sound(context, texts[i], &document);
    pk_medium medium;
    int outer = pk_materials_find(p->materials, "outer");
    assert_int_equal(pk_materials_at(p->materials, outer, 1.55, 20, &medium), PICKET_OK);
    found[i] = medium.permittivity;
    pk_problem_free(p);
    pk_document_free(document);
  }
  assert_true(found[0] == found[1]);
  assert_true(creal(found[0]) > 1.45 * 1.45 && creal(found[0]) < 3.5 * 3.5);
  picket_context_free(context);
}

/* A table is looked for beside the problem file, not in the working directory. */
static void finds_the_table_beside_the_file(void **state) {
  (void)state;
  char folder[] = "/tmp/picket-test-XXXXXX";
  assert_non_null(mkdtemp(folder));
  char table[100];
  char problem[100];
  snprintf(table, sizeof table, "%s/metal.csv", folder);
  snprintf(problem, sizeof problem, "%s/a.yaml", folder);
  FILE *file = fopen(table, "w");
  assert_non_null(file);
  fputs("wavelength_nm,n,k\n1400,0.5,9\n1500,0.5,9\n1550,0.5,9.5\n1600,0.5,10\n", file);
  fclose(file);
  file = fopen(problem, "w");
  assert_non_null(file);
  fputs(FORMAT "materials: {metal: {table: {csv: metal.csv}}}\n", file);
  fclose(file);
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = NULL;
  assert_int_equal(pk_document_read_file(context, problem, &document), PICKET_OK);
  assert_int_equal(pk_problem_read(context, document, &p), PICKET_OK);
  check_index(p, "metal", 0.5, 9.5, 20);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
  assert_int_equal(remove(table) + remove(problem) + remove(folder), 0);
}

static void limits_the_number_of_materials(void **state) {
  (void)state;
  char text[201 * 40 + 100] = FORMAT "materials:\n";
  for (int i = 0; i < 201; i++) {
    size_t used = strlen(text);
    snprintf(text + used, sizeof text - used, "  m%d: {constant: {index: 2}}\n", i);
  }
  bad_text row = {PICKET_ERROR_INPUT, "3:3", "materials has 201 entries, must be at most 200", text,
                  strlen(text)};
  check_refused(&row);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_materials),
      cmocka_unit_test(understands_formulas),
      cmocka_unit_test(takes_any_order),
      cmocka_unit_test(finds_the_table_beside_the_file),
      cmocka_unit_test(limits_the_number_of_materials),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
