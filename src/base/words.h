/* The word someone probably meant: for messages about unknown names. */
#ifndef PK_BASE_WORDS_H
#define PK_BASE_WORDS_H

/* The word of `words` nearest to `word`, by the number of letters inserted, dropped, changed or
 * swapped with their neighbour (upper and lower case count as equal); the first of equals. Null if
 * none is near: more changes than the larger of 2 and a third of the letters of `word`, or as many
 * as it has letters. */
const char *pk_nearest_word(const char *word, const char *const *words, int count);

#endif
