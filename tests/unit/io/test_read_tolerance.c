/* tolerance: what spreads, and what must hold. */
#include "reading.h"
#include "unit/near.h"

#define CELL                                                                           \
  MATERIALS                                                                            \
  "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: si, length_nm: 150, " \
  "width_nm: 450}}]}\n"
#define ONE "{vary: cell.pitch_nm, sigma_nm: 3}"
#define REQUIRE "require: {quantity: clearance_nm, at_least: 50}"
/* The spread begins at 4:23. */
#define SPREAD(one) CELL "tolerance: {spreads: [" one "], " REQUIRE "}\n"
/* What is required begins at 5:12. */
#define REQUIRED(what) CELL "tolerance:\n  require: " what "\n  spreads: [" ONE "]\n"

static const bad_text bad[] = {
    REFUSED("4:12", "tolerance is a value, must be a block of keys", CELL "tolerance: 3\n"),
    REFUSED("4:12", "tolerance has no \"spreads\"", CELL "tolerance: {" REQUIRE "}\n"),
    REFUSED("4:12", "tolerance has no \"require\"", CELL "tolerance: {spreads: [" ONE "]}\n"),
    REFUSED("4:13", "unknown key \"spread\" in tolerance; did you mean \"spreads\"?",
            CELL "tolerance: {spread: [" ONE "], " REQUIRE "}\n"),
    REFUSED("4:22", "tolerance.spreads has 0 elements",
            CELL "tolerance: {spreads: [], " REQUIRE "}\n"),
    REFUSED("4:22", "tolerance.spreads is a value", CELL "tolerance: {spreads: 3, " REQUIRE "}\n"),
    REFUSED("4:23", "tolerance.spreads.0 is a value, must be a block of keys", SPREAD("3")),
    REFUSED("4:23", "tolerance.spreads.0 has no \"vary\"", SPREAD("{sigma_nm: 3}")),
    REFUSED("4:45", "unknown key \"sigma_mn\" in tolerance.spreads.0; did you mean \"sigma_nm\"?",
            SPREAD("{vary: cell.pitch_nm, sigma_mn: 3}")),
    /* the path */
    REFUSED("4:30", "tolerance.spreads.0.vary is \"cell.cladding\", must be the dotted path of a",
            SPREAD("{vary: cell.cladding, sigma: 3}")),
    REFUSED("4:30", "tolerance.spreads.0.vary is \"cell.pitch\", must be the dotted path of a",
            SPREAD("{vary: cell.pitch, sigma: 3}")),
    REFUSED("4:30", "tolerance.spreads.0.vary is \"tolerance.seed\", must be the path of a number",
            SPREAD("{vary: tolerance.seed, sigma: 3}")),
    REFUSED("4:30", "tolerance.spreads.0.vary is a list, must be a text",
            SPREAD("{vary: [cell.pitch_nm], sigma: 3}")),
    REFUSED("4:59", "tolerance.spreads.1 varies \"cell.pitch_nm\" again, must be another number",
            SPREAD(ONE ", {vary: cell.pitch_nm, sigma_nm: 2}")),
    REFUSED("4:68",
            "tolerance.spreads.1 varies \"cell.shapes.0.rect.width_nm\" again, must be another",
            SPREAD("{vary: cell.shapes.0.width_nm, sigma_nm: 3}, {vary: "
                   "cell.shapes.0.rect.width_nm, sigma_nm: 2}")),
    /* the extent */
    REFUSED("4:23", "tolerance.spreads.0 has no extent, must have one of: sigma_nm or sigma",
            SPREAD("{vary: cell.pitch_nm}")),
    REFUSED("4:23", "tolerance.spreads.0 has both a sigma and a range",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: 3, from: 290, to: 310}")),
    REFUSED("4:23", "tolerance.spreads.0 has both sigma and sigma_nm",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: 3, sigma: 3}")),
    REFUSED("4:55", "tolerance.spreads.0.sigma_nm is -3, must be above 0 and at most 1000000000 nm",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: -3}")),
    REFUSED("4:55", "tolerance.spreads.0.sigma_nm is 0, must be above 0",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: 0}")),
    REFUSED("4:55", "tolerance.spreads.0.sigma_nm is \".nan\", must be a plain",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: .nan}")),
    REFUSED("4:55", "tolerance.spreads.0.sigma_nm is .inf, must be above 0",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: .inf}")),
    REFUSED("4:72",
            "tolerance.spreads.0.sigma_nm is the spread of materials.si.constant.index, which is "
            "no length",
            SPREAD("{vary: materials.si.constant.index,    sigma_nm: 0.01}")),
    REFUSED("4:23", "tolerance.spreads.0 has no \"to\"",
            SPREAD("{vary: cell.pitch_nm, from: 290}")),
    REFUSED("4:23", "tolerance.spreads.0 has no \"from\"",
            SPREAD("{vary: cell.pitch_nm, to: 290}")),
    REFUSED("4:23", "tolerance.spreads.0 has a range from 310 to 290, must be two rising numbers",
            SPREAD("{vary: cell.pitch_nm, from: 310, to: 290}")),
    REFUSED("4:23", "tolerance.spreads.0 has a range from 310 to 310, must be two rising numbers",
            SPREAD("{vary: cell.pitch_nm, from: 310, to: 310}")),
    REFUSED("4:51", "tolerance.spreads.0.from is -.inf, must be",
            SPREAD("{vary: cell.pitch_nm, from: -.inf, to: 310}")),
    /* groups */
    REFUSED("4:65", "tolerance.spreads.0.group is empty, must be a text",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: 3, group: }")),
    REFUSED("4:69",
            "tolerance.spreads.1 is a range and of the group \"a\", whose first one is normal",
            SPREAD("{vary: cell.pitch_nm, sigma_nm: 3, group: a}, {vary: temperature_c, from: 0, "
                   "to: 70, group: a}")),
    /* what is required */
    REFUSED("5:12", "tolerance.require is a value, must be a block of keys", REQUIRED("50")),
    REFUSED("5:12", "tolerance.require has no \"quantity\"", REQUIRED("{at_least: 50}")),
    REFUSED("5:12", "tolerance.require has no limit, must have one of: at_least, at_most, between",
            REQUIRED("{quantity: long_nm}")),
    REFUSED("5:12", "tolerance.require has more than one limit",
            REQUIRED("{quantity: long_nm, at_least: 5, between: [5, 6]}")),
    REFUSED("5:12", "tolerance.require has more than one limit",
            REQUIRED("{quantity: long_nm, at_least: 5, at_most: 6}")),
    REFUSED("5:41", "tolerance.require.between is [6, 5], must be two rising numbers",
            REQUIRED("{quantity: long_nm, between: [6, 5]}")),
    REFUSED("5:41", "tolerance.require.at_most is \".nan\", must be a plain",
            REQUIRED("{quantity: long_nm, at_most: .nan}")),
    REFUSED("5:23", "tolerance.require.quantity is \"edge\", must be one of: clearance_nm",
            REQUIRED("{quantity: edge, at_least: 50}")),
    REFUSED("5:12", "tolerance.require has no \"at_nm\", the wavelength at which bloch_index is",
            REQUIRED("{quantity: bloch_index, at_least: 2}")),
    REFUSED("5:32", "unknown key \"atleast\" in tolerance.require; did you mean \"at_least\"?",
            REQUIRED("{quantity: long_nm, atleast: 2}")),
    /* counts */
    REFUSED("4:118", "tolerance.samples is 0, must be a whole number, 1 to 10000000",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], samples: 0}\n"),
    REFUSED("4:118", "tolerance.samples is 1e9",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], samples: 1e9}\n"),
    REFUSED("4:118", "tolerance.samples is 1000000000",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], samples: 1000000000}\n"),
    REFUSED("4:115", "tolerance.seed is -1, must be a whole number, 0 to 999999999",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], seed: -1}\n"),
    REFUSED("4:115", "tolerance.seed is 1.5",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], seed: 1.5}\n"),
    REFUSED("4:125", "tolerance.direct_samples is -1",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], direct_samples: -1}\n"),
    REFUSED("4:117", "tolerance.family is \"te\", must be one of: te-like, tm-like, both",
            CELL "tolerance: {" REQUIRE ", spreads: [" ONE "], family: te}\n"),
};

