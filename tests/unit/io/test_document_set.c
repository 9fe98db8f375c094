/* Setting values by dotted paths: where they land, and that a failed set leaves no trace. */
#include <stdlib.h>

#include "io/document.h"
#include "reading.h"
#include "unit/short_memory.h"

static const char start[] =
    "format: 1\n"
    "cell:\n"
    "  pitch_nm: 300\n"
    "  shapes:\n"
    "    - rect: {fill: si, length_nm: 150}\n"
    "    - disc: {fill: si, diameter_nm: 90}\n"
    "slab:\n"
    "path: [{at: [0, 0]}, {at: [1, 0]}]\n";

static pk_document *make(picket_context *context) {
  pk_document *document = NULL;
  assert_int_equal(pk_document_read_text(context, start, sizeof start - 1, "a.yaml", &document),
                   PICKET_OK);
  return document;
}

/* The tree as flow YAML: equal texts mean equal trees. */
static void write_node(const pk_node *node, char *out, size_t size) {
  size_t used = strlen(out);
  if (node->key) {
    snprintf(out + used, size - used, "%s: ", node->key);
  }
  used = strlen(out);
  if (node->kind == PK_NODE_TEXT) {
    snprintf(out + used, size - used, "%s", node->text);
    return;
  }
  bool is_list = node->kind == PK_NODE_LIST;
  snprintf(out + used, size - used, is_list ? "[" : "{");
  int count = 0;
  for (const pk_node *child = node->first; child; child = child->next) {
    assert_ptr_equal(child->parent, node);
    if (count++ > 0) {
      strncat(out, ", ", size - strlen(out) - 1);
    }
    write_node(child, out, size);
    assert_true(child->next || child == node->last);
  }
  assert_int_equal(count, node->count);
  strncat(out, is_list ? "]" : "}", size - strlen(out) - 1);
}

static void check_tree(const pk_document *document, const char *expected) {
  char text[2000] = "";
  write_node(pk_document_root(document), text, sizeof text);
  assert_string_equal(text, expected);
}

#define SHAPES_BEFORE "{rect: {fill: si, length_nm: 150}}, {disc: {fill: si, diameter_nm: 90}}"
#define PATH_BEFORE "[{at: [0, 0]}, {at: [1, 0]}]"

static void sets_every_form_of_path(void **state) {
  (void)state;
  static const struct {
    const char *path, *value, *tree;
  } rows[] = {
      {"cell.pitch_nm", "310",
       "{format: 1, cell: {pitch_nm: 310, shapes: [" SHAPES_BEFORE "]}, slab: , path: " PATH_BEFORE
       "}"},
      {"cell.shapes.0.rect.length_nm", "99",
       "{format: 1, cell: {pitch_nm: 300, shapes: [{rect: {fill: si, length_nm: 99}}, {disc: "
       "{fill: si, diameter_nm: 90}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.0.length_nm", "99",
       "{format: 1, cell: {pitch_nm: 300, shapes: [{rect: {fill: si, length_nm: 99}}, {disc: "
       "{fill: si, diameter_nm: 90}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.1.at_nm", "[1, 2]", /* a key that is not there yet, its kind left out */
       "{format: 1, cell: {pitch_nm: 300, shapes: [{rect: {fill: si, length_nm: 150}}, {disc: "
       "{fill: si, diameter_nm: 90, at_nm: [1, 2]}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.1.at_nm.0", "7", /* and a list under it made on the way */
       "{format: 1, cell: {pitch_nm: 300, shapes: [{rect: {fill: si, length_nm: 150}}, {disc: "
       "{fill: si, diameter_nm: 90, at_nm: [7]}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.2", "{rect: {fill: x}}", /* one past the end */
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
       ", {rect: {fill: x}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.2.disc.fill", "x",
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
       ", {disc: {fill: x}}]}, slab: , path: " PATH_BEFORE "}"},
      {"cell.shapes.0", "{}", /* the first of a list replaced */
       "{format: 1, cell: {pitch_nm: 300, shapes: [{}, {disc: {fill: si, diameter_nm: 90}}]}, "
       "slab: "
       ", path: " PATH_BEFORE "}"},
      {"path.1.at.0", "0.5",
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
       "]}, slab: , path: [{at: [0, 0]}, {at: [0.5, 0]}]}"},
      {"materials.oxide", "{catalogue: silica}", /* a missing block */
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE "]}, slab: , path: " PATH_BEFORE
       ", materials: {oxide: {catalogue: silica}}}"},
      {"slab.films.0.fill", "si", /* an empty value becomes a block, a missing list is made */
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
       "]}, slab: {films: [{fill: si}]}, path: " PATH_BEFORE "}"},
      {"path", "[]", /* the last key */
       "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE "]}, slab: , path: []}"},
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    pk_document *document = make(context);
    assert_int_equal(pk_document_set(document, "set it", rows[i].path, rows[i].value), PICKET_OK);
    check_tree(document, rows[i].tree);
    pk_document_free(document);
  }
  picket_context_free(context);
}

