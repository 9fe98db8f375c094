/* shapes: where the paint of each kind lands, and what has no place in a cell. */
#include "reading.h"

#include <math.h>

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

#define TOOTH(keys)                                                         \
  MATERIALS "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {" keys \
            ", fill: si, length_nm: "                                       \
            "150, width_nm: 450}}]}\n"
#define WALL(keys)                                              \
  MATERIALS "section: {cladding: oxide, shapes: [{rect: {" keys \
            ", fill: si, width_nm: 150, "                       \
            "height_nm: 300}}]}\n"

/* Roundings and leaning walls. */
static const bad_text bad_rects[] = {
    REFUSED("3:75", "cell.shapes.0.rect.corner_radius_nm is 75.1 nm, must be at most 75 nm",
            TOOTH("corner_radius_nm: 75.1")),
    REFUSED("3:75", "cell.shapes.0.rect.corner_radius_nm is -1, must be at least 0",
            TOOTH("corner_radius_nm: -1")),
    REFUSED("3:75", "cell.shapes.0.rect.corner_radius_nm is \".nan\"",
            TOOTH("corner_radius_nm: .nan")),
    REFUSED("3:75", "cell.shapes.0.rect.corner_radius_nm is .inf", TOOTH("corner_radius_nm: .inf")),
    REFUSED("3:75", "cell.shapes.0.rect.corner_radius_nm is a list",
            TOOTH("corner_radius_nm: [1]")),
    REFUSED("3:73",
            "cell.shapes.0.rect.wall_angle_deg has no meaning in a cell, which is seen from above",
            TOOTH("wall_angle_deg: 3")),
    REFUSED("3:61",
            "section.shapes.0.rect.wall_angle_deg is 31, must be at least -30 and at most 30",
            WALL("wall_angle_deg: 31")),
    REFUSED("3:61", "section.shapes.0.rect.wall_angle_deg is \".nan\"",
            WALL("wall_angle_deg: .nan")),
    REFUSED("3:61",
            "section.shapes.0.rect.wall_angle_deg is 27 deg, must be between -26.57 and 26.57 deg, "
            "where walls 300 nm high and 150 nm apart at half height meet",
            WALL("wall_angle_deg: 27")),
    REFUSED("3:61", "section.shapes.0.rect.wall_angle_deg is -27 deg", WALL("wall_angle_deg: -27")),
    /* The circle in the top: (150 - 300 tan 20°)/2 tan(45° + 10°). */
    REFUSED("3:83", "section.shapes.0.rect.corner_radius_nm is 30 nm, must be at most 29.140595",
            WALL("wall_angle_deg: 20, corner_radius_nm: 30")),
    REFUSED("3:45", "unknown key \"corner_radius_nm\" in section.shapes.0.disc",
            MATERIALS "section: {cladding: oxide, shapes: [{disc: {corner_radius_nm: 3}}]}\n"),
};

static void refuses_bad_rects(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_rects);
}

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
      /* The diagonal point of the arc is 40 (1 - 1/sqrt 2) = 11.7 nm inside both sides. */
      {START("") "{rect: {fill: si, length_nm: 100, width_nm: 400, corner_radius_nm: 40}}" END,
       {{38, 188}, {-38, -188}, {49, 0}},
       {{39, 189}, {-39, -189}, {49, 199}}},
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

/* The share of silicon in the box of a section's rect of 150 x 300 nm, grown by 50 nm all round. */
static double silicon(const char *keys) {
  char text[400];
  snprintf(text, sizeof text, WALL("%s"), keys);
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context, text, &document);
  const pk_section_block *section = &p->section;
  /* The window of the guide holds the wider end. */
  assert_near(section->high_um[0] - section->low_um[0],
              strstr(keys, "angle") ? 0.15 + 0.3 * tan(10 * acos(-1) / 180) : 0.15, 1e-12);
  pk_box box;
  assert_int_equal(
      pk_geometry_box(section->geometry, (double[2]){-0.125, -0.2}, (double[2]){0.125, 0.2}, &box),
      PICKET_OK);
  double share = 0;
  for (int i = 0; i < box.count; i++) {
    share += box.medium[i] == pk_materials_find(p->materials, "si") ? box.fraction[i] : 0;
  }
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
  return share * 250 * 400;
}

/* Areas in nm², to 1e-9 of them: coordinates of a section are the same within 1e-4 nm, and none is
 * moved here. */
static void rounds_and_leans_the_walls(void **state) {
  (void)state;
  const double pi = acos(-1), whole = 150 * 300, close = 1e-9 * whole;
  assert_near(silicon("corner_radius_nm: 0, wall_angle_deg: 10"), whole, close);
  assert_near(silicon("wall_angle_deg: -10"), whole, close);
  assert_near(silicon("corner_radius_nm: 60"), whole - (4 - pi) * 3600, close);
  double lost = 0;
  for (int end = -1; end <= 1; end += 2) {
    double turn = pi / 2 + end * 10 * pi / 180;
    lost += 2 * 400 * (tan(turn / 2) - turn / 2);
  }
  assert_near(silicon("corner_radius_nm: 20, wall_angle_deg: 10"), whole - lost, close);
}

/* In a channel too, in the slices that the shape reaches. */
static void leans_in_a_channel(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        MATERIALS
                        "channel: {pitch_nm: 300, cladding: oxide, shapes: [{rect: "
                        "{fill: si, width_nm: 400, height_nm: 200, wall_angle_deg: 10, "
                        "corner_radius_nm: 5, along_nm: [-75, 75]}}]}\n",
                        &document);
  int found = 0;
  for (int i = 0; i < p->channel.slices; i++) {
    const pk_geometry *slice = p->channel.slice[i];
    if (pk_geometry_shape_count(slice) > 0) {
      /* 0.2 ± 0.1 tan 10° at the base and the top; 5 nm below the edge the arc still is near. */
      int si = pk_materials_find(p->materials, "si");
      assert_int_equal(pk_geometry_medium_at(slice, 0.214, -0.094), si);
      assert_int_equal(pk_geometry_medium_at(slice, 0.214, 0.094), 0);
      assert_false(pk_geometry_has_corners(slice));
      found++;
    }
  }
  assert_int_equal(found, 1);
  pk_problem_free(p);
  pk_document_free(document);
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
      cmocka_unit_test(refuses_bad_shapes),         cmocka_unit_test(refuses_bad_rects),
      cmocka_unit_test(rounds_and_leans_the_walls), cmocka_unit_test(leans_in_a_channel),
      cmocka_unit_test(paints_where_it_says),       cmocka_unit_test(keeps_the_order),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