static void refuses_bad_blocks(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad);
}

/* One block of a document has at most so many numbers to spread by themselves. */
static void refuses_too_many(void **state) {
  (void)state;
  char text[8000] = CELL "tolerance:\n  " REQUIRE "\n  spreads:\n";
  for (int i = 0; i <= PK_DEVIATES; i++) {
    size_t used = strlen(text);
    snprintf(text + used, sizeof text - used,
             "    - {vary: cell.shapes.1.corners_nm.%d.%d, sigma_nm: 1}\n", i / 2, i % 2);
  }
  char *shapes = strstr(text, "}}]}"), polygon[1000] = "}}, {polygon: {fill: si, corners_nm: [";
  for (int i = 0; i <= PK_DEVIATES / 2; i++) {
    size_t used = strlen(polygon);
    snprintf(polygon + used, sizeof polygon - used, "%s[%.4f, %.4f]", i ? ", " : "",
             20 * cos(0.6 * i), 20 * sin(0.6 * i));
  }
  char whole[9000];
  snprintf(whole, sizeof whole, "%.*s%s]}}]}%s", (int)(shapes - text), text, polygon, shapes + 4);
  const bad_text row = {PICKET_ERROR_INPUT, "7:5",
                        "tolerance.spreads has 17 independent spreads, must have at most 16", whole,
                        strlen(whole)};
  check_refused(&row);
}

