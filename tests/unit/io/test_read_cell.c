/* cell: the frame of one period. */
#include "reading.h"
#include "unit/near.h"

static const bad_text bad_cell[] = {
    REFUSED("2:6", "cell is empty, must be a block of keys", FORMAT "cell:\n"),
    REFUSED("3:7", "cell has no \"pitch_nm\"", MATERIALS "cell: {}\n"),
    REFUSED("3:18", "cell.pitch_nm is 0, must be above 0",
            MATERIALS "cell: {pitch_nm: 0, cladding: oxide, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
    REFUSED("3:18", "cell.pitch_nm is 1.1e6, must be above 0 and at most 1000000 nm",
            MATERIALS "cell: {pitch_nm: 1.1e6, cladding: oxide, shapes: [{rect: {fill: si, "
                      "length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:33", "cell.cladding is \"air\", which is not in materials",
            MATERIALS "cell: {pitch_nm: 300, cladding: air, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
    REFUSED("3:49",
            "cell.lateral is \"opne\", must be one of: open, periodic, uniform, electric, magnetic",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: opne, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:7", "cell has no \"lateral_span_nm\", which lateral: periodic needs",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:7", "cell has no \"lateral_span_nm\", which lateral: electric needs",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: electric, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:7", "cell has no \"lateral_span_nm\", which lateral: magnetic needs",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: magnetic, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:57", "cell.lateral_span_nm is -1, must be above 0",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral_span_nm: -1, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:55", "cell.lateral_shift is 0.5, must be 0 unless lateral is periodic",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral_shift: 0.5, shapes: [{rect: "
                      "{fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:96", "cell.lateral_shift is 1, must be at least 0 and below 1",
            MATERIALS
            "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, lateral_span_nm: 600, "
            "lateral_shift: 1, shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:96", "cell.lateral_shift is -0.5, must be",
            MATERIALS
            "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, lateral_span_nm: 600, "
            "lateral_shift: -0.5, shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:96", "cell.lateral_shift is 0.51, must be a fraction p/q with q at most 12",
            MATERIALS
            "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, lateral_span_nm: 600, "
            "lateral_shift: 0.51, shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED(
        "3:96", "cell.lateral_shift is 0.3333, must be a fraction",
        MATERIALS
        "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, lateral_span_nm: 600, "
        "lateral_shift: 0.3333, shapes: [{rect: {fill: si, length_nm: 150, width_nm: 450}}]}\n"),
    REFUSED("3:96", "cell.lateral_shift is 0.9999999999, must be a fraction",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: periodic, lateral_span_nm: "
                      "600, lateral_shift: 0.9999999999, shapes: [{rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}]}\n"),
};

static void refuses_bad_cells(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_cell);
}

#define RECT "shapes: [{rect: {fill: si, length_nm: 150, width_nm: 100}}]}\n"
#define START MATERIALS "cell: {pitch_nm: 310, cladding: oxide, "

static void understands_every_side(void **state) {
  (void)state;
  static const struct {
    const char *text;
    pk_lateral lateral;
    double span_um, half_um, shift;
  } rows[] = {
      {START RECT, PK_LATERAL_OPEN, 0, INFINITY, 0},
      {START "lateral: open, " RECT, PK_LATERAL_OPEN, 0, INFINITY, 0},
      /* The span of an open cell is a wish for the grid; its plane stays unbounded. */
      {START "lateral_span_nm: 4000, lateral_shift: 0, " RECT, PK_LATERAL_OPEN, 4, INFINITY, 0},
      {START "lateral: electric, lateral_span_nm: 4000, " RECT, PK_LATERAL_ELECTRIC, 4, 2, 0},
      {START "lateral: magnetic, lateral_span_nm: 4000, " RECT, PK_LATERAL_MAGNETIC, 4, 2, 0},
      {START "lateral: periodic, lateral_span_nm: 600, " RECT, PK_LATERAL_PERIODIC, 0.6, 0.3, 0},
      {START "lateral: periodic, lateral_span_nm: 600, lateral_shift: 0.5, " RECT,
       PK_LATERAL_PERIODIC, 0.6, 0.3, 0.5},
      /* Ten threes are meant as a third, and become one. */
      {START "lateral: periodic, lateral_span_nm: 600, lateral_shift: 0.3333333333, " RECT,
       PK_LATERAL_PERIODIC, 0.6, 0.3, 1.0 / 3},
      {START "lateral: uniform, "
             "shapes: [{stripe: {fill: si, across: z, from_nm: 0, to_nm: 100}}]}\n",
       PK_LATERAL_UNIFORM, 0, INFINITY, 0},
      /* The span of a stack is the unit of k_x. */
      {START "lateral: uniform, lateral_span_nm: 600, "
             "shapes: [{stripe: {fill: si, across: z, from_nm: 0, to_nm: 100}}]}\n",
       PK_LATERAL_UNIFORM, 0.6, INFINITY, 0},
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    pk_document *document = NULL;
    pk_problem *p = sound(context, rows[i].text, &document);
    const pk_frame *frame = pk_geometry_frame(p->cell.geometry);
    assert_true(p->has_cell);
    assert_near(p->cell.pitch_um, 0.31, 0);
    assert_int_equal(p->cell.lateral, rows[i].lateral);
    assert_near(p->cell.span_um, rows[i].span_um, 0);
    assert_near(p->cell.shift, rows[i].shift, 0);
    assert_near(frame->from[PK_U], -0.155, 0);
    assert_near(frame->to[PK_U], 0.155, 0);
    assert_true(frame->from[PK_V] == -rows[i].half_um && frame->to[PK_V] == rows[i].half_um);
    assert_true(frame->periodic[PK_U]);
    assert_int_equal(frame->periodic[PK_V], rows[i].lateral == PK_LATERAL_PERIODIC);
    assert_near(frame->shift, rows[i].shift * 0.31, 0);
    assert_int_equal(frame->background, pk_materials_find(p->materials, "oxide"));
    pk_problem_free(p);
    pk_document_free(document);
  }
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_cells),
      cmocka_unit_test(understands_every_side),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
