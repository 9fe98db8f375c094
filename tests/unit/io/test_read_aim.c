/* aim and rules: what is varied for which target. */
#include "reading.h"
#include "unit/near.h"

#define CELL                                                                           \
  MATERIALS                                                                            \
  "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: si, length_nm: 150, " \
  "width_nm: 450}}]}\n"
#define START CELL "aim: {vary: cell.pitch_nm, between: [200, 400], "
#define GOOD "quantity: clearance_nm, target: 100"

static const bad_text bad_aim[] = {
    REFUSED("4:6", "aim is a value, must be a block of keys", CELL "aim: 3\n"),
    REFUSED("4:5", "aim is empty, must be a block of keys", CELL "aim:\n"),
    REFUSED("4:6", "aim has no \"vary\"", CELL "aim: {between: [1, 2], " GOOD "}\n"),
    REFUSED("4:6", "aim has no \"between\"", CELL "aim: {vary: cell.pitch_nm, " GOOD "}\n"),
    REFUSED("4:6", "aim has no \"quantity\"", START "target: 3}\n"),
    REFUSED("4:6", "aim has no \"target\"", START "quantity: clearance_nm}\n"),
    REFUSED("4:49", "unknown key \"quantty\" in aim; did you mean \"quantity\"?",
            START "quantty: clearance_nm, target: 100}\n"),
    REFUSED("4:59", "aim.quantity is \"clearance\", must be one of: clearance_nm, long_nm",
            START "quantity: clearance, target: 100}\n"),
    REFUSED("4:59", "aim.quantity is a list, must be one of: ",
            START "quantity: [clearance_nm], target: 100}\n"),
    REFUSED("4:81", "aim.target is \"many\", must be a plain decimal number",
            START "quantity: clearance_nm, target: many}\n"),
    REFUSED("4:81", "aim.target is .inf, must be at least -1000000000 and at most 1000000000",
            START "quantity: clearance_nm, target: .inf}\n"),
    REFUSED("4:81", "aim.target is the text \"100\", must be a number without quotes",
            START "quantity: clearance_nm, target: \"100\"}\n"),
    /* the path */
    REFUSED("4:13", "aim.vary is \"cell.pitch\", must be the dotted path of a single finite number",
            CELL "aim: {vary: cell.pitch, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"cell.cladding\", must be the dotted path of a single finite",
            CELL "aim: {vary: cell.cladding, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"cell.shapes\", must be the dotted path",
            CELL "aim: {vary: cell.shapes, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"cell.shapes.3.width_nm\", must be the dotted path",
            CELL "aim: {vary: cell.shapes.3.width_nm, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"cell..pitch_nm\", must be the dotted path",
            CELL "aim: {vary: cell..pitch_nm, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"aim.target\", must be the path of a number of the structure",
            CELL "aim: {vary: aim.target, between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is \"format\", must be the path of a number of the structure",
            CELL "aim: {vary: format, between: [1, 2], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is a list, must be a text",
            CELL "aim: {vary: [cell.pitch_nm], between: [200, 400], " GOOD "}\n"),
    REFUSED("4:13", "aim.vary is empty, must be a text",
            CELL "aim: {vary: , between: [200, 400], " GOOD "}\n"),
    /* the bounds */
    REFUSED("4:37", "aim.between is [400, 200], must be two rising numbers",
            CELL "aim: {vary: cell.pitch_nm, between: [400, 200], " GOOD "}\n"),
    REFUSED("4:37", "aim.between is [300, 300], must be two rising numbers",
            CELL "aim: {vary: cell.pitch_nm, between: [300, 300], " GOOD "}\n"),
    REFUSED("4:37", "aim.between has 1 element, must be a list of 2 numbers",
            CELL "aim: {vary: cell.pitch_nm, between: [300], " GOOD "}\n"),
    REFUSED("4:37", "aim.between is a value, must be a list of 2 numbers",
            CELL "aim: {vary: cell.pitch_nm, between: 300, " GOOD "}\n"),
    REFUSED("4:43", "aim.between.1 is .inf, must be at least",
            CELL "aim: {vary: cell.pitch_nm, between: [200, .inf], " GOOD "}\n"),
    /* the wavelength */
    REFUSED("4:6", "aim has no \"at_nm\", the wavelength at which bloch_index is meant",
            START "quantity: bloch_index, target: 2}\n"),
    REFUSED("4:90", "aim.at_nm is 5, must be at least 10 and at most 1000000 nm",
            START "quantity: bloch_index, target: 2, at_nm: 5}\n"),
    REFUSED("4:90", "aim.at_nm is a list, must be a number",
            START "quantity: bloch_index, target: 2, at_nm: [1550, 1560]}\n"),
    REFUSED("4:90", "aim.at_nm is \".nan\", must be a plain",
            START "quantity: bloch_index, target: 2, at_nm: .nan}\n"),
    /* the family */
    REFUSED("4:94", "aim.family is \"te\", must be one of: te-like, tm-like, both",
            START "quantity: clearance_nm, target: 100, family: te}\n"),
    /* a second target */
    REFUSED("5:9", "aim.also has no \"target\"",
            CELL "aim: {vary: cell.pitch_nm, between: [200, 400], " GOOD ",\n  also: {vary: "
                 "cell.shapes.0.length_nm, between: [50, 190], quantity: long_nm}}\n"),
    REFUSED("5:16", "aim.also.vary is \"cell.pitch_nm\" again, must be another number",
            START GOOD ",\n  also: {vary: cell.pitch_nm, between: [200, 400], quantity: long_nm, "
                       "target: 3}}\n"),
    REFUSED("5:10",
            "unknown key \"family\" in aim.also; allowed: vary, between, quantity, target, "
            "at_nm",
            START GOOD ",\n  also: {family: te-like}}\n"),
    REFUSED("5:9", "aim.also is a list, must be a block of keys", START GOOD ",\n  also: [3]}\n"),
};

