/* The two-dimensional models of a channel as blocks of a problem file. */
#include "api/channel_models.h"

#include "io/read.h"
#include "unit/study/understood.h"

#include <picket/edges.h>

#define ROW                                                                                     \
  "format: 1\n"                                                                                 \
  "materials: {oxide: {constant: {index: 1.444}}, si: {constant: {index: 3.4757}}}\n"           \
  "channel: {pitch_nm: 300, cladding: oxide, shapes: [{stripe: {fill: si, across: y, from_nm: " \
  "-.inf, to_nm: -2000}}, {rect: {fill: si, width_nm: 450, height_nm: 220, at_nm: [20, 110], "  \
  "along_nm: [-75, 75]}}]}\n"

static pk_problem *model_of(picket_context *context, const char *text, bool cell,
                            picket_status expected) {
  understood u = understand_good(context, text);
  pk_document *document = NULL;
  pk_problem *model = NULL;
  assert_int_equal(pk_document_read_text(context, text, strlen(text), "row", &document), PICKET_OK);
  picket_status status = cell ? pk_channel_model_cell(u.problem, PK_HY, document)
                              : pk_channel_model_section(u.problem, document);
  assert_int_equal(status, expected);
  if (status == PICKET_OK && pk_problem_read(context, document, &model) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  pk_document_free(document);
  picket_problem_free(u.owner);
  return model;
}

/* The tooth becomes a rectangle of a slab's index, as long and as wide, at its place. */
static void draws_the_cell(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  pk_problem *m = model_of(context, ROW, true, PICKET_OK);
  assert_true(m->has_cell);
  assert_near(m->cell.pitch_um, 0.3, 1e-12);
  int tooth = pk_geometry_medium_at(m->cell.geometry, 0.07, 0.24);
  int gap = pk_geometry_medium_at(m->cell.geometry, 0.08, 0.24);
  int side = pk_geometry_medium_at(m->cell.geometry, 0, 0.25);
  assert_true(tooth != gap && tooth != side);
  pk_medium index = {0};
  assert_int_equal(pk_materials_at(m->materials, tooth, 1.55, 20, &index), PICKET_OK);
  double n = sqrt(creal(index.permittivity));
  assert_true(n > 2.7 && n < 3.0); /* te slab of 220 nm: 2.85 */
  pk_problem_free(m);
  picket_context_free(context);
}

/* The row becomes a layered core with the zz entry below the others; the substrate stays. */
static void draws_the_section(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  pk_problem *m = model_of(context, ROW, false, PICKET_OK);
  assert_true(m->section.given);
  int core = pk_geometry_medium_at(m->section.geometry, 0.2, 0.2);
  assert_true(pk_materials_is_layered(m->materials, core));
  assert_int_equal(pk_geometry_medium_at(m->section.geometry, 0.2, 0.23), 0);
  assert_int_equal(pk_geometry_medium_at(m->section.geometry, 0.25, 0.2), 0);
  assert_int_equal(pk_geometry_medium_at(m->section.geometry, 0, -2.1), 1);
  pk_medium tensor[3];
  assert_int_equal(pk_materials_tensor_at(m->materials, core, 1.55, 20, tensor), PICKET_OK);
  assert_true(creal(tensor[2].permittivity) < creal(tensor[0].permittivity));
  pk_problem_free(m);
  picket_context_free(context);
}

static void declines_curved_shapes_and_cells(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  static const char disc[] =
      "format: 1\n"
      "materials: {oxide: {constant: {index: 1.444}}, si: {constant: {index: 3.4757}}}\n"
      "channel: {pitch_nm: 300, cladding: oxide, shapes: [{disc: {fill: si, diameter_nm: 300, "
      "along_nm: [-75, 75]}}]}\n";
  assert_null(model_of(context, disc, true, PICKET_ERROR_UNSUPPORTED));
  assert_null(model_of(context, disc, false, PICKET_ERROR_UNSUPPORTED));
  static const char cell[] =
      "format: 1\n"
      "materials: {oxide: {constant: {index: 1.444}}}\n"
      "cell: {pitch_nm: 300, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: oxide, "
      "across: z, from_nm: 0, to_nm: 10}}]}\n";
  understood u = understand_good(context, cell);
  picket_result *result = NULL;
  assert_int_equal(picket_edges_compare(u.owner, NULL, &result), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "has a cell"));
  assert_int_equal(picket_edges_compare(NULL, NULL, &result), PICKET_ERROR_ARGUMENT);
  assert_int_equal(picket_edges_compare(u.owner, NULL, NULL), PICKET_ERROR_ARGUMENT);
  assert_null(result);
  picket_edge_comparison c;
  assert_int_equal(picket_edges_comparison_count(NULL), 0);
  assert_int_equal(picket_edges_comparison_get(NULL, 0, &c), PICKET_ERROR_ARGUMENT);
  picket_problem_free(u.owner);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(draws_the_cell),
      cmocka_unit_test(draws_the_section),
      cmocka_unit_test(declines_curved_shapes_and_cells),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
