/* The estimate of the first stop band: closed form for a stack, the slab solver for a guide that is
 * not segmented at all, and bounds for a row of discs. */
#include "study/estimate.h"

#include <stdio.h>

#include "slab/slab.h"
#include "unit/short_memory.h"
#include "unit/study/understood.h"

#define MATERIALS                         \
  "materials:\n"                          \
  "  core: {constant: {index: 3.476}}\n"  \
  "  oxide: {constant: {index: 1.444}}\n" \
  "  silicon: {catalogue: silicon}\n"     \
  "  resin: {constant: {index: 1.5}}\n"
#define OPEN_CELL(shapes)                                                                          \
  "format: 1\n" MATERIALS "cell: {pitch_nm: 300, cladding: oxide, lateral: open, shapes: [" shapes \
  "]}\n"

static const double pi = 3.14159265358979323846;

static picket_context *context;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static picket_edge_estimate estimate(const char *text, pk_polarization polarization) {
  picket_edge_estimate e = {0};
  understood u = understand_good(context, text);
  assert_int_equal(pk_estimate(u.problem, polarization, &e), PICKET_OK);
  picket_problem_free(u.owner);
  assert_true(isnan(e.error_um.value) && isnan(e.error_um.uncertainty) && e.error_um.note);
  return e;
}

/* λ² = 4Λ² (ε∥ + ⅓ (πΛ/λ g)²) with g = f(1-f)Δε is quadratic in λ². */
static void stack_in_closed_form(void **state) {
  (void)state;
  static const char text[] =
      "format: 1\n" MATERIALS
      "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
      "across: z, from_nm: -50, to_nm: 50}}]}\n";
  const double pitch = 0.2, a = 3.476 * 3.476, b = 1.444 * 1.444;
  const double mean = (a + b) / 2, g = pi * pitch * (a - b) / 4;
  const double four = 4 * pitch * pitch;
  const double expected =
      sqrt((four * mean + sqrt(four * four * mean * mean + 4 * four * g * g / 3)) / 2);
  for (int p = PK_EY; p <= PK_HY; p++) {
    picket_edge_estimate e = estimate(text, (pk_polarization)p);
    assert_non_null(e.method);
    assert_near(e.centre_um, expected, 1e-13); /* roundings of a dozen operations */
  }
}

/* The first stop band of a guide of one piece would lie at 2Λ times its slab index. */
static void solid_guide_is_its_slab(void **state) {
  (void)state;
  static const char text[] =
      OPEN_CELL("{rect: {fill: core, length_nm: 300, width_nm: 450, at_nm: [0, 120]}}");
  for (int p = PK_EY; p <= PK_HY; p++) {
    picket_edge_estimate e = estimate(text, (pk_polarization)p);
    pk_slab_film film = {pk_slab_isotropic(3.476 * 3.476, 0), 0.45};
    pk_slab slab = {pk_slab_isotropic(1.444 * 1.444, 0), 1, &film,
                    pk_slab_isotropic(1.444 * 1.444, 0)};
    pk_slab_mode mode;
    assert_int_equal(pk_slab_mode_of_order(context, &slab, p == PK_EY ? PK_SLAB_TE : PK_SLAB_TM,
                                           e.centre_um, 0, &mode, NULL, NULL),
                     PICKET_OK);
    assert_near(e.centre_um, 2 * 0.3 * creal(mode.index), 1e-12); /* slab solver */
  }
}

/* Two rows of different length, on a substrate: the same as films of averages put in by hand. */
static void two_rows_on_a_substrate(void **state) {
  (void)state;
  static const char text[] = OPEN_CELL(
      "{rect: {fill: core, length_nm: 150, width_nm: 200, at_nm: [0, 0]}},"
      "{rect: {fill: core, length_nm: 90, width_nm: 100, at_nm: [0, 150]}},"
      "{stripe: {fill: resin, across: x, from_nm: -.inf, to_nm: -100}}");
  const double a = 3.476 * 3.476, b = 1.444 * 1.444;
  for (int p = PK_EY; p <= PK_HY; p++) {
    picket_edge_estimate e = estimate(text, (pk_polarization)p);
    pk_slab_film films[2] = {{.thickness_um = 0.2}, {.thickness_um = 0.1}};
    for (int i = 0; i < 2; i++) {
      const double f = i == 0 ? 0.5 : 0.3, r = pi * 0.3 / e.centre_um * f * (1 - f);
      const double along = f * a + (1 - f) * b, across = 1 / (f / a + (1 - f) / b);
      films[i].medium = pk_slab_isotropic(along + pow(r * (a - b), 2) / 3, 0);
      films[i].medium.along =
          across + pow(r * (1 / a - 1 / b), 2) / 3 * along * across * across * across;
    }
    pk_slab slab = {pk_slab_isotropic(2.25, 0), 2, films, pk_slab_isotropic(b, 0)};
    pk_slab_mode mode;
    assert_int_equal(pk_slab_mode_of_order(context, &slab, p == PK_EY ? PK_SLAB_TE : PK_SLAB_TM,
                                           e.centre_um, 0, &mode, NULL, NULL),
                     PICKET_OK);
    assert_near(e.centre_um, 2 * 0.3 * creal(mode.index), 1e-12); /* slab solver */
  }
}

