/* Remembered corrections: turned, mirrored and scaled corners are one corner, and slopes are those
 * of the correction. */
#include "operator/corner_cache.h"

#include "unit/near.h"
/* near.h brings cmocka, which keeps its place. */
#include "unit/short_memory.h"

static const pk_corner_site SITE = {{12, 1, 2 + 0.1 * I, 3}, {1, 1.4, 0.9, 1.1}};

/* Version 0 to 3 turns, 4 to 7 turns the mirror image: arms backwards, quadrants between them. */
static pk_corner_site version_of(const pk_corner_site *site, int version) {
  pk_corner_site other;
  for (int i = 0; i < 4; i++) {
    int arm = version < 4 ? i + version : 8 + version - i;
    int quadrant = version < 4 ? arm : arm - 1; /* between the arms i and i + 1 */
    other.spacing[i] = 3 * site->spacing[arm % 4];
    other.permittivity[i] = 5 * site->permittivity[quadrant % 4];
  }
  return other;
}

static void eight_versions_are_one_corner(void **state) {
  (void)state;
  picket_context *context = NULL;
  pk_corner_cache *cache = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_corner_cache_create(context, &cache), PICKET_OK);
  pk_corner_cure first, cure, fresh;
  double complex slope[4];
  assert_int_equal(pk_corner_cache_cure(cache, &SITE, &first), PICKET_OK);
  assert_int_equal(pk_corner_cache_misses(cache), 1);
  for (int version = 0; version < 8; version++) {
    pk_corner_site site = version_of(&SITE, version);
    assert_int_equal(pk_corner_cache_cure(cache, &site, &cure), PICKET_OK);
    assert_true(cure.c == first.c && cure.alpha == first.alpha);
    assert_int_equal(pk_corner_correction(context, &site, &fresh), PICKET_OK);
    assert_true(cabs(fresh.c - cure.c) < 1e-10);
    /* Each slope against a wider difference of its own: errors fall as the step squared. */
    assert_int_equal(pk_corner_cache_slope(cache, &site, slope), PICKET_OK);
    for (int q = 0; q < 4; q++) {
      pk_corner_cure side[2];
      for (int i = 0; i < 2; i++) {
        pk_corner_site moved = site;
        moved.permittivity[q] *= i == 0 ? 1 - 1e-3 : 1 + 1e-3;
        assert_int_equal(pk_corner_correction(context, &moved, &side[i]), PICKET_OK);
      }
      double complex wide = (side[1].c - side[0].c) / (2e-3 * site.permittivity[q]);
      assert_true(cabs(wide - slope[q]) < 1e-5 * cabs(slope[q]));
    }
  }
  assert_int_equal(pk_corner_cache_misses(cache), 1);
  pk_corner_site other = SITE;
  other.permittivity[0] *= 1 + 1e-10;
  assert_int_equal(pk_corner_cache_cure(cache, &other, &cure), PICKET_OK);
  assert_int_equal(pk_corner_cache_misses(cache), 2);
  pk_corner_cache_free(cache);
  picket_context_free(context);
}

/* More corners than are kept: each is still right, and the last ones are remembered. */
static void old_corners_make_room(void **state) {
  (void)state;
  picket_context *context = NULL;
  pk_corner_cache *cache = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  assert_int_equal(pk_corner_cache_create(context, &cache), PICKET_OK);
  pk_corner_cure cure, first;
  for (int i = 0; i < 70; i++) {
    pk_corner_site site = SITE;
    site.permittivity[0] = 5 + 0.1 * i;
    assert_int_equal(pk_corner_cache_cure(cache, &site, &cure), PICKET_OK);
    first = i == 0 ? cure : first;
  }
  assert_int_equal(pk_corner_cache_misses(cache), 70);
  pk_corner_site site = SITE;
  site.permittivity[0] = 5 + 0.1 * 69;
  assert_int_equal(pk_corner_cache_cure(cache, &site, &cure), PICKET_OK);
  assert_int_equal(pk_corner_cache_misses(cache), 70);
  site.permittivity[0] = 5;
  assert_int_equal(pk_corner_cache_cure(cache, &site, &cure), PICKET_OK);
  assert_int_equal(pk_corner_cache_misses(cache), 71);
  assert_true(cure.c == first.c);
  pk_corner_cache_free(cache);
  pk_corner_cache_free(NULL);
  picket_context_free(context);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    memory.fail_at = memory.asked + n;
    pk_corner_cache *cache = NULL;
    double complex slope[4] = {42};
    picket_status status = pk_corner_cache_create(context, &cache);
    if (status == PICKET_OK) {
      status = pk_corner_cache_slope(cache, &SITE, slope);
    }
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    assert_true(failed == (slope[0] == 42));
    pk_corner_cache_free(cache);
    memory.fail_at = 0;
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(eight_versions_are_one_corner),
      cmocka_unit_test(old_corners_make_room),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
