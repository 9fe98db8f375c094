/* Reading a document: what stands where in the tree, and every text that is no problem file. */
#include <stdlib.h>
#include <sys/stat.h>
#include <unistd.h>

#include "io/document.h"
#include "reading.h"
#include "unit/short_memory.h"

static const bad_text bad_texts[] = {
    REFUSED("1:1", "there is nothing in it", ""),
    REFUSED("1:1", "there is nothing in it", "# only a comment\n"),
    REFUSED("1:1", "a problem file is a block of keys", "just words\n"),
    REFUSED("1:1", "a problem file is a block of keys",
            "- 1\n"
            "- 2\n"),
    REFUSED("2:7", "byte 0xff is not UTF-8", FORMAT "name: \377\n"),
    REFUSED("2:8", "control character 0x00", FORMAT "name: a\000b\n"),
    REFUSED("2:7", "control character 0x1b", FORMAT "name: \033[31m\n"),
    REFUSED("2:7", "the text holds the control character 0x00", FORMAT "name: \"a\\0b\"\n"),
    REFUSED("2:7", "the text holds the control character 0x1b", FORMAT "name: \"a\\eb\"\n"),
    REFUSED("2:1", "a second document begins here",
            FORMAT "---\n"
                   "format: 1\n"),
    REFUSED("2:7", "anchors (&...) are not used", FORMAT "name: &a x\n"),
    REFUSED("2:7", "anchors (&...) are not used", FORMAT "slab: &a {substrate: x}\n"),
    REFUSED("2:7", "aliases (*...) are not used", FORMAT "name: *a\n"),
    REFUSED("2:7", "tags (!...) are not used", FORMAT "name: !!str x\n"),
    REFUSED("2:7", "tags (!...) are not used", FORMAT "slab: !x {substrate: x}\n"),
    REFUSED("2:7", "tags (!...) are not used", FORMAT "path: !x [1]\n"),
    REFUSED("1:1", "%TAG lines are not used",
            "%TAG ! tag:x,2000:\n"
            "---\n"
            "format: 1\n"),
    REFUSED("3:1", "key \"name\" was already given on line 2",
            FORMAT "name: a\n"
                   "name: b\n"),
    REFUSED("2:3", "a key must be one word",
            FORMAT "? [1, 2]\n"
                   ": 3\n"),
    REFUSED("2:3", "a key must be one word",
            FORMAT "? {a: b}\n"
                   ": 3\n"),
    REFUSED("2:1", "a key must stand here", FORMAT ": 3\n"),
    REFUSED("2:9", "a value is missing here", FORMAT "light: {: 3}\n"),
    REFUSED("2:1", "a key is missing before the ':'", FORMAT "\"\": 3\n"),
    REFUSED("6:1", "missing here",
            FORMAT "path:\n"
                   "- 1\n"
                   " -2\n"
                   "- [3\n"),
    REFUSED("2:7", "a list cannot begin with '-' here", FORMAT "path: - 1\n"),
    REFUSED("4:3", "the next '-' of the list must stand here",
            FORMAT "path:\n"
                   "  - 1\n"
                   "  x: 1\n"),
    REFUSED("2:11", "a value is missing here", FORMAT "name: [a, }\n"),
    REFUSED("2:14", "must stand here", FORMAT "light: {a: 1}}\n"),
    REFUSED("3:1", "a ',' or ']' is missing here", FORMAT "path: [1, 2\n"),
    REFUSED("3:1", "a ',' or '}' is missing here", FORMAT "light: {polarization: hy\n"),
    REFUSED("2:8", "a ':' is not possible here", FORMAT "name: a: b\n"),
    REFUSED("2:1", "this line has no ':' behind its key", FORMAT "name\n"),
    REFUSED("2:7", "the quotes that begin here are never closed", FORMAT "name: \"a\n"),
    REFUSED("2:7", "a value cannot begin with this character", FORMAT "name: @a\n"),
    REFUSED("3:1", "a value cannot begin with this character",
            FORMAT "cell:\n"
                   "\011pitch_nm: 300\n"),
    REFUSED("2:7", "a ':' is not possible here", FORMAT "  name: a\n"),
    REFUSED("2:8", "unknown escape behind", FORMAT "name: \"\\q\"\n"),
};

