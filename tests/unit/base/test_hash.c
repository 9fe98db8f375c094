/* Fingerprints: published values of FNV-1a (64 bits), and what must and must not make a difference.
 */
#include "base/hash.h"

#include "unit/near.h"

static void published_values(void **state) {
  (void)state;
  /* Test vectors of the authors' own page, from memory of it. */
  assert_true(pk_hash_bytes(PK_HASH_START, "", 0) == UINT64_C(0xcbf29ce484222325));
  assert_true(pk_hash_bytes(PK_HASH_START, "a", 1) == UINT64_C(0xaf63dc4c8601ec8c));
  assert_true(pk_hash_bytes(PK_HASH_START, "foobar", 6) == UINT64_C(0x85944171f73967e8));
}

static void texts_keep_their_ends(void **state) {
  (void)state;
  uint64_t one = pk_hash_text(pk_hash_text(PK_HASH_START, "ab"), "c");
  uint64_t other = pk_hash_text(pk_hash_text(PK_HASH_START, "a"), "bc");
  assert_true(one != other);
  assert_true(pk_hash_text(PK_HASH_START, "") != PK_HASH_START);
}

static void numbers(void **state) {
  (void)state;
  assert_true(pk_hash_number(PK_HASH_START, NAN) == pk_hash_number(PK_HASH_START, -NAN));
  assert_true(pk_hash_number(PK_HASH_START, 0.0) != pk_hash_number(PK_HASH_START, -0.0));
  assert_true(pk_hash_number(PK_HASH_START, 1) != pk_hash_number(PK_HASH_START, nextafter(1, 2)));
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(published_values),
      cmocka_unit_test(texts_keep_their_ends),
      cmocka_unit_test(numbers),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