/* More material, longer wavelength: a disc lies between its inner and its outer square. */
static void disc_between_squares(void **state) {
  (void)state;
  for (int p = PK_EY; p <= PK_HY; p++) {
    pk_polarization q = (pk_polarization)p;
    double inner = estimate(OPEN_CELL("{rect: {fill: core, length_nm: 170, width_nm: 170, at_nm: "
                                      "[0, 0]}}"),
                            q)
                       .centre_um;
    double disc =
        estimate(OPEN_CELL("{disc: {fill: core, diameter_nm: 240.5, at_nm: [0, 0]}}"), q).centre_um;
    double outer = estimate(OPEN_CELL("{rect: {fill: core, length_nm: 240.5, width_nm: 240.5, "
                                      "at_nm: [0, 0]}}"),
                            q)
                       .centre_um;
    assert_true(inner < disc && disc < outer);
  }
}

static void cells_it_does_not_apply_to(void **state) {
  (void)state;
  static const char *const laterals[] = {"periodic", "electric", "magnetic"};
  for (int i = 0; i < 3; i++) {
    char text[600];
    snprintf(text, sizeof text,
             "format: 1\n" MATERIALS
             "cell: {pitch_nm: 300, cladding: oxide, lateral: %s, lateral_span_nm: 900, shapes: "
             "[{rect: {fill: core, length_nm: 150, width_nm: 450, at_nm: [0, 0]}}]}\n",
             laterals[i]);
    picket_edge_estimate e = estimate(text, PK_EY);
    assert_null(e.method);
    assert_true(isnan(e.centre_um));
  }
}

/* Silicon is known from 1200 nm; the stop band of so short a pitch would be far below. */
static void none_where_a_material_is_unknown(void **state) {
  (void)state;
  static const char text[] =
      "format: 1\n" MATERIALS
      "cell: {pitch_nm: 100, cladding: oxide, shapes: [{rect: {fill: silicon, length_nm: 50, "
      "width_nm: 450, at_nm: [0, 0]}}]}\n";
  picket_edge_estimate e = estimate(text, PK_EY);
  assert_non_null(e.method);
  assert_true(isnan(e.centre_um));
  assert_string_equal(picket_context_message(context), "");
}

static void light_lines(void **state) {
  (void)state;
  understood u = understand_good(
      context, OPEN_CELL("{rect: {fill: core, length_nm: 150, width_nm: 450, at_nm: [0, 0]}}"));
  double um = 0;
  const pk_materials *materials = u.problem->materials;
  assert_int_equal(pk_light_line(u.problem, pk_materials_find(materials, "oxide"), &um), PICKET_OK);
  assert_near(um, 2 * 0.3 * 1.444, 1e-14);
  assert_int_equal(pk_light_line(u.problem, pk_materials_find(materials, "silicon"), &um),
                   PICKET_OK);
  pk_medium medium;
  assert_int_equal(
      pk_materials_at(materials, pk_materials_find(materials, "silicon"), um, 20, &medium),
      PICKET_OK);
  assert_near(um, 2 * 0.3 * sqrt(creal(medium.permittivity)), 1e-13);
  picket_problem_free(u.owner);
}

/* The second-order term grows as the square of the pitch: for this stack it passes 3.476² at
 * ⅓ (π Λ/λ g)² = 3.476² - ε∥, Λ = 0.764 µm at 1.55 µm. Beyond, there is no estimate. */
static void none_above_every_medium(void **state) {
  (void)state;
  static const int pitch_nm[] = {300, 750, 780, 3000};
  const double a = 3.476 * 3.476, b = 1.444 * 1.444, g = (a - b) / 4;
  for (int i = 0; i < 4; i++) {
    char text[512];
    snprintf(text, sizeof text,
             "format: 1\n" MATERIALS
             "cell: {pitch_nm: %d, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: "
             "core, across: z, from_nm: %g, to_nm: %g}}]}\n",
             pitch_nm[i], -0.25 * pitch_nm[i], 0.25 * pitch_nm[i]);
    understood u = understand_good(context, text);
    double index = 0, turn = pi * pitch_nm[i] / 1550.0 * g;
    double expected = sqrt((a + b) / 2 + turn * turn / 3);
    assert_int_equal(pk_estimated_index(u.problem, PK_EY, 1.55, &index), PICKET_OK);
    if (expected <= 3.476) {
      assert_near(index, expected, 1e-13); /* roundings of a dozen operations */
    } else {
      assert_true(isnan(index));
    }
    assert_int_equal(isnan(index), i > 1);
    picket_problem_free(u.owner);
  }
}

static void out_of_memory(void **state) {
  (void)state;
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 1; status != PICKET_OK; n++) {
    short_memory memory = {0};
    picket_context *scarce = short_memory_context(&memory);
    understood u =
        understand_good(scarce, OPEN_CELL("{disc: {fill: core, diameter_nm: 240, at_nm: [0, 0]}}"));
    long before = memory.living;
    memory.fail_at = memory.asked + n;
    picket_edge_estimate e = {.centre_um = 77};
    status = pk_estimate(u.problem, PK_HY, &e);
    assert_int_equal(memory.living, before);
    if (status == PICKET_OK) {
      assert_true(n > 10);
    } else {
      assert_int_equal(status, PICKET_ERROR_MEMORY);
      assert_near(e.centre_um, 77, 0);
    }
    picket_problem_free(u.owner);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
    n += n / 8; /* later allocations repeat those of the first wavelengths */
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(stack_in_closed_form),
      cmocka_unit_test(solid_guide_is_its_slab),
      cmocka_unit_test(two_rows_on_a_substrate),
      cmocka_unit_test(disc_between_squares),
      cmocka_unit_test(cells_it_does_not_apply_to),
      cmocka_unit_test(none_where_a_material_is_unknown),
      cmocka_unit_test(light_lines),
      cmocka_unit_test(none_above_every_medium),
      cmocka_unit_test(out_of_memory),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