static void refuses_bad_texts(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_texts);
}

static pk_document *parse(picket_context *context, const char *text) {
  pk_document *document = NULL;
  assert_int_equal(pk_document_read_text(context, text, strlen(text), "a.yaml", &document),
                   PICKET_OK);
  return document;
}

static void check_place(pk_place place, int line, int column) {
  assert_string_equal(place.file, "a.yaml");
  assert_int_equal(place.line, line);
  assert_int_equal(place.column, column);
}

static void keeps_values_and_places(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = parse(context,
                                "a: 1\n"
                                "\xce\x93\xce\x93: \"1\" # columns count letters, not bytes\n"
                                "list:\n"
                                "  - x\n"
                                "  - {k: 'v w'}\n"
                                "none:\n"
                                "long: |\n"
                                "  two\n"
                                "  lines\n");
  const pk_node *root = pk_document_root(document);
  assert_int_equal(root->kind, PK_NODE_MAP);
  assert_int_equal(root->count, 5);
  const pk_node *a = pk_node_get(root, "a");
  assert_string_equal(a->text, "1");
  assert_false(a->quoted);
  check_place(a->place, 1, 4);
  check_place(a->key_place, 1, 1);
  const pk_node *gamma = pk_node_get(root, "\xce\x93\xce\x93");
  assert_true(gamma->quoted);
  check_place(gamma->place, 2, 5);
  const pk_node *list = pk_node_get(root, "list");
  assert_int_equal(list->kind, PK_NODE_LIST);
  assert_int_equal(list->count, 2);
  const pk_node *v = pk_node_element(list, 1)->first;
  assert_string_equal(v->text, "v w");
  check_place(v->place, 5, 9);
  assert_string_equal(pk_node_path(v).text, "list.1.k");
  assert_null(pk_node_element(list, 2));
  assert_true(pk_node_is_empty(pk_node_get(root, "none")));
  assert_string_equal(pk_node_get(root, "long")->text, "two\nlines\n");
  assert_null(pk_node_get(root, "A"));
  assert_null(pk_node_get(a, "a"));
  pk_document_free(document);
  picket_context_free(context);
}

static void reads_what_other_editors_write(void **state) {
  (void)state;
  static const char *const texts[] = {
      "\357\273\277format: 1\nname: a\n", /* byte order mark */
      "format: 1\r\nname: a\r\n",         /* line ends of another system */
      "%YAML 1.1\n---\nformat: 1\nname: a\n...\n",
      "{format: 1, name: a}",
      "{\"format\": 1, \"name\": \"a\"}", /* JSON */
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
    pk_document *document = parse(context, texts[i]);
    assert_string_equal(pk_node_get(pk_document_root(document), "name")->text, "a");
    pk_document_free(document);
  }
  picket_context_free(context);
}

/* A text of `count` times `piece` between `start` and `end`. */
static char *repeated(const char *start, const char *piece, size_t count, const char *end) {
  size_t step = strlen(piece);
  char *text = malloc(strlen(start) + count * step + strlen(end) + 1);
  assert_non_null(text);
  strcpy(text, start);
  char *at = text + strlen(start);
  for (size_t i = 0; i < count; i++, at += step) {
    memcpy(at, piece, step);
  }
  strcpy(at, end);
  return text;
}

static void check_hostile(char *text, const char *message) {
  picket_context *context = plain_context();
  pk_document *document = NULL;
  assert_int_equal(pk_document_read_text(context, text, strlen(text), "a.yaml", &document),
                   PICKET_ERROR_INPUT);
  assert_string_equal(picket_context_message(context), message);
  picket_context_free(context);
  free(text);
}