static void understands(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        CELL
                        "tolerance:\n  spreads:\n"
                        "    - {vary: cell.shapes.0.length_nm, sigma_nm: 3, group: edge}\n"
                        "    - {vary: cell.shapes.0.width_nm, sigma: 2, group: edge}\n"
                        "    - {vary: temperature_c, from: -5, to: 70}\n"
                        "  require: {quantity: bloch_index, between: [2, 2.1], at_nm: 1550}\n"
                        "  samples: 500\n  seed: 7\n  direct_samples: 0\n  family: both\n",
                        &document);
  const pk_tolerance_block *t = &p->tolerance;
  assert_true(t->given);
  assert_int_equal(t->count, 3);
  assert_string_equal(t->spread[0].vary, "cell.shapes.0.length_nm");
  assert_string_equal(t->spread[1].group, "edge");
  assert_true(t->spread[0].normal && t->spread[1].normal && !t->spread[2].normal);
  assert_near(t->spread[0].sigma, 3, 0);
  assert_true(isnan(t->spread[2].sigma) && isnan(t->spread[0].from));
  assert_null(t->spread[2].group);
  assert_near(t->spread[2].from, -5, 0);
  assert_near(t->spread[2].to, 70, 0);
  assert_int_equal(t->quantity, PK_MEASURED_BLOCH_INDEX);
  assert_near(t->at_um, 1.55, 0);
  assert_near(t->least, 2, 0);
  assert_near(t->most, 2.1, 0);
  assert_int_equal(t->samples, 500);
  assert_int_equal(t->seed, 7);
  assert_int_equal(t->direct, 0);
  assert_true(t->wanted[0] && t->wanted[1] && t->family_given);
  pk_problem_free(p);
  pk_document_free(document);
  p = sound(context, SPREAD(ONE), &document);
  t = &p->tolerance;
  assert_int_equal(t->samples, 10000);
  assert_int_equal(t->seed, 1);
  assert_int_equal(t->direct, 200);
  assert_near(t->least, 50, 0);
  assert_true(isinf(t->most) && isnan(t->at_um));
  assert_true(t->wanted[0] && !t->wanted[1] && !t->family_given);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_blocks),
      cmocka_unit_test(refuses_too_many),
      cmocka_unit_test(understands),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
