/* light: wavelengths in all their forms. */
#include "reading.h"
#include "unit/near.h"

static const bad_text bad_light[] = {
    REFUSED("2:8", "light is a value, must be a block of keys (wavelength_nm, polarization)",
            FORMAT "light: 1550\n"),
    REFUSED("2:9", "unknown key \"wavelenght_nm\" in light; did you mean \"wavelength_nm\"?",
            FORMAT "light: {wavelenght_nm: 1550}\n"),
    REFUSED("2:24", "light.wavelength_nm is 0, must be at least 10 and at most 1000000 nm",
            FORMAT "light: {wavelength_nm: 0}\n"),
    REFUSED("2:24", "light.wavelength_nm is -1550, must be",
            FORMAT "light: {wavelength_nm: -1550}\n"),
    REFUSED("2:24", "light.wavelength_nm is 1.55, must be",
            FORMAT "light: {wavelength_nm: 1.55}\n"),
    REFUSED("2:24", "light.wavelength_nm is 2e6, must be", FORMAT "light: {wavelength_nm: 2e6}\n"),
    REFUSED("2:24", "light.wavelength_nm has 0 elements, must be a list of 1 to 10000 wavelengths",
            FORMAT "light: {wavelength_nm: []}\n"),
    REFUSED("2:31", "light.wavelength_nm.1 is 1500 nm, must be above the 1500 nm before it",
            FORMAT "light: {wavelength_nm: [1500, 1500]}\n"),
    REFUSED("2:37", "light.wavelength_nm.2 is 1550 nm, must be above the 1600 nm before it",
            FORMAT "light: {wavelength_nm: [1500, 1600, 1550]}\n"),
    REFUSED("2:31", "light.wavelength_nm.1 is \"x\", must be a plain",
            FORMAT "light: {wavelength_nm: [1500, x]}\n"),
    REFUSED("2:24", "light.wavelength_nm has no \"points\"",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1600}}\n"),
    REFUSED("2:41", "light.wavelength_nm.to is 1500 nm, must be above \"from\", 1600 nm",
            FORMAT "light: {wavelength_nm: {from: 1600, to: 1500, points: 3}}\n"),
    REFUSED("2:55", "light.wavelength_nm.points is 0, must be a whole number, 1 to 10000",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1600, points: 0}}\n"),
    REFUSED("2:55", "light.wavelength_nm.points is 10001, must be a whole number",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1600, points: 10001}}\n"),
    REFUSED("2:55", "light.wavelength_nm.points is 2.5, must be a whole number",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1600, points: 2.5}}\n"),
    REFUSED("2:55", "light.wavelength_nm.points is 1, must be at least 2",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1600, points: 1}}\n"),
    REFUSED("2:55", "light.wavelength_nm.points is 2, must be 1",
            FORMAT "light: {wavelength_nm: {from: 1500, to: 1500, points: 2}}\n"),
    REFUSED("2:23", "light.polarization is \"te\", must be one of: hy, ey, both",
            FORMAT "light: {polarization: te}\n"),
};

static void refuses_bad_light(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_light);
}

static void understands_all_forms(void **state) {
  (void)state;
  static const struct {
    const char *text;
    int count;
    double first_um, second_um, last_um;
    bool ey, hy;
  } rows[] = {
      {FORMAT "light: {wavelength_nm: 1550}\n", 1, 1.55, 0, 1.55, true, true},
      {FORMAT "light: {wavelength_nm: [1310, 1550, 1600.5]}\n", 3, 1.31, 1.55, 1.6005, true, true},
      {FORMAT "light: {wavelength_nm: {from: 1500, to: 1580, points: 17}, polarization: hy}\n", 17,
       1.5, 1.505, 1.58, false, true},
      {FORMAT "light: {wavelength_nm: {from: 1500, to: 1500, points: 1}, polarization: ey}\n", 1,
       1.5, 0, 1.5, true, false},
      {FORMAT "light: {wavelength_nm: {from: 10, to: 1e6, points: 10000}}\n", 10000, 0.01,
       0.01 + 999.99 / 9999, 1000, true, true},
      {FORMAT "light: {polarization: both}\n", 0, 0, 0, 0, true, true},
  };
  picket_context *context = plain_context();
  for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
    pk_document *document = NULL;
    pk_problem *p = sound(context, rows[i].text, &document);
    assert_int_equal(p->light.count, rows[i].count);
    assert_int_equal(p->light.wanted[PK_EY], rows[i].ey);
    assert_int_equal(p->light.wanted[PK_HY], rows[i].hy);
    if (rows[i].count > 0) {
      /* The ends are the decimals of the file, correctly rounded: no tolerance. */
      assert_near(p->light.wavelength_um[0], rows[i].first_um, 0);
      assert_near(p->light.wavelength_um[rows[i].count - 1], rows[i].last_um, 0);
    }
    if (rows[i].count > 1) {
      /* A few roundings of numbers below 2. */
      assert_near(p->light.wavelength_um[1], rows[i].second_um, 1e-15);
    }
    pk_problem_free(p);
    pk_document_free(document);
  }
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_light),
      cmocka_unit_test(understands_all_forms),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