static const bad_text bad_rules[] = {
    REFUSED("2:8", "rules is a value, must be a block of keys", FORMAT "rules: 60\n"),
    REFUSED("2:9", "unknown key \"smallest_nm\" in rules; allowed: smallest_feature_nm, grid_nm",
            FORMAT "rules: {smallest_nm: 60}\n"),
    REFUSED("2:9", "unknown key \"grid_mn\" in rules; did you mean \"grid_nm\"?",
            FORMAT "rules: {grid_mn: 1}\n"),
    REFUSED("2:30", "rules.smallest_feature_nm is 0, must be above 0 and at most 100000 nm",
            FORMAT "rules: {smallest_feature_nm: 0}\n"),
    REFUSED("2:18", "rules.grid_nm is -1, must be above 0", FORMAT "rules: {grid_nm: -1}\n"),
    REFUSED("2:18", "rules.grid_nm is a list, must be a number", FORMAT "rules: {grid_nm: [1]}\n"),
    REFUSED("2:18", "rules.grid_nm is \".nan\", must be a plain",
            FORMAT "rules: {grid_nm: .nan}\n"),
};

static void refuses_bad_aim(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_aim);
}

static void refuses_bad_rules(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_rules);
}

static void understands(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        START
                        "quantity: bloch_index, target: 1.8, at_nm: 1550, family: both,\n"
                        "  also: {vary: cell.shapes.0.width_nm, between: [300, 600], "
                        "quantity: long_nm, target: 1400}}\n"
                        "rules: {smallest_feature_nm: 60, grid_nm: 0.5}\n",
                        &document);
  assert_true(p->aim.given);
  assert_int_equal(p->aim.count, 2);
  assert_string_equal(p->aim.part[0].vary, "cell.pitch_nm");
  assert_int_equal(p->aim.part[0].quantity, PK_MEASURED_BLOCH_INDEX);
  assert_near(p->aim.part[0].between[0], 200, 0);
  assert_near(p->aim.part[0].between[1], 400, 0);
  assert_near(p->aim.part[0].target, 1.8, 0);
  assert_near(p->aim.part[0].at_um, 1.55, 0);
  assert_string_equal(p->aim.part[1].vary, "cell.shapes.0.width_nm");
  assert_int_equal(p->aim.part[1].quantity, PK_MEASURED_LONG);
  assert_true(isnan(p->aim.part[1].at_um));
  assert_true(p->aim.wanted[0] && p->aim.wanted[1]);
  assert_near(p->rules.smallest_um, 0.06, 1e-15);
  assert_near(p->rules.grid_um, 0.0005, 1e-18);
  pk_problem_free(p);
  pk_document_free(document);
  p = sound(context, START GOOD "}\n", &document);
  assert_int_equal(p->aim.count, 1);
  assert_true(p->aim.wanted[0] && !p->aim.wanted[1]);
  assert_false(p->rules.given);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_aim),
      cmocka_unit_test(refuses_bad_rules),
      cmocka_unit_test(understands),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
