/* shapes: where the paint of each kind lands, and what has no place in a cell. */
#include "reading.h"
#include "unit/near.h"

static const bad_text bad_shapes[] = {
    REFUSED("3:48", "cell.shapes has 0 elements, must be a list of 1 to 1000 shapes",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, shapes: []}\n"),
    REFUSED("3:48", "cell.shapes is a block, must be a list",
            MATERIALS "cell: {pitch_nm: 300, cladding: oxide, shapes: {rect: {fill: si, length_nm: "
                      "150, width_nm: 450}}}\n"),
    REFUSED("3:7", "cell has no \"shapes\"", MATERIALS "cell: {pitch_nm: 300, cladding: oxide}\n"),
    REFUSED("7:7",
            "cell.shapes.0 has 0 kinds, must have exactly one of: rect, disc, polygon, stripe",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - {}\n"),
    REFUSED("7:7", "cell.shapes.0 has 2 kinds",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - {rect: {fill: si, length_nm: 150, width_nm: 450}, disc: {fill: si, "
                      "diameter_nm: 10}}\n"),
    REFUSED("7:7", "unknown key \"circle\" in cell.shapes.0; ",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - circle: {fill: si}\n"),
    REFUSED("7:40", "unknown key \"widht_nm\" in cell.shapes.0.rect; did you mean \"width_nm\"?",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 150, widht_nm: 4}\n"),
    REFUSED("7:13", "cell.shapes.0.rect has no \"width_nm\"",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 150}\n"),
    REFUSED("7:35", "cell.shapes.0.rect.length_nm is 0, must be above 0",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 0, width_nm: 4}\n"),
    REFUSED("7:13",
            "cell.shapes.0.rect is longer than one period: it spans z from -150.5 to 150.5 nm, the "
            "cell from -150 to 150 nm",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 301, width_nm: 4}\n"),
    REFUSED("7:13",
            "cell.shapes.0.rect lies wholly outside the cell: it spans z from 150 to 250 nm",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 4, at_nm: [200, 0]}\n"),
    REFUSED("7:60", "cell.shapes.0.rect.at_nm has 1 element, must be a list of 2 numbers",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 4, at_nm: [0]}\n"),
    REFUSED("7:60", "cell.shapes.0.rect.at_nm is a value, must be a list of 2 numbers",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 4, at_nm: 0}\n"),
    REFUSED("7:20",
            "cell.shapes.0.rect.fill is \"gold\", which is not in materials; allowed: oxide, si",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - rect: {fill: gold, length_nm: 100, width_nm: 4}\n"),
    REFUSED("7:37", "cell.shapes.0.disc.diameter_nm is -3, must be above 0",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - disc: {fill: si, diameter_nm: -3}\n"),
    REFUSED("7:13", "cell.shapes.0.disc is longer than one period",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - disc: {fill: si, diameter_nm: 310}\n"),
    REFUSED("7:39",
            "cell.shapes.0.polygon.corners_nm has 2 elements, must be a list of 3 to 1000 corners",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - polygon: {fill: si, corners_nm: [[0, 0], [1, 1]]}\n"),
    REFUSED("7:56", "cell.shapes.0.polygon.corners_nm.2 is a value, must be a list of 2 numbers",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - polygon: {fill: si, corners_nm: [[0, 0], [1, 1], 3]}\n"),
    REFUSED("7:16", "cell.shapes.0.polygon is longer than one period",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - polygon: {fill: si, corners_nm: [[-200, 0], [200, 0], [0, 9]]}\n"),
    REFUSED("9:13",
            "cell.shapes.0.rect reaches outside the cell: it spans x from 200 to 600 nm, the cell "
            "from -500 to 500 nm",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: electric\n"
                      "  lateral_span_nm: 1000\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 400, at_nm: [0, 400]}\n"),
    REFUSED("9:13", "cell.shapes.0.rect lies wholly outside the cell",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: electric\n"
                      "  lateral_span_nm: 1000\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 400, at_nm: [0, 800]}\n"),
    REFUSED("8:13", "cell.shapes.0.rect reaches outside the cell",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral_span_nm: 1000\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 1100}\n"),
    REFUSED("9:13", "cell.shapes.0.rect is longer than one period: it spans x",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: periodic\n"
                      "  lateral_span_nm: 400\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 450}\n"),
    REFUSED("9:13", "cell.shapes.0.rect lies wholly outside the cell: it spans x",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: periodic\n"
                      "  lateral_span_nm: 400\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 100, at_nm: [0, 260]}\n"),
    REFUSED("8:13", "cell.shapes.0.rect has a lateral end, but lateral is uniform",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: uniform\n"
                      "  shapes:\n"
                      "    - rect: {fill: si, length_nm: 100, width_nm: 100}\n"),
    REFUSED("7:34", "cell.shapes.0.stripe.across is \"y\", must be one of: z, x",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: y, from_nm: 0, to_nm: 1}\n"),
    REFUSED("7:57", "cell.shapes.0.stripe.to_nm is 10, must be above from_nm, 10",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: 10, to_nm: 10}\n"),
    REFUSED("7:59", "cell.shapes.0.stripe.to_nm is -.inf, must be above from_nm, .inf",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: .inf, to_nm: -.inf}\n"),
    REFUSED("7:46", "cell.shapes.0.stripe.from_nm is \".nan\"",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: .nan, to_nm: 1}\n"),
    REFUSED("7:15", "cell.shapes.0.stripe across z never ends laterally",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: z, from_nm: -50, to_nm: 50}\n"),
    REFUSED("8:15", "cell.shapes.0.stripe is across x, but lateral is uniform",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: uniform\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: -50, to_nm: 50}\n"),
    REFUSED("8:15", "cell.shapes.0.stripe is endless, but the cell repeats along z",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: uniform\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: z, from_nm: -.inf, to_nm: 50}\n"),
    REFUSED("8:15", "cell.shapes.0.stripe is longer than one period",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: uniform\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: z, from_nm: -200, to_nm: 200}\n"),
    REFUSED("9:15", "cell.shapes.0.stripe is endless, but the cell repeats along x",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: periodic\n"
                      "  lateral_span_nm: 400\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: -.inf, to_nm: 0}\n"),
    REFUSED("9:15", "cell.shapes.0.stripe reaches outside the cell",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: electric\n"
                      "  lateral_span_nm: 1000\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: 0, to_nm: 600}\n"),
    REFUSED("9:15", "cell.shapes.0.stripe lies wholly outside the cell",
            MATERIALS "cell:\n"
                      "  pitch_nm: 300\n"
                      "  cladding: oxide\n"
                      "  lateral: electric\n"
                      "  lateral_span_nm: 1000\n"
                      "  shapes:\n"
                      "    - stripe: {fill: si, across: x, from_nm: 500, to_nm: .inf}\n"),
};

static void refuses_bad_shapes(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_shapes);
}

#define START(sides) MATERIALS "cell: {pitch_nm: 300, cladding: oxide, " sides "shapes: ["
#define END "]}\n"
#define WALLS "lateral: electric, lateral_span_nm: 1000, "
#define LATTICE "lateral: periodic, lateral_span_nm: 400, "

/* Points just inside and just outside of every side, [z, x] in nm. */
static void paints_where_it_says(void **state) {
  (void)state;
  static const struct {
    const char *text;
    double in[3][2], out[3][2];
  } rows[] = {
      {START("") "{rect: {fill: si, length_nm: 100, width_nm: 400, at_nm: [10, 20]}}" END,
       {{59, 219}, {-39, -179}, {10, 20}},
       {{61, 20}, {10, 221}, {-41, 20}}},
      {START("") "{rect: {fill: si, length_nm: 100, width_nm: 400}}" END,
       {{49, 199}, {-49, -199}, {0, 0}},
       {{51, 0}, {0, 201}, {-51, 0}}},
      {START("") "{disc: {fill: si, diameter_nm: 100, at_nm: [20, 0]}}" END,
       {{69, 0}, {20, 49}, {20, -49}},
       {{71, 0}, {20, 51}, {60, 40}}},
      {START("") "{polygon: {fill: si, corners_nm: [[-50, 0], [50, 0], [0, 90]]}}" END,
       {{-48, 1}, {48, 1}, {0, 88}},
       {{0, -1}, {-48, 20}, {48, 20}}},
      {START("") "{stripe: {fill: si, across: x, from_nm: -.inf, to_nm: -2000}}" END,
       {{0, -2001}, {140, -9999}, {-140, -2001}},
       {{0, -1999}, {0, 0}, {140, 5000}}},
      {START("lateral_span_nm: 4000, ") "{stripe: {fill: si, across: x, from_nm: 2000, to_nm: "
                                        ".inf}}" END,
       {{0, 2001}, {140, 9999}, {-140, 2001}},
       {{0, 1999}, {0, 0}, {140, -5000}}},
      {START(WALLS) "{stripe: {fill: si, across: x, from_nm: -100, to_nm: .inf}}" END,
       {{0, -99}, {140, 499}, {-140, 0}},
       {{0, -101}, {140, -499}, {-140, -101}}},
      {START(WALLS) "{stripe: {fill: si, across: z, from_nm: -50, to_nm: 70}}" END,
       {{-49, 0}, {69, 499}, {0, -499}},
       {{-51, 0}, {71, 0}, {149, 499}}},
      {START("lateral: uniform, ") "{stripe: {fill: si, across: z, from_nm: -50, to_nm: 70}}" END,
       {{-49, 0}, {69, 499}, {0, -9999}},
       {{-51, 0}, {71, 0}, {149, 499}}},
      /* Across a periodic boundary: wraps. */
      {START("") "{rect: {fill: si, length_nm: 100, width_nm: 400, at_nm: [140, 0]}}" END,
       {{91, 0}, {149, 0}, {-111, 0}},
       {{89, 0}, {-109, 0}, {0, 0}}},
      {START(LATTICE) "{rect: {fill: si, length_nm: 100, width_nm: 100, at_nm: [0, 190]}}" END,
       {{0, 141}, {0, 199}, {0, -161}},
       {{0, 139}, {0, -159}, {0, 0}}},
      /* On the border of a wall and a whole period long. */
      {START(WALLS) "{rect: {fill: si, length_nm: 300, width_nm: 1000}}" END,
       {{149, 499}, {-149, -499}, {0, 0}},
       {{0, 501}, {0, -501}, {149, 501}}},
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    pk_document *document = NULL;
    pk_problem *p = sound(context, rows[i].text, &document);
    int oxide = pk_materials_find(p->materials, "oxide");
    int si = pk_materials_find(p->materials, "si");
    for (int k = 0; k < 3; k++) {
      const double *in = rows[i].in[k];
      const double *out = rows[i].out[k];
      if (pk_geometry_medium_at(p->cell.geometry, in[0] / 1000, in[1] / 1000) != si ||
          pk_geometry_medium_at(p->cell.geometry, out[0] / 1000, out[1] / 1000) != oxide) {
        fail_msg("row %zu, point %d", i, k);
      }
    }
    pk_problem_free(p);
    pk_document_free(document);
  }
  picket_context_free(context);
}

/* Later shapes cover earlier ones. */
static void keeps_the_order(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        START("") "{rect: {fill: si, length_nm: 100, width_nm: 400}}, "
                                  "{rect: {fill: oxide, length_nm: 50, width_nm: 200}}" END,
                        &document);
  assert_int_equal(pk_geometry_medium_at(p->cell.geometry, 0, 0),
                   pk_materials_find(p->materials, "oxide"));
  assert_int_equal(pk_geometry_medium_at(p->cell.geometry, 0.03, 0),
                   pk_materials_find(p->materials, "si"));
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_shapes),
      cmocka_unit_test(paints_where_it_says),
      cmocka_unit_test(keeps_the_order),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
