/* path: points in the zone. */
#include "reading.h"
#include "unit/near.h"

static const bad_text bad_path[] = {
    REFUSED("2:7", "path is a block, must be a list of 2 to 1000 points",
            FORMAT "path: {at: [0, 0]}\n"),
    REFUSED("2:7", "path has 1 element, must be a list of 2 to 1000 points",
            FORMAT "path: [{at: [0, 0]}]\n"),
    REFUSED("2:23", "unknown key \"att\" in path.1; did you mean \"at\"?",
            FORMAT "path: [{at: [0, 0]}, {att: [1, 0]}]\n"),
    REFUSED("2:22", "path.1 has no \"at\"", FORMAT "path: [{at: [0, 0]}, {label: X}]\n"),
    REFUSED("2:27", "path.1.at has 1 element, must be a list of 2 numbers",
            FORMAT "path: [{at: [0, 0]}, {at: [1]}]\n"),
    REFUSED("2:28", "path.1.at.0 is 200, must be at least -100",
            FORMAT "path: [{at: [0, 0]}, {at: [200, 0]}]\n"),
    REFUSED("2:22", "path.1 repeats the point before it",
            FORMAT "path: [{at: [0, 0]}, {at: [0, 0]}]\n"),
    REFUSED("4:31", "path.1.at.1 is 1, must be 0 unless cell.lateral is periodic",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"
                      "path: [{at: [0, 0]}, {at: [1, 1]}]\n"),
};

static void refuses_bad_path(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_path);
}

static void understands_points(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(
      context, FORMAT "path: [{at: [0, 0], label: \"\316\223\"}, {at: [1, -0.5]}]\n", &document);
  assert_int_equal(p->path.count, 2);
  assert_string_equal(p->path.point[0].label, "\316\223");
  assert_null(p->path.point[1].label);
  assert_near(p->path.point[1].at[0], 1, 0);
  assert_near(p->path.point[1].at[1], -0.5, 0);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_path),
      cmocka_unit_test(understands_points),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
