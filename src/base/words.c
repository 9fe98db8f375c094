/* Nearest word by optimal string alignment distance: with D(i, j) the distance of the first i
 * letters of one word from the first j of the other, D(i, j) = min( D(i-1, j) + 1, D(i, j-1) + 1,
 * D(i-1, j-1) + [a_i ≠ b_j], D(i-2, j-2) + 1 where a_i a_{i-1} = b_{j-1} b_j ). Rows i-2, i-1 and i
 * are kept. F. J. Damerau, Comm. ACM 7, 171 (1964). */
#include "base/words.h"

#include <stddef.h>
#include <string.h>

/* Names people type are shorter; a longer one has no suggestion. */
enum { LETTERS = 96 };

static int lower(char letter) {
  return letter >= 'A' && letter <= 'Z' ? letter - 'A' + 'a' : letter;
}

static int least(int a, int b) {
  return a < b ? a : b;
}

static int distance(const char *a, int a_length, const char *b, int b_length) {
  int rows[3][LETTERS + 1];
  int *before = rows[0], *last = rows[1], *row = rows[2];
  for (int j = 0; j <= b_length; j++) {
    last[j] = j;
    before[j] = 0;
  }
  for (int i = 1; i <= a_length; i++) {
    row[0] = i;
    for (int j = 1; j <= b_length; j++) {
      int change = lower(a[i - 1]) != lower(b[j - 1]);
      row[j] = least(least(last[j], row[j - 1]) + 1, last[j - 1] + change);
      if (i > 1 && j > 1 && lower(a[i - 1]) == lower(b[j - 2]) &&
          lower(a[i - 2]) == lower(b[j - 1])) {
        row[j] = least(row[j], before[j - 2] + 1);
      }
    }
    int *spare = before;
    before = last;
    last = row;
    row = spare;
  }
  return last[b_length];
}

const char *pk_nearest_word(const char *word, const char *const *words, int count) {
  const size_t length = strlen(word);
  if (length > LETTERS) {
    return NULL;
  }
  int allowed = length / 3 > 2 ? (int)(length / 3) : 2;
  int best = least(allowed, (int)length - 1) + 1;
  const char *nearest = NULL;
  for (int i = 0; i < count; i++) {
    size_t other = strlen(words[i]);
    if (other > LETTERS) {
      continue;
    }
    int changes = distance(word, (int)length, words[i], (int)other);
    if (changes < best) {
      best = changes;
      nearest = words[i];
    }
  }
  return nearest;
}