static void refuses_hostile_texts(void **state) {
  (void)state;
  check_hostile(repeated("", "[", 10000000, ""),
                "a.yaml: the text has 10000000 bytes, must be at most 4000000");
  check_hostile(repeated("", "[", 3999999, ""),
                "a.yaml:1:33: lists and blocks are nested deeper than 32");
  check_hostile(repeated("", "{a: ", 900000, ""),
                "a.yaml:1:129: lists and blocks are nested deeper than 32");
  check_hostile(repeated("", "- ", 1900000, ""),
                "a.yaml:1:65: lists and blocks are nested deeper than 32");
  check_hostile(repeated("a: [", "1,", 1900000, "]"),
                "a.yaml:1:400001: the file has more than 200000 values");
  char *keys = calloc(1002, 8);
  assert_non_null(keys);
  for (int i = 0; i < 1001; i++) {
    char line[32];
    snprintf(line, sizeof line, "k%04d: \n", i); /* an empty value */
    memcpy(keys + (size_t)i * 8, line, 8);
  }
  check_hostile(keys, "a.yaml:1001:1: the block has more than 1000 keys");
}

static void nesting_of_32_is_allowed(void **state) {
  (void)state;
  picket_context *context = plain_context();
  char *text = repeated("a: ", "[", 31, "1]]]]]]]]]]]]]]]]]]]]]]]]]]]]]]]");
  pk_document *document = parse(context, text);
  pk_document_free(document);
  free(text);
  picket_context_free(context);
}

static void check_file(const char *path, picket_status expected, const char *words) {
  picket_context *context = plain_context();
  pk_document *document = NULL;
  picket_status status = pk_document_read_file(context, path, &document);
  assert_int_equal(status, expected);
  if (status == PICKET_OK) {
    assert_string_equal(pk_document_folder(document), words);
  } else {
    assert_null(document);
    if (!strstr(picket_context_message(context), words)) {
      fail_msg("%s lacks: %s", picket_context_message(context), words);
    }
  }
  pk_document_free(document);
  picket_context_free(context);
}

static void reads_files(void **state) {
  (void)state;
  char folder[] = "/tmp/picket-test-XXXXXX";
  assert_non_null(mkdtemp(folder));
  char path[100];
  snprintf(path, sizeof path, "%s/a.yaml", folder);
  check_file(path, PICKET_ERROR_FILE, "a.yaml: the file cannot be read: there is no such file");
  check_file(folder, PICKET_ERROR_FILE, ": the file cannot be read: it is a folder");
  FILE *file = fopen(path, "wb");
  assert_non_null(file);
  fputs("format: 1\n", file);
  fclose(file);
  char expected[100];
  snprintf(expected, sizeof expected, "%s/", folder);
  check_file(path, PICKET_OK, expected);
  if (geteuid() != 0) { /* the superuser may read everything */
    assert_int_equal(chmod(path, 0), 0);
    check_file(path, PICKET_ERROR_FILE, "the file cannot be read: reading it is not permitted");
  }
  snprintf(path + strlen(path), sizeof path - strlen(path), "/b.yaml");
  check_file(path, PICKET_ERROR_FILE, "a part of its path is not a folder");
  path[strlen(path) - strlen("/b.yaml")] = '\0';
  assert_int_equal(remove(path), 0);
  assert_int_equal(remove(folder), 0);
  /* Endless, and binary from its first byte: the limit is met before anything is looked at. */
  check_file("/dev/zero", PICKET_ERROR_FILE, "/dev/zero: the file is longer than 4000000 bytes");
  check_file("/dev/null", PICKET_ERROR_INPUT, "/dev/null:1:1: there is nothing in it");
}

static void survives_every_failed_allocation(void **state) {
  (void)state;
  static const char text[] = "format: 1\ncell: {shapes: [{rect: {fill: 'a'}}, 3]}\n";
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0, 0, 0};
    picket_context *context = short_memory_context(&memory);
    pk_document *document = NULL;
    memory.fail_at = memory.asked + n;
    status = pk_document_read_text(context, text, sizeof text - 1, "a.yaml", &document);
    assert_int_equal(status, document ? PICKET_OK : PICKET_ERROR_MEMORY);
    assert_true(status != PICKET_OK || n > 15);
    pk_document_free(document);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_texts),
      cmocka_unit_test(keeps_values_and_places),
      cmocka_unit_test(reads_what_other_editors_write),
      cmocka_unit_test(refuses_hostile_texts),
      cmocka_unit_test(nesting_of_32_is_allowed),
      cmocka_unit_test(reads_files),
      cmocka_unit_test(survives_every_failed_allocation),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