static void refuses_and_leaves_unchanged(void **state) {
  (void)state;
  static const struct {
    const char *path, *value, *message;
  } rows[] = {
      {"", "1", "set it: path \"\" has an empty piece; write it like cell.pitch_nm"},
      {".", "1", "set it: path \".\" has an empty piece; write it like cell.pitch_nm"},
      {"cell.", "1", "set it: path \"cell.\" has an empty piece; write it like cell.pitch_nm"},
      {"cell..a", "1", "set it: path \"cell..a\" has an empty piece; write it like cell.pitch_nm"},
      {"cell.shapes.3", "1",
       "set it: path \"cell.shapes.3\": element 3 is past the end of the list, must be 0 to 2"},
      {"cell.shapes.-1", "1",
       "set it: path \"cell.shapes.-1\": \"-1\" must be the number of a list element, 0 to 2"},
      {"cell.shapes.+1", "1",
       "set it: path \"cell.shapes.+1\": \"+1\" must be the number of a list element, 0 to 2"},
      {"cell.shapes.01", "1",
       "set it: path \"cell.shapes.01\": \"01\" must be the number of a list element, 0 to 2"},
      {"cell.shapes.rect", "1",
       "set it: path \"cell.shapes.rect\": \"rect\" must be the number of a list element, 0 to 2"},
      {"cell.pitch_nm.x", "1",
       "set it: path \"cell.pitch_nm.x\" goes into cell.pitch_nm, which is the single value 300"},
      {"cell.pitch_nm", "", "set it: there is nothing in it"},
      {"cell.pitch_nm", "# 3", "set it: there is nothing in it"},
      {"cell.pitch_nm", "[1, 2", "set it: a ',' or ']' is missing here"},
      {"cell.pitch_nm", "{a: 1, a: 2}", "set it: key \"a\" is given twice"},
      {"cell.pitch_nm", "&a 3", "set it: anchors (&...) are not used in problem files"},
      {"cell.pitch_nm", "\xff", "set it: byte 0xff is not UTF-8 text; is this a binary file?"},
      {"cell.\xff", "1", "set it: byte 0xff is not UTF-8 text; is this a binary file?"},
      {"a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a", "1",
       "set it: path \"a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a....\" has "
       "more "
       "than 32 pieces"},
  };
  picket_context *context = plain_context();
  pk_document *document = make(context);
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    assert_int_equal(pk_document_set(document, "set it", rows[i].path, rows[i].value),
                     PICKET_ERROR_INPUT);
    assert_string_equal(picket_context_message(context), rows[i].message);
    check_tree(document, "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
                         "]}, slab: , path: " PATH_BEFORE "}");
  }
  pk_document_free(document);
  picket_context_free(context);
}

static void knows_where_a_value_came_from(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = make(context);
  char label[] = "set cell.pitch_nm"; /* copied: the caller's buffer may go */
  assert_int_equal(pk_document_set(document, label, "cell.pitch_nm", "310"), PICKET_OK);
  memset(label, 'x', sizeof label - 1);
  const pk_node *cell = pk_node_get(pk_document_root(document), "cell");
  const pk_node *pitch = pk_node_get(cell, "pitch_nm");
  assert_string_equal(pitch->place.file, "set cell.pitch_nm");
  assert_int_equal(pitch->place.line, 0);
  assert_string_equal(cell->place.file, "a.yaml");
  assert_int_equal(cell->place.line, 3);
  assert_string_equal(pk_node_path(pitch).text, "cell.pitch_nm");
  const pk_node *disc = pk_node_element(pk_node_get(cell, "shapes"), 1)->first;
  assert_string_equal(pk_node_path(disc->first).text, "cell.shapes.1.disc.fill");
  pk_document_free(document);
  picket_context_free(context);
}

/* A study that varies a value sets it thousands of times: the document must not grow. */
static void does_not_grow_when_set_again(void **state) {
  (void)state;
  short_memory memory = {0, 0, 0};
  picket_context *context = short_memory_context(&memory);
  pk_document *document = make(context);
  assert_int_equal(pk_document_set(document, "set a", "cell.pitch_nm", "1"), PICKET_OK);
  long living = memory.living;
  for (int i = 0; i < 100; i++) {
    assert_int_equal(pk_document_set(document, "set a", "cell.pitch_nm", "2"), PICKET_OK);
  }
  assert_int_equal(memory.living, living);
  pk_document_free(document);
  picket_context_free(context);
  assert_int_equal(memory.living, 0);
}

static void survives_every_failed_allocation(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0, 0, 0};
    picket_context *context = short_memory_context(&memory);
    pk_document *document = make(context);
    memory.fail_at = memory.asked + n;
    status = pk_document_set(document, "set it", "slab.films.0", "{fill: si, thickness_nm: 220}");
    if (status != PICKET_OK) {
      assert_int_equal(status, PICKET_ERROR_MEMORY);
      check_tree(document, "{format: 1, cell: {pitch_nm: 300, shapes: [" SHAPES_BEFORE
                           "]}, slab: , path: " PATH_BEFORE "}");
    } else {
      assert_true(n > 10);
    }
    pk_document_free(document);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(sets_every_form_of_path),
      cmocka_unit_test(refuses_and_leaves_unchanged),
      cmocka_unit_test(knows_where_a_value_came_from),
      cmocka_unit_test(does_not_grow_when_set_again),
      cmocka_unit_test(survives_every_failed_allocation),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
