/* The word someone probably meant: the fewest letters inserted, dropped, changed or swapped with
 * their neighbour (optimal string alignment; F. J. Damerau, Comm. ACM 7, 171 (1964)). */
#include <string.h>

#include "cli/cli.h"

enum { LETTERS = 32 }; /* names of commands and options are shorter */

static int least(int a, int b) {
  return a < b ? a : b;
}

/* d[i][j]: changes from the first i letters of one word to the first j of the other. */
static int distance_of(const char *a, int a_length, const char *b, int b_length) {
  int d[LETTERS + 1][LETTERS + 1];
  for (int i = 0; i <= a_length; i++) {
    for (int j = 0; j <= b_length; j++) {
      if (i == 0 || j == 0) {
        d[i][j] = i + j;
        continue;
      }
      d[i][j] =
          least(least(d[i - 1][j], d[i][j - 1]) + 1, d[i - 1][j - 1] + (a[i - 1] != b[j - 1]));
      if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1]) {
        d[i][j] = least(d[i][j], d[i - 2][j - 2] + 1);
      }
    }
  }
  return d[a_length][b_length];
}

void pk_nearest_try(pk_nearest *nearest, const char *word, const char *candidate) {
  size_t length = strlen(word);
  size_t other = strlen(candidate);
  if (length > LETTERS || other > LETTERS) {
    return;
  }
  int changes = distance_of(word, (int)length, candidate, (int)other);
  /* Two slips, but never so many that nothing of the word is left. */
  if (changes <= 2 && changes < (int)length && (!nearest->best || changes < nearest->distance)) {
    nearest->best = candidate;
    nearest->distance = changes;
  }
}
