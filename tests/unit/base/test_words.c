/* Nearest words: distances counted by hand. */
#include "base/words.h"

#include "unit/near.h"

static const char *const words[] = {"silicon", "silica", "nitride", "germanium", "water", "ex"};
enum { COUNT = sizeof words / sizeof words[0] };

static void check(const char *typed, const char *meant) {
  const char *found = pk_nearest_word(typed, words, COUNT);
  if (meant) {
    assert_non_null(found);
    assert_string_equal(found, meant);
  } else {
    assert_null(found);
  }
}

static void one_change_of_each_kind(void **state) {
  (void)state;
  check("silicone", "silicon");
  check("silcon", "silicon");
  check("sylicon", "silicon");
  check("silicno", "silicon");
  check("Silica", "silica");
  check("water", "water");
}

/* "awtre" is two swaps from "water", "egrmnaium" two from "germanium": two changes each. */
static void several_changes(void **state) {
  (void)state;
  check("awtre", "water");
  check("egrmnaium", "germanium");
  check("germ", NULL);
}

static void nothing_near(void **state) {
  (void)state;
  check("", NULL);
  check("quartz", NULL);
  check("ab", NULL);
  check("e", NULL);
  check("xe", "ex");
  char endless[400];
  for (int i = 0; i < 399; i++) {
    endless[i] = 'a';
  }
  endless[399] = '\0';
  check(endless, NULL);
  assert_null(pk_nearest_word("water", NULL, 0));
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(one_change_of_each_kind),
      cmocka_unit_test(several_changes),
      cmocka_unit_test(nothing_near),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
