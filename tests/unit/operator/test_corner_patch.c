/* The correction of a corner: values found independently for this project, what it is defined by,
 * and what it must not depend on. */
#include "operator/corner_patch.h"

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

static const double SILICON = 3.4757 * 3.4757, OXIDE = 1.444 * 1.444;

static picket_context *context;

static int open_context(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int close_context(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static pk_corner_cure cure_of(pk_corner_site site) {
  pk_corner_cure cure;
  assert_int_equal(pk_corner_correction(context, &site, &cure), PICKET_OK);
  return cure;
}

/* The project's notes: sparse patches of 12, 24, 48 cells; digits as given there. */
static void known_corrections(void **state) {
  (void)state;
  const struct {
    pk_corner_site site;
    double c, digits;
  } known[] = {
      {{{SILICON, OXIDE, OXIDE, OXIDE}, {1, 1, 1, 1}}, -0.12098, 5e-6},
      {{{SILICON, 1, 1, 1}, {1, 1, 1, 1}}, -0.15504, 5e-6},
      {{{4, OXIDE, OXIDE, OXIDE}, {1, 1, 1, 1}}, -0.04529, 5e-6},
      {{{SILICON, OXIDE, OXIDE, OXIDE}, {2, 1, 2, 1}}, -0.146, 5e-4},
  };
  for (int i = 0; i < 4; i++) {
    pk_corner_cure cure = cure_of(known[i].site);
    assert_true(cure.known);
    assert_near(creal(cure.c), known[i].c, known[i].digits);
    assert_near(cimag(cure.c), 0, 0);
  }
}

/* The corrected energy tends to the exact one as n^{2α-2} (the scheme away from the corner), the
 * plain one to a constant: on patches larger than those it was found from. */
static void corrected_energies_tend_to_the_exact_one(void **state) {
  (void)state;
  const pk_corner_site sites[] = {{{SILICON, OXIDE, OXIDE, OXIDE}, {1, 1, 1, 1}},
                                  {{SILICON, 1, OXIDE, OXIDE}, {1, 1.5, 0.8, 1}},
                                  {{12, 1, 12, 1}, {1, 1, 1, 1}},
                                  {{9 + I, 1, 2, 2}, {1, 1.5, 1.5, 1}}};
  for (int i = 0; i < 4; i++) {
    pk_corner_cure cure = cure_of(sites[i]);
    double complex c[2] = {0, cure.c}, near[2], far[2];
    assert_int_equal(pk_corner_patch_excess(context, &sites[i], cure.alpha, 48, 2, c, near),
                     PICKET_OK);
    assert_int_equal(pk_corner_patch_excess(context, &sites[i], cure.alpha, 96, 2, c, far),
                     PICKET_OK);
    double complex fall = cpow(2, 2 * cure.alpha - 2);
    /* The next term, n^{2α-4}, is (1/48)² of this one, with a factor of some 4. */
    assert_true(cabs(far[1] / near[1] - fall) < 2e-3);
    double complex limit = (far[0] - fall * near[0]) / (1 - fall);
    assert_true(cabs(limit) > 0.01 &&
                cabs((far[1] - fall * near[1]) / (1 - fall)) < 1e-3 * cabs(limit));
  }
}

static void scale_and_direction_do_not_matter(void **state) {
  (void)state;
  pk_corner_site site = {{12, 1, 2, 3}, {1, 1.4, 0.9, 1.1}};
  double complex c = cure_of(site).c;
  pk_corner_site other;
  for (int q = 0; q < 4; q++) {
    other.permittivity[q] = 7 * site.permittivity[q];
    other.spacing[q] = 0.01 * site.spacing[q];
  }
  assert_true(cabs(cure_of(other).c - c) < 1e-10);
  for (int q = 0; q < 4; q++) {
    other.permittivity[q] = site.permittivity[(q + 1) % 4];
    other.spacing[q] = site.spacing[(q + 1) % 4];
  }
  assert_true(cabs(cure_of(other).c - c) < 1e-10);
}

/* c is analytic in ε, as is everything it is made of. */
static void complex_corrections_are_analytic(void **state) {
  (void)state;
  const double step = 1e-3;
  double complex moved[4];
  for (int k = 0; k < 4; k++) {
    double complex change = (k % 2 ? step : -step) * (k / 2 ? I : 1);
    pk_corner_site site = {{12 + change, 2, 2, 1}, {1, 1, 1, 1}};
    moved[k] = cure_of(site).c;
  }
  double complex along = moved[1] - moved[0], across = (moved[3] - moved[2]) / I;
  assert_true(cabs(along - across) < 1e-5 * cabs(along));
}

static void where_there_is_no_corner_nothing_is_corrected(void **state) {
  (void)state;
  pk_corner_cure cure = cure_of((pk_corner_site){{9, 9, 2, 2}, {1, 1, 2, 1}});
  assert_true(cure.known && cure.c == 0 && cure.alpha == 1);
  cure = cure_of((pk_corner_site){{2.001, 2, 2, 2}, {1, 1, 1, 1}});
  assert_true(cure.known && cure.c == 0);
  cure = cure_of((pk_corner_site){{-10 + I, 2, 2, 2}, {1, 1, 1, 1}});
  assert_true(!cure.known && cure.c == 0 && cure.alpha == 1);
}

/* Weak corners approach none: c is nearly proportional to 1 - α. */
static void weak_corners_need_little(void **state) {
  (void)state;
  double before = 1;
  for (double e = 3; e > 1.02; e = 1 + 0.6 * (e - 1)) {
    pk_corner_cure cure = cure_of((pk_corner_site){{e, 1, 1, 1}, {1, 1, 1, 1}});
    double ratio = -creal(cure.c) / (1 - creal(cure.alpha));
    assert_true(ratio > 0.35 && ratio < 0.55);
    assert_true(-creal(cure.c) < before);
    before = -creal(cure.c);
  }
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  const pk_corner_site site = {{12, 1, 2, 2}, {1, 1, 1, 1}};
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *short_context = short_memory_context(&memory);
    long held = memory.living;
    memory.fail_at = memory.asked + n;
    pk_corner_cure cure = {.c = 42};
    picket_status status = pk_corner_correction(short_context, &site, &cure);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_true(!failed || cure.c == 42);
    assert_int_equal(memory.living, held);
    memory.fail_at = 0;
    picket_context_free(short_context);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 20);
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(known_corrections),
      cmocka_unit_test(corrected_energies_tend_to_the_exact_one),
      cmocka_unit_test(scale_and_direction_do_not_matter),
      cmocka_unit_test(complex_corrections_are_analytic),
      cmocka_unit_test(where_there_is_no_corner_nothing_is_corrected),
      cmocka_unit_test(weak_corners_need_little),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, open_context, close_context);
}
