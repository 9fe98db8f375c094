/* section: a plane across a guide. */
#include "reading.h"
#include "unit/near.h"

#define BAD_BEND(value, message)                                        \
  REFUSED("3:44", message,                                              \
          MATERIALS "section: {cladding: oxide, bend_radius_um: " value \
                    ", shapes: ["                                       \
                    "{rect: {fill: si, width_nm: 1500, height_nm: 300}}]}\n")

static const bad_text bad_section[] = {
    REFUSED("3:10", "section has no \"shapes\"", MATERIALS "section: {cladding: oxide}\n"),
    REFUSED("3:10", "section has no \"cladding\"",
            MATERIALS "section: {shapes: [{disc: {fill: si, diameter_nm: 100}}]}\n"),
    REFUSED("3:36", "section.shapes has 0 elements",
            MATERIALS "section: {cladding: oxide, shapes: []}\n"),
    REFUSED("3:79", "section.shapes.0.rect.height_nm is 0, must be above 0",
            MATERIALS "section: {cladding: oxide, shapes: [{rect: {fill: si, width_nm: 1, "
                      "height_nm: 0}}]}\n"),
    REFUSED("3:45", "unknown key \"length_nm\"",
            MATERIALS "section: {cladding: oxide, shapes: [{rect: {length_nm: 1}}]}\n"),
    REFUSED("3:65", "section.shapes.0.stripe.across is \"z\", must be one of: x, y",
            MATERIALS "section: {cladding: oxide, shapes: [{stripe: {fill: si, across: z, from_nm: "
                      "0, to_nm: 1}}]}\n"),
    REFUSED("3:10", "section holds stripes only",
            MATERIALS "section: {cladding: oxide, shapes: [{stripe: {fill: si, across: y, from_nm: "
                      "0, to_nm: 1}}]}\n"),
    REFUSED("3:43", "section.span_nm.1 is 0, must be above 0",
            MATERIALS "section: {cladding: oxide, span_nm: [100, 0], shapes: [{disc: {fill: si, "
                      "diameter_nm: 100}}]}\n"),
    BAD_BEND("0", "section.bend_radius_um is 0, must be at least 0.5 and at most 1000000 um"),
    BAD_BEND("-5", "section.bend_radius_um is -5, must be at least 0.5"),
    BAD_BEND("2e6", "section.bend_radius_um is 2e6, must be at least 0.5"),
    BAD_BEND(".nan", "section.bend_radius_um is \".nan\", must be a plain decimal number"),
    BAD_BEND("tight", "section.bend_radius_um is \"tight\", must be a plain decimal number"),
    BAD_BEND("0.6",
             "section.bend_radius_um is 0.6, must be above 0.75 um: the shapes of the "
             "section reach the centre of the bend"),
    REFUSED("3:44", "section.bend_radius_um is 1.5, must be above 2 um: the walls of span_nm",
            MATERIALS
            "section: {cladding: oxide, bend_radius_um: 1.5, span_nm: [4000, 900], shapes: "
            "[{disc: {fill: si, diameter_nm: 100}}]}\n"),
};

static void refuses_bad_sections(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_section);
}

#define LAYERED                                                                             \
  FORMAT                                                                                    \
  "materials: {oxide: {constant: {index: 1.45}}, core: {constant: {index: 3.5}}, "          \
  "teeth: {layered: {films: [{fill: core, thickness_nm: 100}, {fill: oxide, thickness_nm: " \
  "9}]}}}\n"

/* A layered material has its place in a section and nowhere else. */
static void understands_layers(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        LAYERED
                        "section: {cladding: oxide, shapes: [{disc: {fill: teeth, "
                        "diameter_nm: 100}}]}\n",
                        &document);
  assert_true(pk_materials_is_layered(p->materials, 2));
  pk_problem_free(p);
  pk_document_free(document);
  static const bad_text row =
      REFUSED("3:83", "cell.shapes.0.stripe.fill is \"teeth\", which is layered: only a section",
              LAYERED
              "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: "
              "teeth, across: z, from_nm: -50, to_nm: 50}}]}\n");
  check_refused(&row);
  picket_context_free(context);
}

static void understands_a_section(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        MATERIALS
                        "section:\n"
                        "  cladding: oxide\n"
                        "  span_nm: [4000, 3000]\n"
                        "  bend_radius_um: 12.5\n"
                        "  shapes:\n"
                        "    - stripe: {fill: si, across: y, from_nm: -.inf, to_nm: "
                        "-2000}\n"
                        "    - rect: {fill: si, width_nm: 450, height_nm: 220, at_nm: "
                        "[10, 110]}\n"
                        "    - polygon: {fill: oxide, corners_nm: [[0, 0], [50, 0], [0, "
                        "400]]}\n"
                        "    - disc: {fill: si, diameter_nm: 100, at_nm: [-300, 0]}\n",
                        &document);
  assert_true(p->section.given);
  assert_near(p->section.span_um[0], 4, 1e-12);
  assert_near(p->section.span_um[1], 3, 1e-12);
  assert_near(p->section.bend_radius_um, 12.5, 1e-12);
  assert_near(p->section.low_um[0], -0.35, 1e-12);
  assert_near(p->section.high_um[0], 0.235, 1e-12);
  assert_near(p->section.low_um[1], -0.05, 1e-12);
  assert_near(p->section.high_um[1], 0.4, 1e-12);
  assert_true(p->section.used[0] && p->section.used[1]);
  assert_int_equal(pk_geometry_medium_at(p->section.geometry, 0.1, 0.1), 1);
  assert_int_equal(pk_geometry_medium_at(p->section.geometry, 0.01, 0.01), 0);
  assert_int_equal(pk_geometry_medium_at(p->section.geometry, 5, -30), 1);
  assert_int_equal(pk_geometry_medium_at(p->section.geometry, 5, 30), 0);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_sections),
      cmocka_unit_test(understands_a_section),
      cmocka_unit_test(understands_layers),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
