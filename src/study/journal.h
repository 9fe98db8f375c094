/* A journal of finished pieces of work, so that a run that was ended in whatever way can be taken
 * up again. A text file: the first line says whose it is, then one line per piece, written at once
 * when the piece is done. */
#ifndef PK_STUDY_JOURNAL_H
#define PK_STUDY_JOURNAL_H

#include <stdint.h>

#include "base/context.h"

typedef struct pk_journal pk_journal;

/* Takes a piece of an earlier run. PICKET_ERROR_INTERNAL: the line makes no sense, the piece is
 * simply done again; any other failure ends the opening. */
typedef picket_status (*pk_journal_take)(void *user, int piece, const char *answer);

/* Opens a journal, or begins one if there is no such file or it is empty.
 *   key   fingerprint of everything the answers depend on; a journal with another key is refused
 * A last line that was cut off is thrown away. PICKET_ERROR_INPUT if the file is something else,
 * PICKET_ERROR_OUTPUT if it cannot be written or another run is writing it. */
picket_status pk_journal_open(picket_context *context, const char *path, uint64_t key,
                              pk_journal_take take, void *user, pk_journal **out);

/* Adds a piece. PICKET_ERROR_OUTPUT, with the file as it was before, if that is possible. */
picket_status pk_journal_add(pk_journal *journal, int piece, const char *answer);

void pk_journal_close(pk_journal *journal); /* accepts null */

#endif
